//! The lists of exact levels that other checks rest on, against the smooth counts of their shapes: a level that is missing from a
//! list, or a list of another shape, shows as a step.

#[path = "common/solvable.rs"]
mod solvable;

use orbitsum::baseline::weyl;
use solvable::*;
use std::f64::consts::PI;

/// Windows of k over which staircase minus smooth count is averaged.
const WINDOWS: [(f64, f64); 2] = [(10.0, 36.0), (36.0, LIST_END)];
/// Largest mean difference in levels. Measured: 0.0036 (class E of the equilateral triangle), orbits that the weight leaves and
/// terms in 1/k; a missing level changes a mean by 1 if it lies below the window, and by 0.05 if it lies at k = 60.
const LARGEST: f64 = 0.005;
/// Steps of the midpoint rule for the smooth count.
const STEPS: u32 = 4000;

/// Weight of the mean: a squared sine, which suppresses an orbit of length L by about 1/(L width/2 pi)^3.
fn weight(x: f64) -> f64 {
    1.0 - (2.0 * PI * x).cos()
}

/// Integral of the weight from x to the end of the window at 1.
fn weight_above(x: f64) -> f64 {
    let x = x.clamp(0.0, 1.0);
    1.0 - x + (2.0 * PI * x).sin() / (2.0 * PI)
}

fn mean_difference(case: &Case, (from, to): (f64, f64)) -> f64 {
    let smooth = weyl(&case.domain, &case.symmetry, case.class.as_ref());
    let staircase: f64 = case
        .levels
        .iter()
        .map(|k| weight_above((k - from) / (to - from)))
        .sum();
    let count: f64 = (0..STEPS)
        .map(|i| (f64::from(i) + 0.5) / f64::from(STEPS))
        .map(|x| weight(x) * smooth.count(from + (to - from) * x, 0.0))
        .sum();
    staircase - count / f64::from(STEPS)
}

fn check(cases: &[Case]) {
    for case in cases {
        for window in WINDOWS {
            let difference = mean_difference(case, window);
            assert!(
                difference.abs() < LARGEST,
                "{} {window:?}: {difference}",
                case.name
            );
        }
    }
}

#[test]
fn circles() {
    check(&disks());
    check(&annuli());
    check(&half_disks());
    check(&half_disk_classes());
}

#[test]
fn sectors() {
    for arc in ["d", "n"] {
        for walls in ["dd", "dn", "nn"] {
            let cases: Vec<Case> = OPENINGS
                .iter()
                .map(|&opening| sector(opening, walls, arc))
                .collect();
            check(&cases);
        }
        check(&[sector(STRAIGHT, "dn", arc)]);
    }
}

#[test]
fn ellipses() {
    check(&[ellipse()]);
    check(&ellipse_classes());
}

#[test]
fn polygons() {
    check(&rectangles());
    check(&rectangle_classes());
    check(&[square()]);
    check(&square_classes());
    check(&slit_squares());
    check(&right_isosceles());
    check(&equilaterals());
    check(&equilateral_classes());
    check(&hexagon_classes());
}

/// Shapes of which single levels are published for a given area.
#[test]
fn areas_of_other_shapes() {
    let area = |name: &str| test_shape(name, &[]).area;
    for name in ["regular-6", "regular-8", "regular-10", "regular-20"] {
        assert!((area(name) / PI - 1.0).abs() < 1e-14, "{name}");
    }
    for name in ["drum-1", "drum-2"] {
        let drum = test_shape(name, &[]);
        assert!((drum.area - 14.0).abs() < 1e-13, "{name}");
        // Weyl: isospectral shapes have the same perimeter and corner constant.
        assert!((drum.perimeter - 12.0 - 6.0 * 2f64.sqrt()).abs() < 1e-13);
        let constant: f64 = drum
            .vertices
            .iter()
            .map(|corner| (PI * PI - corner.angle.powi(2)) / (24.0 * PI * corner.angle))
            .sum();
        // Two corners each of 45, 90, 135 and 270 degrees: 2 (15/96 + 1/16 + 7/288 - 5/144) = 5/12.
        assert!((constant - 5.0 / 12.0).abs() < 1e-13, "{name}: {constant}");
    }
}
