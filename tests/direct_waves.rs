//! Computed waves: Rellich's identity on the walls, Bessel functions inside a disk, orthonormality on a grid.

#[path = "common/shipped.rs"]
mod shipped;

use orbitsum::billiard::{Domain, detect};
use orbitsum::solver::{Grid, Solver, WallPlace, WaveValues, Window, WindowLevels, wall_places};
use shipped::shape;

/// Levels, waves, and the places on the walls they are given at.
fn waves(
    domain: &Domain,
    to: f64,
    points: usize,
) -> (WindowLevels, Vec<WaveValues>, Vec<WallPlace>) {
    let solver = Solver::new(domain, &detect(domain), None).expect("a regular shape");
    let places = wall_places(domain, 100.0);
    let window = Window { from: 0.0, to };
    let (levels, waves) = solver
        .waves(window, &Grid::over(domain, points), &places)
        .expect("a window");
    (levels, waves, places)
}

/// F. Rellich, Math. Z. 46 (1940) 635: on Dirichlet walls the integral of (x, n) (du/dn)^2 is 2 k^2, for normalised waves.
#[test]
fn normal_derivatives_obey_rellich() {
    // Along circles the midpoint rule is exact and what is left is the error of the derivative, about the root of that of k;
    // walls with ends limit the rule itself.
    for (name, to, accuracy) in [
        ("disk", 8.0, 1e-8),
        ("stadium", 4.0, 1e-4),
        ("equilateral", 16.0, 1e-3),
        ("rectangle", 10.0, 1e-3),
        ("annulus", 8.0, 1e-8),
        ("sinai", 14.0, 1e-3),
    ] {
        let domain = shape(name, &[]);
        let (levels, waves, places) = waves(&domain, to, 10);
        assert!(levels.complete && waves.len() == levels.found(), "{name}");
        for wave in &waves {
            let k = levels.levels[wave.level].k;
            let sum: f64 = places
                .iter()
                .zip(&wave.walls)
                .map(|(place, [u, slope])| {
                    assert!(u.abs() < 1e-9, "{name}: u = {u} on a wall");
                    let count = places.iter().filter(|p| p.wall == place.wall).count();
                    let weight = domain.lengths[place.wall] / count as f64;
                    -weight * place.point.dot(&place.inward) * slope * slope
                })
                .sum();
            let miss = sum / (2.0 * k * k) - 1.0;
            assert!(miss.abs() < accuracy, "{name}, k = {k}: {miss:e}");
        }
    }
}

#[test]
fn the_lowest_wave_of_a_disk_is_a_bessel_function() {
    let disk = shape("disk", &[]);
    let (levels, waves, _) = waves(&disk, 3.0, 40);
    let k = levels.levels[0].k;
    // Norm of J0(k r) on the disk: pi J1(k)^2 (Abramowitz & Stegun (1964), 11.4.5).
    let norm = std::f64::consts::PI.sqrt() * libm::j1(k).abs();
    let points = Grid::over(&disk, 40).points();
    let sign = waves[0].grid[20 * 40 + 20].signum();
    for (point, u) in points.iter().zip(&waves[0].grid) {
        if point.norm() < 1.0 {
            let exact = libm::j0(k * point.norm()) / norm;
            assert!(
                (sign * u - exact).abs() < 1e-10,
                "at {point:?}: {u} {exact}"
            );
        } else {
            assert!(u.is_nan());
        }
    }
}

#[test]
fn waves_are_orthonormal_also_those_of_one_level() {
    for name in ["equilateral", "pentagon", "sinai"] {
        let domain = shape(name, &[]);
        let (_, waves, _) = waves(&domain, 14.0, 150);
        let step = Grid::over(&domain, 150).step;
        for (i, a) in waves.iter().enumerate() {
            for (j, b) in waves.iter().enumerate().take(i + 1) {
                let inside = a.grid.iter().zip(&b.grid).filter(|(u, _)| !u.is_nan());
                let product: f64 = inside.map(|(u, v)| u * v * step * step).sum();
                let expected = f64::from(u8::from(i == j));
                assert!(
                    (product - expected).abs() < 0.02,
                    "{name} {i} {j}: {product}"
                );
            }
        }
    }
}
