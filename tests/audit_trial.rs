//! A part of the trial of the audit (`benches/audit_trial.rs`): faults planted in the first five lists of each shape, clean lists,
//! and single missing levels. The levels are computed without orbits, or by closed forms (`tests/level_lists_shipped.rs`).

#[path = "common/audit_trial.rs"]
mod audit_trial;

use audit_trial::{GROUP_1, GROUP_2, GROUP_3, Plan, SHAPES, Subject, Tally, audited, group, trial};
use orbitsum::levels::audit::{TrendKind, Verdict};

/// Lists of each shape of a group, with seven planted faults each. Those of the third group take longest, and an audit of them is
/// judged by the whole trial.
const LISTS: [u64; 3] = [5, 5, 2];

/// What is promised of the lists of one shape.
struct Promise {
    /// Smallest part of the planted faults that is found.
    recall: f64,
    /// Most reports that match nothing.
    false_reports: usize,
    /// Largest median distance of a missing level from its place, in mean spacings.
    median: f64,
}

/// Promises of the three groups. One fault of 35 is 2.9 %: where 98 or 99 % are found, one may be lost; where 90 % of 14 are, chance
/// may take four.
const PROMISES: [Promise; 3] = [
    Promise {
        recall: 34.0 / 35.0,
        false_reports: 0,
        median: 0.05,
    },
    Promise {
        recall: 34.0 / 35.0,
        false_reports: 0,
        median: 0.12,
    },
    Promise {
        recall: 0.7,
        false_reports: 1,
        median: 0.2,
    },
];

/// The L shape falls short of its group: the edges of its strips diffract at the inner corner, and the search for faults ends in wrong
/// ones that explain the record nearly as well. What it does is held here, so that it gets no worse unseen.
const L_SHAPE: Promise = Promise {
    recall: 0.4,
    false_reports: 3,
    median: 0.2,
};

/// Part of those faults that were found which a list can tell of: not of a level above all that are listed.
fn recall(tally: &Tally) -> f64 {
    tally.found as f64 / (tally.planted - tally.beyond) as f64
}

fn keeps_its_promise(subject: &Subject) {
    let group = group(&subject.name) - 1;
    let tally = trial(subject, &Plan::STANDARD, LISTS[group]);
    let promise = match subject.name.as_str() {
        "l-shape" => &L_SHAPE,
        _ => &PROMISES[group],
    };
    let name = &subject.name;
    assert_eq!(tally.planted as u64, 7 * LISTS[group]);
    assert_eq!(tally.refused, 0, "{name}: {tally:?}");
    assert!(recall(&tally) >= promise.recall, "{name}: {tally:?}");
    assert!(
        tally.false_reports <= promise.false_reports,
        "{name}: {tally:?}"
    );
    let median = tally.misplacement(0.5).expect("missing levels are found");
    assert!(median <= promise.median, "{name}: {median} in {tally:?}");
}

/// Nothing is reported of a list without faults.
fn is_clean(subject: &Subject) {
    let findings = audited(subject, &subject.truth).expect("an audit");
    assert!(
        findings.faults.is_empty(),
        "{}: {:?}",
        subject.name,
        findings.faults
    );
    assert_eq!(findings.trend.kind, TrendKind::None, "{}", subject.name);
    assert_eq!(findings.below, 0, "{}", subject.name);
    assert_ne!(findings.verdict, Verdict::Foreign, "{}", subject.name);
}

/// One missing level in the middle is found, or the audit says that it cannot be seen.
fn misses_one(subject: &Subject) {
    let corrupted = Plan::ONE.corrupt(subject, 0);
    let findings = audited(subject, &corrupted.levels).expect("an audit");
    let tally = Tally::of_list(subject, &corrupted, &findings);
    assert_eq!(
        tally.found + tally.unseen,
        1,
        "{}: {:?} of {:?}",
        subject.name,
        findings.faults,
        corrupted.planted
    );
}

fn check(name: &str) {
    let subject = Subject::new(name);
    keeps_its_promise(&subject);
    is_clean(&subject);
    misses_one(&subject);
}

#[test]
fn exact_sums() {
    GROUP_1.into_iter().for_each(check);
}

#[test]
fn chaotic_shapes() {
    GROUP_2.into_iter().for_each(check);
}

#[test]
fn disk() {
    check("disk");
}

#[test]
fn annulus() {
    check("annulus");
}

#[test]
fn ellipse() {
    check("ellipse");
}

#[test]
fn sinai_eighth() {
    check("sinai-eighth");
}

#[test]
fn lemon() {
    check("lemon");
}

#[test]
fn oval() {
    check("oval");
}

#[test]
fn pentagon() {
    check("pentagon");
}

#[test]
fn l_shape() {
    check("l-shape");
}

#[test]
fn every_shape_is_on_trial() {
    assert_eq!(SHAPES.concat().len(), 13);
    assert_eq!(GROUP_3.len(), 8);
    for name in SHAPES.concat() {
        assert!((1..=3).contains(&group(name)), "{name}");
    }
}
