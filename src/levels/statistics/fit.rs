//! One parameter of a model by maximum likelihood.

use serde::Serialize;

/// Points of the search that comes before the refinement: likelihoods here have one maximum, or two far apart.
const COARSE: usize = 24;
/// Width of the interval at the end of the refinement, as a fraction of the range.
const TOLERANCE: f64 = 1e-7;
/// Step of the second difference, as a fraction of the range: truncation and rounding are both below 1e-3 of it.
const STEP: f64 = 2e-3;

/// A fitted parameter.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Fit {
    /// The value that fits best.
    pub value: f64,
    /// Its standard error. At an end of the allowed range: how far inside the likelihood has fallen by exp(-1/2). None where the
    /// likelihood does not fall as far.
    pub error: Option<f64>,
}

/// The maximum of a log-likelihood over low..high. The standard error is (-second derivative)^(-1/2).
pub(super) fn most_likely(low: f64, high: f64, log_likelihood: impl Fn(f64) -> f64) -> Fit {
    let value = maximum(low, high, &log_likelihood);
    let step = STEP * (high - low);
    let error = if value - step > low && value + step < high {
        let second = (log_likelihood(value + step) - 2.0 * log_likelihood(value)
            + log_likelihood(value - step))
            / (step * step);
        (second < 0.0).then(|| (-second).sqrt().recip())
    } else {
        let inwards = if value < 0.5 * (low + high) {
            high
        } else {
            low
        };
        fall(value, inwards, &log_likelihood)
    };
    Fit { value, error }
}

/// Distance from `from` towards `to` over which a function falls by 1/2, by bisection; it is taken to fall all the way.
fn fall(from: f64, to: f64, function: &impl Fn(f64) -> f64) -> Option<f64> {
    let least = function(from) - 0.5;
    let has_fallen = |share: f64| function(from + share * (to - from)) < least;
    has_fallen(1.0).then(|| {
        let (mut low, mut high) = (0.0, 1.0);
        while high - low > TOLERANCE {
            let middle = 0.5 * (low + high);
            if has_fallen(middle) {
                high = middle;
            } else {
                low = middle;
            }
        }
        high * (to - from).abs()
    })
}

/// Where a function is largest: a coarse search, then golden sections about its best point.
pub(super) fn maximum(low: f64, high: f64, function: &impl Fn(f64) -> f64) -> f64 {
    let at = |index: usize| low + (high - low) * index as f64 / COARSE as f64;
    let mut best = (0, f64::NEG_INFINITY);
    for index in 0..=COARSE {
        let value = function(at(index));
        if value > best.1 {
            best = (index, value);
        }
    }
    let golden = 0.5 * (5_f64.sqrt() - 1.0);
    let (mut a, mut b) = (at(best.0.saturating_sub(1)), at((best.0 + 1).min(COARSE)));
    let mut inner = [b - golden * (b - a), a + golden * (b - a)];
    let mut values = inner.map(function);
    while b - a > TOLERANCE * (high - low) {
        if values[0] >= values[1] {
            b = inner[1];
            inner = [b - golden * (b - a), inner[0]];
            values = [function(inner[0]), values[0]];
        } else {
            a = inner[0];
            inner = [inner[1], a + golden * (b - a)];
            values = [values[1], function(inner[1])];
        }
    }
    // The golden section never looks at the ends themselves.
    let middle = 0.5 * (a + b);
    [low, middle, high]
        .into_iter()
        .max_by(|x, y| function(*x).total_cmp(&function(*y)))
        .unwrap_or(middle)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_parabola_gives_its_width() {
        let fit = most_likely(-1.0, 3.0, |x| -0.5 * ((x - 0.7) / 0.05_f64).powi(2));
        assert!((fit.value - 0.7).abs() < 1e-6);
        assert!((fit.error.unwrap_or(0.0) - 0.05).abs() < 1e-6);
        let fit = most_likely(0.0, 1.0, |x| 2.0 * x);
        assert_eq!(fit.value, 1.0);
        assert!((fit.error.unwrap_or(0.0) - 0.25).abs() < 1e-6);
        assert_eq!(most_likely(0.0, 1.0, |x| 0.2 * x).error, None);
    }
}
