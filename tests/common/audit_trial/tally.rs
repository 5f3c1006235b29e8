//! The outcome of many lists.

use super::matching::{Judged, judge};
use super::plan::Corrupted;
use super::subject::Subject;
use orbitsum::levels::audit::{FaultKind, Findings, Verdict};

/// Confidences that are counted together: from, and up to the next.
pub(crate) const BINS: [f64; 4] = [0.0, 0.5, 0.9, 0.99];
/// Reports this many local mean spacings outside a run of missing levels still belong to it.
const AROUND_RUN: f64 = 1.0;

/// Counts over lists.
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct Tally {
    pub(crate) lists: usize,
    /// Faults planted.
    pub(crate) planted: usize,
    /// Those found, as what they are or as one half of a shifted level.
    pub(crate) found: usize,
    /// Those of `found` that were told as one half of a shifted level.
    pub(crate) shifted: usize,
    /// Lost ones that lie above everything that is listed.
    pub(crate) beyond: usize,
    /// Lost missing ones where the audit says that it cannot see single levels.
    pub(crate) unseen: usize,
    /// Reported levels that match nothing planted.
    pub(crate) false_reports: usize,
    /// Lists that were not audited, and lists taken as those of another shape.
    pub(crate) refused: usize,
    /// Lists of which a part is said to be unresolved.
    pub(crate) unresolved: usize,
    /// Lists for which a trend is reported.
    pub(crate) trends: usize,
    /// Distances of the missing levels that were found, in mean spacings.
    pub(crate) misplaced: Vec<f64>,
    /// Number of those within the stated standard deviation.
    pub(crate) within_error: usize,
    /// Reports (doubts too) of the confidences of [`BINS`], and how many of them are right.
    pub(crate) confidence: [(usize, usize); BINS.len()],
    /// Runs of removed neighbours, and how many of them were counted right.
    pub(crate) runs: usize,
    pub(crate) runs_right: usize,
    /// What was lost, and what was reported and is false, in words.
    pub(crate) remarks: Vec<String>,
}

impl Tally {
    /// A list that the audit did not take.
    pub(crate) fn unaudited(corrupted: &Corrupted) -> Self {
        Self {
            lists: 1,
            planted: corrupted.planted.len(),
            refused: 1,
            runs: corrupted.runs.len(),
            ..Self::default()
        }
    }

    /// What the audit says of a list, compared with what was planted. Only findings count as reports; doubts enter the table
    /// of confidences, where they can be right about what the findings have left.
    pub(crate) fn of_list(subject: &Subject, corrupted: &Corrupted, findings: &Findings) -> Self {
        let judged = judge(subject, corrupted, &corrupted.planted, &findings.faults);
        let doubted = judge(subject, corrupted, &judged.lost, &findings.doubts);
        let mut tally = Self {
            lists: 1,
            planted: corrupted.planted.len(),
            found: judged.hits.len() + judged.shifted.len(),
            shifted: judged.shifted.len(),
            false_reports: judged.false_reports(),
            refused: usize::from(findings.verdict == Verdict::Foreign),
            unresolved: usize::from(matches!(findings.verdict, Verdict::Unresolved { .. })),
            trends: usize::from(findings.trend.kind != orbitsum::levels::audit::TrendKind::None),
            runs: corrupted.runs.len(),
            remarks: remarks(&judged, findings),
            ..Self::default()
        };
        tally.count_lost(corrupted, findings, &judged);
        tally.count_places(subject, &judged);
        let faults = findings.faults.iter().zip(&judged.reports);
        for (report, (told, right)) in faults.chain(findings.doubts.iter().zip(&doubted.reports)) {
            let bin = BINS.partition_point(|&from| from <= report.confidence) - 1;
            tally.confidence[bin].0 += told;
            tally.confidence[bin].1 += right;
        }
        let right =
            |run: &&([f64; 2], usize)| counted_in_run(subject, findings, run.0) == run.1 as i64;
        tally.runs_right = corrupted.runs.iter().filter(right).count();
        tally
    }

