//! Directly computed levels of the ellipse with half axes 1 and 0.6 against zeros of modified Mathieu functions
//! (data/reference/ellipse_6_mathieu.csv, Fourier series with 60 digits, mpmath 1.4.1).

#[path = "common/direct.rs"]
mod direct;

use direct::{Case, TOP, check, check_window, ellipse, ellipse_classes};

/// Window that ends between the fortieth level and the next one.
const LOWEST_FORTY: [f64; 2] = [0.0, 17.5];

#[test]
fn lowest_forty_levels() {
    let case: Case = ellipse();
    assert_eq!(case.between(LOWEST_FORTY[0], LOWEST_FORTY[1]).len(), 40);
    check_window(&case, LOWEST_FORTY);
}

#[test]
fn whole_ellipse() {
    check_window(&ellipse(), [0.0, TOP]);
}

#[test]
fn classes_of_the_ellipse() {
    check(&ellipse_classes());
}
