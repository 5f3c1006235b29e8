//! Weyl expansions of symmetry classes: they add to the full count, and the one-dimensional classes of a reflection group
//! are the expansions of the fundamental domain with Dirichlet (odd) or Neumann (even) walls on the axes.

#[path = "common/shapes.rs"]
mod shapes;

use orbitsum::baseline::{Weyl, weyl};
use orbitsum::billiard::{Condition, Domain, Symmetry, Vec2, Wall, check_declared, detect};
use shapes::*;
use std::f64::consts::PI;

/// Largest difference of coefficients that rounding may leave.
const ROUNDING: f64 = 1e-11;

fn class(shape: &Domain, group: &Symmetry, name: &str) -> Weyl {
    let irrep = group
        .class(name)
        .unwrap_or_else(|| panic!("{} has no class {name}", group.name));
    weyl(shape, group, Some(irrep))
}

fn assert_same(what: &str, a: &Weyl, b: &Weyl) {
    for power in [2, 1, 0, -1] {
        let (a, b) = (a.coefficient(power), b.coefficient(power));
        assert!(
            (a - b).abs() < ROUNDING,
            "{what}, power {power}: {a} and {b}"
        );
    }
    assert_eq!(a.omissions, b.omissions, "{what}");
}

/// Compares a class with the fundamental domain.
fn assert_fundamental(shape: &Domain, name: &str, fundamental: &Domain) {
    let group = detect(shape);
    let whole = class(shape, &group, name);
    let part = weyl(fundamental, &Symmetry::trivial(), None);
    assert_same(&format!("{} {name}", group.name), &whole, &part);
}

fn even(yes: bool) -> Condition {
    if yes { N } else { D }
}

/// Classes of the rectangle's group with their parities under x -> -x and y -> -y.
const PARITIES: [(&str, bool, bool); 4] = [
    ("A1", true, true),
    ("A2", false, false),
    ("B1", false, true),
    ("B2", true, false),
];

#[test]
fn classes_add_to_the_full_count() {
    let pin = |x: f64| vec![circle(point(x, 0.0), 0.1, N)];
    let thin = |from: f64, to: f64| vec![line(point(from, 0.0), point(to, 0.0), D)];
    let square = || centered_rectangle_walls(2.0, 2.0, [D; 4]);
    let c3 = Harmonics::polar(&[(3, 0.1, 0.0), (6, 0.05, 0.2)]);
    let shapes = [
        ("none", quarter_stadium(1.0, 1.0, [D; 4])),
        ("reflection", half_disk(1.0, D, N)),
        ("reflection", with_hole(square(), pin(0.3))),
        ("reflection", cardioid(D)),
        ("C3", domain(vec![curve(c3, 0.0, 2.0 * PI, D)])),
        ("rectangle", stadium(1.0, 1.0, N)),
        ("rectangle", rectangle(1.0, 1.3, [D, N, D, N])),
        ("rectangle", with_slits(square(), vec![thin(-0.3, 0.3)])),
        ("triangle", domain(regular_walls(3, 0.0, &[D]))),
        ("square", with_hole(square(), pin(0.0))),
        ("5-gon", domain(regular_walls(5, 11.0, &[D]))),
        ("6-gon", domain(regular_walls(12, 0.0, &[D, N]))),
    ];
    for (name, shape) in shapes {
        let group = detect(&shape);
        assert_eq!(group.name, name);
        let full = weyl(&shape, &group, None);
        let parts: Vec<Weyl> = group
            .irreps
            .iter()
            .map(|irrep| weyl(&shape, &group, Some(irrep)))
            .collect();
        for power in [2, 1, 0, -1] {
            let sum: f64 = parts.iter().map(|part| part.coefficient(power)).sum();
            let difference = sum - full.coefficient(power);
            assert!(
                difference.abs() < ROUNDING,
                "{name}, power {power}: {difference}"
            );
        }
    }
}

#[test]
fn stadium_and_its_quarter() {
    for wall in [D, N] {
        for (name, x, y) in PARITIES {
            let quarter = quarter_stadium(0.7, 1.2, [even(y), wall, wall, even(x)]);
            assert_fundamental(&stadium(0.7, 1.2, wall), name, &quarter);
        }
    }
}

