//! The way an outline is drawn does not change what is found in it: a straight side in one piece or in two.

use num_complex::Complex64;
use orbitsum::billiard::detect;
use orbitsum::orbit::{Catalogue, ClassWeights, Limits, terms};
use orbitsum::system;
use orbitsum::trace::{DEFAULT_ACCURACY, UniformGrid, sum_on_grid};
use std::path::Path;

/// Smoothed orbit sum of a system file on a grid, and the number of its terms.
fn sum(text: &str) -> (usize, Vec<f64>) {
    let domain = match system::parse(text, Path::new("drawn.toml"), &[]) {
        Ok(system) => system.domain,
        Err(error) => panic!("{}", error.render()),
    };
    let symmetry = detect(&domain);
    let limits = Limits {
        max_length: 7.0,
        max_bounces: 30,
    };
    let catalogue = Catalogue::find(&domain, &symmetry, limits);
    let terms = terms(&catalogue, &ClassWeights::new(&symmetry, None));
    let grid = UniformGrid {
        start: 10.0,
        step: 0.1,
        count: 200,
    };
    let total: Complex64 = terms.iter().map(|term| term.coefficient).sum();
    assert!(total.norm() > 0.0);
    (
        terms.len(),
        sum_on_grid(&terms, &grid, 0.5, DEFAULT_ACCURACY).staircase,
    )
}

fn assert_same(whole: &str, split: &str) {
    let (one, other) = (sum(whole), sum(split));
    assert_eq!(one.0, other.0, "numbers of terms");
    for (x, y) in one.1.iter().zip(&other.1) {
        assert!((x - y).abs() < 1e-8, "{x} and {y}");
    }
}

#[test]
fn rectangle_with_a_vertex_on_a_side() {
    let text = |vertex: &str| {
        format!(
            "[outline]\nstart = [0, 0]\nwall = [{vertex} {{ line = [1, 0] }}, {{ line = [1, 1.3] }}, \
             {{ line = [0, 1.3] }}, {{ line = [0, 0] }}]\n"
        )
    };
    assert_same(&text(""), &text("{ line = [0.37, 0] },"));
}

#[test]
fn stadium_with_a_vertex_on_a_side() {
    let text = |vertex: &str| {
        format!(
            "[outline]\nstart = [-1, -1]\nwall = [{vertex} {{ line = [1, -1] }}, {{ arc = [1, 1], center = [1, 0] }}, \
             {{ line = [-1, 1] }}, {{ arc = [-1, -1], center = [-1, 0] }}]\n"
        )
    };
    assert_same(&text(""), &text("{ line = [0.2, -1] },"));
}
