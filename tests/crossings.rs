//! Walls that cross or touch, nesting of loops, and which points lie inside.

#[path = "common/shapes.rs"]
mod shapes;

use orbitsum::billiard::{Domain, GeometryError, Role, Vec2, Wall};
use proptest::prelude::*;
use shapes::*;
use std::f64::consts::PI;

fn crosses(shape: &Domain) -> bool {
    matches!(shape.check_crossings(), Err(GeometryError::Crossing { .. }))
}

fn square() -> Vec<Wall> {
    centered_rectangle_walls(2.0, 2.0, [D; 4])
}

fn loops(chains: Vec<(Role, Vec<Wall>)>) -> Domain {
    Domain::new(chains).expect("closed chains")
}

#[test]
fn proper_shapes_pass() {
    let shapes = [
        rectangle(1.0, 1.3, [D, N, D, N]),
        stadium(1.0, 1.0, D),
        stadium(1e-3, 1.0, D),
        quarter_stadium(1.0, 1.0, [D; 4]),
        half_disk(1.0, D, N),
        lemon(1.2, D),
        lemon(1.999, D),
        ellipse(1.0, 0.8, D),
        ellipse(1.0, 1e-3, D),
        cardioid(D),
        domain(vec![circle(point(0.3, 0.1), 1.0, D)]),
        domain(vec![
            arc(point(0.0, 0.0), 1.0, 10.0, 180.0, D),
            arc(point(0.0, 0.0), 1.0, 190.0, 180.0, N),
        ]),
        with_hole(
            vec![circle(point(0.0, 0.0), 1.0, D)],
            vec![circle(point(0.1, 0.0), 0.8, N)],
        ),
        with_slits(
            square(),
            vec![vec![line(point(-0.4, 0.0), point(0.4, 0.0), D)]],
        ),
        with_slits(
            square(),
            vec![vec![
                line(point(-0.4, 0.0), point(0.1, 0.2), D),
                line(point(0.1, 0.2), point(0.4, 0.0), D),
                arc(point(0.4, 0.2), 0.2, -90.0, 90.0, D),
            ]],
        ),
    ];
    for (i, shape) in shapes.iter().enumerate() {
        assert_eq!(shape.check_crossings(), Ok(()), "shape {i}");
    }
}

#[test]
fn ten_digits_at_a_smooth_joint_pass() {
    for error in [1e-10, -1e-10] {
        let r = 1.0 + error;
        let shape = domain(vec![
            line(point(0.0, 0.0), point(2.0, 0.0), D),
            arc(point(1.0, 0.0), 1.0, 0.0, 90.0, D),
            line(point(1.0, r), point(0.0, r), D),
            line(point(0.0, r), point(0.0, 0.0), D),
        ]);
        assert_eq!(shape.check_crossings(), Ok(()));
    }
}

#[test]
fn crossing_lines_are_refused_with_the_point() {
    let bow = polygon(
        &[(0.0, 0.0), (2.0, 2.0), (2.0, 0.5), (0.0, 2.0), (-1.0, 1.5)],
        &[D],
    );
    match bow.check_crossings() {
        Err(GeometryError::Crossing { at, .. }) => {
            assert!((at - point(8.0 / 7.0, 8.0 / 7.0)).norm() < 1e-12, "{at}");
        }
        other => panic!("{other:?}"),
    }
}

#[test]
fn a_vertex_on_another_wall_is_refused() {
    let touching = |y: f64| {
        polygon(
            &[(0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, y), (0.0, 1.0)],
            &[D],
        )
    };
    assert!(crosses(&touching(0.0)));
    assert!(crosses(&touching(1e-10)));
    assert!(touching(1e-6).check_crossings().is_ok());
    assert!(crosses(&touching(-1e-6)));
    // A spike: out and back along the same line.
    assert!(crosses(&polygon(
        &[
            (0.0, 0.0),
            (1.0, 0.0),
            (2.0, 0.0),
            (1.0, 0.0),
            (1.0, 1.0),
            (0.0, 1.0)
        ],
        &[D]
    )));
}

