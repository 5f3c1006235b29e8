//! Faults as they are told to people.

use super::explain::{Found, SAME};
use super::findings::{Corrected, Fault, FaultKind};
use super::run::Listed;
use super::scene::Step;
use super::trend::PowerLaw;

/// Confidence from which on a suspicion is a finding.
pub const FINDING: f64 = 0.9;
/// Weight of the tails in the likelihood of the noise: as a t distribution with this many degrees of freedom.
const FREEDOM: f64 = 30.0;

/// Missing levels closer than this many mean spacings are told as one place with a count.
const ONE_PLACE: f64 = 0.1;
/// A window in which to search again reaches this many standard deviations of the place to either side, and a mean spacing at least.
const WINDOW: f64 = 3.0;

/// Findings and suspicions, each in ascending order of k.
pub(super) struct Told {
    pub(super) faults: Vec<Fault>,
    pub(super) doubts: Vec<Fault>,
}

/// Tells the faults that were found.
pub(super) fn told(
    found: &[Found],
    list: &Listed<'_>,
    law: &PowerLaw,
    density: &dyn Fn(f64) -> f64,
) -> Told {
    let mut faults = merged(found, density);
    faults.sort_by(|a, b| a.k.total_cmp(&b.k));
    faults = counted(faults, found, density);
    for fault in &mut faults {
        place_in_list(fault, list, law);
    }
    let (faults, doubts) = faults
        .into_iter()
        .partition(|fault| fault.confidence >= FINDING);
    Told { faults, doubts }
}

/// Neighbouring missing levels at one place as one fault with a count.
fn counted(faults: Vec<Fault>, found: &[Found], density: &dyn Fn(f64) -> f64) -> Vec<Fault> {
    let mut told: Vec<Fault> = Vec::new();
    for fault in faults {
        let joins = told.last().is_some_and(|before| {
            before.kind == FaultKind::Missing
                && fault.kind == FaultKind::Missing
                && (fault.k - before.k) * density(fault.k) < ONE_PLACE
        });
        match told.last_mut() {
            Some(before) if joins => {
                let (a, b) = (before.count as f64, fault.count as f64);
                before.k = (a * before.k + b * fault.k) / (a + b);
                // What is known of several at one place is their centre.
                before.k_error = single_error(found, before.k) / (a + b);
                before.spacings_error = before.k_error * density(before.k);
                before.count += fault.count;
                before.confidence = before.confidence.min(fault.confidence);
                before.window[1] = fault.window[1];
            }
            _ => told.push(fault),
        }
    }
    told
}

/// Error of the place of the fault nearest to k, if nothing else were open.
fn single_error(found: &[Found], k: f64) -> f64 {
    found
        .iter()
        .min_by(|a, b| (a.k - k).abs().total_cmp(&(b.k - k).abs()))
        .map_or(f64::INFINITY, |nearest| nearest.single_error)
}

/// Windows are given on the scale of the list as well, where that has a trend; a missing level within the width of a listed one is
/// not resolved from it.
fn place_in_list(fault: &mut Fault, list: &Listed<'_>, law: &PowerLaw) {
    let [from, to] = fault.window;
    fault.window = [from.min(law.listed(from)), to.max(law.listed(to))];
    if let Some(index) = fault.listed {
        if fault.kind == FaultKind::False {
            fault.k = list.levels[index - 1];
        }
        return;
    }
    let Some(widths) = list.widths else { return };
    let place = law.listed(fault.k);
    let nearest = (0..list.levels.len()).min_by(|&a, &b| {
        (list.levels[a] - place)
            .abs()
            .total_cmp(&(list.levels[b] - place).abs())
    });
    if let Some(index) = nearest
        && (list.levels[index] - place).abs() < widths[index].max(fault.k_error)
        && widths[index] > 0.0
    {
        fault.kind = FaultKind::Unresolved;
        fault.listed = Some(index + 1);
    }
}

