//! Symmetry groups of shapes whose isometries are plain from their definition.

#[path = "common/shapes.rs"]
mod shapes;

use orbitsum::billiard::{
    Domain, Mat2, Symmetry, SymmetryError, Vec2, Wall, check_declared, detect,
    is_rotationally_invariant,
};
use proptest::prelude::*;
use shapes::*;
use std::f64::consts::PI;

fn names(group: &Symmetry) -> Vec<&str> {
    group
        .elements
        .iter()
        .map(|element| element.name.as_str())
        .collect()
}

fn assert_maps(group: &Symmetry, expected: &[Mat2], error: f64) {
    assert_eq!(group.order(), expected.len());
    for (element, matrix) in group.elements.iter().zip(expected) {
        assert!(
            (element.matrix - matrix).norm() <= error,
            "{} {}",
            element.name,
            element.matrix
        );
    }
}

#[test]
fn rectangle_has_two_exact_axes() {
    for conditions in [[D; 4], [N; 4], [D, N, D, N]] {
        let group = detect(&rectangle(1.0, 1.3, conditions));
        assert_eq!(group.name, "rectangle");
        assert_eq!(group.center, point(0.5, 0.65));
        assert_eq!(names(&group), ["e", "C2", "y->-y", "x->-x"]);
        let diagonal = |x, y| Mat2::new(x, 0.0, 0.0, y);
        let expected = [
            diagonal(1.0, 1.0),
            diagonal(-1.0, -1.0),
            diagonal(1.0, -1.0),
            diagonal(-1.0, 1.0),
        ];
        assert_maps(&group, &expected, 0.0);
        let axes: Vec<Vec2> = group.axes().into_iter().map(|(_, axis)| axis).collect();
        assert_eq!(axes, [point(1.0, 0.0), point(0.0, 1.0)]);
    }
}

#[test]
fn conditions_break_symmetry() {
    let group = detect(&rectangle(1.0, 1.3, [N, D, D, D]));
    assert_eq!(names(&group), ["e", "x->-x"]);
    assert_eq!(detect(&rectangle(1.0, 1.3, [N, N, D, D])).name, "none");
    assert_eq!(
        detect(&rectangle(1.0, 1.0, [N, N, D, D])).name,
        "reflection"
    );
    assert_eq!(detect(&rectangle(1.0, 1.0, [N, D, N, D])).name, "rectangle");
    let circle_of_two = domain(vec![
        arc(point(0.0, 0.0), 1.0, 10.0, 180.0, D),
        arc(point(0.0, 0.0), 1.0, 190.0, 180.0, N),
    ]);
    let group = detect(&circle_of_two);
    assert_eq!(group.name, "reflection");
    let (_, axis) = group.axes()[0];
    assert!(
        (axis - point(100f64.to_radians().cos(), 100f64.to_radians().sin())).norm() < 1e-12
            || (axis + point(100f64.to_radians().cos(), 100f64.to_radians().sin())).norm() < 1e-12
    );
}

#[test]
fn square_names_and_classes() {
    let group = detect(&rectangle(2.0, 2.0, [D; 4]));
    assert_eq!(group.name, "square");
    assert_eq!(
        names(&group),
        [
            "e",
            "C4",
            "C2",
            "C4^3",
            "y->-y",
            "sigma(45)",
            "x->-x",
            "sigma(135)"
        ]
    );
    let b1 = group.class("b1").expect("B1");
    assert_eq!(b1.weights, [1.0, -1.0, 1.0, -1.0, 1.0, -1.0, 1.0, -1.0]);
    assert!(group.class("odd,odd").is_none());
    assert_eq!(group.class("E").expect("E").dimension, 2);
}

