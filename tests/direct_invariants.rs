//! What directly computed levels must not depend on: size, place and direction of the shape, the way a window is cut.

#[path = "common/shipped.rs"]
mod shipped;

use orbitsum::billiard::{Domain, detect};
use orbitsum::solver::{Levels, Solver};
use orbitsum::system::parse;
use shipped::shape;
use std::path::Path;

fn levels(domain: &Domain, from: f64, to: f64) -> Levels {
    let solver = Solver::new(domain, &detect(domain), None).expect("a regular shape");
    let found = solver.levels(from, to).expect("levels");
    assert!(found.complete);
    found
}

/// Each level of one list, times the factor, is that of the other within both errors.
fn assert_same(name: &str, a: &Levels, b: &Levels, factor: f64) {
    assert_eq!(a.levels.len(), b.levels.len(), "{name}");
    for (one, other) in a.levels.iter().zip(&b.levels) {
        let difference = (factor * one.k - other.k).abs();
        let errors = factor * one.error + other.error;
        assert!(
            difference <= errors,
            "{name} k = {}: {difference:e} {errors:e}",
            other.k
        );
        assert_eq!(
            one.multiplicity, other.multiplicity,
            "{name} k = {}",
            other.k
        );
    }
}

#[test]
fn levels_scale_with_the_size() {
    for (name, parameter) in [("l-shape", "a"), ("pentagon", "a"), ("disk", "R")] {
        let unit = levels(&shape(name, &[]), 0.0, 14.0);
        let larger = levels(&shape(name, &[(parameter, "7")]), 0.0, 2.0);
        assert_same(name, &unit, &larger, 1.0 / 7.0);
    }
}

#[test]
fn levels_do_not_depend_on_place_and_direction() {
    // A trapezium with one Neumann wall, as it is and turned by the angle of the 3-4-5 triangle and shifted.
    let text = |p: [[f64; 2]; 4]| {
        let [a, b, c, d] = p.map(|[x, y]| format!("[{x}, {y}]"));
        format!(
            "name = \"trapezium\"\n[outline]\nstart = {a}\nwall = [ {{ line = {b} }}, {{ line = {c}, condition = \
             \"neumann\" }}, {{ line = {d} }}, {{ line = {a} }} ]\n"
        )
    };
    let points = [[0.0, 0.0], [2.0, 0.0], [1.5, 1.0], [0.25, 1.0]];
    let moved = points.map(|[x, y]| [0.6 * x - 0.8 * y + 3.0, 0.8 * x + 0.6 * y - 5.0]);
    let domain = |p| {
        let system = parse(&text(p), Path::new("trapezium.toml"), &[]);
        system
            .map_err(|error| error.render())
            .expect("a system")
            .domain
    };
    let (here, there) = (domain(points), domain(moved));
    assert_same(
        "trapezium",
        &levels(&here, 0.0, 20.0),
        &levels(&there, 0.0, 20.0),
        1.0,
    );
}

#[test]
fn windows_add_up() {
    let domain = shape("mushroom", &[]);
    let whole = levels(&domain, 0.0, 16.0);
    let (low, high) = (levels(&domain, 0.0, 9.3), levels(&domain, 9.3, 16.0));
    assert_eq!(high.first, low.found() + 1);
    let mut joined = low.clone();
    joined.levels.extend(high.levels);
    assert_same("mushroom", &whole, &joined, 1.0);
}
