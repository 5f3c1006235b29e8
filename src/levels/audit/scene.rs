//! A record under one noise model: what steps look like when it is whitened, and how well a set of them explains it.

use super::record::Span;
use crate::dense::{Cholesky, Matrix, dot};
use std::f64::consts::PI;

/// Places tried for missing levels, per smoothing width.
const PLACES_PER_WIDTH: f64 = 4.0;
/// Part of the levels that is expected to be missing, or false, before anything is known.
const RATE: f64 = 0.01;
/// Pairs of a missing and a false level are looked for up to this many mean spacings apart.
const PAIR_REACH: f64 = 2.5;
/// Gauss-Newton steps for the places of missing levels.
const NEWTON_STEPS: usize = 12;
/// A change of a place below this part of the smoothing width ends the iteration.
const PLACE_TOLERANCE: f64 = 1e-4;

/// One fault of a list.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Step {
    /// A level is missing at this k.
    Missing(f64),
    /// The listed level with this number (from 0) is false.
    False(usize),
}

/// A set of steps and what is left when they are taken out of the record.
#[derive(Clone, Debug)]
pub(super) struct Explanation {
    pub(super) steps: Vec<Step>,
    /// Whitened rest.
    pub(super) rest: Vec<f64>,
    /// Logarithm of likelihood times prior, up to a constant of the noise model.
    pub(super) value: f64,
}

/// What a search may not use: it is asked for the best explanation without something.
#[derive(Clone, Copy, Debug)]
pub(super) struct Ban {
    pub(super) step: Step,
    /// Everything of its kind within this distance is banned too.
    pub(super) reach: f64,
    /// Whether steps that are there already may move into this range.
    pub(super) may_enter: bool,
}

/// Everything that the search needs under one noise model.
pub(super) struct Scene<'a> {
    pub(super) span: Span,
    pub(super) points: &'a [f64],
    pub(super) levels: &'a [f64],
    pub(super) white: Vec<f64>,
    pub(super) places: &'a [f64],
    /// Whitened steps at the places; squared norms; logarithms of their priors.
    pub(super) missing: Columns,
    /// The same at the listed levels.
    pub(super) listed: Columns,
    /// For each listed level the first place within reach of it, and the scalar products of its step with those at the places.
    pub(super) pairs: Vec<(usize, Vec<f64>)>,
    /// Smooth density of levels at a k.
    pub(super) density: &'a dyn Fn(f64) -> f64,
}

/// Whitened steps.
pub(super) struct Columns {
    pub(super) matrix: Matrix,
    pub(super) squares: Vec<f64>,
    pub(super) priors: Vec<f64>,
}

impl Columns {
    pub(super) fn along(&self, rest: &[f64]) -> Vec<f64> {
        (0..self.matrix.ncols())
            .map(|column| dot(self.matrix.col_as_slice(column), rest))
            .collect()
    }
}

/// Steps in a record, not whitened: missing levels at evenly spaced places, and the listed levels.
pub(super) struct Steps {
    places: Vec<f64>,
    missing: Matrix,
    listed: Matrix,
}

impl Steps {
    pub(super) fn new(span: Span, points: &[f64], levels: &[f64]) -> Self {
        let count = ((span.to - span.from) / span.smoothing * PLACES_PER_WIDTH).ceil() as usize;
        let step = (span.to - span.from) / count as f64;
        let places: Vec<f64> = (0..count)
            .map(|place| span.from + step * (place as f64 + 0.5))
            .collect();
        let columns = |at: &[f64]| {
            let mut plain = Matrix::zeros(points.len(), at.len());
            for (column, &x) in at.iter().enumerate() {
                for (value, &k) in plain.col_as_slice_mut(column).iter_mut().zip(points) {
                    *value = span.step(x, k);
                }
            }
            plain
        };
        Self {
            missing: columns(&places),
            listed: columns(levels),
            places,
        }
    }
}