#[test]
fn classes_of_a_rectangle_are_found_by_parity() {
    let group = detect(&rectangle(1.0, 1.3, [D; 4]));
    let parities = |name: &str| group.class(name).map(|irrep| irrep.name.clone());
    assert_eq!(parities("even, EVEN").as_deref(), Some("A1"));
    assert_eq!(parities("odd,odd").as_deref(), Some("A2"));
    assert_eq!(parities("odd , even").as_deref(), Some("B1"));
    assert_eq!(parities("even,odd").as_deref(), Some("B2"));
    assert_eq!(parities("odd"), None);
    // odd under x -> -x: -1 on that element.
    let b1 = group.class("B1").expect("B1");
    assert_eq!((b1.weights[2], b1.weights[3]), (1.0, -1.0));
}

#[test]
fn one_reflection_has_odd_and_even_classes() {
    let group = detect(&half_disk(1.0, D, D));
    assert_eq!(names(&group), ["e", "x->-x"]);
    assert_eq!(group.center.x, 0.0);
    assert_eq!(group.class("Odd").expect("odd").name, "A''");
    assert_eq!(group.class("a'").expect("even").weights, [1.0, 1.0]);
}

#[test]
fn regular_polygons_in_any_position() {
    for n in 3..=24 {
        for turned in [0.0, 7.0, 90.0] {
            let group = detect(&domain(regular_walls(n, turned, &[D])));
            assert_eq!(group.order(), 2 * n, "{n} {turned}");
            assert_eq!(group.center, Vec2::zeros());
        }
        let alternating = detect(&domain(regular_walls(2 * n, 0.3, &[D, N])));
        assert_eq!(alternating.order(), 2 * n);
    }
    assert_eq!(detect(&domain(regular_walls(64, 0.0, &[D]))).name, "64-gon");
}

#[test]
fn stadium_and_its_pieces() {
    let group = detect(&stadium(1.0, 1.0, D));
    assert_eq!(names(&group), ["e", "C2", "y->-y", "x->-x"]);
    assert_eq!(group.center, Vec2::zeros());
    assert_eq!(detect(&quarter_stadium(1.0, 1.0, [D; 4])).name, "none");
    assert_eq!(detect(&lemon(1.2, D)).name, "rectangle");
}

#[test]
fn disk_and_annulus_are_left_to_the_integrable_case() {
    let disk = domain(vec![circle(point(0.3, 0.1), 1.0, D)]);
    assert!(is_rotationally_invariant(&disk));
    assert_eq!(detect(&disk).name, "none");
    let by_formula = ellipse(1.0, 1.0, N);
    assert!(is_rotationally_invariant(&by_formula));
    let annulus = |x: f64| {
        with_hole(
            vec![circle(point(0.0, 0.0), 1.0, D)],
            vec![circle(point(x, 0.0), 0.5, N)],
        )
    };
    assert!(is_rotationally_invariant(&annulus(0.0)));
    assert!(!is_rotationally_invariant(&annulus(0.1)));
    assert_eq!(names(&detect(&annulus(0.1))), ["e", "y->-y"]);
    assert!(!is_rotationally_invariant(&rectangle(1.0, 1.0, [D; 4])));
}

#[test]
fn formula_curves_map_onto_themselves_with_a_shift() {
    let source = Ellipse {
        a: 1.0,
        b: 0.8,
        turned: 0.4,
    };
    let turned = detect(&domain(vec![curve(source, 0.7, 0.7 + 2.0 * PI, D)]));
    assert_eq!(turned.name, "rectangle");
    let (_, axis) = turned.axes()[0];
    assert!(
        (axis - point(0.4f64.cos(), 0.4f64.sin())).norm() < 1e-12,
        "{axis}"
    );
    assert_eq!(
        names(&detect(&ellipse(1.0, 0.8, D))),
        ["e", "C2", "y->-y", "x->-x"]
    );

    let flower = |waves: &[(u32, f64, f64)]| {
        detect(&domain(vec![curve(
            Harmonics::polar(waves),
            0.3,
            0.3 + 2.0 * PI,
            D,
        )]))
    };
    assert_eq!(flower(&[(5, 0.05, 0.0)]).name, "5-gon");
    assert_eq!(flower(&[(3, 0.1, 0.2)]).name, "triangle");
    // Two waves whose crests do not stand on common axes: rotations only.
    assert_eq!(flower(&[(3, 0.1, 0.0), (6, 0.05, 0.2)]).name, "C3");
    assert_eq!(flower(&[(4, 0.05, 0.0), (8, 0.03, 0.1)]).name, "C4");
    assert_eq!(flower(&[(2, 0.2, 0.0), (4, 0.05, 0.3)]).name, "C2");
    assert_eq!(flower(&[(2, 0.2, 0.0), (3, 0.1, 0.3)]).name, "none");
    assert_eq!(flower(&[(6, 0.02, 0.0), (10, 0.01, 0.0)]).name, "rectangle");
    assert_eq!(detect(&ellipse(1.0, 1.0 - 1e-8, D)).name, "rectangle");
    let cusp = detect(&cardioid(D));
    assert_eq!(names(&cusp), ["e", "y->-y"]);
    assert_eq!(cusp.center.y, 0.0);
}

