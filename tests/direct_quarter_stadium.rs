//! Directly computed levels of the quarter stadium, of which no level is known exactly, against NGSolve: low levels and high ones
//! (data/reference/quarter_stadium.csv, curved triangles of order 14, ngsolve 6.2.2608 and scipy 1.17.1).

#[path = "common/direct.rs"]
mod direct;

use direct::{SOLVABLE, deviation, may_break, rows, shape, solve, table, tell};
use orbitsum::billiard::detect;

/// The levels of a window, whose number NGSolve and ARPACK give as `count`.
fn check([from, to]: [f64; 2], count: usize) {
    let domain = shape("quarter-stadium", &[]);
    let found = solve(
        "quarter stadium",
        &domain,
        &detect(&domain),
        None,
        [from, to],
    );
    let mut list = table("quarter_stadium.csv");
    list.retain(|row| (from..to).contains(&row.k));
    // The shape has no symmetry, and its levels are simple.
    assert_eq!([list.len(), found.counted, found.levels.len()], [count; 3]);
    let (mut worst, mut broken) = (0.0_f64, 0);
    for (row, listed) in rows(&found).iter().zip(&list) {
        let off = deviation(row.k, listed.k);
        assert!(off <= SOLVABLE, "{row:?} instead of {listed:?}");
        worst = worst.max(off);
        broken += usize::from((row.k - listed.k).abs() > row.error + listed.error);
    }
    tell(&format!(
        "{from} <= k < {to}: deviation at most {worst:.1e}, {broken} beyond both errors"
    ));
    assert!(broken <= may_break(count), "{broken} of {count}");
}

#[test]
fn low_levels() {
    check([0.0, 40.0], 210);
}

#[test]
fn high_levels() {
    check([75.0, 80.0], 110);
}
