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
/// Where the sum over cells ends, in standard deviations.
const TAIL: f64 = 6.0;
/// Where a Gaussian has ended, in standard deviations: what lies beyond is 1e-15.
const ENDED: f64 = 8.0;

/// Least smoothing in mean spacings. Near the beginning of a list a few orbits resolve single levels; a record that shows more than
/// their mean positions gains nothing, and errors of levels would no longer be small against its widths.
const RESOLUTION: f64 = 0.6;

/// Where the list is taken to be complete, and how it is smoothed; all in k.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Span {
    /// First k at which the staircase is known.
    pub from: f64,
    /// Last k at which it is known.
    pub to: f64,
    /// Standard deviation of the Gaussian, but for a few points at low k where [`Self::width`] is larger.
    pub smoothing: f64,
    /// Density of levels by the area term, per k.
    pub(super) density_per_k: f64,
}

impl Span {
    /// The span from..to with the smoothing that suits orbits up to `max_length`.
    pub fn new(from: f64, to: f64, prediction: &Prediction) -> Self {
        Self {
            from,
            to,
            smoothing: REACH / prediction.max_length,
            density_per_k: 2.0 * prediction.weyl.coefficient(2),
        }
    }

    /// Standard deviation of the Gaussian at k.
    pub fn width(&self, k: f64) -> f64 {
        self.smoothing.max(RESOLUTION / (self.density_per_k * k))
    }

    /// The points of the record.
    pub fn points(&self) -> Vec<f64> {
        let mut points = Vec::new();
        let mut k = self.from;
        loop {
            // Half a step before and after each point.
            let half = 0.5 * POINT_STEP * self.width(k);
            let point = k + half;
            k = point + half;
            if point >= self.to {
                return points;
            }
            points.push(point);
        }
    }

    /// The step of a level at x as it stands in the record at k: the part of the Gaussian about k that lies
    /// above x, of the part that lies within the span.
    pub(super) fn step(&self, x: f64, k: f64) -> f64 {
        let x = x.clamp(self.from, self.to);
        let reach = ENDED * self.width(k);
        if (x - k).abs() > reach {
            return if x < k { 1.0 } else { 0.0 };
        }
        let (below, all) = self.within(k);
        ((all - self.share(x, k)) / (all - below)).clamp(0.0, 1.0)
    }

    /// Derivative of [`Self::step`] with respect to x.
    pub(super) fn step_slope(&self, x: f64, k: f64) -> f64 {
        let t = (x - k) / self.width(k);
        if x < self.from || x > self.to || t.abs() > ENDED {
            return 0.0;
        }
        let (below, all) = self.within(k);
        let gaussian = (-0.5 * t * t).exp() / (self.width(k) * (2.0 * PI).sqrt());
        -gaussian / (all - below)
    }

    /// Parts of the Gaussian about k that lie below the begin and below the end of the span.
    fn within(&self, k: f64) -> (f64, f64) {
        let reach = ENDED * self.width(k);
        let part = |end: f64, far: f64| {
            if (end - k).abs() > reach {
                far
            } else {
                self.share(end, k)
            }
        };
        (part(self.from, 0.0), part(self.to, 1.0))
    }

    /// Part of the Gaussian about k below `upto`.
    fn share(&self, upto: f64, k: f64) -> f64 {
        0.5 * libm::erfc((k - upto) * FRAC_1_SQRT_2 / self.width(k))
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
        let all = span.to - span.from;
        let count = (all / span.smoothing * CELLS_PER_WIDTH).ceil() as usize;
        let step = all / count as f64;
        let grid = UniformGrid {
            start: span.from + 0.5 * step,
            step,
            count,
        };
        let weights = |&point: &f64| {
            let width = span.width(point);
            let reach = TAIL * width;
            let index = |k: f64| ((k - span.from) / step).clamp(0.0, count as f64);
            let (first, last) = (
                index(point - reach).floor() as usize,
                index(point + reach).ceil() as usize,
            );
            let mut weights: Vec<f64> = (first..last)
                .map(|cell| {
                    let t = (grid.point(cell) - point) / width;
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
        self.points
            .iter()
            .map(|&k| {
                let reach = ENDED * self.span.width(k);
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
