//! The orbits of the stadium against an independent brute-force search.
//!
//! From a uniform grid of starts on one quarter arc every ray is followed; where it comes back near an image of its start,
//! Newton's method on the two-dimensional return map (single shooting, not the length function) looks for a periodic point.
//! Nothing but the bounce map is shared with the search under test.

use orbitsum::billiard::{
    Domain, Event, Mat2, Origin, Ray, Symmetry, Tracer, Vec2, detect, flight, incidence, reflection,
};
use orbitsum::orbit::{Catalogue, Limits, OrbitKind};
use orbitsum::system;
use std::f64::consts::{FRAC_PI_2, PI};
use std::path::Path;

const MAX_LENGTH: f64 = 10.0;
const MAX_BOUNCES: usize = 12;
/// Starts along the quarter arc and over the angles.
const GRID: (usize, usize) = (400, 1000);
/// Wall number of the arc at the right.
const RIGHT: usize = 1;

/// Where a ray is after a bounce.
#[derive(Clone, Copy)]
struct Visit {
    point: Vec2,
    direction: Vec2,
    length: f64,
    map: Mat2,
    wall: usize,
}

/// A start on the right arc: polar angle of the point, angle of the ray from the normal towards the tangent.
#[derive(Clone, Copy)]
struct Start {
    place: f64,
    angle: f64,
}

impl Start {
    fn phase(self) -> (Vec2, Vec2) {
        let radial = Vec2::new(self.place.cos(), self.place.sin());
        let tangent = Vec2::new(-radial.y, radial.x);
        (
            Vec2::new(1.0, 0.0) + radial,
            tangent * self.angle.sin() - radial * self.angle.cos(),
        )
    }

    fn of(point: Vec2, direction: Vec2) -> Self {
        let place = point.y.atan2(point.x - 1.0);
        let radial = Vec2::new(place.cos(), place.sin());
        let tangent = Vec2::new(-radial.y, radial.x);
        Self {
            place,
            angle: direction.dot(&tangent).atan2(-direction.dot(&radial)),
        }
    }
}

fn follow(tracer: &Tracer, start: Start, bounces: usize) -> Option<Vec<Visit>> {
    let (point, direction) = start.phase();
    let mut ray = Ray {
        point,
        direction,
        origin: Origin::Wall {
            wall: RIGHT,
            t: start.place + FRAC_PI_2,
        },
    };
    let (mut length, mut map) = (0.0, Mat2::identity());
    (0..bounces)
        .map(|_| {
            let Event::Wall(hit) = tracer.next(&ray) else {
                return None;
            };
            length += hit.distance;
            map = reflection(hit.curvature, incidence(ray.direction, &hit))
                * flight(hit.distance)
                * map;
            ray = Tracer::reflect(ray.direction, &hit);
            Some(Visit {
                point: hit.point,
                direction: ray.direction,
                length,
                map,
                wall: hit.wall,
            })
        })
        .collect()
}

/// Newton's method on the return map; the visits of the periodic point.
fn shoot(
    tracer: &Tracer,
    symmetry: &Symmetry,
    element: usize,
    n: usize,
    mut start: Start,
) -> Option<(Start, Vec<Visit>)> {
    let inverse = symmetry.inverse(element);
    for _ in 0..10 {
        let visits = follow(tracer, start, n)?;
        let last = visits[n - 1];
        if last.wall.is_multiple_of(2) {
            return None;
        }
        let back = Start::of(
            symmetry.apply(inverse, last.point),
            symmetry.turn(inverse, last.direction),
        );
        // Transverse displacement and direction angle; the tangent points to the right of the ray.
        let cosine = start.angle.cos();
        let (place, angle) = (back.place - start.place, back.angle - start.angle);
        let mismatch = Vec2::new(-place * cosine, place - angle);
        if mismatch.norm() < 1e-11 {
            return Some((start, visits));
        }
        let map = last.map * symmetry.elements[element].det();
        let shift = (Mat2::identity() - map).try_inverse()? * mismatch;
        let moved = -shift.x / cosine;
        start.place += moved;
        start.angle += moved - shift.y;
        if start.place.abs() > FRAC_PI_2 || start.angle.abs() > FRAC_PI_2 {
            return None;
        }
    }
    None
}