#[test]
fn arcs_that_touch_or_cross_are_refused() {
    // An arc that bulges through the opposite wall, just touches it, or stays clear.
    let bulging = |depth: f64| {
        // Circle through (-1, 1) and (1, 1) with lowest point (0, 1 - depth).
        let radius = (1.0 + depth * depth) / (2.0 * depth);
        let center = point(0.0, 1.0 - depth + radius);
        let half = (1.0 / radius).asin().to_degrees();
        domain(vec![
            line(point(-1.0, 0.0), point(1.0, 0.0), D),
            line(point(1.0, 0.0), point(1.0, 1.0), D),
            arc(center, radius, -90.0 + half, -2.0 * half, D),
            line(point(-1.0, 1.0), point(-1.0, 0.0), D),
        ])
    };
    assert!(bulging(0.9).check_crossings().is_ok());
    assert!(crosses(&bulging(1.0)));
    let holes = |x: f64, r: f64| {
        loops(vec![
            (Role::Outer, vec![circle(point(0.0, 0.0), 2.0, D)]),
            (Role::Hole, vec![circle(point(-0.5, 0.0), 0.5, D)]),
            (Role::Hole, vec![circle(point(x, 0.3), r, D)]),
        ])
    };
    let distance = (0.25f64 + 0.09).sqrt();
    assert!(holes(0.0, distance - 0.5 - 1e-6).check_crossings().is_ok());
    assert!(crosses(&holes(0.0, distance - 0.5)));
    assert!(crosses(&holes(0.0, distance - 0.4)));
}

#[test]
fn curves_that_cross_are_refused() {
    // A limacon with an inner loop, and one without.
    let loop_inside = Harmonics::polar(&[(1, 1.3, 0.0)]);
    assert!(crosses(&domain(vec![curve(loop_inside, 0.0, 2.0 * PI, D)])));
    let smooth = Harmonics::polar(&[(1, 0.999, 0.0)]);
    assert!(
        domain(vec![curve(smooth, 0.0, 2.0 * PI, D)])
            .check_crossings()
            .is_ok()
    );
    let with_circle = |x: f64| {
        let outline = curve(
            Ellipse {
                a: 1.0,
                b: 0.8,
                turned: 0.0,
            },
            0.0,
            2.0 * PI,
            D,
        );
        with_hole(vec![outline], vec![circle(point(x, 0.0), 0.2, D)])
    };
    assert!(with_circle(0.3).check_crossings().is_ok());
    assert!(crosses(&with_circle(0.9)));
    // Walked twice.
    let twice = curve(
        Ellipse {
            a: 1.0,
            b: 0.8,
            turned: 0.0,
        },
        0.0,
        4.0 * PI,
        D,
    );
    assert!(crosses(&domain(vec![twice])));
}

#[test]
fn nesting() {
    let hole = |x: f64, r: f64| (Role::Hole, vec![circle(point(x, 0.0), r, D)]);
    let outside = |chains: Vec<(Role, Vec<Wall>)>| {
        matches!(
            loops(chains).check_crossings(),
            Err(GeometryError::Outside { .. })
        )
    };
    assert!(outside(vec![(Role::Outer, square()), hole(3.0, 0.5)]));
    assert!(outside(vec![
        (Role::Outer, square()),
        hole(0.0, 0.5),
        hole(0.0, 0.2)
    ]));
    assert!(!outside(vec![
        (Role::Outer, square()),
        hole(0.5, 0.3),
        hole(-0.5, 0.2)
    ]));
    let slit = |x: f64| {
        with_slits(
            square(),
            vec![vec![line(point(x, 0.0), point(x + 0.1, 0.1), D)]],
        )
    };
    assert!(matches!(
        slit(4.0).check_crossings(),
        Err(GeometryError::Outside { .. })
    ));
    assert!(slit(0.0).check_crossings().is_ok());
}

#[test]
fn a_thin_wall_on_another_wall_is_refused_with_a_reason() {
    let attached = with_slits(
        square(),
        vec![vec![line(point(0.0, -1.0), point(0.0, 0.0), D)]],
    );
    let error = attached.check_crossings().expect_err("attached");
    assert!(error.to_string().contains("must stand free"), "{error}");
    let through = with_slits(
        square(),
        vec![vec![line(point(0.0, -1.5), point(0.0, 0.0), D)]],
    );
    assert!(through.check_crossings().is_err());
    // A thin wall that crosses itself is a crossing.
    let knot = with_slits(
        square(),
        vec![vec![
            line(point(-0.5, 0.0), point(0.5, 0.0), D),
            line(point(0.5, 0.0), point(0.5, 0.5), D),
            line(point(0.5, 0.5), point(0.0, -0.5), D),
        ]],
    );
    assert!(crosses(&knot));
}