#[test]
fn a_turned_and_shifted_shape_has_the_same_classes() {
    let (s, c) = 0.3f64.sin_cos();
    let moved = |x: f64, y: f64| point(c * x - s * y + 3.0, s * x + c * y - 1.0);
    let corners = [
        moved(-1.0, -0.6),
        moved(1.0, -0.6),
        moved(1.0, 0.6),
        moved(-1.0, 0.6),
    ];
    let shape = domain(polygon_walls(&corners, &[D]));
    for (name, x, y) in PARITIES {
        assert_fundamental(&shape, name, &rectangle(1.0, 0.6, [even(y), D, D, even(x)]));
    }
}

#[test]
fn ellipse_with_a_start_off_the_axes_and_its_quarter() {
    for wall in [D, N] {
        for (name, x, y) in PARITIES {
            let source = || Ellipse {
                a: 1.0,
                b: 0.8,
                turned: 0.0,
            };
            let shape = domain(vec![curve(source(), 0.3, 0.3 + 2.0 * PI, wall)]);
            let quarter = domain(vec![
                line(point(0.0, 0.0), point(1.0, 0.0), even(y)),
                curve(source(), 0.0, 0.5 * PI, wall),
                line(point(0.0, 0.8), point(0.0, 0.0), even(x)),
            ]);
            assert_fundamental(&shape, name, &quarter);
        }
    }
}

#[test]
fn square_and_its_eighth() {
    for wall in [D, N] {
        let shape = domain(centered_rectangle_walls(2.0, 2.0, [wall; 4]));
        // (class, even under y -> -y, even under the reflection across the diagonal)
        for (name, axis, diagonal) in [
            ("A1", true, true),
            ("A2", false, false),
            ("B1", true, false),
            ("B2", false, true),
        ] {
            let eighth = polygon(
                &[(0.0, 0.0), (1.0, 0.0), (1.0, 1.0)],
                &[even(axis), wall, even(diagonal)],
            );
            assert_fundamental(&shape, name, &eighth);
        }
    }
}

/// Triangle from the centre of a regular polygon (one corner on the x axis) to that corner and to the middle of the side beside it.
fn polygon_part(n: usize, corner_axis: Condition, wall: Condition, side_axis: Condition) -> Domain {
    let half = PI / n as f64;
    let middle = half.cos();
    polygon(
        &[
            (0.0, 0.0),
            (1.0, 0.0),
            (middle * half.cos(), middle * half.sin()),
        ],
        &[corner_axis, wall, side_axis],
    )
}

#[test]
fn regular_polygons_and_their_parts() {
    for n in [3, 5, 7] {
        let shape = domain(regular_walls(n, 0.0, &[D]));
        assert_fundamental(&shape, "A1", &polygon_part(n, N, D, N));
        assert_fundamental(&shape, "A2", &polygon_part(n, D, D, D));
    }
    for n in [6, 8] {
        // The axis nearest to the x axis runs through corners.
        let shape = domain(regular_walls(n, 0.0, &[D]));
        assert_fundamental(&shape, "A1", &polygon_part(n, N, D, N));
        assert_fundamental(&shape, "A2", &polygon_part(n, D, D, D));
        assert_fundamental(&shape, "B1", &polygon_part(n, N, D, D));
        assert_fundamental(&shape, "B2", &polygon_part(n, D, D, N));
    }
}

#[test]
fn axis_across_a_hole() {
    for (wall, hole) in [(D, D), (D, N), (N, D)] {
        let (a, b, r) = (1.5, 1.1, 0.4);
        let shape = with_hole(
            centered_rectangle_walls(2.0 * a, 2.0 * b, [wall; 4]),
            vec![circle(point(0.0, 0.0), r, hole)],
        );
        for (name, x, y) in PARITIES {
            let quarter = domain(vec![
                line(point(r, 0.0), point(a, 0.0), even(y)),
                line(point(a, 0.0), point(a, b), wall),
                line(point(a, b), point(0.0, b), wall),
                line(point(0.0, b), point(0.0, r), even(x)),
                arc(point(0.0, 0.0), r, 90.0, -90.0, hole),
            ]);
            assert_fundamental(&shape, name, &quarter);
        }
    }
}

fn slit_square(from: f64, to: f64, wall: Condition) -> Domain {
    with_slits(
        centered_rectangle_walls(2.0, 2.0, [D; 4]),
        vec![vec![line(point(from, 0.0), point(to, 0.0), wall)]],
    )
}

#[test]
fn thin_wall_along_one_axis_and_across_the_other() {
    for thin in [D, N] {
        for (name, x, y) in PARITIES {
            let quarter = polygon(
                &[(0.0, 0.0), (0.4, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)],
                &[thin, even(y), D, D, even(x)],
            );
            assert_fundamental(&slit_square(-0.4, 0.4, thin), name, &quarter);
        }
    }
}

