//! Trial of the audit: faults are planted in true lists of about 300 levels, and what the audit reports is compared with them.
#![allow(dead_code)]

#[path = "audit_trial/matching.rs"]
mod matching;
#[path = "audit_trial/plan.rs"]
mod plan;
#[path = "audit_trial/subject.rs"]
mod subject;
#[path = "audit_trial/tally.rs"]
mod tally;

#[allow(
    unused_imports,
    reason = "each file of checks uses its own part of what they share"
)]
pub(crate) use {
    matching::{FALSE_REACH, Judged, MISSING_REACH, judge},
    plan::{Corrupted, Plan, Planted, Removal},
    subject::{GROUP_1, GROUP_2, GROUP_3, SHAPES, Subject, group},
    tally::{BINS, Tally},
};

use orbitsum::levels::audit::{Findings, Listed, audit};
use rayon::prelude::*;

/// The audit of a list of which nothing is known but its levels.
pub(crate) fn audited(subject: &Subject, levels: &[f64]) -> Option<Findings> {
    let listed = Listed {
        levels,
        errors: None,
        widths: None,
        to: None,
    };
    audit(&listed, &subject.prediction)
}

/// Plants the faults of a plan in the list with this number, audits it and compares.
pub(crate) fn one_list(subject: &Subject, plan: &Plan, number: u64) -> Tally {
    let corrupted = plan.corrupt(subject, number);
    let mut tally = match audited(subject, &corrupted.levels) {
        Some(findings) => Tally::of_list(subject, &corrupted, &findings),
        None => Tally::unaudited(&corrupted),
    };
    for remark in &mut tally.remarks {
        remark.insert_str(0, &format!("list {number}, "));
    }
    tally
}

/// The trial of one plan on the first lists of a shape. What comes out does not depend on the number of threads: every list has
/// a seed of its own, and they are added up in order.
pub(crate) fn trial(subject: &Subject, plan: &Plan, lists: u64) -> Tally {
    let tallies: Vec<Tally> = (0..lists)
        .into_par_iter()
        .map(|number| one_list(subject, plan, number))
        .collect();
    tallies.into_iter().fold(Tally::default(), Tally::plus)
}
