//! Periodic orbits of the stadium with radius 1 and half straight 1.

use orbitsum::billiard::detect;
use orbitsum::orbit::{Catalogue, Limits, Orbit, OrbitKind};
use orbitsum::system;
use std::path::Path;

fn find(max_length: f64, max_bounces: usize) -> Catalogue {
    let domain = system::load(Path::new("billiards/stadium.toml"), &[])
        .expect("a shipped file")
        .domain;
    let symmetry = detect(&domain);
    Catalogue::find(
        &domain,
        &symmetry,
        Limits {
            max_length,
            max_bounces,
        },
    )
}

fn counted(catalogue: &Catalogue) -> Vec<&Orbit> {
    catalogue
        .orbits
        .iter()
        .filter(|orbit| matches!(orbit.kind, OrbitKind::Isolated | OrbitKind::Axis))
        .collect()
}

/// Lengths from elementary geometry: the long axis 4, the rhombus through both tips and the middles of the straight walls
/// 2 sqrt 5, the bow tie and the rectangle 2 + 2 sqrt 2, and 5 (four hits of the arcs under 60 degrees); the others from an
/// independent brute-force search (close returns from a start grid).
#[test]
fn shortest_lengths() {
    let lengths: Vec<f64> = counted(&find(5.07, 20))
        .iter()
        .map(|orbit| orbit.length)
        .collect();
    let expected = [
        4.0,
        2.0 * 5f64.sqrt(),
        2.0 + 8f64.sqrt(),
        2.0 + 8f64.sqrt(),
        4.889431983,
        5.0,
        5.014969587,
        5.061467459,
    ];
    assert!(lengths.len() >= expected.len());
    for (length, wanted) in lengths.iter().zip(expected) {
        assert!((length - wanted).abs() < 1e-9, "{length} against {wanted}");
    }
}

/// Every orbit listed: det M = 1, stationary length, and a search that has settled.
#[test]
fn every_orbit_is_sound() {
    let catalogue = find(12.0, 20);
    assert!(catalogue.orbits.len() > 200);
    for orbit in &catalogue.orbits {
        assert!(
            (orbit.determinant - 1.0).abs() < 1e-9,
            "{}: det {}",
            orbit.word,
            orbit.determinant
        );
        assert!(
            orbit.residual < 1e-11,
            "{}: residual {}",
            orbit.word,
            orbit.residual
        );
    }
    assert_eq!(catalogue.passes.last().map(|pass| pass.added), Some(0));
}

/// Distinct primitive relative orbits up to symmetry and time reversal, bouncing-ball strip and joints left out. The first
/// number is confirmed by tests/stadium_brute_force.rs; the search gives the same numbers with 30 times as many sources and
/// rays 2.5 times as dense.
#[test]
fn counts() {
    for (max_length, max_bounces, expected) in [
        (10.0, 12, 70),
        (10.0, 20, 95),
        (12.0, 12, 117),
        (12.0, 20, 266),
    ] {
        let count = counted(&find(max_length, max_bounces)).len();
        assert_eq!(
            count, expected,
            "up to length {max_length} and {max_bounces} bounces"
        );
    }
}
