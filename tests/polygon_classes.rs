//! Symmetry classes of shapes whose orbit sum is exact: each class by itself, two-dimensional ones among them.
//!
//! Levels by class from the parities of the closed forms (see polygons.rs); those of the equilateral triangle: a pair m, n with
//! m = n mod 3 keeps its sign under the rotation by a third (McCartin, SIAM Rev. 45 (2003) 267).

#[path = "common/exact.rs"]
mod exact;
#[path = "common/shapes.rs"]
mod shapes;

use exact::{ExactSum, box_value, equilateral_value, levels};
use orbitsum::baseline::weyl;
use orbitsum::billiard::{Condition, Domain, detect};
use shapes::{
    D, N, centered_rectangle_walls, domain, line, point, polygon, regular_walls, with_slits,
};

/// Largest rms residual in levels.
const LARGEST: f64 = 1e-6;

/// `class_of` names the class of the level m, n, or none.
fn check(
    name: &str,
    shape: &Domain,
    classes: &[&str],
    value: impl Fn(f64, f64) -> f64,
    class_of: impl Fn(i32, i32) -> Option<&'static str>,
) {
    let symmetry = detect(shape);
    assert_eq!(
        symmetry.irreps.len(),
        classes.len(),
        "{name}: {}",
        symmetry.name
    );
    let sum = ExactSum::new(shape, &symmetry);
    for &class in classes {
        let irrep = symmetry.class(class).expect("a class");
        let list = levels(sum.list_end(), &value, |m, n| class_of(m, n) == Some(class));
        let rms = sum.residual(&list, Some(irrep));
        assert!(rms < LARGEST, "{name}, {class}: {rms:e}");
    }
    let all = levels(sum.list_end(), &value, |m, n| class_of(m, n).is_some());
    let rms = sum.residual(&all, None);
    assert!(rms < LARGEST, "{name}, whole shape: {rms:e}");
}

/// Smallest number of half waves between like walls.
fn least(condition: Condition) -> i32 {
    i32::from(condition == D)
}

/// Is a function with that many half waves between two like walls even about the middle?
fn is_even(half_waves: i32, condition: Condition) -> bool {
    (half_waves % 2 == 0) == (condition == N)
}

/// B1 is odd under x -> -x and even under y -> -y.
#[test]
fn rectangles() {
    for condition in [D, N] {
        let shape = domain(centered_rectangle_walls(1.0, 1.3, [condition; 4]));
        check(
            &format!("rectangle {condition:?}"),
            &shape,
            &["A1", "A2", "B1", "B2"],
            box_value(1.0, 1.3, 0.0, 0.0),
            |m, n| {
                (m.min(n) >= least(condition)).then_some(
                    match (is_even(m, condition), is_even(n, condition)) {
                        (true, true) => "A1",
                        (false, false) => "A2",
                        (false, true) => "B1",
                        (true, false) => "B2",
                    },
                )
            },
        );
    }
}

/// The sum of the products m, n and n, m (m > n) is even under the diagonal, their difference odd: here m > n stands for the
/// difference, m <= n for the sum. One number even and one odd: both products together are a level of E.
#[test]
fn squares() {
    for condition in [D, N] {
        let shape = domain(centered_rectangle_walls(1.0, 1.0, [condition; 4]));
        check(
            &format!("square {condition:?}"),
            &shape,
            &["A1", "A2", "B1", "B2", "E"],
            box_value(1.0, 1.0, 0.0, 0.0),
            |m, n| {
                (m.min(n) >= least(condition)).then_some(
                    match (is_even(m, condition), is_even(n, condition), m > n) {
                        (true, true, false) => "A1",
                        (true, true, true) => "B1",
                        (false, false, true) => "A2",
                        (false, false, false) => "B2",
                        _ => "E",
                    },
                )
            },
        );
    }
}

#[test]
fn equilateral_triangles() {
    for condition in [D, N] {
        let shape = domain(
            regular_walls(3, 90.0, &[condition])
                .iter()
                .map(|wall| {
                    line(
                        wall.start() / 3f64.sqrt(),
                        wall.end() / 3f64.sqrt(),
                        condition,
                    )
                })
                .collect(),
        );
        check(
            &format!("equilateral {condition:?}"),
            &shape,
            &["A1", "A2", "E"],
            equilateral_value,
            |m, n| {
                (m.min(n) >= least(condition)).then_some(match ((m - n) % 3, m > n) {
                    (0, false) => "A1",
                    (0, true) => "A2",
                    _ => "E",
                })
            },
        );
    }
}

/// Reflecting across both diagonals of the square that two triangles make is a half turn, which multiplies a product by
/// (-1)^(m + n) with like legs, after a sign -1 for Dirichlet ones that cancels: with a Dirichlet (Neumann) hypotenuse a
/// function is even under x <-> y if m + n is odd (even).
#[test]
fn right_isosceles_triangles() {
    for (hypotenuse, legs) in [(D, D), (N, D), (D, N), (N, N)] {
        let shape = polygon(
            &[(0.0, 0.0), (1.0, 0.0), (0.0, 1.0)],
            &[legs, hypotenuse, legs],
        );
        check(
            &format!("right isosceles {hypotenuse:?} {legs:?}"),
            &shape,
            &["A'", "A''"],
            box_value(1.0, 1.0, 0.0, 0.0),
            |m, n| {
                let allowed = n >= least(legs) && (m > n || (m == n && hypotenuse == N));
                allowed.then_some(if ((m + n) % 2 == 0) == (hypotenuse == N) {
                    "A'"
                } else {
                    "A''"
                })
            },
        );
    }
}

/// Square of side 1 with a slit of half its length.
fn slit_square() -> Domain {
    with_slits(
        centered_rectangle_walls(1.0, 1.0, [D; 4]),
        vec![vec![line(point(-0.25, 0.0), point(0.25, 0.0), D)]],
    )
}

/// Functions odd under y -> -y vanish on the whole axis, so that a slit on it does not matter: they are those of the half square
/// with Dirichlet walls, divided by their parity under x -> -x. Coefficients of the smooth count by hand: area 1/4 of the square per
/// class, perimeter of the quarter (1/2 x 1/2) with the axis x = 0 odd or even, four right angles.
#[test]
fn smooth_count_of_odd_classes_of_the_slit_square() {
    let shape = slit_square();
    let symmetry = detect(&shape);
    let pi = std::f64::consts::PI;
    for (name, perimeter, constant) in [("A2", 2.0, 0.25), ("B2", 1.0, 0.0)] {
        let count = weyl(&shape, &symmetry, symmetry.class(name));
        for (power, expected) in [
            (2, 0.25 / (4.0 * pi)),
            (1, -perimeter / (4.0 * pi)),
            (0, constant),
        ] {
            let found = count.coefficient(power);
            assert!(
                (found - expected).abs() < 1e-12,
                "{name}, power {power}: {found} and {expected}"
            );
        }
    }
}

/// In those classes nothing diffracts at the tips: the strips that the slit cuts add up to those of the half square.
#[test]
fn odd_classes_of_the_slit_square() {
    let shape = slit_square();
    let symmetry = detect(&shape);
    let sum = ExactSum::new(&shape, &symmetry);
    for (name, even_x) in [("A2", false), ("B2", true)] {
        let list = levels(sum.list_end(), box_value(1.0, 0.5, 0.0, 0.0), |m, n| {
            m >= 1 && n >= 1 && is_even(m, D) == even_x
        });
        let rms = sum.residual(&list, symmetry.class(name));
        assert!(rms < LARGEST, "{name}: {rms:e}");
    }
}
