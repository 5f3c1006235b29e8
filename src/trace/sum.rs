//! Sums of terms over many k.

use rayon::prelude::*;

use super::plan::{self, Segment};
use super::smoothed::{SmoothedTerms, Value};
use super::term::Term;
use super::{direct, fast};

/// The points start, start + step, ..., `count` of them.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct UniformGrid {
    /// First k.
    pub start: f64,
    /// Distance of neighbours, positive.
    pub step: f64,
    /// Number of points.
    pub count: usize,
}

impl UniformGrid {
    /// The point with number `index`.
    pub fn point(&self, index: usize) -> f64 {
        self.start + self.step * index as f64
    }

    /// All points in order.
    pub fn points(&self) -> Vec<f64> {
        (0..self.count).map(|index| self.point(index)).collect()
    }
}

/// The sum of the oscillating terms at a number of k.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct OrbitSum {
    /// Contribution to the staircase N(k), in levels.
    pub staircase: Vec<f64>,
    /// Contribution to the density dN/dk.
    pub density: Vec<f64>,
}

/// The part of a sum that is being computed.
pub(super) struct Target<'a> {
    pub(super) staircase: &'a mut [f64],
    pub(super) density: &'a mut [f64],
}

/// Part of the accuracy that the series of a term may use up; the fast transform needs the rest.
const SERIES_SHARE: f64 = 0.1;

/// Accuracy of [`sum_on_grid`] that is enough for everything that is compared with levels.
pub const DEFAULT_ACCURACY: f64 = 1e-10;

/// Sums `terms`, smoothed with a Gaussian of standard deviation `smoothing` in k (may be 0), over a uniform grid.
///
/// The error of the staircase is below `accuracy` times the sum of the terms' unsmoothed amplitudes, that of the density below
/// `accuracy` times the sum of amplitude times length, plus the rounding of the phases k l in double precision (k l times 1e-16).
/// Below an accuracy of 4e-13 all terms are summed directly. The result does not depend on the number of threads.
pub fn sum_on_grid(terms: &[Term], grid: &UniformGrid, smoothing: f64, accuracy: f64) -> OrbitSum {
    let smoothed = SmoothedTerms::with_accuracy(terms, smoothing, SERIES_SHARE * accuracy);
    let mut sum = OrbitSum {
        staircase: vec![0.0; grid.count],
        density: vec![0.0; grid.count],
    };
    for segment in plan::segments(&smoothed, grid, accuracy) {
        let Segment {
            points,
            direct,
            fast,
        } = segment;
        let part = UniformGrid {
            start: grid.point(points.start),
            step: grid.step,
            count: points.len(),
        };
        let mut target = Target {
            staircase: &mut sum.staircase[points.clone()],
            density: &mut sum.density[points],
        };
        direct::add(&smoothed, &direct, &part, &mut target);
        for class in fast {
            fast::add(&smoothed, &class, &part, accuracy, &mut target);
        }
    }
    sum
}

/// Sums `terms`, smoothed with a Gaussian of standard deviation `smoothing` in k (may be 0), at arbitrary points, one by one.
///
/// Errors are those of [`SmoothedTerms`].
pub fn sum_at(terms: &[Term], points: &[f64], smoothing: f64) -> OrbitSum {
    let smoothed = SmoothedTerms::new(terms, smoothing);
    let values: Vec<Value> = points.par_iter().map(|&k| smoothed.at(k)).collect();
    OrbitSum {
        staircase: values.iter().map(|value| value.staircase).collect(),
        density: values.iter().map(|value| value.density).collect(),
    }
}
