//! Constant terms of the Weyl expansion against calculations by hand, with the corner constants
//! c = (pi^2 - a^2)/(24 pi a) (like walls) and -(pi^2 + 2 a^2)/(48 pi a) (unlike walls) and 1/6 per full turn of the tangent.
//! Both: Baltes & Hilf, Spectra of Finite Systems (1976); like walls: Kac (1966).

#[path = "common/shapes.rs"]
mod shapes;

use orbitsum::baseline::{Omission, Weyl, weyl};
use orbitsum::billiard::{Domain, Symmetry};
use shapes::*;
use std::f64::consts::PI;

fn expansion(shape: &Domain) -> Weyl {
    weyl(shape, &Symmetry::trivial(), None)
}

fn assert_constant(name: &str, shape: &Domain, expected: f64) {
    let constant = expansion(shape).constant();
    assert!(
        (constant - expected).abs() < 1e-12,
        "{name}: {constant}, by hand {expected}"
    );
}

#[test]
fn shapes_with_dirichlet_walls() {
    let origin = point(0.0, 0.0);
    // One full turn: 2 pi/(12 pi) = 1/6.
    assert_constant("disk", &domain(vec![circle(origin, 0.7, D)]), 1.0 / 6.0);
    assert_constant("ellipse", &ellipse(1.0, 0.3, D), 1.0 / 6.0);
    assert_constant("stadium", &stadium(1.0, 1.0, D), 1.0 / 6.0);
    // Right angle: (1 - 1/4)/(24/2) = 1/16; four of them.
    assert_constant("rectangle", &rectangle(1.0, 1.3, [D; 4]), 0.25);
    // 60 degrees: (1 - 1/9)/(24/3) = 1/9; three of them.
    assert_constant(
        "equilateral",
        &domain(regular_walls(3, 0.2, &[D])),
        1.0 / 3.0,
    );
    // 45 degrees: (1 - 1/16)/(24/4) = 5/32; two of them and a right angle: 5/16 + 1/16.
    let isosceles = polygon(&[(0.0, 0.0), (1.0, 0.0), (0.0, 1.0)], &[D]);
    assert_constant("right isosceles", &isosceles, 3.0 / 8.0);
    // 270 degrees: (1 - 9/4)/(24 * 3/2) = -5/144; five right angles 45/144: 40/144.
    let l_shape = [
        (0.0, 0.0),
        (2.0, 0.0),
        (2.0, 1.0),
        (1.0, 1.0),
        (1.0, 2.0),
        (0.0, 2.0),
    ];
    assert_constant("l-shape", &polygon(&l_shape, &[D]), 5.0 / 18.0);
    // 108 degrees = 3 pi/5: (1 - 9/25)/(24 * 3/5) = 2/45; five of them.
    assert_constant("pentagon", &domain(regular_walls(5, 0.0, &[D])), 2.0 / 9.0);
    // Half a turn: 1/12; two right angles: 1/8.
    assert_constant("half disk", &half_disk(1.0, D, D), 5.0 / 24.0);
    // A quarter turn: 1/24; three right angles: 3/16; the joint of line and arc: 0.
    assert_constant(
        "quarter stadium",
        &quarter_stadium(1.0, 1.0, [D; 4]),
        11.0 / 48.0,
    );
    // +1/6 outside, -1/6 inside.
    let ring = with_hole(
        vec![circle(origin, 1.0, D)],
        vec![circle(point(0.1, 0.0), 0.3, D)],
    );
    assert_constant("annulus", &ring, 0.0);
    // Square 1/4 and hole -1/6.
    let sinai = with_hole(
        centered_rectangle_walls(1.0, 1.0, [D; 4]),
        vec![circle(origin, 0.2, D)],
    );
    assert_constant("square with a round hole", &sinai, 1.0 / 12.0);
    // Free tip, 360 degrees: (1 - 4)/48 = -1/16; two of them and the square.
    let slit = || vec![line(point(-0.4, 0.0), point(0.4, 0.0), D)];
    let slit_square = with_slits(centered_rectangle_walls(2.0, 2.0, [D; 4]), vec![slit()]);
    assert_constant("square with a thin wall", &slit_square, 1.0 / 8.0);
    // The tangent of r = 1 + cos t turns by 3 pi between its cusps: 1/4; the cusp of 360 degrees: -1/16.
    assert_constant("cardioid", &cardioid(D), 3.0 / 16.0);
    // Lens of two arcs of 2 b each that meet at angles pi - 2 (pi/2 - b) = 2 b, with cos b = d/2; here b = 60 degrees:
    // turn 4 pi/3: 1/9; two corners of 120 degrees: 2 (1 - 4/9)/(24 * 2/3) = 5/72.
    assert_constant("lemon", &lemon(1.0, D), 1.0 / 9.0 + 5.0 / 72.0);
}

#[test]
fn neumann_walls_have_the_same_constants() {
    assert_constant(
        "disk",
        &domain(vec![circle(point(0.0, 0.0), 1.0, N)]),
        1.0 / 6.0,
    );
    assert_constant("rectangle", &rectangle(1.0, 1.3, [N; 4]), 0.25);
    assert_constant("half disk", &half_disk(1.0, N, N), 5.0 / 24.0);
}

