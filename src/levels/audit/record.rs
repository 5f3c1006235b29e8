//! The record that an audit reads: staircase of a list less prediction, smoothed, at evenly spaced points.

use super::prediction::Prediction;
use crate::trace::{DEFAULT_ACCURACY, UniformGrid, sum_on_grid};
use std::f64::consts::{FRAC_1_SQRT_2, PI};

/// Smoothing width times the longest orbit. Longer orbits are left with at most exp(-3.1) = 0.04 of their amplitude, which the
/// noise model counts; a wider Gaussian would blur the places of levels for nothing.
const REACH: f64 = 2.5;
/// Distance of neighbouring points in smoothing widths: waves that lie between the points (longer than pi/0.8 widths) have
/// been smoothed down to 4e-4 of their amplitude.
const POINT_STEP: f64 = 0.8;
/// Cells of the integration per smoothing width. The midpoint rule is exact to rounding inside, to 5e-4 of a level at the ends.
const CELLS_PER_WIDTH: f64 = 8.0;
/// Where a Gaussian has ended, in standard deviations.
const TAIL: f64 = 6.0;

/// Where the list is taken to be complete, and how it is smoothed; all in k.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Span {
    /// First k at which the staircase is known.
    pub from: f64,
    /// Last k at which it is known.
    pub to: f64,
    /// Standard deviation of the Gaussian.
    pub smoothing: f64,
}

impl Span {
    /// The span from..to with the smoothing that suits orbits up to `max_length`.
    pub fn new(from: f64, to: f64, max_length: f64) -> Self {
        Self {
            from,
            to,
            smoothing: REACH / max_length,
        }
    }

    /// The points of the record.
    pub fn points(&self) -> Vec<f64> {
        let count = ((self.to - self.from) / (POINT_STEP * self.smoothing)).floor() as usize + 1;
        let step = (self.to - self.from) / count as f64;
        (0..count)
            .map(|index| self.from + step * (index as f64 + 0.5))
            .collect()
    }

    /// The step of a level at x as it stands in the record at k: the part of the Gaussian about k that lies
    /// above x, of the part that lies within the span.
    pub(super) fn step(&self, x: f64, k: f64) -> f64 {
        let share = |upto: f64| 0.5 * libm::erfc((k - upto) * FRAC_1_SQRT_2 / self.smoothing);
        let (below, all) = (share(self.from), share(self.to));
        ((all - share(x.clamp(self.from, self.to))) / (all - below)).clamp(0.0, 1.0)
    }

    /// Derivative of [`Self::step`] with respect to x.
    pub(super) fn step_slope(&self, x: f64, k: f64) -> f64 {
        if x < self.from || x > self.to {
            return 0.0;
        }
        let share = |upto: f64| 0.5 * libm::erfc((k - upto) * FRAC_1_SQRT_2 / self.smoothing);
        let t = (x - k) / self.smoothing;
        let gaussian = (-0.5 * t * t).exp() / (self.smoothing * (2.0 * PI).sqrt());
        -gaussian / (share(self.to) - share(self.from))
    }
}

/// Gaussian weights of one point over the cells of the span; they add up to one.
#[derive(Clone, Debug)]
pub(super) struct Weights {
    first: usize,
    weights: Vec<f64>,
}

impl Weights {
    /// Smoothed value of a function that is known in the cells.
    pub(super) fn smoothed(&self, cells: &[f64]) -> f64 {
        self.weights
            .iter()
            .zip(&cells[self.first..])
            .map(|(weight, value)| weight * value)
            .sum()
    }
}

impl Weights {
    /// Smoothed cosine and sine of `length` times k.
    pub(super) fn wave(&self, length: f64, middles: &[f64]) -> (f64, f64) {
        self.weights.iter().zip(&middles[self.first..]).fold(
            (0.0, 0.0),
            |(cosine, sine), (weight, k)| {
                let (s, c) = (length * k).sin_cos();
                (cosine + weight * c, sine + weight * s)
            },
        )
    }
}

/// Cells of equal width over a span, and the weights of its points.
#[derive(Clone, Debug)]
pub(super) struct Cells {
    grid: UniformGrid,
    pub(super) weights: Vec<Weights>,
}

impl Cells {
    pub(super) fn new(span: &Span, points: &[f64]) -> Self {
        let width = span.to - span.from;
        let count = (width / span.smoothing * CELLS_PER_WIDTH).ceil() as usize;
        let step = width / count as f64;
        let grid = UniformGrid {
            start: span.from + 0.5 * step,
            step,
            count,
        };
        let reach = TAIL * span.smoothing;
        let weights = |&point: &f64| {
            let index = |k: f64| ((k - span.from) / step).clamp(0.0, count as f64);
            let (first, last) = (
                index(point - reach).floor() as usize,
                index(point + reach).ceil() as usize,
            );
            let mut weights: Vec<f64> = (first..last)
                .map(|cell| {
                    let t = (grid.point(cell) - point) / span.smoothing;
                    (-0.5 * t * t).exp()
                })
                .collect();
            let sum: f64 = weights.iter().sum();
            weights.iter_mut().for_each(|weight| *weight /= sum);
            Weights { first, weights }
        };
        Self {
            weights: points.iter().map(weights).collect(),
            grid,
        }
    }

    /// Middles of the cells.
    pub(super) fn middles(&self) -> Vec<f64> {
        self.grid.points()
    }

    /// Smooth count and orbit sum in the cells, unsmoothed.
    fn predicted(&self, prediction: &Prediction) -> Vec<f64> {
        let orbits = sum_on_grid(&prediction.terms, &self.grid, 0.0, DEFAULT_ACCURACY);
        orbits
            .staircase
            .iter()
            .enumerate()
            .map(|(cell, orbits)| prediction.weyl.count(self.grid.point(cell), 0.0) + orbits)
            .collect()
    }

    /// A function of k at the points, smoothed like the record.
    pub(super) fn smoothed(&self, function: impl Fn(f64) -> f64) -> Vec<f64> {
        let values: Vec<f64> = self.middles().into_iter().map(function).collect();
        self.weights
            .iter()
            .map(|weights| weights.smoothed(&values))
            .collect()
    }
}

/// Predicted staircase of a span, ready to be compared with lists.
#[derive(Clone, Debug)]
pub struct Predicted {
    /// The span.
    pub span: Span,
    /// The points.
    pub points: Vec<f64>,
    /// Predicted staircase at the points.
    pub staircase: Vec<f64>,
    pub(super) cells: Cells,
}

impl Predicted {
    /// Smooths the prediction over a span.
    pub fn new(prediction: &Prediction, span: Span) -> Self {
        let points = span.points();
        let cells = Cells::new(&span, &points);
        let values = cells.predicted(prediction);
        let staircase = cells
            .weights
            .iter()
            .map(|weights| weights.smoothed(&values))
            .collect();
        Self {
            span,
            points,
            staircase,
            cells,
        }
    }

    /// Smoothed staircase of `levels` (ascending, in k) at the points; `below` levels lie below the span.
    pub fn of_levels(&self, levels: &[f64], below: f64) -> Vec<f64> {
        let reach = TAIL * self.span.smoothing;
        self.points
            .iter()
            .map(|&k| {
                let whole = levels.partition_point(|&level| level < k - reach);
                let near = &levels[whole..];
                let near = &near[..near.partition_point(|&level| level <= k + reach)];
                below
                    + whole as f64
                    + near
                        .iter()
                        .map(|&level| self.span.step(level, k))
                        .sum::<f64>()
            })
            .collect()
    }
}