#[test]
fn halves_cut_into_different_numbers_of_walls() {
    let ellipse = |from: f64, to: f64| {
        curve(
            Ellipse {
                a: 1.0,
                b: 0.8,
                turned: 0.0,
            },
            from,
            to,
            D,
        )
    };
    // One wall above, three below.
    let shape = domain(vec![
        ellipse(0.0, PI),
        ellipse(PI, 1.2 * PI),
        ellipse(1.2 * PI, 1.5 * PI),
        ellipse(1.5 * PI, 2.0 * PI),
    ]);
    assert_eq!(detect(&shape).name, "rectangle");
    let square = polygon(
        &[
            (0.0, 0.0),
            (0.3, 0.0),
            (1.0, 0.0),
            (1.0, 1.0),
            (0.0, 1.0),
            (0.0, 0.1),
        ],
        &[D],
    );
    assert_eq!(detect(&square).name, "square");
}

#[test]
fn a_small_defect_breaks_symmetry() {
    let dented = polygon(
        &[(0.0, 0.0), (0.5, 1e-6), (1.0, 0.0), (1.0, 1.3), (0.0, 1.3)],
        &[D],
    );
    assert_eq!(names(&detect(&dented)), ["e", "x->-x"]);
    let pin = vec![circle(point(0.5, 0.651), 0.01, D)];
    let pinned = with_hole(
        polygon_walls(
            &[
                point(0.0, 0.0),
                point(1.0, 0.0),
                point(1.0, 1.3),
                point(0.0, 1.3),
            ],
            &[D],
        ),
        pin,
    );
    assert_eq!(names(&detect(&pinned)), ["e", "x->-x"]);
}

#[test]
fn thin_walls_count_with_both_faces() {
    let square = || centered_rectangle_walls(2.0, 2.0, [D; 4]);
    let along = |condition| vec![line(point(-0.4, 0.0), point(0.4, 0.0), condition)];
    assert_eq!(
        detect(&with_slits(square(), vec![along(D)])).name,
        "rectangle"
    );
    let mut one_sided = with_slits(square(), vec![along(D)]);
    let face = one_sided.walls.len() - 1;
    one_sided.walls[face].condition = N;
    assert_eq!(names(&detect(&one_sided)), ["e", "x->-x"]);
    let cross = with_slits(
        square(),
        vec![
            vec![line(point(0.2, 0.0), point(0.6, 0.0), D)],
            vec![line(point(0.0, 0.2), point(0.0, 0.6), D)],
            vec![line(point(-0.2, 0.0), point(-0.6, 0.0), D)],
            vec![line(point(0.0, -0.2), point(0.0, -0.6), D)],
        ],
    );
    assert_eq!(detect(&cross).name, "square");
}

fn turned(points: &[(f64, f64)], degrees: f64, shift: Vec2, digits: Option<i32>) -> Domain {
    let (s, c) = degrees.to_radians().sin_cos();
    let moved: Vec<Vec2> = points
        .iter()
        .map(|&(x, y)| point(c * x - s * y, s * x + c * y) + shift)
        .map(|p| match digits {
            Some(digits) => p.map(|v| (v * 10f64.powi(digits)).round() / 10f64.powi(digits)),
            None => p,
        })
        .collect();
    domain(polygon_walls(&moved, &[D]))
}

