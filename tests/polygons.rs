//! Polygons whose orbit sum is exact: rectangle, 45-45-90, equilateral and 30-60-90 triangle, with Dirichlet and Neumann
//! walls.
//!
//! Levels are closed forms: products of sines and cosines for the rectangle; for the triangles the combinations of them
//! that are odd or even under the reflections of the plane's tiling (equilateral triangle: Lame, Lecons sur la theorie
//! mathematique de l'elasticite, 1852; McCartin, SIAM Rev. 45 (2003) 267, and with Neumann walls Math. Probl. Eng. 8 (2002) 517).
//! Nothing is fitted.

#[path = "common/exact.rs"]
mod exact;
#[path = "common/shapes.rs"]
mod shapes;

use exact::{ExactSum, box_value, equilateral_value, levels};
use orbitsum::billiard::{Condition, Domain, Symmetry};
use shapes::{D, N, polygon, rectangle};

/// Largest rms residual in levels.
const LARGEST: f64 = 1e-6;

fn check(name: &str, domain: &Domain, list: impl Fn(f64) -> Vec<f64>) {
    let symmetry = Symmetry::trivial();
    let sum = ExactSum::new(domain, &symmetry);
    let rms = sum.residual(&list(sum.list_end()), None);
    eprintln!("{name}: {rms:.1e}");
    assert!(rms < LARGEST, "{name}: {rms:e}");
}

/// Half odd numbers between unlike walls; and whether 0 is allowed.
fn between(first: Condition, second: Condition) -> (f64, i32) {
    match (first, second) {
        (D, D) => (0.0, 1),
        (N, N) => (0.0, 0),
        _ => (0.5, 0),
    }
}

fn check_rectangle(name: &str, [a, b]: [f64; 2], conditions: [Condition; 4]) {
    let [left, right, bottom, top] = conditions;
    let ((x, least_m), (y, least_n)) = (between(left, right), between(bottom, top));
    check(name, &rectangle(a, b, [bottom, right, top, left]), |end| {
        levels(end, box_value(a, b, x, y), |m, n| {
            m >= least_m && n >= least_n
        })
    });
}

/// Conditions left, right, bottom, top.
#[test]
fn rectangles() {
    for (name, conditions) in [
        ("DDDD", [D, D, D, D]),
        ("NNNN", [N, N, N, N]),
        ("DNDD", [D, N, D, D]),
        ("DNDN", [D, N, D, N]),
        ("DDNN", [D, D, N, N]),
        ("DDDN", [D, D, D, N]),
    ] {
        check_rectangle(name, [1.0, 1.3], conditions);
    }
    check_rectangle("2.6 x 1", [2.6, 1.0], [D, D, D, D]);
    check_rectangle("2.6 x 1 DNND", [2.6, 1.0], [D, N, N, D]);
}

/// Conditions hypotenuse, leg along x, leg along y. The reflection across the hypotenuse makes a square of the triangle; a
/// product with numbers m, n goes over into plus or minus the one with n, m, so that odd ones are m > n and even ones m >= n.
#[test]
fn right_isosceles_triangles() {
    for (name, conditions) in [
        ("DDD", [D, D, D]),
        ("NDD", [N, D, D]),
        ("DNN", [D, N, N]),
        ("NNN", [N, N, N]),
        ("DDN", [D, D, N]),
        ("NDN", [N, D, N]),
    ] {
        let [hypotenuse, along_x, along_y] = conditions;
        let triangle = polygon(
            &[(0.0, 0.0), (1.0, 0.0), (0.0, 1.0)],
            &[along_x, hypotenuse, along_y],
        );
        let (shift, least) = between(along_x, along_y);
        check(name, &triangle, |end| {
            levels(end, box_value(1.0, 1.0, shift, shift), |m, n| {
                n >= least && (m > n || (m == n && hypotenuse == N))
            })
        });
    }
}

/// Every pair m, n is a level: m, n >= 1 with Dirichlet, >= 0 with Neumann walls.
#[test]
fn equilateral_triangles() {
    for (name, condition, least) in [("D", D, 1), ("N", N, 0)] {
        let triangle = polygon(
            &[(0.0, 0.0), (1.0, 0.0), (0.5, 0.75f64.sqrt())],
            &[condition],
        );
        check(name, &triangle, |end| {
            levels(end, equilateral_value, |m, n| m >= least && n >= least)
        });
    }
}

/// Half of the equilateral triangle of side 1; conditions of hypotenuse and short leg (its sides), and of the long leg (its
/// altitude). The levels m, n and n, m make one function that is even under the altitude and one that is odd (none if m = n).
#[test]
fn half_equilateral_triangles() {
    for (name, sides, altitude) in [("DD", D, D), ("DN", D, N), ("ND", N, D), ("NN", N, N)] {
        let triangle = polygon(
            &[(0.0, 0.0), (0.5, 0.0), (0.5, 0.75f64.sqrt())],
            &[sides, altitude, sides],
        );
        let least = i32::from(sides == D);
        check(name, &triangle, |end| {
            levels(end, equilateral_value, |m, n| {
                n >= least && (m > n || (m == n && altitude == N))
            })
        });
    }
}
