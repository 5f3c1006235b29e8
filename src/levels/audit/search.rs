//! The set of steps that explains a record best: integer least squares over all sets of missing and false levels.
//!
//! A record of a faulty list is noise plus a step of +1 at every false level (one of those listed) and of -1 at every missing one
//! (anywhere). With a Gaussian noise model the best set minimises half the squared whitened rest less the logarithm of the prior.
//! Heights are whole numbers, so the problem is combinatorial; it is solved by exchange: levels are added, removed, replaced,
//! moved, added in pairs, and neighbours are taken out and put back together, until nothing improves the whole explanation.

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
/// Improvement, in natural units of likelihood, below which an exchange is not worth making.
const WORTH: f64 = 1e-6;
/// Exchanges after which a search is given up, and those that look for an explanation without a fault.
const MOST_EXCHANGES: usize = 80;
const MOST_EXCHANGES_WITHOUT: usize = 12;
/// A list with more faults than this, and than a quarter of its levels, is not one with faults.
const MOST_FAULTS: usize = 12;
/// Neighbourhoods in which steps are taken out together, in smoothing widths, and the most that are taken out.
const REBUILT: [f64; 3] = [3.0, 7.0, 14.0];
const MOST_REBUILT: usize = 3;
/// Listed levels on either side for which a false one is exchanged, and the most promising exchanges that are followed up.
const RELABELLED: usize = 5;
const FOLLOWED: usize = 4;
/// Every how many-th place is tried where sets of steps are.
const COARSE: usize = 3;

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
    rest: Vec<f64>,
    /// Logarithm of likelihood times prior, up to a constant of the noise model.
    pub(super) value: f64,
}

/// What a search may not use: it is asked for the best explanation without something.
#[derive(Clone, Copy, Debug)]
pub(super) struct Ban {
    pub(super) step: Step,
    /// Everything of its kind within this distance is banned too.
    pub(super) reach: f64,
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
    pairs: Vec<(usize, Vec<f64>)>,
    /// Smooth density of levels at a k.
    density: &'a dyn Fn(f64) -> f64,
}

/// Whitened steps.
pub(super) struct Columns {
    pub(super) matrix: Matrix,
    squares: Vec<f64>,
    pub(super) priors: Vec<f64>,
}

impl Columns {
    fn along(&self, rest: &[f64]) -> Vec<f64> {
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
    fn slope(&self, x: f64) -> Vec<f64> {
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
            if !banned(ban, Step::Missing(moved), self.levels) {
                largest = largest.max((moved - x).abs());
                steps[index] = Step::Missing(moved);
            }
        }
        Some((steps, largest))
    }

    /// The best single step to add, with the improvement it promises.
    fn best_addition(&self, at: &Explanation, ban: Option<Ban>) -> Option<(Vec<Step>, f64)> {
        let (missing, listed) = self.scores(at);
        let missing = missing
            .iter()
            .enumerate()
            .map(|(place, gain)| (Step::Missing(self.places[place]), *gain));
        let listed = listed
            .iter()
            .enumerate()
            .map(|(index, gain)| (Step::False(index), *gain));
        missing
            .chain(listed)
            .filter(|(step, _)| self.is_free(*step, &at.steps) && !banned(ban, *step, self.levels))
            .max_by(|a, b| a.1.total_cmp(&b.1))
            .map(|(step, gain)| (vec![step], gain))
    }

    /// Improvements that single steps promise: missing levels at the places, false ones among the listed.
    fn scores(&self, at: &Explanation) -> (Vec<f64>, Vec<f64>) {
        let gain = |columns: &Columns, sign: f64| -> Vec<f64> {
            columns
                .along(&at.rest)
                .iter()
                .zip(columns.squares.iter().zip(&columns.priors))
                .map(|(along, (square, prior))| sign * along - 0.5 * square + prior)
                .collect()
        };
        (gain(&self.missing, -1.0), gain(&self.listed, 1.0))
    }

    /// The best missing level beside a false one to add.
    fn best_pair(&self, at: &Explanation, ban: Option<Ban>) -> Option<(Vec<Step>, f64)> {
        let (missing, listed) = self.scores(at);
        let mut best: Option<(Vec<Step>, f64)> = None;
        for (index, (first, products)) in self.pairs.iter().enumerate() {
            let fault = Step::False(index);
            if !self.is_free(fault, &at.steps) || banned(ban, fault, self.levels) {
                continue;
            }
            for (place, product) in (*first..).zip(products) {
                let step = Step::Missing(self.places[place]);
                let together = missing[place] + listed[index] + product;
                if best.as_ref().is_none_or(|(_, gain)| together > *gain)
                    && !banned(ban, step, self.levels)
                {
                    best = Some((vec![fault, step], together));
                }
            }
        }
        best
    }

    fn is_free(&self, step: Step, taken: &[Step]) -> bool {
        match step {
            Step::Missing(_) => true,
            Step::False(_) => !taken.contains(&step),
        }
    }

