//! Is a curve given by formulas a smooth wall? It may come to rest at its ends (a cusp there), nowhere else.

use super::error::{Problem, SystemError};
use super::formula::{Span, Tape};
use super::reader::FormulaText;
use crate::billiard::{Curve, GeometryError};

/// Samples of a curve at which its formulas are looked at; features narrower than that go unnoticed here.
const SAMPLES: usize = 512;
/// A curve is at rest where its speed is below this fraction of its largest speed. A smooth shape that comes so close to a
/// cusp cannot be told from one in double precision.
const AT_REST: f64 = 1e-9;
/// Steps of the search for the smallest speed: each takes a third off the bracket, so that these reach rounding.
const SEARCH_STEPS: usize = 100;
/// Fraction of the parameter range that counts as the end of the wall.
const END: f64 = 1e-9;
/// Radii below minus this fraction of the largest are negative; what is smaller is rounding at a cusp.
const NEGATIVE: f64 = 1e-12;

fn parameter(curve: &Curve, fraction: f64) -> f64 {
    if fraction >= 1.0 {
        curve.to
    } else {
        curve.from + (curve.to - curve.from) * fraction
    }
}

fn fraction(sample: usize) -> f64 {
    sample as f64 / SAMPLES as f64
}

/// Refuses curves with values or derivatives that are not finite, kinks, jumps, poles, and points at rest inside.
pub(super) fn check(
    curve: &Curve,
    tape: &Tape,
    formulas: &[FormulaText],
    whole: Span,
) -> Result<(), SystemError> {
    if curve.from == curve.to {
        return Err(geometry(whole, GeometryError::NoLength { wall: 0 }));
    }
    let place =
        |formula: usize, span: Span| formulas.get(formula).map_or(whole, |f| f.locate(span));
    let mut pieces = tape.pieces();
    for sample in 0..=SAMPLES {
        let t = parameter(curve, fraction(sample));
        let finite = curve
            .source
            .derivatives(t)
            .iter()
            .all(|v| v.x.is_finite() && v.y.is_finite());
        if !finite {
            let origin = tape.not_finite(&[t]);
            let span = origin.map_or(whole, |origin| place(origin.formula, origin.span));
            return Err(SystemError::at(span, Problem::CurveNotFinite { t }));
        }
        if let Some(origin) = tape.next_piece(&mut pieces, &[t]) {
            let from = parameter(curve, fraction(sample.saturating_sub(1)));
            let span = place(origin.formula, origin.span);
            return Err(SystemError::at(span, Problem::Kink { from, to: t }));
        }
    }
    check_rest(curve, whole)
}

fn geometry(span: Span, error: GeometryError) -> SystemError {
    SystemError::at(span, Problem::Geometry(error))
}

fn speed(curve: &Curve, fraction: f64) -> f64 {
    curve.source.derivatives(parameter(curve, fraction))[1].norm()
}

fn check_rest(curve: &Curve, whole: Span) -> Result<(), SystemError> {
    let speeds: Vec<f64> = (0..=SAMPLES).map(|i| speed(curve, fraction(i))).collect();
    let largest = speeds.iter().copied().fold(0.0, f64::max);
    for i in 1..SAMPLES {
        if speeds[i] > speeds[i - 1] || speeds[i] > speeds[i + 1] {
            continue;
        }
        let at = slowest(curve, fraction(i - 1), fraction(i + 1));
        if speed(curve, at) <= AT_REST * largest && at > END && at < 1.0 - END {
            let t = parameter(curve, at);
            return Err(geometry(
                whole,
                GeometryError::Irregular {
                    wall: 0,
                    t,
                    what: format!(
                        "the curve comes to rest at t = {t}: split it there, it may rest at its ends only"
                    ),
                },
            ));
        }
    }
    Ok(())
}

/// Fraction of the parameter range at which the speed has a minimum inside the bracket.
fn slowest(curve: &Curve, mut low: f64, mut high: f64) -> f64 {
    for _ in 0..SEARCH_STEPS {
        let third = (high - low) / 3.0;
        let (a, b) = (low + third, high - third);
        if speed(curve, a) <= speed(curve, b) {
            high = b;
        } else {
            low = a;
        }
    }
    0.5 * (low + high)
}

/// Refuses a polar curve whose radius becomes negative: it would cross its own centre.
pub(super) fn check_radius(curve: &Curve, tape: &Tape, span: Span) -> Result<(), SystemError> {
    let samples: Vec<(f64, f64)> = (0..=SAMPLES)
        .map(|i| {
            let t = parameter(curve, fraction(i));
            let [radius] = tape.evaluate(&[t]);
            (t, radius)
        })
        .collect();
    let largest = samples.iter().map(|(_, r)| r.abs()).fold(0.0, f64::max);
    match samples.iter().find(|(_, r)| *r < -NEGATIVE * largest) {
        None => Ok(()),
        Some(&(t, radius)) => Err(SystemError::at(span, Problem::NegativeRadius { t, radius })),
    }
}
