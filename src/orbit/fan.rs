//! Fans of rays from one point of a wall, refined until neighbouring rays tell the same story.

use crate::billiard::{
    Domain, Event, Mat2, Origin, Ray, Tracer, Vec2, flight, incidence, left, reflection,
};
use std::f64::consts::FRAC_PI_2;

/// How far rays are followed.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Reach {
    pub(crate) length: f64,
    pub(crate) bounces: usize,
    /// Stop at the first curved wall (the search for strips).
    pub(crate) straight_only: bool,
}

/// How finely a fan is resolved.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Resolution {
    /// Rays before refinement.
    pub(crate) rays: usize,
    /// Neighbours whose bounce points lie further apart than this, or on other walls, are refined.
    pub(crate) spread: f64,
    /// Neighbours closer than this angle (radians) are not refined further.
    pub(crate) smallest_gap: f64,
}

/// One bounce of a ray.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Step {
    pub(crate) wall: usize,
    pub(crate) t: f64,
    pub(crate) point: Vec2,
    /// Direction after the bounce.
    pub(crate) direction: Vec2,
    /// Linearised map from the start.
    pub(crate) map: Mat2,
}

/// A ray followed from a wall.
#[derive(Clone, Debug)]
pub(crate) struct Track {
    pub(crate) start: Vec2,
    pub(crate) direction: Vec2,
    pub(crate) steps: Vec<Step>,
    /// The ray ran into a corner or along a wall before its limits.
    stopped: bool,
}

/// A point of a wall from which fans are shot.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Source {
    pub(crate) wall: usize,
    pub(crate) t: f64,
    pub(crate) point: Vec2,
    pub(crate) tangent: Vec2,
    /// Distance to the neighbouring sources along the wall.
    pub(crate) spacing: f64,
}

impl Track {
    fn empty() -> Self {
        Self {
            start: Vec2::zeros(),
            direction: Vec2::zeros(),
            steps: Vec::new(),
            stopped: false,
        }
    }

    /// Follows the ray that leaves `source` along `direction`, in the memory of this track.
    fn follow(
        &mut self,
        domain: &Domain,
        tracer: &Tracer,
        source: &Source,
        direction: Vec2,
        reach: &Reach,
    ) {
        self.start = source.point;
        self.direction = direction;
        self.steps.clear();
        self.stopped = false;
        let mut ray = Ray {
            point: source.point,
            direction,
            origin: Origin::Wall {
                wall: source.wall,
                t: source.t,
            },
        };
        let mut length = 0.0;
        let mut map = Mat2::identity();
        while self.steps.len() < reach.bounces {
            let Event::Wall(hit) = tracer.next(&ray) else {
                self.stopped = true;
                break;
            };
            length += hit.distance;
            let cosine = incidence(ray.direction, &hit);
            if length > reach.length
                || (reach.straight_only && !domain.walls[hit.wall].is_straight())
            {
                break;
            }
            map = reflection(hit.curvature, cosine) * (flight(hit.distance) * map);
            ray = Tracer::reflect(ray.direction, &hit);
            self.steps.push(Step {
                wall: hit.wall,
                t: hit.t,
                point: hit.point,
                direction: ray.direction,
                map,
            });
        }
    }
}

/// Follows the ray that leaves `source` along `direction`.
pub(crate) fn follow_direction(
    domain: &Domain,
    tracer: &Tracer,
    source: &Source,
    direction: Vec2,
    reach: &Reach,
) -> Track {
    let mut track = Track::empty();
    track.follow(domain, tracer, source, direction, reach);
    track
}

/// Angle beyond the normal, radians, to which a fan reaches on the other side: an orbit that leaves its wall along the
/// normal next to a joint or a corner may have its neighbours on one side only.
const BEYOND_NORMAL: f64 = 0.15;

/// Shoots a refined fan from one source over angles from a little below 0 to pi/2 and shows every ray to `visit`.
///
/// The other side of the normal is not needed: an orbit that leaves the source there is, run backwards, one that leaves it
/// on this side.
pub(crate) fn shoot(
    domain: &Domain,
    tracer: &Tracer,
    source: &Source,
    reach: &Reach,
    resolution: &Resolution,
    visit: &mut dyn FnMut(&Track),
) {
    let width = (FRAC_PI_2 + BEYOND_NORMAL) / resolution.rays as f64;
    let angle = |i: usize| (i as f64 + 0.5) * width - BEYOND_NORMAL;
    let mut spare: Vec<Track> = Vec::new();
    let mut at = |angle: f64, spare: &mut Vec<Track>| {
        let mut track = spare.pop().unwrap_or_else(Track::empty);
        let direction = left(source.tangent) * angle.cos() + source.tangent * angle.sin();
        track.follow(domain, tracer, source, direction, reach);
        visit(&track);
        track
    };
    let mut near = (angle(0), at(angle(0), &mut spare));
    // Rays still to be compared with `near`, the nearest one on top.
    let mut waiting: Vec<(f64, Track)> = Vec::new();
    for i in 1..resolution.rays {
        waiting.push((angle(i), at(angle(i), &mut spare)));
        while let Some((high, track)) = waiting.pop() {
            if high - near.0 > largest_gap(&near.1, &track, resolution) {
                let middle = 0.5 * (near.0 + high);
                waiting.push((high, track));
                waiting.push((middle, at(middle, &mut spare)));
            } else {
                spare.push(std::mem::replace(&mut near, (high, track)).1);
            }
        }
    }
}

/// The angle between two neighbouring rays above which a third is wanted between them; infinite if they tell the same story.
///
/// Where they meet different walls but stay close, as on both sides of a smooth joint, the return map is continuous, but
/// each word has its own orbits: there a coarser resolution is enough.
fn largest_gap(a: &Track, b: &Track, resolution: &Resolution) -> f64 {
    let (mut walls, mut points) = (false, false);
    for (x, y) in a.steps.iter().zip(&b.steps) {
        walls |= x.wall != y.wall;
        points |= (x.point - y.point).norm_squared() > resolution.spread * resolution.spread;
    }
    let cut_short =
        |short: &Track, long: &Track| short.stopped && short.steps.len() < long.steps.len();
    // Without a limit of distance the walls alone decide.
    let words = walls && resolution.spread.is_infinite();
    if points || words || cut_short(a, b) || cut_short(b, a) {
        resolution.smallest_gap
    } else if walls {
        WORDS_ALONE * resolution.smallest_gap
    } else {
        f64::INFINITY
    }
}

/// How much coarser the resolution may be where rays differ by the walls alone.
const WORDS_ALONE: f64 = 2.0;