    fn count_lost(&mut self, corrupted: &Corrupted, findings: &Findings, judged: &Judged) {
        for lost in &judged.lost {
            if corrupted.is_beyond(lost) {
                self.beyond += 1;
            } else if let Verdict::Unresolved { ranges } = &findings.verdict {
                let inside = |range: &[f64; 2]| (range[0]..=range[1]).contains(&lost.k);
                self.unseen +=
                    usize::from(lost.kind == FaultKind::Missing && ranges.iter().any(inside));
            }
        }
    }

    fn count_places(&mut self, subject: &Subject, judged: &Judged) {
        for hit in &judged.hits {
            if hit.planted.kind == FaultKind::Missing {
                let off = (hit.k - hit.planted.k).abs();
                self.misplaced.push(off / subject.spacing(hit.planted.k));
                self.within_error += usize::from(off <= hit.k_error);
            }
        }
    }

    /// Both together.
    pub(crate) fn plus(mut self, other: Self) -> Self {
        self.lists += other.lists;
        self.planted += other.planted;
        self.found += other.found;
        self.shifted += other.shifted;
        self.beyond += other.beyond;
        self.unseen += other.unseen;
        self.false_reports += other.false_reports;
        self.refused += other.refused;
        self.unresolved += other.unresolved;
        self.trends += other.trends;
        self.misplaced.extend(other.misplaced);
        self.within_error += other.within_error;
        for (sum, (told, right)) in self.confidence.iter_mut().zip(other.confidence) {
            sum.0 += told;
            sum.1 += right;
        }
        self.runs += other.runs;
        self.runs_right += other.runs_right;
        self.remarks.extend(other.remarks);
        self
    }

    /// Faults that were not found.
    pub(crate) fn lost(&self) -> usize {
        self.planted - self.found
    }

    /// Part of the planted faults that was found; 1 where nothing was planted.
    pub(crate) fn recall(&self) -> f64 {
        if self.planted == 0 {
            1.0
        } else {
            self.found as f64 / self.planted as f64
        }
    }

    /// Misplacement of missing levels, in mean spacings, that this part of those found does not exceed.
    pub(crate) fn misplacement(&self, part: f64) -> Option<f64> {
        let mut sorted = self.misplaced.clone();
        sorted.sort_by(f64::total_cmp);
        let index = (part * sorted.len() as f64).ceil() as usize;
        sorted.get(index.max(1) - 1).copied()
    }

    /// Part of the missing levels found whose true place lies within the stated standard deviation.
    pub(crate) fn coverage(&self) -> Option<f64> {
        let found = self.misplaced.len();
        (found > 0).then(|| self.within_error as f64 / found as f64)
    }
}

/// Faults that were lost and reports that match nothing.
fn remarks(judged: &Judged, findings: &Findings) -> Vec<String> {
    let lost = judged.lost.iter();
    let lost = lost.map(|planted| format!("lost: {} at {:.4}", planted.kind.word(), planted.k));
    let wrong = findings.faults.iter().zip(&judged.reports);
    let wrong = wrong.filter(|(_, (told, right))| told > right);
    let wrong = wrong.map(|(report, (told, right))| {
        format!(
            "not so: {} {} at {:.4} +- {:.4}, confidence {:.4}",
            told - right,
            report.kind.word(),
            report.k,
            report.k_error,
            report.confidence
        )
    });
    lost.chain(wrong).collect()
}

/// Missing less false levels that are reported in and about a run of missing ones.
fn counted_in_run(subject: &Subject, findings: &Findings, [first, last]: [f64; 2]) -> i64 {
    let from = first - AROUND_RUN * subject.spacing(first);
    let to = last + AROUND_RUN * subject.spacing(last);
    let sign = |kind: FaultKind| match kind {
        FaultKind::Missing => 1,
        FaultKind::False => -1,
        FaultKind::Shifted | FaultKind::Unresolved => 0,
    };
    findings
        .faults
        .iter()
        .filter(|report| (from..=to).contains(&report.k))
        .map(|report| sign(report.kind) * report.count.max(1) as i64)
        .sum()
}
