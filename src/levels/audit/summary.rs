//! From a list and a prediction to findings.

use super::explain::{Explained, Found, SAME, Setting, explain, positive_density};
use super::findings::{
    Corrected, Fault, FaultKind, Findings, Trend, TrendKind, Verdict,
};
use super::noise::Waves;
use super::prediction::Prediction;
use super::record::{Predicted, Span};
use super::search::Step;
use crate::dense::Matrix;

/// A list to be audited, all in k.
#[derive(Clone, Copy, Debug)]
pub struct Listed<'a> {
    /// Levels, ascending, each as often as it is listed.
    pub levels: &'a [f64],
    /// Standard deviations of the levels, where they are known.
    pub errors: Option<&'a [f64]>,
    /// Widths (full, at half height) of measured resonances, where they are known.
    pub widths: Option<&'a [f64]>,
    /// Last k up to which the list claims to be complete; its last level where nothing is claimed.
    pub to: Option<f64>,
}

/// Confidence from which on a suspicion is a finding.
pub const FINDING: f64 = 0.9;
/// The record begins where the smooth count reaches this: below, it means nothing.
const FIRST_COUNT: f64 = 0.5;
/// Weight of the tails in the likelihood of the noise: as a t distribution with this many degrees of freedom.
const FREEDOM: f64 = 30.0;

/// Audits a list. None if there are not enough levels (two) or no noise model (numbers that are not finite).
#[must_use]
pub fn audit(list: &Listed<'_>, prediction: &Prediction) -> Option<Findings> {
    let weyl = &prediction.weyl;
    let (first, last) = (*list.levels.first()?, *list.levels.last()?);
    let from = 0.8 * weyl.k_at_count(FIRST_COUNT);
    let to = list.to.unwrap_or(last).max(last);
    let _ = first;
    let span = Span::new(from, to, prediction.max_length);
    let predicted = Predicted::new(prediction, span);
    let waves = Waves::new(&predicted, prediction.max_length);
    let record: Vec<f64> = predicted
        .of_levels(list.levels, 0.0)
        .iter()
        .zip(&predicted.staircase)
        .map(|(levels, predicted)| levels - predicted)
        .collect();
    let points = record.len();
    let setting = Setting {
        prediction,
        predicted: &predicted,
        waves: &waves,
        fixed: Matrix::zeros(points, points),
    };
    let explained = explain(&setting, list.levels, &record)?;
    Some(findings(list, prediction, &predicted, record, explained))
}

fn findings(
    list: &Listed<'_>,
    prediction: &Prediction,
    predicted: &Predicted,
    record: Vec<f64>,
    explained: Explained,
) -> Findings {
    let span = predicted.span;
    let density = |k: f64| positive_density(prediction.weyl.density(k, 0.0), span.to - span.from);
    let mut faults: Vec<Fault> = merged(&explained.found, list, &density);
    faults.sort_by(|a, b| a.k.total_cmp(&b.k));
    let (faults, doubts): (Vec<Fault>, Vec<Fault>) =
        faults.into_iter().partition(|fault| fault.confidence >= FINDING);
    let corrected = corrected(list, &faults);
    Findings {
        span: [span.from, span.to],
        smoothing: span.smoothing,
        below: 0,
        verdict: Verdict::Audited,
        trend: Trend {
            kind: TrendKind::None,
            odds: 0.0,
            factor: 0.0,
            factor_error: 0.0,
            power: 0.0,
            noticed_from: None,
            at_end: 0.0,
        },
        measures: None,
        level_error: explained.level_error,
        parts: Vec::new(),
        points: predicted.points.clone(),
        before: record,
        after: explained.rest,
        noise: explained.noise,
        corrected,
        faults,
        doubts,
    }
}

/// Probability from the logarithm of odds, with tails heavier than those of a normal distribution.
fn probability(odds: f64) -> f64 {
    let softened = 0.5 * FREEDOM * (1.0 + 2.0 * odds.max(0.0) / FREEDOM).ln();
    1.0 / (1.0 + (-softened).exp())
}

/// Faults as told to people: a missing level beside a false one is a shifted one.
fn merged(found: &[Found], list: &Listed<'_>, density: &dyn Fn(f64) -> f64) -> Vec<Fault> {
    let mut used = vec![false; found.len()];
    let mut faults = Vec::new();
    let mut pairs: Vec<(f64, usize, usize)> = Vec::new();
    for (a, missing) in found.iter().enumerate() {
        for (b, wrong) in found.iter().enumerate() {
            if matches!((missing.step, wrong.step), (Step::Missing(_), Step::False(_))) {
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
        let Step::False(index) = found[b].step else { continue };
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
            Step::False(listed) => fault(FaultKind::False, single, single.odds, Some(listed), density),
        });
    }
    let _ = list;
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
        _ => 1.0 - libm::erfc(SAME / (spread * std::f64::consts::SQRT_2)),
    };
    let reach = (3.0 * found.error).max(spacing);
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
fn corrected(list: &Listed<'_>, faults: &[Fault]) -> Vec<Corrected> {
    let dropped = |index: usize| {
        faults.iter().any(|fault| {
            matches!(fault.kind, FaultKind::False | FaultKind::Shifted)
                && fault.listed == Some(index + 1)
        })
    };
    let kept = list.levels.iter().enumerate().filter(|(index, _)| !dropped(*index)).map(
        |(index, &k)| Corrected {
            k,
            error: list.errors.map(|errors| errors[index]),
            estimated: false,
        },
    );
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