#[test]
fn mixed_walls() {
    // Right angle, unlike: -(1 + 1/2)/(48/2) = -1/16.
    assert_constant("one N side", &rectangle(1.0, 1.3, [N, D, D, D]), 0.0);
    assert_constant(
        "opposite N sides",
        &rectangle(1.0, 1.3, [D, N, D, N]),
        -0.25,
    );
    assert_constant(
        "neighbouring N sides",
        &rectangle(1.0, 1.3, [D, D, N, N]),
        0.0,
    );
    assert_constant(
        "half disk, N diameter",
        &half_disk(1.0, N, D),
        1.0 / 12.0 - 1.0 / 8.0,
    );
    // Change of condition on a smooth wall: -(1 + 2)/48 = -1/16; two of them.
    let origin = point(0.0, 0.0);
    let halves = domain(vec![
        arc(origin, 1.0, 0.0, 180.0, D),
        arc(origin, 1.0, 180.0, 180.0, N),
    ]);
    assert_constant("disk, half D half N", &halves, 1.0 / 6.0 - 1.0 / 8.0);
    // 60 degrees, unlike: -(1 + 2/9)/(48/3) = -11/144, at both ends of the N side.
    let triangle = domain(regular_walls(3, 0.0, &[N, D, D]));
    assert_constant("triangle, one N side", &triangle, 1.0 / 9.0 - 11.0 / 72.0);
    // Thin wall with D on one face and N on the other: tips -(1 + 8)/96 = -3/32 each; square 1/4.
    let walls = vec![line(point(-0.4, 0.0), point(0.4, 0.0), D)];
    let mut slit = with_slits(centered_rectangle_walls(2.0, 2.0, [D; 4]), vec![walls]);
    let face = slit.walls.len() - 1;
    slit.walls[face].condition = N;
    assert_constant("square with a thin wall of two faces", &slit, 1.0 / 16.0);
}

#[test]
fn area_and_perimeter_have_their_signs() {
    let shape = rectangle(2.0, 3.0, [N, D, D, D]);
    let count = expansion(&shape);
    let parts = count.contributions(4.0 * PI);
    let expected = [
        ("area", 6.0 * 4.0 * PI),
        ("perimeter_dirichlet", -8.0),
        ("perimeter_neumann", 2.0),
        ("curvature", 0.0),
        ("corners", 0.0),
        ("inverse_k", 0.0),
    ];
    for (part, expected) in parts.iter().zip(expected) {
        assert_eq!(part.0, expected.0);
        assert!(
            (part.1 - expected.1).abs() < 1e-12,
            "{}: {}",
            part.0,
            part.1
        );
    }
    assert!(
        (count.count(10.0, 2.0) - count.count(10.0, 0.0) - 6.0 * 4.0 / (4.0 * PI)).abs() < 1e-12
    );
    // Both faces of a thin wall count.
    let slit = with_slits(
        centered_rectangle_walls(2.0, 2.0, [D; 4]),
        vec![vec![line(point(-0.4, 0.0), point(0.4, 0.0), D)]],
    );
    assert!((expansion(&slit).coefficient(1) + 9.6 / (4.0 * PI)).abs() < 1e-14);
}

#[test]
fn next_order() {
    let inverse = |shape: &Domain| expansion(shape).coefficient(-1);
    let origin = point(0.0, 0.0);
    // Integral of curvature^2 on a circle of radius R: 2 pi/R.
    let disk = |condition| domain(vec![circle(origin, 2.0, condition)]);
    assert!((inverse(&disk(D)) - 1.0 / 256.0).abs() < 1e-14);
    assert!((inverse(&disk(N)) - 5.0 / 256.0).abs() < 1e-14);
    // Half disk: pi/(256 pi) and two corners of 1/(32 pi).
    assert!((inverse(&half_disk(1.0, D, D)) - 1.0 / 256.0 - 1.0 / (16.0 * PI)).abs() < 1e-14);
    assert!((inverse(&half_disk(1.0, N, D)) - 1.0 / 256.0 + 1.0 / (16.0 * PI)).abs() < 1e-14);
    assert!((inverse(&half_disk(1.0, D, N)) - 5.0 / 256.0 + 3.0 / (16.0 * PI)).abs() < 1e-14);
    assert!((inverse(&half_disk(1.0, N, N)) - 5.0 / 256.0 - 3.0 / (16.0 * PI)).abs() < 1e-14);
    assert_eq!(inverse(&rectangle(1.0, 2.0, [D, N, D, D])), 0.0);
    // Corners of curved walls at other angles, and cusps.
    for shape in [lemon(1.0, D), cardioid(D)] {
        assert_eq!(expansion(&shape).omissions, [Omission::InverseK]);
        assert_eq!(expansion(&shape).contributions(1.0).len(), 5);
    }
    assert!(expansion(&disk(D)).omissions.is_empty());
}

#[test]
fn a_corner_of_angle_zero_is_left_out_and_named() {
    // Between two circles that are tangent from inside, cut along the tangent point: a crescent with a corner of angle zero.
    let shape = domain(vec![
        arc(point(0.0, 0.0), 1.0, 0.0, 360.0, D),
        arc(point(0.5, 0.0), 0.5, 0.0, -360.0, D),
    ]);
    let count = expansion(&shape);
    assert!(
        count
            .omissions
            .iter()
            .any(|what| matches!(what, Omission::ZeroAngle { .. }))
    );
    assert!(count.count(10.0, 0.0).is_finite());
}

#[test]
fn the_count_is_inverted() {
    for shape in [
        rectangle(1.0, 1.3, [D; 4]),
        stadium(1.0, 1.0, D),
        half_disk(1.0, N, N),
    ] {
        let count = expansion(&shape);
        for n in [3.0, 10.0, 1000.0, 1e6] {
            let k = count.k_at_count(n);
            assert!((count.count(k, 0.0) - n).abs() < 1e-9 * n, "{n}: {k}");
            assert!((count.mean_spacing(k) * count.density(k, 0.0) - 1.0).abs() < 1e-15);
        }
        assert!(count.k_at_count(-5.0).is_finite());
        assert!(count.k_at_count(0.0) >= 0.0);
    }
}
