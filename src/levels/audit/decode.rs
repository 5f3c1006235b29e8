//! The most probable sequence of faults, read from the beginning of a record to its end.
//!
//! Whitening is causal: the whitened record at a point depends on nothing that comes later. So the faults can be read in their order, as
//! a sequence is decoded that has passed a channel with memory (the M-algorithm: Anderson & Mohan, IEEE Trans. Commun. 32 (1984) 169,
//! from memory): at every point each hypothesis goes on without a new fault or with one of those whose steps begin to show, and
//! the best few thousand hypotheses are kept. What is found does not depend on how conspicuous a fault is in the whole record, which
//! misleads a search that takes the largest step first.

use super::scene::{Scene, Step};
use std::collections::HashMap;

/// Hypotheses that are kept at every point, and places that are tried for missing levels (every how many-th).
#[derive(Clone, Copy, Debug)]
pub(super) struct Effort {
    kept: usize,
    coarse: usize,
}

impl Effort {
    /// Enough where the noise is small.
    pub(super) const USUAL: Self = Self {
        kept: 600,
        coarse: 2,
    };
    /// Where the noise leaves many hypotheses open for long.
    pub(super) const THOROUGH: Self = Self {
        kept: 3000,
        coarse: 1,
    };
}
/// A step shows this many smoothing widths ahead: 2e-4 of it lies further away.
const AHEAD: f64 = 3.5;
/// Hypotheses that differ only in faults older than this many smoothing widths are taken for one; the best is kept.
const MEMORY: f64 = 12.0;
/// Hypotheses that are worse than the best by more than this, in natural units of likelihood, are dropped.
const HOPELESS: f64 = 60.0;

/// A fault that may be taken up, in the order in which they show.
struct Candidate {
    step: Step,
    place: f64,
    /// Sign of the whitened step in the rest.
    sign: f64,
    prior: f64,
    /// Column among the missing or the listed.
    column: usize,
    is_missing: bool,
}

#[derive(Clone)]
struct Hypothesis {
    /// Numbers of candidates in ascending order.
    faults: Vec<u32>,
    cost: f64,
}

/// The steps of the best hypothesis.
pub(super) fn decode(scene: &Scene<'_>, effort: Effort) -> Vec<Step> {
    let candidates = candidates(scene, effort.coarse);
    let mut hypotheses = vec![Hypothesis {
        faults: Vec::new(),
        cost: 0.0,
    }];
    let mut next = 0;
    let smoothing = scene.span.smoothing;
    let mut row = vec![0.0; candidates.len()];
    for (point, &k) in scene.points.iter().enumerate() {
        let last = candidates.partition_point(|candidate| candidate.place <= k + AHEAD * smoothing);
        for (number, candidate) in candidates.iter().enumerate().take(last).skip(next) {
            let mut added: Vec<Hypothesis> = hypotheses
                .iter()
                .map(|hypothesis| {
                    let mut faults = hypothesis.faults.clone();
                    faults.push(number as u32);
                    Hypothesis {
                        faults,
                        cost: hypothesis.cost - candidate.prior,
                    }
                })
                .collect();
            hypotheses.append(&mut added);
            prune(&mut hypotheses, 2 * effort.kept);
        }
        next = last;
        for (value, candidate) in row.iter_mut().zip(&candidates).take(last) {
            let columns = if candidate.is_missing {
                &scene.missing
            } else {
                &scene.listed
            };
            *value = candidate.sign * columns.matrix[(point, candidate.column)];
        }
        for hypothesis in &mut hypotheses {
            let steps: f64 = hypothesis
                .faults
                .iter()
                .map(|&fault| row[fault as usize])
                .sum();
            let rest = scene.white[point] + steps;
            hypothesis.cost += 0.5 * rest * rest;
        }
        let old = candidates.partition_point(|candidate| candidate.place < k - MEMORY * smoothing);
        merge(&mut hypotheses, old as u32, &candidates);
        prune(&mut hypotheses, effort.kept);
    }
    hypotheses.first().map_or_else(Vec::new, |best| {
        best.faults
            .iter()
            .map(|&fault| candidates[fault as usize].step)
            .collect()
    })
}

fn candidates(scene: &Scene<'_>, coarse: usize) -> Vec<Candidate> {
    let missing = scene
        .places
        .iter()
        .enumerate()
        .filter(|(place, _)| place.is_multiple_of(coarse))
        .map(|(place, &x)| Candidate {
            step: Step::Missing(x),
            place: x,
            sign: 1.0,
            prior: scene.missing.priors[place],
            column: place,
            is_missing: true,
        });
    let listed = scene
        .levels
        .iter()
        .enumerate()
        .map(|(index, &level)| Candidate {
            step: Step::False(index),
            place: level,
            sign: -1.0,
            prior: scene.listed.priors[index],
            column: index,
            is_missing: false,
        });
    let mut candidates: Vec<Candidate> = missing.chain(listed).collect();
    candidates.sort_by(|a, b| a.place.total_cmp(&b.place));
    candidates
}

/// Keeps the best hypotheses, best first. Ties are broken by the faults, so that the result is always the same.
fn prune(hypotheses: &mut Vec<Hypothesis>, most: usize) {
    let best = hypotheses
        .iter()
        .map(|hypothesis| hypothesis.cost)
        .fold(f64::INFINITY, f64::min);
    hypotheses.retain(|hypothesis| hypothesis.cost <= best + HOPELESS);
    let order = |a: &Hypothesis, b: &Hypothesis| {
        a.cost
            .total_cmp(&b.cost)
            .then_with(|| a.faults.cmp(&b.faults))
    };
    if hypotheses.len() > most {
        hypotheses.select_nth_unstable_by(most, order);
        hypotheses.truncate(most);
    }
    hypotheses.sort_by(order);
}

/// Of hypotheses with the same recent faults and as many older ones of each kind keeps the best.
fn merge(hypotheses: &mut Vec<Hypothesis>, old: u32, candidates: &[Candidate]) {
    let mut seen: HashMap<(u32, u32, Vec<u32>), usize> = HashMap::new();
    let mut kept: Vec<Hypothesis> = Vec::with_capacity(hypotheses.len());
    for hypothesis in hypotheses.drain(..) {
        let split = hypothesis.faults.partition_point(|&fault| fault < old);
        let (before, recent) = hypothesis.faults.split_at(split);
        let missing = before
            .iter()
            .filter(|&&fault| candidates[fault as usize].is_missing)
            .count() as u32;
        let key = (missing, split as u32 - missing, recent.to_vec());
        match seen.get(&key) {
            Some(&index) if kept[index].cost <= hypothesis.cost => {}
            Some(&index) => kept[index] = hypothesis,
            None => {
                seen.insert(key, kept.len());
                kept.push(hypothesis);
            }
        }
    }
    *hypotheses = kept;
}
