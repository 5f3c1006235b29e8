//! Directly computed levels of the annulus with radii 1 and 0.5 against zeros of cross products of Bessel functions
//! (data/reference/annulus_*.csv, from scipy 1.17.1 and mpmath 1.4.1).

#[path = "common/direct.rs"]
mod direct;

use direct::{Case, annuli, check};

fn check_one(name: &str) {
    let cases: Vec<Case> = annuli()
        .into_iter()
        .filter(|case| case.name.ends_with(name))
        .collect();
    assert_eq!(cases.len(), 1);
    check(&cases);
}

#[test]
fn dirichlet() {
    check_one("dd");
}

#[test]
fn neumann() {
    check_one("nn");
}

#[test]
fn dirichlet_outside_neumann_inside() {
    check_one("dn");
}

#[test]
fn neumann_outside_dirichlet_inside() {
    check_one("nd");
}