    /// The best explanation that exchanges reach from some steps.
    pub(super) fn search(&self, start: Vec<Step>, ban: Option<Ban>) -> Explanation {
        let mut best = self.settled(start, ban);
        let most = if ban.is_some() {
            MOST_EXCHANGES_WITHOUT
        } else {
            MOST_EXCHANGES
        };
        for _ in 0..most {
            if self.is_hopeless(&best) {
                break;
            }
            match self.improved(&best, ban) {
                Some(better) => best = better,
                None => break,
            }
        }
        best
    }

    /// Has an explanation so many faults that it explains nothing?
    pub(super) fn is_hopeless(&self, explanation: &Explanation) -> bool {
        explanation.steps.len() > MOST_FAULTS.max(self.levels.len() / 4)
    }

    /// A better explanation one exchange away.
    fn improved(&self, at: &Explanation, ban: Option<Ban>) -> Option<Explanation> {
        let is_better = |found: &Explanation| found.value > at.value + WORTH;
        let with = |from: &Explanation, addition: Option<(Vec<Step>, f64)>| {
            let (added, _) = addition?;
            let steps = from.steps.iter().copied().chain(added).collect();
            Some(self.settled(steps, ban))
        };
        let addition = self.best_addition(at, ban);
        if let Some(found) = with(at, addition.filter(|(_, gain)| *gain > 0.0)).filter(is_better) {
            return Some(found);
        }
        for index in 0..at.steps.len() {
            let mut steps = at.steps.clone();
            steps.remove(index);
            let without = self.explained(steps);
            if is_better(&without) {
                return Some(self.settled(without.steps, ban));
            }
            let addition = self.best_addition(&without, ban);
            if let Some((_, gain)) = &addition
                && without.value + gain > at.value + WORTH
                && let Some(found) = with(&without, addition).filter(is_better)
            {
                return Some(found);
            }
        }
        if let Some(found) = with(at, self.best_pair(at, ban).filter(|(_, gain)| *gain > 0.0))
            && is_better(&found)
        {
            return Some(found);
        }
        self.relabelled(at, ban).or_else(|| self.rebuilt(at, ban))
    }

    /// Exchanges one false level, or two at once, for listed levels nearby, while the missing levels move along: which level is false
    /// and where others are missing can often be changed together at little cost, but not one after the other.
    fn relabelled(&self, at: &Explanation, ban: Option<Ban>) -> Option<Explanation> {
        let falses: Vec<(usize, usize)> = at
            .steps
            .iter()
            .enumerate()
            .filter_map(|(number, step)| match *step {
                Step::False(index) => Some((number, index)),
                Step::Missing(_) => None,
            })
            .collect();
        let along = self.along_places(at);
        let projected = |column: &[f64]| -> Vec<f64> {
            let mut column = column.to_vec();
            for slope in &along {
                let part = -dot(slope, &column);
                add(&mut column, slope, part);
            }
            column
        };
        let rest = projected(&at.rest);
        // What each exchange changes in the rest, and the rest of the likelihood that it leaves.
        let exchanges: Vec<Vec<(usize, Vec<f64>)>> = falses
            .iter()
            .map(|&(_, index)| {
                let near = index.saturating_sub(RELABELLED)
                    ..(index + RELABELLED + 1).min(self.levels.len());
                near.filter(|&other| {
                    let step = Step::False(other);
                    other != index
                        && self.is_free(step, &at.steps)
                        && !banned(ban, step, self.levels)
                })
                .map(|other| {
                    let mut change = self.listed.matrix.col_as_slice(index).to_vec();
                    add(&mut change, self.listed.matrix.col_as_slice(other), -1.0);
                    (other, projected(&change))
                })
                .collect()
            })
            .collect();
        let mut promising: Vec<(f64, Vec<(usize, usize)>)> = Vec::new();
        for (i, &(first, _)) in falses.iter().enumerate() {
            for (other, change) in &exchanges[i] {
                let gain = -dot(change, &rest) - 0.5 * dot(change, change);
                promising.push((gain, vec![(first, *other)]));
                for (j, &(second, _)) in falses.iter().enumerate().take(i) {
                    for (another, more) in &exchanges[j] {
                        if another == other {
                            continue;
                        }
                        let both =
                            gain - dot(more, &rest) - 0.5 * dot(more, more) - dot(change, more);
                        promising.push((both, vec![(first, *other), (second, *another)]));
                    }
                }
            }
        }
        promising.sort_by(|a, b| b.0.total_cmp(&a.0));
        for (_, exchange) in promising.into_iter().take(FOLLOWED) {
            let mut steps = at.steps.clone();
            for (number, index) in exchange {
                steps[number] = Step::False(index);
            }
            let found = self.settled(steps, ban);
            if found.value > at.value + WORTH {
                return Some(found);
            }
        }
        None
    }

