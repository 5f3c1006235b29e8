//! Mean chord and Lyapunov exponent of the shapes in billiards/.
//!
//! The mean chord of every billiard is pi A/L (Santalo, Integral Geometry and Geometric Probability, 1976, chapter 3).

use orbitsum::billiard::{Domain, Dynamics, Event, Origin, Ray, Tracer, Vec2, dynamics};
use std::f64::consts::PI;

#[path = "common/shipped.rs"]
mod shipped;

use shipped::shape;

const BOUNCES: usize = 400_000;
/// Standard errors within which an average must agree. 22 shapes are checked: with 32 blocks (Student's distribution) five
/// are passed by chance once in two thousand runs, and the runs are always the same.
const STANDARD_ERRORS: f64 = 5.0;

const SHAPES: [(&str, &[(&str, &str)]); 22] = [
    ("rectangle", &[]),
    ("ellipse", &[]),
    ("right-isosceles", &[]),
    ("equilateral", &[]),
    ("disk", &[]),
    ("half-disk", &[]),
    ("annulus", &[]),
    ("stadium", &[]),
    ("quarter-stadium", &[]),
    ("limacon", &[]),
    ("limacon", &[("e", "0.9")]),
    ("limacon", &[("e", "1")]),
    ("cardioid", &[]),
    ("lemon", &[]),
    ("sinai", &[]),
    ("sinai-eighth", &[]),
    ("oval", &[]),
    ("mushroom", &[]),
    ("mushroom", &[("foot_width", "0.1")]),
    ("l-shape", &[]),
    ("pentagon", &[]),
    ("slit-square", &[]),
];

fn measure(domain: &Domain) -> Dynamics {
    dynamics(domain, &Tracer::new(domain), BOUNCES)
}

#[test]
fn mean_chord_is_pi_times_area_over_perimeter() {
    for (name, settings) in SHAPES {
        let domain = shape(name, settings);
        let found = measure(&domain);
        let exact = PI * domain.area / domain.perimeter;
        let error = found.mean_chord_error;
        assert!(
            (found.mean_chord - exact).abs() < STANDARD_ERRORS * error,
            "{name}: {} +- {error} instead of {exact}",
            found.mean_chord
        );
        assert!(error < 0.03 * exact, "{name}: error {error}");
        assert_eq!((found.stopped, found.escaped), (0, 0), "{name}");
    }
}

/// Integrable shapes, and polygons, where neighbouring rays separate linearly at most.
#[test]
fn regular_motion_has_no_horizon() {
    for name in [
        "disk",
        "rectangle",
        "ellipse",
        "equilateral",
        "right-isosceles",
        "half-disk",
        "annulus",
        "l-shape",
        "pentagon",
        "slit-square",
    ] {
        let found = measure(&shape(name, &[]));
        assert_eq!(found.horizon_bounces, None, "{name}: {found:?}");
    }
}

#[test]
fn chaotic_motion_has_a_horizon() {
    for name in [
        "stadium",
        "quarter-stadium",
        "sinai",
        "sinai-eighth",
        "cardioid",
        "oval",
        "mushroom",
        "lemon",
    ] {
        let found = measure(&shape(name, &[]));
        let expected = (1e14_f64).ln() / found.lyapunov_per_bounce;
        let horizon = found.horizon_bounces.expect(name);
        assert!((horizon / expected - 1.0).abs() < 1e-12, "{name}");
        assert!(
            found.lyapunov_per_bounce > 20.0 * found.lyapunov_error,
            "{name}: {found:?}"
        );
    }
}

/// The exponent per length does not depend on whether the symmetric shape or its fundamental part is used.
#[test]
fn folding_a_shape_leaves_its_exponent() {
    for (full, part) in [("stadium", "quarter-stadium"), ("sinai", "sinai-eighth")] {
        let (full, part) = (measure(&shape(full, &[])), measure(&shape(part, &[])));
        let error = |found: &Dynamics| found.lyapunov_error / found.mean_chord;
        let bound = STANDARD_ERRORS * error(&full).hypot(error(&part));
        let difference = full.lyapunov_per_length - part.lyapunov_per_length;
        assert!(difference.abs() < bound, "{difference} {bound}");
    }
}

