//! Directly computed levels of circular sectors against zeros of Bessel functions of integer and fractional order
//! (data/reference/disk_*.csv and sector_*.csv, from scipy 1.17.1 and mpmath 1.4.1): what a function does in a corner of any angle,
//! between like and unlike walls.

#[path = "common/direct.rs"]
mod direct;

use direct::{OPENINGS, STRAIGHT, TOP, check_below, sector};

/// End of the window for Neumann walls in the place of Dirichlet ones that are tested up to [`TOP`].
const NEUMANN_TOP: f64 = 40.0;
/// End of the window with a Neumann arc.
const NEUMANN_ARC_TOP: f64 = 30.0;

fn check_all(walls: &str, arc: &str, top: f64) {
    let cases = OPENINGS.map(|opening| sector(opening, walls, arc));
    check_below(&cases, top);
}

#[test]
fn dirichlet() {
    check_all("dd", "d", TOP);
}

/// Singularities as strong as r^(5/19) at the corner.
#[test]
fn unlike_straight_walls() {
    check_all("dn", "d", TOP);
}

#[test]
fn neumann_straight_walls() {
    check_all("nn", "d", NEUMANN_TOP);
}

#[test]
fn neumann_arc() {
    for walls in ["dd", "dn", "nn"] {
        check_all(walls, "n", NEUMANN_ARC_TOP);
    }
}

/// The condition changes on a straight wall: r^(1/2).
#[test]
fn change_of_condition_on_a_straight_wall() {
    check_below(&[sector(STRAIGHT, "dn", "d")], TOP);
    check_below(&[sector(STRAIGHT, "dn", "n")], NEUMANN_ARC_TOP);
}
