//! A curve cut into convex pieces.
//!
//! A curve is cut where its curvature changes sign and then into pieces that turn by little. Such a piece is convex and
//! lies in the triangle of its end points and the point where its end tangents meet (its apex), so a straight line meets it
//! at most twice, and the two roots lie on either side of the point where the piece runs parallel to the ray.

use super::{Curve, Vec2, cross};
use std::f64::consts::PI;

/// Largest turning of a piece, radians: small enough that its triangle is thin, large enough that there are few pieces.
const LARGEST_TURN: f64 = PI / 16.0;
/// Samples per curve in the search for changes of the sign of curvature and for the turning.
const SAMPLES: usize = 512;
/// Cuts closer than this fraction of the curve are one cut.
const SAME_CUT: f64 = 1e-9;
/// Ratio of first to second derivative (in units of the curve's parameter) below which a curve is at rest (a cusp).
const AT_REST: f64 = 1e-9;
/// Halvings after which an interval of numbers has none left between its ends.
const HALVINGS: usize = 60;
/// Degree of the polynomial that stands for a piece where only a first guess is wanted.
const DEGREE: usize = 7;

/// A convex piece of a curve, parameters [from, to] of its wall.
#[derive(Clone, Copy, Debug)]
pub(super) struct Piece {
    pub(super) from: f64,
    pub(super) to: f64,
    pub(super) start: Vec2,
    pub(super) end: Vec2,
    pub(super) apex: Vec2,
    pub(super) start_tangent: Vec2,
    pub(super) end_tangent: Vec2,
    /// Coefficients, in powers of (t - from)/(to - from), of the polynomial that shares position and three derivatives
    /// with the piece at both of its ends (two-point Hermite interpolation).
    pub(super) polynomial: [Vec2; DEGREE + 1],
}

/// Cuts a curve of parameter range [0, extent] into convex pieces.
pub(super) fn cut(curve: &Curve, extent: f64) -> Vec<Piece> {
    let mut cuts = vec![0.0];
    let mut turned = 0.0;
    let mut last = direction(curve, 0.0, extent);
    let mut last_bend = bend(curve, 0.5 * extent / SAMPLES as f64);
    for i in 1..=SAMPLES {
        let t = extent * i as f64 / SAMPLES as f64;
        let before = extent * (i as f64 - 1.0) / SAMPLES as f64;
        let here = direction(curve, t, extent);
        let middle = extent * (i as f64 - 0.5) / SAMPLES as f64;
        let here_bend = bend(curve, middle);
        if i > 1 && here_bend * last_bend < 0.0 {
            let low = extent * (i as f64 - 1.5) / SAMPLES as f64;
            let zero = bisect(low, middle, |t| bend(curve, t));
            if zero > cuts[cuts.len() - 1] + SAME_CUT * extent {
                cuts.push(zero);
            }
            turned = 0.0;
        }
        turned += cross(last, here).atan2(last.dot(&here)).abs();
        if turned > LARGEST_TURN && before > cuts[cuts.len() - 1] + SAME_CUT * extent {
            cuts.push(before);
            turned = cross(last, here).atan2(last.dot(&here)).abs();
        }
        last = here;
        last_bend = here_bend;
    }
    cuts.push(extent);
    cuts.windows(2)
        .map(|ends| Piece::new(curve, ends[0], ends[1], extent))
        .collect()
}

fn bend(curve: &Curve, t: f64) -> f64 {
    let [_, first, second, _] = curve.derivatives(t);
    cross(first, second)
}

fn direction(curve: &Curve, t: f64, extent: f64) -> Vec2 {
    // At a cusp the speed vanishes: step off it by far less than a sample.
    let [_, first, second, _] = curve.derivatives(t);
    if first.norm() > AT_REST * second.norm() {
        return first.normalize();
    }
    let inward = if t < 0.5 * extent { second } else { -second };
    inward.normalize()
}

impl Piece {
    fn new(curve: &Curve, from: f64, to: f64, extent: f64) -> Self {
        let (first, last) = (curve.derivatives(from), curve.derivatives(to));
        let (start, end) = (first[0], last[0]);
        let start_tangent = direction(curve, from, extent);
        let end_tangent = direction(curve, to, extent);
        let turn = cross(start_tangent, end_tangent);
        let chord = end - start;
        // Where the end tangents meet; a piece that does not turn is its own chord.
        let apex = if turn.abs() > 1e-12 {
            start + start_tangent * (cross(chord, end_tangent) / turn)
        } else {
            start + chord * 0.5
        };
        Self {
            from,
            to,
            start,
            end,
            apex,
            start_tangent,
            end_tangent,
            polynomial: hermite(first, last, to - from),
        }
    }

    /// Does the piece focus (its interior is on the left and it turns to the left)?
    pub(super) fn focuses(&self) -> bool {
        cross(self.start_tangent, self.end_tangent) > 0.0
    }
}

/// Two-point Hermite interpolation with three derivatives at both ends of an interval of the given width.
fn hermite(first: [Vec2; 4], last: [Vec2; 4], width: f64) -> [Vec2; DEGREE + 1] {
    // Taylor coefficients in units of the interval.
    let scaled = |d: [Vec2; 4]| {
        [
            d[0],
            d[1] * width,
            d[2] * (width * width / 2.0),
            d[3] * (width * width * width / 6.0),
        ]
    };
    let (a, b) = (scaled(first), scaled(last));
    // What the powers 4 to 7 have to add at the far end: value and first derivatives (divided by factorials).
    let r0 = b[0] - a[0] - a[1] - a[2] - a[3];
    let r1 = b[1] - a[1] - a[2] * 2.0 - a[3] * 3.0;
    let r2 = b[2] - a[2] - a[3] * 3.0;
    let r3 = b[3] - a[3];
    // Inverse of the matrix of binomial coefficients (j over i), i = 0..3, j = 4..7.
    [
        a[0],
        a[1],
        a[2],
        a[3],
        r0 * 35.0 - r1 * 15.0 + r2 * 5.0 - r3,
        r0 * -84.0 + r1 * 39.0 - r2 * 14.0 + r3 * 3.0,
        r0 * 70.0 - r1 * 34.0 + r2 * 13.0 - r3 * 3.0,
        r0 * -20.0 + r1 * 10.0 - r2 * 4.0 + r3,
    ]
}

fn bisect(from: f64, to: f64, value: impl Fn(f64) -> f64) -> f64 {
    let at_from = value(from);
    let (mut low, mut high) = (from, to);
    for _ in 0..HALVINGS {
        let middle = 0.5 * (low + high);
        if (value(middle) < 0.0) == (at_from < 0.0) {
            low = middle;
        } else {
            high = middle;
        }
    }
    0.5 * (low + high)
}