/// Probability from the logarithm of odds, with tails heavier than those of a normal distribution.
fn probability(odds: f64) -> f64 {
    let softened = 0.5 * FREEDOM * (1.0 + 2.0 * odds.max(0.0) / FREEDOM).ln();
    1.0 / (1.0 + (-softened).exp())
}

/// Faults as told to people: a missing level beside a false one is a shifted one.
fn merged(found: &[Found], density: &dyn Fn(f64) -> f64) -> Vec<Fault> {
    let mut used = vec![false; found.len()];
    let mut faults = Vec::new();
    let mut pairs: Vec<(f64, usize, usize)> = Vec::new();
    for (a, missing) in found.iter().enumerate() {
        for (b, wrong) in found.iter().enumerate() {
            if matches!(
                (missing.step, wrong.step),
                (Step::Missing(_), Step::False(_))
            ) {
                let apart = (missing.k - wrong.k).abs() * density(wrong.k);
                if apart < SAME {
                    pairs.push((apart, a, b));
                }
            }
        }
    }
    pairs.sort_by(|a, b| a.0.total_cmp(&b.0));
    for (_, a, b) in pairs {
        if used[a] || used[b] {
            continue;
        }
        used[a] = true;
        used[b] = true;
        let Step::False(index) = found[b].step else {
            continue;
        };
        faults.push(fault(
            FaultKind::Shifted,
            &found[a],
            found[a].odds.min(found[b].odds),
            Some(index),
            density,
        ));
    }
    for (index, single) in found.iter().enumerate() {
        if used[index] {
            continue;
        }
        faults.push(match single.step {
            Step::Missing(_) => fault(FaultKind::Missing, single, single.odds, None, density),
            Step::False(listed) => {
                fault(FaultKind::False, single, single.odds, Some(listed), density)
            }
        });
    }
    faults
}

fn fault(
    kind: FaultKind,
    found: &Found,
    odds: f64,
    listed: Option<usize>,
    density: &dyn Fn(f64) -> f64,
) -> Fault {
    let spacing = 1.0 / density(found.k);
    let spread = found.error / spacing;
    // Part of a normal distribution within half a spacing.
    let within = match kind {
        FaultKind::False => 1.0,
        // Of several neighbours the number counts.
        FaultKind::Missing if found.of_several => 1.0,
        _ => 1.0 - libm::erfc(SAME / (spread * std::f64::consts::SQRT_2)),
    };
    let reach = (WINDOW * found.error).max(spacing);
    Fault {
        kind,
        k: found.k,
        k_error: found.error,
        spacings_error: spread,
        confidence: probability(odds) * within,
        count: 1,
        listed: listed.map(|index| index + 1),
        window: [(found.k - reach).max(0.0), found.k + reach],
    }
}

/// The list without false levels, with missing ones put in and shifted ones moved.
pub(super) fn corrected(list: &Listed<'_>, faults: &[Fault]) -> Vec<Corrected> {
    let dropped = |index: usize| {
        faults.iter().any(|fault| {
            matches!(fault.kind, FaultKind::False | FaultKind::Shifted)
                && fault.listed == Some(index + 1)
        })
    };
    let kept = list
        .levels
        .iter()
        .enumerate()
        .filter(|(index, _)| !dropped(*index))
        .map(|(index, &k)| Corrected {
            k,
            error: list.errors.map(|errors| errors[index]),
            estimated: false,
        });
    let added = faults
        .iter()
        .filter(|fault| fault.kind != FaultKind::False)
        .flat_map(|fault| {
            std::iter::repeat_n(
                Corrected {
                    k: fault.k,
                    error: Some(fault.k_error),
                    estimated: true,
                },
                fault.count,
            )
        });
    let mut corrected: Vec<Corrected> = kept.chain(added).collect();
    corrected.sort_by(|a, b| a.k.total_cmp(&b.k));
    corrected
}
