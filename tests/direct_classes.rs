//! Directly computed levels of all classes together against those of the whole shape, computed with and without its symmetry.
//!
//! The classes of a group share out the levels (every representation is a sum of irreducible ones); nothing else is used.

#[path = "common/direct.rs"]
mod direct;
#[path = "common/shapes.rs"]
mod shapes;

use direct::{CONVEX, REENTRANT, copies, deviation, rows, shape, solve, test_shape};
use orbitsum::billiard::{Domain, Symmetry, detect};
use std::f64::consts::PI;

fn sorted(mut list: Vec<f64>) -> Vec<f64> {
    list.sort_by(f64::total_cmp);
    list
}

fn assert_same(name: &str, a: &[f64], b: &[f64], claim: f64) {
    assert_eq!(a.len(), b.len(), "{name}");
    for (a, b) in a.iter().zip(b) {
        assert!(deviation(*a, *b) <= claim, "{name}: {a} and {b}");
    }
}

/// `group` is the name of the symmetry group that is found.
fn check(name: &str, group: &str, domain: &Domain, top: f64, claim: f64) {
    let symmetry = detect(domain);
    assert_eq!(symmetry.name, group, "{name}");
    let list = |symmetry: &Symmetry, class| {
        copies(&rows(&solve(name, domain, symmetry, class, [0.0, top])))
    };
    let plain = list(&Symmetry::trivial(), None);
    assert!(plain.len() > 40, "{name}: {}", plain.len());
    assert_same(name, &list(&symmetry, None), &plain, claim);
    let mut union = Vec::new();
    for irrep in &symmetry.irreps {
        let class = list(&symmetry, Some(irrep));
        assert!(!class.is_empty(), "{name}, {}", irrep.name);
        // Levels of a two-dimensional class come in pairs.
        assert!(class.len().is_multiple_of(irrep.dimension), "{name}");
        union.extend(class);
    }
    assert_same(name, &sorted(union), &plain, claim);
}

#[test]
fn regular_polygons() {
    let pentagon = shape("pentagon", &[]);
    check("pentagon", "5-gon", &pentagon, 25.0, CONVEX);
    let hexagon = test_shape("regular-6", &[]);
    check("hexagon", "6-gon", &hexagon, 17.0, CONVEX);
    let octagon = test_shape("regular-8", &[]);
    check("octagon", "8-gon", &octagon, 17.0, CONVEX);
}

#[test]
fn one_and_two_axes() {
    let l_shape = shape("l-shape", &[]);
    check("L shape", "reflection", &l_shape, 20.0, REENTRANT);
    let stadium = shape("stadium", &[]);
    check("stadium", "rectangle", &stadium, 12.0, CONVEX);
    let slit_square = shape("slit-square", &[]);
    check("slit square", "rectangle", &slit_square, 30.0, REENTRANT);
}

#[test]
fn a_hole_in_the_centre() {
    let sinai = shape("sinai", &[]);
    check("Sinai billiard", "square", &sinai, 35.0, CONVEX);
}

/// Groups of rotations alone: pairs of complex conjugate classes.
#[test]
fn rotations_without_axes() {
    let curve = |rotations: u32| {
        let waves = [
            (rotations, 0.1, 0.0),
            (2 * rotations, 0.05, 0.2 / f64::from(rotations)),
        ];
        let source = shapes::Harmonics::polar(&waves);
        shapes::domain(vec![shapes::curve(source, 0.0, 2.0 * PI, shapes::D)])
    };
    for rotations in 2..=4 {
        let group = format!("C{rotations}");
        check(&group, &group, &curve(rotations), 16.0, CONVEX);
    }
}
