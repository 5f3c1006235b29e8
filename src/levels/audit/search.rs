//! The set of steps that explains a record best: integer least squares over all sets of missing and false levels.
//!
//! A record of a faulty list is noise plus a step of +1 at every false level (one of those listed) and of -1 at every missing one
//! (anywhere). With a Gaussian noise model the best set minimises half the squared whitened rest less the logarithm of the prior.
//! Heights are whole numbers, so the problem is combinatorial; it is solved by exchange: levels are added, removed, replaced,
//! moved, added in pairs, and neighbours are taken out and put back together, until nothing improves the whole explanation.

use super::scene::{Ban, Columns, Explanation, Scene, Step, add, banned};
use crate::dense::dot;

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

impl Scene<'_> {
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
}
