//! Faults of special kinds: runs of missing neighbours, many missing levels, close pairs, shifted levels; and what an audit may
//! not depend on.

#[path = "common/audit_trial.rs"]
mod audit_trial;

use audit_trial::{Corrupted, Plan, Planted, Removal, Subject, Tally, audited, one_list, trial};
use orbitsum::levels::audit::{Fault, FaultKind, Findings};
use proptest::prelude::*;
use std::sync::LazyLock;

static QUARTER_STADIUM: LazyLock<Subject> = LazyLock::new(|| Subject::new("quarter-stadium"));
static RECTANGLE: LazyLock<Subject> = LazyLock::new(|| Subject::new("rectangle"));

/// Smallest part of many missing levels that is found.
const MANY_FOUND: f64 = 0.95;
/// By how many mean spacings levels are shifted.
const SHIFT: f64 = 0.3;
/// Levels of the short lists of the property tests.
const SHORT: usize = 100;

#[test]
fn runs_of_neighbours_are_counted() {
    for subject in [&*QUARTER_STADIUM, &*RECTANGLE] {
        let tally = trial(subject, &Plan::RUNS, 2);
        assert_eq!(tally.runs, 4);
        assert_eq!(tally.runs_right, tally.runs, "{}: {tally:?}", subject.name);
        assert_eq!(tally.false_reports, 0, "{}: {tally:?}", subject.name);
    }
}

#[test]
fn one_level_in_ten_is_missing() {
    for subject in [&*QUARTER_STADIUM, &*RECTANGLE] {
        let tally = one_list(subject, &Plan::MANY, 0);
        assert_eq!(tally.planted, 30);
        assert!(tally.recall() >= MANY_FOUND, "{}: {tally:?}", subject.name);
        assert_eq!(tally.false_reports, 0, "{}: {tally:?}", subject.name);
    }
}

#[test]
fn one_of_a_close_pair_is_missing() {
    for subject in [&*QUARTER_STADIUM, &*RECTANGLE] {
        for number in 0..3 {
            let tally = one_list(subject, &Plan::NEAR_DEGENERATE, number);
            assert_eq!(
                (tally.planted, tally.found, tally.false_reports),
                (1, 1, 0),
                "{}, pair {number}: {tally:?}",
                subject.name
            );
        }
    }
}

/// A list in which levels with these numbers are too high by [`SHIFT`].
fn shifted(subject: &Subject, numbers: &[usize]) -> Corrupted {
    let mut levels = subject.truth.clone();
    let mut planted = Vec::new();
    for &number in numbers {
        let place = levels[number];
        levels[number] += SHIFT * subject.spacing(place);
        planted.extend([Planted::missing(place), Planted::wrong(levels[number])]);
    }
    levels.sort_by(f64::total_cmp);
    Corrupted {
        levels,
        planted,
        runs: Vec::new(),
    }
}

#[test]
fn levels_that_are_off_are_told_as_shifted() {
    for subject in [&*QUARTER_STADIUM, &*RECTANGLE] {
        let corrupted = shifted(subject, &[60, 140, 220]);
        let findings = audited(subject, &corrupted.levels).expect("an audit");
        let tally = Tally::of_list(subject, &corrupted, &findings);
        let faults = &findings.faults;
        assert_eq!(tally.shifted, 6, "{}: {faults:?}", subject.name);
        assert_eq!(tally.false_reports, 0, "{}: {faults:?}", subject.name);
    }
}

/// The first levels of the rectangle.
fn short_rectangle() -> Subject {
    Subject::of_list("rectangle", "rectangle", SHORT)
}

/// Two levels removed and one added, in the list with this number.
const FEW: Plan = Plan {
    name: "few",
    removal: Removal::Random(2),
    added: 1,
    ..Plan::STANDARD
};

fn told(subject: &Subject, levels: &[f64]) -> Findings {
    audited(subject, levels).expect("an audit")
}

/// Sides of the rectangle of `billiards/`.
const SIDES: [(&str, f64); 2] = [("a", 1.0), ("b", 1.3)];

/// Places of faults on the scale of a shape that is larger by this factor.
fn places(faults: &[Fault], factor: f64) -> Vec<(FaultKind, usize, f64)> {
    let place = |fault: &Fault| (fault.kind, fault.count, fault.k * factor);
    faults.iter().map(place).collect()
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(4))]

    /// A larger shape has lower levels, and the same faults in its list.
    #[test]
    fn size_does_not_matter(factor in 0.02_f64..50.0, number in 0_u64..1000) {
        let subject = short_rectangle();
        let scaled = subject.scaled(&SIDES.map(|(name, side)| (name, side * factor)), 1.0 / factor);
        let list = FEW.corrupt(&subject, number).levels;
        let scaled_list: Vec<f64> = list.iter().map(|k| k / factor).collect();
        let (one, other) = (told(&subject, &list), told(&scaled, &scaled_list));
        let (one, other) = (places(&one.faults, 1.0), places(&other.faults, factor));
        prop_assert_eq!(one.len(), other.len());
        for (a, b) in one.iter().zip(&other) {
            prop_assert_eq!((a.0, a.1), (b.0, b.1));
            prop_assert!((a.2 - b.2).abs() < 1e-3 * subject.spacing(a.2), "{:?} {:?}", a, b);
        }
    }

    /// The findings are the same to the last digit on one thread and on three.
    #[test]
    fn threads_do_not_matter(number in 0_u64..1000) {
        let subject = short_rectangle();
        let list = FEW.corrupt(&subject, number).levels;
        let with = |threads: usize| {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("a pool");
            let findings = pool.install(|| told(&subject, &list));
            format!("{findings:?}")
        };
        prop_assert_eq!(with(1), with(3));
    }
}
