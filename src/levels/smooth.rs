//! Levels convolved with a Gaussian.

use std::f64::consts::{FRAC_1_SQRT_2, PI};

use rayon::prelude::*;

/// Levels further away than this many standard deviations count fully or not at all: the error is 1e-19 for each.
const REACH: f64 = 9.0;

/// Points that one thread does at a time.
const CHUNK: usize = 1024;

/// The staircase of `values` (ascending) at `points`, each step a normal distribution function of standard deviation
/// `smoothing`: sum_n erfc((E_n - x)/(s sqrt 2))/2.
///
/// Relative errors are a few 1e-16 (from libm's erfc) wherever a level lies within nine standard deviations or below. Without
/// smoothing a level at the point itself counts half, the limit of small s. Points in ascending order are fastest.
pub fn staircase(values: &[f64], points: &[f64], smoothing: f64) -> Vec<f64> {
    let shape = |near: &[f64], point: f64| -> f64 {
        if smoothing == 0.0 {
            return 0.5 * near.len() as f64;
        }
        let scale = FRAC_1_SQRT_2 / smoothing;
        near.iter()
            .map(|value| 0.5 * libm::erfc((value - point) * scale))
            .sum()
    };
    near_levels(values, points, smoothing, |below, near, point| {
        below as f64 + shape(near, point)
    })
}

/// Mean over from..to of the unsmoothed staircase of `values` (ascending); those below `from` count fully, those from `to` on
/// not at all.
#[must_use]
pub fn mean_staircase(values: &[f64], from: f64, to: f64) -> f64 {
    let share = |value: &f64| ((to - value) / (to - from)).clamp(0.0, 1.0);
    values.iter().map(share).sum()
}

/// The density of `values` (ascending) at `points`: a sum of Gaussians of standard deviation `smoothing`, which must be
/// positive. The result is per unit of `values`; without smoothing it is zero, and infinite at a level.
pub fn density(values: &[f64], points: &[f64], smoothing: f64) -> Vec<f64> {
    let norm = 1.0 / (smoothing * (2.0 * PI).sqrt());
    near_levels(values, points, smoothing, |_, near, point| {
        if smoothing == 0.0 {
            return if near.is_empty() { 0.0 } else { f64::INFINITY };
        }
        let gaussian = |value: &f64| {
            let t = (value - point) / smoothing;
            (-0.5 * t * t).exp()
        };
        norm * near.iter().map(gaussian).sum::<f64>()
    })
}

/// Calls `evaluate` for every point with the number of levels far below it, the levels near it, and the point.
fn near_levels<F>(values: &[f64], points: &[f64], smoothing: f64, evaluate: F) -> Vec<f64>
where
    F: Fn(usize, &[f64], f64) -> f64 + Sync,
{
    let reach = REACH * smoothing;
    let chunk = |points: &[f64]| -> Vec<f64> {
        let mut walk = Walk::default();
        let near = |&point: &f64| {
            let (from, to) = walk.window(values, point, reach);
            evaluate(from, &values[from..to], point)
        };
        points.iter().map(near).collect()
    };
    points.par_chunks(CHUNK).flat_map_iter(chunk).collect()
}

/// A window of levels that moves along with ascending points.
#[derive(Default)]
struct Walk {
    point: f64,
    from: usize,
    to: usize,
}

impl Walk {
    /// The range of `values` with |value - point| <= reach.
    fn window(&mut self, values: &[f64], point: f64, reach: f64) -> (usize, usize) {
        let (low, high) = (point - reach, point + reach);
        if (self.from, self.to) == (0, 0) || point < self.point {
            self.from = values.partition_point(|&value| value < low);
            self.to = values.partition_point(|&value| value <= high);
        } else {
            let ahead = |start: usize, inside: &dyn Fn(f64) -> bool| {
                start
                    + values[start..]
                        .iter()
                        .take_while(|&&value| inside(value))
                        .count()
            };
            self.from = ahead(self.from, &|value| value < low);
            self.to = ahead(self.to.max(self.from), &|value| value <= high);
        }
        self.point = point;
        (self.from, self.to.max(self.from))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_mean_staircase_counts_levels_by_what_follows_them() {
        // 1 below the window, 1 for the last three quarters, 2 for the last half, none at its end.
        let mean = mean_staircase(&[0.5, 2.0, 3.0, 3.0, 5.0], 1.0, 5.0);
        assert!((mean - (1.0 + 0.75 + 2.0 * 0.5)).abs() < 1e-15);
    }
}