    /// Orthonormal directions in which the record changes when missing levels move.
    fn along_places(&self, at: &Explanation) -> Vec<Vec<f64>> {
        let mut directions: Vec<Vec<f64>> = Vec::new();
        for step in &at.steps {
            let Step::Missing(x) = *step else { continue };
            let mut slope = self.slope(x);
            let before = dot(&slope, &slope);
            for direction in &directions {
                let part = -dot(direction, &slope);
                add(&mut slope, direction, part);
            }
            let norm = dot(&slope, &slope);
            if norm > 1e-6 * before {
                slope.iter_mut().for_each(|value| *value /= norm.sqrt());
                directions.push(slope);
            }
        }
        directions
    }

    /// Takes out the steps of one neighbourhood after the other and puts in the best set of up to three.
    fn rebuilt(&self, at: &Explanation, ban: Option<Ban>) -> Option<Explanation> {
        for &step in &at.steps {
            for reach in REBUILT {
                if let Some(found) = self.rebuilt_about(at, self.place(step), reach, ban) {
                    return Some(found);
                }
            }
        }
        None
    }

    fn rebuilt_about(
        &self,
        at: &Explanation,
        x: f64,
        reach: f64,
        ban: Option<Ban>,
    ) -> Option<Explanation> {
        let reach = reach * self.span.smoothing;
        let mut nearest: Vec<usize> = (0..at.steps.len())
            .filter(|&index| (self.place(at.steps[index]) - x).abs() <= reach)
            .collect();
        nearest.sort_by(|&a, &b| {
            let distance = |index: usize| (self.place(at.steps[index]) - x).abs();
            distance(a).total_cmp(&distance(b))
        });
        nearest.truncate(MOST_REBUILT);
        let kept: Vec<Step> = at
            .steps
            .iter()
            .enumerate()
            .filter(|(index, _)| !nearest.contains(index))
            .map(|(_, step)| *step)
            .collect();
        let without = self.explained(kept);
        let added = self.best_set(&without, x, reach, ban);
        let steps: Vec<Step> = without.steps.iter().copied().chain(added).collect();
        let found = self.settled(steps, ban);
        (found.value > at.value + WORTH).then_some(found)
    }

    /// The best set of up to three steps near x to add, by trying all of them: places at a coarse distance, all listed levels.
    fn best_set(&self, at: &Explanation, x: f64, reach: f64, ban: Option<Ban>) -> Vec<Step> {
        let inside = |k: f64| (k - x).abs() <= reach;
        let places = (0..self.places.len())
            .filter(|&place| place.is_multiple_of(COARSE) && inside(self.places[place]))
            .map(|place| (Step::Missing(self.places[place]), &self.missing, place));
        let listed = (0..self.levels.len())
            .filter(|&index| inside(self.levels[index]))
            .map(|index| (Step::False(index), &self.listed, index));
        let candidates: Vec<(Step, &[f64], f64)> = places
            .chain(listed)
            .filter(|(step, ..)| self.is_free(*step, &at.steps) && !banned(ban, *step, self.levels))
            .map(|(step, columns, index)| {
                let sign = if matches!(step, Step::Missing(_)) {
                    -1.0
                } else {
                    1.0
                };
                let column = columns.matrix.col_as_slice(index);
                let gain = sign * dot(column, &at.rest) - 0.5 * columns.squares[index]
                    + columns.priors[index];
                (step, column, gain)
            })
            .collect();
        let count = candidates.len();
        let mut products = vec![0.0; count * count];
        for i in 0..count {
            for j in 0..i {
                let same = matches!(candidates[i].0, Step::Missing(_))
                    == matches!(candidates[j].0, Step::Missing(_));
                let product = dot(candidates[i].1, candidates[j].1);
                products[i * count + j] = if same { -product } else { product };
            }
        }
        let mut best = (0.0, Vec::new());
        let mut keep = |gain: f64, set: &[usize]| {
            if gain > best.0 {
                best = (gain, set.to_vec());
            }
        };
        for i in 0..count {
            keep(candidates[i].2, &[i]);
            for j in 0..i {
                let two = candidates[i].2 + candidates[j].2 + products[i * count + j];
                keep(two, &[i, j]);
                for k in 0..j {
                    let three =
                        two + candidates[k].2 + products[i * count + k] + products[j * count + k];
                    keep(three, &[i, j, k]);
                }
            }
        }
        best.1
            .into_iter()
            .map(|index| candidates[index].0)
            .collect()
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

fn add(target: &mut [f64], column: &[f64], factor: f64) {
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
fn banned(ban: Option<Ban>, step: Step, levels: &[f64]) -> bool {
    ban.is_some_and(|ban| match (ban.step, step) {
        (Step::Missing(at), Step::Missing(x)) => (x - at).abs() < ban.reach,
        (Step::False(at), Step::False(index)) => (levels[index] - levels[at]).abs() < ban.reach,
        _ => false,
    })
}
