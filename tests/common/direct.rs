//! Levels of the direct solver against exact ones: all there, right, and as good as the solver says.
#![allow(dead_code)]

#[path = "judge.rs"]
mod judge;
#[path = "solvable.rs"]
mod solvable;

#[allow(
    unused_imports,
    reason = "each file of checks uses its own part of what they share"
)]
pub(crate) use judge::{Expected, Found, Verdict, copies, deviation, judge, may_break};
use orbitsum::billiard::{Domain, Irrep, Symmetry, detect};
use orbitsum::solver::{Levels, Solver};
#[allow(
    unused_imports,
    reason = "each file of checks uses its own part of what they share"
)]
pub(crate) use solvable::*;

/// End of the window of shapes of unit size.
pub(crate) const TOP: f64 = 60.0;
/// Largest relative deviation in k of exactly solvable shapes.
pub(crate) const SOLVABLE: f64 = 1e-10;
/// Largest relative deviation in k of polygons without reentrant corners.
pub(crate) const CONVEX: f64 = 1e-9;
/// Largest relative deviation in k of polygons with reentrant corners.
pub(crate) const REENTRANT: f64 = 1e-8;

/// What was measured, for `cargo test -- --nocapture`.
#[allow(
    clippy::print_stdout,
    reason = "a test may speak where a library may not"
)]
pub(crate) fn tell(text: &str) {
    println!("{text}");
}

/// Levels with from <= k < to, which must be complete.
pub(crate) fn solve(
    name: &str,
    domain: &Domain,
    symmetry: &Symmetry,
    class: Option<&Irrep>,
    [from, to]: [f64; 2],
) -> Levels {
    let solver =
        Solver::new(domain, symmetry, class).unwrap_or_else(|error| panic!("{name}: {error}"));
    let levels = solver
        .levels(from, to)
        .unwrap_or_else(|error| panic!("{name}: {error}"));
    assert!(
        levels.complete,
        "{name}: {} levels are counted in {from} <= k < {to}, the list is not complete",
        levels.counted
    );
    levels
}

/// Levels of a whole shape below k, with its symmetry as it is found.
pub(crate) fn solve_below(name: &str, domain: &Domain, k: f64) -> Vec<Found> {
    rows(&solve(name, domain, &detect(domain), None, [0.0, k]))
}

/// What the checks read of the solver's levels.
pub(crate) fn rows(levels: &Levels) -> Vec<Found> {
    levels
        .levels
        .iter()
        .map(|level| Found {
            k: level.k,
            error: level.error,
            multiplicity: level.multiplicity,
        })
        .collect()
}

/// All levels below [`TOP`] within [`SOLVABLE`].
pub(crate) fn check(cases: &[Case]) {
    check_below(cases, TOP);
}

/// All levels below k within [`SOLVABLE`], and the stated errors of all cases together.
pub(crate) fn check_below(cases: &[Case], k: f64) {
    let verdicts = cases.iter().map(|case| check_window(case, [0.0, k]));
    let (rows, broken) = verdicts.fold((0, 0), |(rows, broken), verdict| {
        (rows + verdict.rows, broken + verdict.broken)
    });
    assert!(
        broken <= may_break(rows),
        "{broken} of {rows} stated errors are smaller than the true ones"
    );
}

/// The levels of a window, their numbers and their count.
pub(crate) fn check_window(case: &Case, window: [f64; 2]) -> Verdict {
    let [from, to] = window;
    let found = solve(
        &case.name,
        &case.domain,
        &case.symmetry,
        case.class.as_ref(),
        window,
    );
    let expected = Expected {
        levels: case.between(from, to),
        degenerate: case.degenerate,
        claim: SOLVABLE,
    };
    let verdict = judge(&rows(&found), &expected)
        .unwrap_or_else(|complaint| panic!("{} {from} <= k < {to}: {complaint}", case.name));
    tell(&format!("{} {from} <= k < {to}: {verdict}", case.name));
    let below = case.between(0.0, from).len();
    assert_eq!(
        (found.first, found.counted),
        (below + 1, expected.levels.len()),
        "{}: number of the first level, count of levels",
        case.name
    );
    verdict
}