#[test]
fn thin_wall_in_one_half_of_an_axis() {
    let shape = slit_square(0.2, 0.7, D);
    for (name, even_y) in [("even", true), ("odd", false)] {
        let axis = even(even_y);
        let half = polygon(
            &[
                (-1.0, 0.0),
                (0.2, 0.0),
                (0.7, 0.0),
                (1.0, 0.0),
                (1.0, 1.0),
                (-1.0, 1.0),
            ],
            &[axis, D, axis, D, D, D],
        );
        assert_fundamental(&shape, name, &half);
    }
}

#[test]
fn bent_thin_wall_with_its_corner_on_an_axis() {
    let shape = with_slits(
        centered_rectangle_walls(2.0, 2.0, [D; 4]),
        vec![vec![
            line(point(-0.4, 0.2), point(0.0, 0.5), D),
            line(point(0.0, 0.5), point(0.4, 0.2), D),
        ]],
    );
    let group = detect(&shape);
    assert_eq!(group.name, "reflection");
    // Full angles at the bend: 2 b below and 2 pi - 2 b above, with tan b = 4/3.
    let b = (4.0f64 / 3.0).atan();
    let ends = [PI, PI, 2.0 * b, 2.0 * PI - 2.0 * b].map(|alpha| -PI / (8.0 * alpha));
    let reflection: f64 = ends.iter().sum();
    let difference =
        class(&shape, &group, "even").constant() - class(&shape, &group, "odd").constant();
    assert!((difference - reflection).abs() < ROUNDING);
    let slope =
        class(&shape, &group, "even").coefficient(1) - class(&shape, &group, "odd").coefficient(1);
    assert!((slope - 2.0 / (2.0 * PI)).abs() < ROUNDING);
}

#[test]
fn axis_through_the_corners_of_a_lemon() {
    for wall in [D, N] {
        for (name, x, y) in PARITIES {
            let height = (1.0f64 - 0.36).sqrt();
            let quarter = domain(vec![
                line(point(0.0, 0.0), point(0.4, 0.0), even(y)),
                arc(point(-0.6, 0.0), 1.0, 0.0, height.asin().to_degrees(), wall),
                line(point(0.0, height), point(0.0, 0.0), even(x)),
            ]);
            assert_fundamental(&lemon(1.2, wall), name, &quarter);
        }
    }
}

#[test]
fn axis_into_a_cusp() {
    for (name, axis) in [("even", N), ("odd", D)] {
        let half = domain(vec![
            line(point(0.0, 0.0), point(2.0, 0.0), axis),
            curve(Harmonics::polar(&[(1, 1.0, 0.0)]), 0.0, PI, D),
        ]);
        assert_fundamental(&cardioid(D), name, &half);
    }
}

#[test]
fn rotation_with_its_centre_in_a_hole_or_on_a_thin_wall() {
    // Classes of C2 of a centred hole: N_A - N_B = N_rotation = 0; of the plain square: 1/4.
    let constant = |shape: &Domain| {
        let group = check_declared(&detect(shape), "C2").expect("C2");
        class(shape, &group, "A").constant() - class(shape, &group, "B").constant()
    };
    let square = centered_rectangle_walls(2.0, 2.0, [D; 4]);
    assert!((constant(&domain(square.clone())) - 0.25).abs() < ROUNDING);
    let hole: Vec<Wall> = vec![circle(Vec2::zeros(), 0.3, D)];
    assert!(constant(&with_hole(square, hole)).abs() < ROUNDING);
    assert!(constant(&slit_square(-0.4, 0.4, D)).abs() < ROUNDING);
}

#[test]
fn rotations_of_a_shape_without_axes() {
    // N_g for the two rotations of C3: 1/(4 sin^2 60) = 1/3, so N_A - N_E/2 = 1/3 and N_A = (1/6 + 2/3)/3.
    let source = Harmonics::polar(&[(3, 0.1, 0.0), (6, 0.05, 0.2)]);
    let shape = domain(vec![curve(source, 0.0, 2.0 * PI, D)]);
    let group = detect(&shape);
    assert_eq!(group.name, "C3");
    let (a, e) = (class(&shape, &group, "A"), class(&shape, &group, "E"));
    assert!((a.constant() - (1.0 / 6.0 + 2.0 / 3.0) / 3.0).abs() < ROUNDING);
    assert!((a.constant() - 0.5 * e.constant() - 1.0 / 3.0).abs() < ROUNDING);
}