#[test]
fn ten_digit_coordinates_keep_their_symmetry() {
    let hexagon: Vec<(f64, f64)> = (0..6)
        .map(|i| (f64::from(i) * PI / 3.0).sin_cos())
        .map(|(s, c)| (c, s))
        .collect();
    let group = detect(&turned(&hexagon, 11.0, point(0.123, -7.0), Some(10)));
    assert_eq!(group.name, "6-gon");
    let upright = detect(&turned(&hexagon, 0.0, point(0.0, 0.0), Some(10)));
    assert_eq!(upright.elements[6].matrix, Mat2::new(1.0, 0.0, 0.0, -1.0));
    assert_eq!(upright.center, Vec2::zeros());
    let pentagon: Vec<(f64, f64)> = (0..5)
        .map(|i| (f64::from(i) * 0.4 * PI).sin_cos())
        .map(|(s, c)| (c, s))
        .collect();
    let moved = |digits| detect(&turned(&pentagon, 11.0, point(0.123, -7.0), Some(digits)));
    assert_eq!(moved(10).name, "5-gon");
    assert_eq!(moved(6).name, "none");
}

#[test]
fn declared_groups_are_subgroups() {
    let square = detect(&rectangle(1.0, 1.0, [D; 4]));
    let taken = |word: &str| check_declared(&square, word).map(|group| group.order());
    assert_eq!(taken("none"), Ok(1));
    assert_eq!(taken("Square"), Ok(8));
    assert_eq!(taken("4-gon"), Ok(8));
    assert_eq!(taken("rectangle"), Ok(4));
    assert_eq!(taken("C4"), Ok(4));
    assert_eq!(taken("C2"), Ok(2));
    assert_eq!(taken("reflection"), Ok(2));
    assert!(matches!(
        taken("triangle"),
        Err(SymmetryError::NotPresent { .. })
    ));
    assert!(matches!(taken("C0"), Err(SymmetryError::Unknown { .. })));
    assert!(matches!(taken("round"), Err(SymmetryError::Unknown { .. })));
    let nearest = check_declared(&square, "reflection").expect("reflection");
    assert_eq!(names(&nearest), ["e", "y->-y"]);
    let diagonal = check_declared(&square, "sigma(45)").expect("sigma(45)");
    assert_eq!(diagonal.elements[1].matrix, Mat2::new(0.0, 1.0, 1.0, 0.0));
    let upright = check_declared(&square, "x->-x").expect("x->-x");
    assert_eq!(names(&upright), ["e", "x->-x"]);
    let lone = detect(&half_disk(1.0, D, D));
    assert!(check_declared(&lone, "C2").is_err());
    assert!(check_declared(&Symmetry::trivial(), "reflection").is_err());
}

#[test]
fn a_thousand_short_walls_are_no_burden() {
    let walls: Vec<Wall> = regular_walls(4096, 0.0, &[D]);
    let polygon = domain(walls);
    // The largest group looked for.
    assert_eq!(detect(&polygon).name, "64-gon");
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(64))]
    #[test]
    fn an_isosceles_triangle_in_any_position_has_one_axis(
        width in 0.3f64..3.0, degrees in -180.0f64..180.0, x in -5.0f64..5.0, y in -5.0f64..5.0,
    ) {
        prop_assume!((width - 2.0 / 3f64.sqrt()).abs() > 1e-3);
        let shape = turned(
            &[(-0.5 * width, 0.0), (0.5 * width, 0.0), (0.0, 1.0)],
            degrees,
            point(x, y),
            None,
        );
        let group = detect(&shape);
        prop_assert_eq!(&group.name, "reflection");
        let (_, axis) = group.axes()[0];
        let (s, c) = (degrees + 90.0).to_radians().sin_cos();
        prop_assert!((axis.x * s - axis.y * c).abs() < 1e-13);
    }
}