impl<'a> Scene<'a> {
    /// Prepares the search in a record.
    pub(super) fn new(
        span: Span,
        points: &'a [f64],
        steps: &'a Steps,
        record: &[f64],
        levels: &'a [f64],
        whitener: &Cholesky,
        density: &'a dyn Fn(f64) -> f64,
    ) -> Self {
        let columns = |plain: &Matrix| {
            let matrix = whitener.whitened(plain.as_ref());
            let squares = (0..matrix.ncols())
                .map(|column| {
                    let step = matrix.col_as_slice(column);
                    dot(step, step)
                })
                .collect();
            Columns {
                matrix,
                squares,
                priors: Vec::new(),
            }
        };
        let places = steps.places.as_slice();
        let count = places.len();
        let mut missing = columns(&steps.missing);
        missing.priors = (0..count)
            .map(|place| {
                let (a, b) = (place.saturating_sub(1), (place + 1).min(count - 1));
                let change: f64 = missing
                    .matrix
                    .col_as_slice(a)
                    .iter()
                    .zip(missing.matrix.col_as_slice(b))
                    .map(|(a, b)| (b - a) * (b - a))
                    .sum();
                let slope = change.sqrt() / (places[b] - places[a]);
                prior_of_missing(1.0 / slope, density(places[place]))
            })
            .collect();
        let mut listed = columns(&steps.listed);
        listed.priors = vec![RATE.ln(); levels.len()];
        let pairs = levels
            .iter()
            .enumerate()
            .map(|(index, &level)| {
                let reach = PAIR_REACH / density(level);
                let first = places.partition_point(|&x| x < level - reach);
                let last = places.partition_point(|&x| x <= level + reach);
                let column = listed.matrix.col_as_slice(index);
                let products = (first..last)
                    .map(|place| dot(missing.matrix.col_as_slice(place), column))
                    .collect();
                (first, products)
            })
            .collect();
        Self {
            white: whitener.whitened_column(record),
            span,
            points,
            levels,
            places,
            missing,
            listed,
            pairs,
            density,
        }
    }

    /// The four places about x, and where x lies between the second (0) and the third (1).
    fn around(&self, x: f64) -> (usize, f64) {
        let step = self.places[1] - self.places[0];
        let place = (x - self.places[0]) / step;
        let first = (place.floor().max(1.0) as usize).min(self.places.len() - 3) - 1;
        (first, place - (first + 1) as f64)
    }

    fn combined(&self, first: usize, weights: [f64; 4]) -> Vec<f64> {
        let mut sum = vec![0.0; self.points.len()];
        for (column, weight) in weights.into_iter().enumerate() {
            add(
                &mut sum,
                self.missing.matrix.col_as_slice(first + column),
                weight,
            );
        }
        sum
    }

    /// Whitened step at x, by cubic interpolation between the places.
    fn step(&self, x: f64) -> Vec<f64> {
        let (first, t) = self.around(x);
        self.combined(
            first,
            [
                -t * (t - 1.0) * (t - 2.0) / 6.0,
                (t + 1.0) * (t - 1.0) * (t - 2.0) / 2.0,
                -(t + 1.0) * t * (t - 2.0) / 2.0,
                (t + 1.0) * t * (t - 1.0) / 6.0,
            ],
        )
    }

    /// Whitened derivative of the step at x with respect to x.
    pub(super) fn slope(&self, x: f64) -> Vec<f64> {
        let (first, t) = self.around(x);
        let scale = 1.0 / (self.places[1] - self.places[0]);
        self.combined(
            first,
            [
                -(3.0 * t * t - 6.0 * t + 2.0) / 6.0 * scale,
                (3.0 * t * t - 4.0 * t - 1.0) / 2.0 * scale,
                -(3.0 * t * t - 2.0 * t - 2.0) / 2.0 * scale,
                (3.0 * t * t - 1.0) / 6.0 * scale,
            ],
        )
    }

    /// What is left of the record after some steps, and how probable that is.
    pub(super) fn explained(&self, steps: Vec<Step>) -> Explanation {
        let mut rest = self.white.clone();
        let mut prior = 0.0;
        for step in &steps {
            match *step {
                Step::Missing(x) => {
                    add(&mut rest, &self.step(x), 1.0);
                    let slope = self.slope(x);
                    let error = 1.0 / dot(&slope, &slope).sqrt();
                    prior += prior_of_missing(error, (self.density)(x));
                }
                Step::False(index) => {
                    add(&mut rest, self.listed.matrix.col_as_slice(index), -1.0);
                    prior += self.listed.priors[index];
                }
            }
        }
        Explanation {
            value: prior - 0.5 * dot(&rest, &rest),
            steps,
            rest,
        }
    }

    /// The explanation with the places of all missing levels moved to where they explain the record best.
    pub(super) fn settled(&self, steps: Vec<Step>, ban: Option<Ban>) -> Explanation {
        let mut best = self.explained(steps);
        let mut damping = 0.0;
        for _ in 0..NEWTON_STEPS {
            let Some((steps, change)) = self.newton(&best, ban, damping) else {
                break;
            };
            let next = self.explained(steps);
            if next.value > best.value {
                best = next;
                damping = 0.0;
                if change < PLACE_TOLERANCE * self.span.smoothing {
                    break;
                }
            } else if damping > 1e3 || change < PLACE_TOLERANCE * self.span.smoothing {
                break;
            } else {
                damping = if damping == 0.0 { 0.3 } else { damping * 10.0 };
            }
        }
        best
    }

