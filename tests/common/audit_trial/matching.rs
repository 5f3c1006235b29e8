//! Which reports are right: reports and planted faults are matched one to one.

use super::plan::{Corrupted, Planted};
use super::subject::Subject;
use orbitsum::levels::audit::{Fault, FaultKind};

/// Largest distance of a report of a missing level from the planted one, in local mean spacings.
pub(crate) const MISSING_REACH: f64 = 0.5;
/// Largest distance of the level that is named as false from the planted one.
pub(crate) const FALSE_REACH: f64 = 0.3;
/// Largest distance of a planted missing level from a planted false one that together may be told as a shifted level.
const SHIFTED_REACH: f64 = 0.5;

/// A planted fault that was reported.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Hit {
    pub(crate) planted: Planted,
    pub(crate) k: f64,
    pub(crate) k_error: f64,
}

/// What has become of planted faults and reports.
#[derive(Clone, Debug, Default)]
pub(crate) struct Judged {
    /// Found as what they are.
    pub(crate) hits: Vec<Hit>,
    /// Found as one half of a shifted level.
    pub(crate) shifted: Vec<Planted>,
    /// Not found.
    pub(crate) lost: Vec<Planted>,
    /// Of each report the number of levels that it tells of, and the number of those that are right.
    pub(crate) reports: Vec<(usize, usize)>,
}

impl Judged {
    /// Reported levels (a report may tell of several) that match nothing.
    pub(crate) fn false_reports(&self) -> usize {
        self.reports.iter().map(|(told, right)| told - right).sum()
    }
}

/// Compares reports with planted faults: first the shifted levels, then missing and false ones, each so that as many as possible
/// match and the sum of distances is the least.
pub(crate) fn judge(
    subject: &Subject,
    corrupted: &Corrupted,
    planted: &[Planted],
    reports: &[Fault],
) -> Judged {
    let mut judged = Judged {
        reports: reports
            .iter()
            .map(|report| (report.count.max(1), 0))
            .collect(),
        ..Judged::default()
    };
    let mut open = planted.to_vec();
    for (index, report) in reports.iter().enumerate() {
        if report.kind == FaultKind::Shifted
            && let Some(pair) = shifted(subject, corrupted, &open, report)
        {
            judged.reports[index].1 = 1;
            judged.shifted.extend(pair);
            for half in pair {
                // Of equal levels only one is told.
                let place = open.iter().position(|planted| *planted == half);
                place.map(|place| open.remove(place));
            }
        }
    }
    for (kind, reach) in [
        (FaultKind::Missing, MISSING_REACH),
        (FaultKind::False, FALSE_REACH),
    ] {
        let wanted: Vec<Planted> = open.iter().copied().filter(|it| it.kind == kind).collect();
        let told: Vec<usize> = (0..reports.len())
            .filter(|&index| reports[index].kind == kind)
            .flat_map(|index| std::iter::repeat_n(index, reports[index].count.max(1)))
            .collect();
        let distance = |a: usize, b: usize| {
            let planted = wanted[a].k;
            (reports[told[b]].k - planted).abs() / subject.spacing(planted)
        };
        let pairs = matched([wanted.len(), told.len()], reach, distance);
        for &(a, b) in &pairs {
            let report = &reports[told[b]];
            judged.reports[told[b]].1 += 1;
            judged.hits.push(Hit {
                planted: wanted[a],
                k: report.k,
                k_error: report.k_error,
            });
        }
        let lost = (0..wanted.len()).filter(|index| !pairs.iter().any(|(a, _)| a == index));
        judged.lost.extend(lost.map(|index| wanted[index]));
    }
    judged
}

/// The missing and the false level that a report of a shifted one tells of.
fn shifted(
    subject: &Subject,
    corrupted: &Corrupted,
    open: &[Planted],
    report: &Fault,
) -> Option<[Planted; 2]> {
    let listed = corrupted.levels[report.listed? - 1];
    let near = |kind: FaultKind, k: f64, reach: f64| {
        let distance = move |planted: &Planted| (planted.k - k).abs() / subject.spacing(planted.k);
        open.iter()
            .copied()
            .filter(|planted| planted.kind == kind && distance(planted) <= reach)
            .min_by(|a, b| distance(a).total_cmp(&distance(b)))
    };
    let missing = near(FaultKind::Missing, report.k, MISSING_REACH)?;
    let wrong = near(FaultKind::False, listed, FALSE_REACH)?;
    let apart = (missing.k - wrong.k).abs() / subject.spacing(missing.k);
    (apart <= SHIFTED_REACH).then_some([missing, wrong])
}

/// Pairs of two ascending lists that are within reach of each other: as many as possible, and of those sets the one with the least
/// sum of distances. Pairs that cross never do better, so that the best sets of the first parts of the lists lead to the best of all.
fn matched(
    [wanted, told]: [usize; 2],
    reach: f64,
    distance: impl Fn(usize, usize) -> f64,
) -> Vec<(usize, usize)> {
    let better = |a: (usize, f64), b: (usize, f64)| a.0 > b.0 || (a.0 == b.0 && a.1 < b.1);
    let mut best = vec![vec![(0, 0.0); told + 1]; wanted + 1];
    let with = |best: &[Vec<(usize, f64)>], a: usize, b: usize| {
        let apart = distance(a - 1, b - 1);
        let (count, sum) = best[a - 1][b - 1];
        (apart <= reach).then_some((count + 1, sum + apart))
    };
    for a in 1..=wanted {
        for b in 1..=told {
            let mut value = best[a - 1][b];
            for other in [Some(best[a][b - 1]), with(&best, a, b)]
                .into_iter()
                .flatten()
            {
                if better(other, value) {
                    value = other;
                }
            }
            best[a][b] = value;
        }
    }
    let (mut a, mut b) = (wanted, told);
    let mut pairs = Vec::new();
    while a > 0 && b > 0 {
        if best[a][b] == best[a - 1][b] {
            a -= 1;
        } else if best[a][b] == best[a][b - 1] {
            b -= 1;
        } else {
            a -= 1;
            b -= 1;
            pairs.push((a, b));
        }
    }
    pairs.reverse();
    pairs
}
