//! Bounds on the number of levels from means of the residual, in the manner of Turing's method.
//!
//! Let D(k) be the number of true levels below k less that of listed ones. If every listed level is real, D never falls. The mean of the
//! predicted staircase over a window is that of the true one but for the noise, so the mean of D over the window is known: D at its
//! begin is at most, and at its end at least, that (Turing, Proc. London Math. Soc. (3) 3 (1953) 99, for the zeros of the zeta
//! function; here the noise is estimated, not bounded, and the bounds are semiclassical, not rigorous).

use super::explain::Explained;
use super::findings::Part;
use super::record::Predicted;

/// Levels in a part.
const LEVELS_PER_PART: f64 = 30.0;
/// Standard deviations that a bound allows for.
const DEVIATIONS: f64 = 3.5;
/// Widths of the windows over which means are taken, in parts; the one that bounds best counts.
const WINDOWS: [f64; 4] = [0.25, 0.5, 1.0, 2.0];

/// Bounds for parts of a list. `residual` is that of the list without its false levels; `levels` are these.
pub(super) fn parts(
    predicted: &Predicted,
    explained: &Explained,
    residual: &[f64],
    levels: &[f64],
) -> Vec<Part> {
    let Some(&last) = levels.last() else {
        return Vec::new();
    };
    let count = ((levels.len() as f64 / LEVELS_PER_PART).round() as usize).max(1);
    let boundaries: Vec<f64> = (0..=count)
        .map(|boundary| match boundary {
            0 => predicted.span.from,
            _ if boundary == count => last,
            _ => {
                let place = boundary * levels.len() / count;
                0.5 * (levels[place - 1] + levels[place])
            }
        })
        .collect();
    let bounds: Vec<(f64, f64)> = boundaries
        .iter()
        .map(|&boundary| {
            let width = (last - predicted.span.from) / count as f64;
            excess(predicted, explained, residual, boundary, width)
        })
        .collect();
    (0..count)
        .map(|part| {
            let (from, to) = (boundaries[part], boundaries[part + 1]);
            let listed = levels.iter().filter(|&&k| from < k && k <= to).count();
            let (low, high) = (bounds[part], bounds[part + 1]);
            let least = (high.0 - low.1).max(0.0);
            let most = (high.1 - low.0).max(least);
            Part {
                from,
                to,
                listed,
                least: listed + least as usize,
                most: listed.saturating_add(most as usize),
            }
        })
        .collect()
}

/// Least and largest number of true levels below a boundary less that of listed ones. Nothing is missing below the span.
fn excess(
    predicted: &Predicted,
    explained: &Explained,
    residual: &[f64],
    boundary: f64,
    width: f64,
) -> (f64, f64) {
    let (mut least, mut most) = (0.0_f64, f64::from(u32::MAX));
    if boundary <= predicted.span.from {
        most = 0.0;
    }
    for window in WINDOWS {
        let reach = window * width;
        if let Some((mean, error)) =
            mean(predicted, explained, residual, boundary, boundary + reach)
        {
            most = most.min((-mean + DEVIATIONS * error).floor());
        }
        if let Some((mean, error)) =
            mean(predicted, explained, residual, boundary - reach, boundary)
        {
            least = least.max((-mean - DEVIATIONS * error).ceil());
        }
    }
    if most == f64::from(u32::MAX) {
        // At the end of a list there is no window above it: as many as the mean below allows, and one more.
        most = least + 1.0;
    }
    (least, most.max(least))
}

/// Mean of the residual over from..to and its standard deviation; none for windows that reach beyond the record.
fn mean(
    predicted: &Predicted,
    explained: &Explained,
    residual: &[f64],
    from: f64,
    to: f64,
) -> Option<(f64, f64)> {
    let span = predicted.span;
    if from < span.from || to > span.to {
        return None;
    }
    let inside: Vec<bool> = predicted
        .points
        .iter()
        .map(|&k| from <= k && k < to)
        .collect();
    let count = inside.iter().filter(|&&inside| inside).count();
    if count < 2 {
        return None;
    }
    let weight = 1.0 / count as f64;
    let weights: Vec<f64> = inside
        .iter()
        .map(|&inside| if inside { weight } else { 0.0 })
        .collect();
    let mean = residual
        .iter()
        .zip(&weights)
        .map(|(value, weight)| value * weight)
        .sum();
    Some((mean, explained.whitener.deviation(&weights)))
}