    /// A damped Gauss-Newton step for all places, and its largest component.
    fn newton(&self, at: &Explanation, ban: Option<Ban>, damping: f64) -> Option<(Vec<Step>, f64)> {
        let movable: Vec<(usize, f64)> = at
            .steps
            .iter()
            .enumerate()
            .filter_map(|(index, step)| match *step {
                Step::Missing(x) => Some((index, x)),
                Step::False(_) => None,
            })
            .collect();
        if movable.is_empty() {
            return None;
        }
        let slopes: Vec<Vec<f64>> = movable.iter().map(|&(_, x)| self.slope(x)).collect();
        let count = movable.len();
        let mut hessian = Matrix::zeros(count, count);
        let mut gradient = Matrix::zeros(count, 1);
        for (i, a) in slopes.iter().enumerate() {
            gradient[(i, 0)] = -dot(a, &at.rest);
            for (j, b) in slopes.iter().enumerate().take(i + 1) {
                hessian[(i, j)] = dot(a, b);
            }
            hessian[(i, i)] *= 1.0 + damping + 1e-9;
        }
        let factor = Cholesky::new(hessian.as_ref())?;
        let change = factor.solved(&gradient);
        let mut steps = at.steps.clone();
        let mut largest = 0.0_f64;
        for (&(index, x), row) in movable.iter().zip(0..count) {
            let limit = self.span.smoothing;
            let moved =
                (x + change[(row, 0)].clamp(-limit, limit)).clamp(self.span.from, self.span.to);
            let stays_out = ban.filter(|ban| !ban.may_enter);
            if !banned(stays_out, Step::Missing(moved), self.levels) {
                largest = largest.max((moved - x).abs());
                steps[index] = Step::Missing(moved);
            }
        }
        Some((steps, largest))
    }

    /// Where a step is.
    pub(super) fn place(&self, step: Step) -> f64 {
        match step {
            Step::Missing(x) => x,
            Step::False(index) => self.levels[index],
        }
    }

    /// Standard deviations of the places of the missing levels, jointly; of a false level, as if it could be anywhere.
    pub(super) fn errors(&self, explanation: &Explanation) -> Vec<f64> {
        let slopes: Vec<Vec<f64>> = explanation
            .steps
            .iter()
            .map(|&step| self.slope(self.place(step)))
            .collect();
        let single = |slope: &[f64]| 1.0 / dot(slope, slope).sqrt();
        let movable: Vec<usize> = (0..slopes.len())
            .filter(|&index| matches!(explanation.steps[index], Step::Missing(_)))
            .collect();
        let mut errors: Vec<f64> = slopes.iter().map(|slope| single(slope)).collect();
        let mut hessian = Matrix::zeros(movable.len(), movable.len());
        for (i, &a) in movable.iter().enumerate() {
            for (j, &b) in movable.iter().enumerate() {
                hessian[(i, j)] = dot(&slopes[a], &slopes[b]);
            }
            hessian[(i, i)] *= 1.0 + 1e-9;
        }
        if let Some(factor) = Cholesky::new(hessian.as_ref()) {
            let inverse = factor.solved(&Matrix::identity(movable.len(), movable.len()));
            for (i, &index) in movable.iter().enumerate() {
                errors[index] = inverse[(i, i)].sqrt();
            }
        }
        errors
    }

    /// The rest of the record, not whitened, given the record.
    pub(super) fn rest_of(&self, record: &[f64], steps: &[Step]) -> Vec<f64> {
        let mut rest = record.to_vec();
        for &step in steps {
            let sign = match step {
                Step::Missing(_) => 1.0,
                Step::False(_) => -1.0,
            };
            let x = self.place(step);
            for (value, &k) in rest.iter_mut().zip(self.points) {
                *value += sign * self.span.step(x, k);
            }
        }
        rest
    }

    /// Standard deviation of the place of a single missing level at x.
    pub(super) fn place_error(&self, x: f64) -> f64 {
        let slope = self.slope(x);
        1.0 / dot(&slope, &slope).sqrt()
    }
}

pub(super) fn add(target: &mut [f64], column: &[f64], factor: f64) {
    for (value, change) in target.iter_mut().zip(column) {
        *value += factor * change;
    }
}

/// Logarithm of the prior probability that a level is missing at a place, times the range of places that explain the record as
/// well (Laplace's approximation): `error` is the standard deviation of the place.
fn prior_of_missing(error: f64, density: f64) -> f64 {
    RATE.ln() + ((2.0 * PI).sqrt() * error * density).min(1.0).ln()
}

/// May this step not be used?
pub(super) fn banned(ban: Option<Ban>, step: Step, levels: &[f64]) -> bool {
    ban.is_some_and(|ban| match (ban.step, step) {
        (Step::Missing(at), Step::Missing(x)) => (x - at).abs() < ban.reach,
        (Step::False(at), Step::False(index)) => (levels[index] - levels[at]).abs() < ban.reach,
        _ => false,
    })
}
