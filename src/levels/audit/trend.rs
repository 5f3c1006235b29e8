//! A smooth trend of a list: a wrong size, or levels that drift away as those of an under-resolved solver do.
//!
//! Listed levels are taken to be true ones times 1 + a (k/K)^q, K the last level. Levels that are merely missing or false make steps of
//! whole numbers, a trend does not: the record of a list without its trend lies close to whole numbers everywhere except at the
//! steps, and changes from one to the next as seldom as possible.

use super::prediction::Prediction;
use super::record::{Predicted, Span};

/// Powers that are tried; 0 is a wrong scale. The error of finite elements of degree p goes as k^(2p).
const POWERS: [f64; 6] = [0.0, 1.0, 2.0, 3.0, 4.0, 6.0];
/// Largest shift of the last level that is looked for, in mean spacings, and the step.
const MOST_SPACINGS: f64 = 12.0;
const STEP_SPACINGS: f64 = 0.04;
/// Noise of a record, in levels, in the comparison of trends.
const NOISE: f64 = 0.12;
/// Cost of a change from one whole number to the next: the logarithm of the odds against a missing level.
const CHANGE: f64 = 6.0;
/// Cost of a trend.
const TREND: f64 = 12.0;
/// Root mean square distance from whole numbers of a record without its trend, in levels: where there is more noise than this, whole
/// numbers cannot be told (random numbers have 0.29).
const QUIET: f64 = 0.15;
/// Neighbouring points that say one thing.
const DEPENDENT: f64 = 3.0;
/// Mean spacings that the coarse record is smoothed over at least: single levels do not matter here.
const SPACINGS: f64 = 2.5;

/// A power law.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct PowerLaw {
    pub(super) factor: f64,
    pub(super) power: f64,
    /// The K of the formula.
    pub(super) last: f64,
}

impl PowerLaw {
    /// No trend.
    pub(super) fn none(last: f64) -> Self {
        Self {
            factor: 0.0,
            power: 0.0,
            last,
        }
    }

    /// The true level of a listed one.
    pub(super) fn truth(&self, listed: f64) -> f64 {
        if self.factor == 0.0 {
            return listed;
        }
        // The power law in the listed level is as good as that in the true one, and needs no iteration.
        listed / (1.0 + self.factor * (listed / self.last).powf(self.power))
    }

    /// What a listed level would be, of a true one.
    pub(super) fn listed(&self, truth: f64) -> f64 {
        let mut listed = truth;
        for _ in 0..20 {
            listed = truth * (1.0 + self.factor * (listed / self.last).powf(self.power));
        }
        listed
    }

    /// Shift of a listed level in mean spacings at k, positive where it is too high.
    pub(super) fn spacings(&self, k: f64, density: f64) -> f64 {
        (k - self.truth(k)) * density
    }
}

/// The power law without which the record is simplest, with how much less it costs than none at all.
pub(super) fn coarse(
    prediction: &Prediction,
    levels: &[f64],
    span: &Span,
    below: f64,
) -> (PowerLaw, f64) {
    let last = levels.last().copied().unwrap_or(span.to);
    let density = prediction.weyl.density(last, 0.0);
    let none = PowerLaw::none(last);
    if density <= 0.0 {
        return (none, 0.0);
    }
    let wide = Span {
        smoothing: span.smoothing.max(SPACINGS / density),
        ..*span
    };
    let record = CoarseRecord::new(prediction, wide, below);
    let (without, _) = record.cost(levels, &none);
    let mut best = (none, without - TREND);
    let steps = (MOST_SPACINGS / STEP_SPACINGS) as i32;
    for power in POWERS {
        for step in -steps..=steps {
            let factor = f64::from(step) * STEP_SPACINGS / (density * last);
            let law = PowerLaw {
                factor,
                power,
                last,
            };
            if step == 0 {
                continue;
            }
            let (cost, distance) = record.cost(levels, &law);
            if cost < best.1 && distance < QUIET {
                best = (law, cost);
            }
        }
    }
    let gained = (without - TREND - best.1).max(0.0);
    (best.0, gained)
}

/// The prediction on few points.
struct CoarseRecord {
    predicted: Predicted,
    below: f64,
}

impl CoarseRecord {
    fn new(prediction: &Prediction, span: Span, below: f64) -> Self {
        Self {
            predicted: Predicted::new(prediction, span),
            below,
        }
    }

    /// Distance of the record from whole numbers, and their changes, in natural units of likelihood; and its root mean square
    /// distance from whole numbers.
    fn cost(&self, levels: &[f64], law: &PowerLaw) -> (f64, f64) {
        let truth: Vec<f64> = levels.iter().map(|&level| law.truth(level)).collect();
        let to = truth.last().copied().unwrap_or(0.0);
        let smoothing = self.predicted.span.smoothing;
        let points = &self.predicted.points;
        // Near the end the cut of the Gaussian shows.
        let upto = points.partition_point(|&k| k < to - 2.0 * smoothing);
        let stairs = self.predicted.of_levels(&truth, self.below);
        let stairs = &stairs[..upto];
        let (mut distance, mut changes, mut before) = (0.0, 0.0, 0.0);
        for (stair, predicted) in stairs.iter().zip(&self.predicted.staircase) {
            let value = stair - predicted;
            let whole = value.round();
            distance += (value - whole).powi(2);
            changes += (whole - before).abs();
            before = whole;
        }
        let cost = 0.5 * distance / (NOISE * NOISE * DEPENDENT) + CHANGE * changes;
        (cost, (distance / stairs.len().max(1) as f64).sqrt())
    }
}