type Phase = (Vec2, Vec2);

fn same(symmetry: &Symmetry, a: Phase, b: Phase) -> bool {
    (0..symmetry.order()).any(|g| {
        (symmetry.apply(g, a.0) - b.0).norm() < 1e-6 && (symmetry.turn(g, a.1) - b.1).norm() < 1e-6
    })
}

struct Found {
    length: f64,
    phases: Vec<Phase>,
}

/// All primitive orbits up to symmetry and time reversal.
fn brute_force(domain: &Domain, symmetry: &Symmetry) -> Vec<Found> {
    let tracer = Tracer::new(domain);
    let mut found: Vec<Found> = Vec::new();
    for i in 0..GRID.0 {
        for j in 0..GRID.1 {
            let start = Start {
                place: FRAC_PI_2 * (i as f64 + 0.37) / GRID.0 as f64,
                angle: PI * (j as f64 + 0.41) / GRID.1 as f64 - FRAC_PI_2,
            };
            let Some(visits) = follow(&tracer, start, MAX_BOUNCES) else {
                continue;
            };
            for n in 1..=MAX_BOUNCES {
                if visits[n - 1].length > MAX_LENGTH + 0.2 || visits[n - 1].wall.is_multiple_of(2) {
                    continue;
                }
                for element in 0..symmetry.order() {
                    let image = symmetry.apply(element, start.phase().0);
                    if (image - visits[n - 1].point).norm() < 0.1
                        && let Some((start, visits)) = shoot(&tracer, symmetry, element, n, start)
                    {
                        add(symmetry, &mut found, start, &visits);
                    }
                }
            }
        }
    }
    found
}

fn add(symmetry: &Symmetry, found: &mut Vec<Found>, start: Start, visits: &[Visit]) {
    let n = visits.len();
    let length = visits[n - 1].length;
    let mut phases = vec![start.phase()];
    phases.extend(
        visits[..n - 1]
            .iter()
            .map(|visit| (visit.point, visit.direction)),
    );
    let primitive = phases[1..]
        .iter()
        .all(|&later| !same(symmetry, phases[0], later));
    // Newton may also run into a ray along the wall, which closes at once.
    if !(1e-3..=MAX_LENGTH + 1e-9).contains(&length) || !primitive {
        return;
    }
    let reversed = (visits[0].point, -phases[0].1);
    let known = found.iter().any(|other| {
        other.phases.len() == n
            && (other.length - length).abs() < 1e-8
            && other
                .phases
                .iter()
                .any(|&phase| same(symmetry, phase, phases[0]) || same(symmetry, phase, reversed))
    });
    if !known {
        found.push(Found { length, phases });
    }
}

#[test]
fn finds_the_same_orbits() {
    let domain = system::load(Path::new("billiards/stadium.toml"), &[])
        .expect("a shipped file")
        .domain;
    let symmetry = detect(&domain);
    let limits = Limits {
        max_length: MAX_LENGTH,
        max_bounces: MAX_BOUNCES,
    };
    let catalogue = Catalogue::find(&domain, &symmetry, limits);
    let listed: Vec<(f64, usize)> = catalogue
        .orbits
        .iter()
        .filter(|orbit| matches!(orbit.kind, OrbitKind::Isolated | OrbitKind::Axis))
        .map(|orbit| (orbit.length, orbit.bounces()))
        .collect();
    let mut found: Vec<(f64, usize)> = brute_force(&domain, &symmetry)
        .into_iter()
        // Orbits through a joint, recognised by a bounce at (+-1, +-1), are not isolated on both sides.
        .filter(|orbit| {
            !orbit
                .phases
                .iter()
                .any(|(point, _)| (point.abs() - Vec2::new(1.0, 1.0)).norm() < 1e-6)
        })
        .map(|orbit| (orbit.length, orbit.phases.len()))
        .collect();
    found.sort_by(|a, b| a.0.total_cmp(&b.0));
    assert_eq!(listed.len(), 70);
    assert_eq!(found.len(), listed.len());
    for (one, other) in listed.iter().zip(&found) {
        assert!((one.0 - other.0).abs() < 1e-8, "{one:?} and {other:?}");
    }
}
