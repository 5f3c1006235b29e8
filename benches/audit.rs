//! Audit of a list of 1000 levels of the quarter stadium on one thread, the search for orbits included: its time, and what it finds
//! of five removed and two added levels.
//!
//! `cargo bench --bench audit`.

#[path = "../tests/common/audit_trial.rs"]
mod audit_trial;

use audit_trial::{Plan, Subject, Tally, audited};
use orbitsum::levels::audit::Findings;
use std::time::{Duration, Instant};

/// Levels of the list.
const LEVELS: usize = 1000;
/// Lists that are audited one after another, the first ones of the trial.
const LISTS: u64 = 3;

fn timed<T>(work: impl FnOnce() -> T) -> (T, Duration) {
    let started = Instant::now();
    let result = work();
    (result, started.elapsed())
}

#[allow(clippy::print_stdout, reason = "a bench tells what it measures")]
fn measure() {
    let list = || Subject::of_list("quarter-stadium", "quarter-stadium-1000", LEVELS);
    let (subject, search) = timed(list);
    println!(
        "quarter stadium, {} levels, orbits up to {:.2}: {} terms, search {search:.2?}",
        subject.truth.len(),
        subject.prediction.max_length,
        subject.prediction.terms.len(),
    );
    let mut all = Tally::default();
    for number in 0..LISTS {
        let corrupted = Plan::STANDARD.corrupt(&subject, number);
        let (findings, time): (Option<Findings>, _) =
            timed(|| audited(&subject, &corrupted.levels));
        let findings = findings.expect("a list of 1000 levels can be audited");
        let tally = Tally::of_list(&subject, &corrupted, &findings);
        println!(
            "list {number}: {} of {} found, {} false reports, audit {time:.2?}, with the search {:.2?}",
            tally.found,
            tally.planted,
            tally.false_reports,
            search + time,
        );
        all = all.plus(tally);
    }
    if let (Some(median), Some(most)) = (all.misplacement(0.5), all.misplacement(0.9)) {
        println!("misplacement in mean spacings: median {median:.3}, 90 % within {most:.3}");
    }
}

fn main() {
    rayon::ThreadPoolBuilder::new()
        .num_threads(1)
        .build()
        .expect("one thread")
        .install(measure);
}