#[test]
fn thousands_of_short_walls() {
    let shape = domain(regular_walls(6000, 0.0, &[D]));
    assert!(shape.check_crossings().is_ok());
    assert!(shape.contains(point(0.3, 0.2)));
    let star: Vec<Vec2> = (0..4000)
        .map(|i| {
            let angle = 2.0 * PI * f64::from(i) / 4000.0;
            point(angle.cos(), angle.sin()) * if i % 2 == 0 { 1.0 } else { 0.2 }
        })
        .collect();
    assert!(domain(polygon_walls(&star, &[D])).check_crossings().is_ok());
}

#[test]
fn interior_points_lie_inside() {
    let crescent = domain(vec![
        arc(point(0.0, 0.0), 1.0, -90.0, 180.0, D),
        arc(
            point(-0.9, 0.0),
            (1.0f64 + 0.81).sqrt(),
            48.012_787_504_183_34,
            -96.025_575_008_366_68,
            D,
        ),
    ]);
    let needle = polygon(&[(0.0, 0.0), (1.0, 0.0), (1.0, 1e-3), (0.0, 1e-3)], &[D]);
    let ring = with_hole(
        vec![circle(point(0.0, 0.0), 1.0, D)],
        vec![circle(point(0.0, 0.0), 0.9999, D)],
    );
    for shape in [crescent, needle, ring, cardioid(D), stadium(1.0, 1.0, D)] {
        let inside = shape.interior_point();
        assert!(shape.contains(inside), "{inside}");
    }
    let center = rectangle(1.0, 1.0, [D; 4]).interior_point();
    assert!((center - point(0.5, 0.5)).norm() < 0.05);
}

proptest! {
    #[test]
    fn points_inside_an_ellipse_by_curve_and_by_formula(x in -1.2f64..1.2, y in -1.0f64..1.0) {
        let shape = ellipse(1.0, 0.8, D);
        let value = x * x + y * y / 0.64 - 1.0;
        prop_assume!(value.abs() > 1e-12);
        prop_assert_eq!(shape.contains(point(x, y)), value < 0.0);
    }

    #[test]
    fn points_inside_a_cardioid(x in -0.6f64..2.2, y in -1.5f64..1.5) {
        let shape = cardioid(D);
        let (r, angle) = (x.hypot(y), y.atan2(x));
        let value = r - 1.0 - angle.cos();
        prop_assume!(value.abs() > 1e-12);
        prop_assert_eq!(shape.contains(point(x, y)), value < 0.0);
    }

    #[test]
    fn points_inside_a_stadium_with_a_hole(x in -2.2f64..2.2, y in -1.1f64..1.1) {
        let outline = stadium(1.0, 1.0, D).walls;
        let shape = with_hole(outline, vec![circle(point(0.5, 0.1), 0.3, N)]);
        let outer = 1.0 - y.hypot((x.abs() - 1.0).max(0.0));
        let hole = (x - 0.5).hypot(y - 0.1) - 0.3;
        prop_assume!(outer.abs() > 1e-12 && hole.abs() > 1e-12);
        prop_assert_eq!(shape.contains(point(x, y)), outer > 0.0 && hole > 0.0);
    }

    #[test]
    fn rays_level_with_vertices_are_counted_once(x in -1.5f64..1.5) {
        // The vertices of this diamond and of the middle of its sides lie on the ray y = 0 or y = 1/2.
        let shape = polygon(
            &[(1.0, 0.0), (0.5, 0.5), (0.0, 1.0), (-0.5, 0.5), (-1.0, 0.0), (0.0, -1.0)],
            &[D],
        );
        for y in [0.0f64, 0.5, 1.0] {
            let value = x.abs() + y.abs() - 1.0;
            prop_assume!(value.abs() > 1e-12);
            prop_assert_eq!(shape.contains(point(x, y)), value < 0.0);
        }
    }
}
