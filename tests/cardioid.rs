//! Periodic orbits of the cardioid are maxima of the length.
//!
//! Baecker & Dullin, J. Phys. A 30 (1997) 1991: the cardioid's orbits, those through the cusp aside, are maxima of the length
//! with respect to the bounce points, so the number of negative eigenvalues of the length Hessian is the number of bounces.

use orbitsum::billiard::Symmetry;
use orbitsum::orbit::{Catalogue, Fixing, Limits};
use orbitsum::system;
use std::path::Path;

/// Distance from the cusp within which an orbit counts as running through it.
const CUSP: f64 = 1e-6;

#[test]
fn orbits_are_length_maxima() {
    let shape = system::load(Path::new("billiards/cardioid.toml"), &[])
        .expect("a shipped file")
        .domain;
    // The whole shape without its symmetry, so that every bounce is an independent variable.
    let symmetry = Symmetry::trivial();
    let limits = Limits {
        max_length: 22.0,
        max_bounces: 10,
    };
    let catalogue = Catalogue::find(&shape, &symmetry, limits);
    let mut checked = 0;
    for orbit in &catalogue.orbits {
        if orbit.points.iter().any(|bounce| bounce.point.norm() < CUSP) {
            continue;
        }
        for closure in &orbit.closures {
            if closure.fixing == Fixing::Element(0) {
                assert_eq!(
                    closure.negative,
                    orbit.bounces() * closure.repetition as usize,
                    "length {}, {} bounces, repetition {}",
                    orbit.length,
                    orbit.bounces(),
                    closure.repetition
                );
            }
        }
        checked += 1;
    }
    assert!(checked >= 50, "only {checked} orbits");
}