/// Cardioid: the Lyapunov exponent per bounce is about 0.65 (Baecker & Dullin, J. Phys. A 30 (1997); from memory).
#[test]
fn exponent_of_the_cardioid() {
    let found = measure(&shape("cardioid", &[]));
    assert!((found.lyapunov_per_bounce - 0.65).abs() < 0.01, "{found:?}");
}

/// The exponent from pairs of nearby rays (Benettin, Galgani & Strelcyn, Phys. Rev. A 14 (1976)), which needs no
/// linearised map: their distance is set back to its start after every few bounces.
#[test]
fn nearby_rays_separate_with_the_exponent() {
    for name in ["stadium", "cardioid", "sinai"] {
        let domain = shape(name, &[]);
        let tracer = Tracer::new(&domain);
        let values: Vec<f64> = (0..40)
            .map(|number| pair(&domain, &tracer, number))
            .collect();
        let count = values.len() as f64;
        let mean = values.iter().sum::<f64>() / count;
        let variance = values
            .iter()
            .map(|value| (value - mean).powi(2))
            .sum::<f64>()
            / (count - 1.0);
        let found = measure(&domain);
        let error = (variance / count).sqrt().hypot(found.lyapunov_error);
        assert!(
            (mean - found.lyapunov_per_bounce).abs() < STANDARD_ERRORS * error,
            "{name}: {mean} and {} +- {error}",
            found.lyapunov_per_bounce
        );
        assert!(error < 0.02, "{name}: {error}");
    }
}

/// Distance of the two rays in arc-length-like units, small against everything and large against rounding.
const APART: f64 = 1e-8;

fn start(domain: &Domain, number: u32) -> Ray {
    // A lattice of starts, uniform in arc length on the longest wall and in the sine of the angle.
    let wall = (0..domain.walls.len())
        .max_by(|&a, &b| domain.lengths[a].total_cmp(&domain.lengths[b]))
        .expect("a wall");
    let t = (0.5 + 0.618_033_988_749_895 * f64::from(number)).fract() * domain.walls[wall].extent();
    let sine = 1.9 * ((0.3 + 0.754_877_666_246_693 * f64::from(number)).fract() - 0.5);
    let frame = domain.walls[wall].frame(t);
    Ray {
        point: frame.point,
        direction: frame.tangent * sine + frame.normal() * (1.0 - sine * sine).sqrt(),
        origin: Origin::Wall { wall, t },
    }
}

/// Mean logarithmic growth of the distance in direction of two rays, per bounce.
fn pair(domain: &Domain, tracer: &Tracer, number: u32) -> f64 {
    let mut ray = start(domain, number);
    let mut near = turned(&ray, APART);
    let mut growth = 0.0;
    let mut counted = 0.0;
    for bounce in 0..2000 {
        let (Event::Wall(a), Event::Wall(b)) = (tracer.next(&ray), tracer.next(&near)) else {
            panic!("a corner");
        };
        let split = a.wall != b.wall;
        ray = Tracer::reflect(ray.direction, &a);
        near = Tracer::reflect(near.direction, &b);
        let (moved, apart) = (
            near.point - ray.point,
            (near.direction - ray.direction).norm(),
        );
        // Displacement across the ray.
        let across = (moved.x * ray.direction.y - moved.y * ray.direction.x).abs();
        let distance = across.hypot(apart);
        if split {
            // A joint or an edge came between the two.
            near = turned(&ray, APART);
            continue;
        }
        near = closer(domain, &ray, &near, APART / distance);
        if bounce > 20 {
            growth += (distance / APART).ln();
            counted += 1.0;
        }
    }
    growth / counted
}

fn turned(ray: &Ray, angle: f64) -> Ray {
    let d = ray.direction;
    let direction = Vec2::new(d.x - angle * d.y, d.y + angle * d.x).normalize();
    Ray { direction, ..*ray }
}

/// The ray beside `ray` at a fraction of the distance of `near`, on the same wall.
fn closer(domain: &Domain, ray: &Ray, near: &Ray, fraction: f64) -> Ray {
    let (Origin::Wall { wall, t }, Origin::Wall { t: other, .. }) = (ray.origin, near.origin)
    else {
        panic!("not on a wall");
    };
    let t = t + fraction * (other - t);
    let direction = ray.direction + (near.direction - ray.direction) * fraction;
    Ray {
        point: domain.walls[wall].frame(t).point,
        direction: direction.normalize(),
        origin: Origin::Wall { wall, t },
    }
}
