//! Search for all periodic orbits with a bounce on a curved wall.
//!
//! From a set of points on the curved walls (one symmetry copy of them) refined fans of rays are shot. Wherever a ray comes
//! back near the image of its start under a group element, the linearised return map says how far the nearest periodic
//! point is; if it is near, Newton's method on the length function takes over. The search is repeated with a finer start
//! set until a whole pass adds nothing.

use super::analyse::{self, Setting};
use super::fan::{Reach, Resolution, Source, Step, Track, shoot};
use super::path::{Bounce, ClosedPath, Link, Workspace, refine};
use super::periodic::Orbit;
use super::phase::{Phase, phases};
use crate::billiard::{Domain, Isometry, Mat2, Shape, Symmetry, Vec2, left};
use rayon::prelude::*;

/// What one pass of the search did.
#[derive(Clone, Copy, Debug)]
pub struct Pass {
    /// Points on the walls from which fans were shot.
    pub sources: usize,
    /// Smallest angle between neighbouring rays, radians.
    pub smallest_gap: f64,
    /// Rays followed.
    pub rays: usize,
    /// Orbits that no earlier pass had found.
    pub added: usize,
}

/// Sources on the curved walls in the first pass, for one symmetry copy.
const FIRST_SOURCES: usize = 24;
/// Rays of a fan before refinement.
const FIRST_RAYS: usize = 40;
/// Smallest angle between rays in the first pass, radians.
const FIRST_GAP: f64 = 1e-3;
/// Neighbouring rays may land this far apart, as a fraction of the size, before they are refined.
const SPREAD: f64 = 0.1;
/// Number of passes after which the search gives up on settling; what is still being added then is said in the output.
const MOST_PASSES: usize = 6;
/// Each pass has this many times the sources of the one before, and gaps smaller by the same factor.
const REFINEMENT: f64 = 1.6;
/// Passes without anything new after which the search is complete.
const QUIET_PASSES: usize = 1;

/// All orbits with a curved bounce up to the limits of `setting`, shortest first, and what the passes did.
pub(crate) fn curved_orbits(setting: &Setting) -> (Vec<Orbit>, Vec<Pass>) {
    let mut orbits: Vec<Orbit> = Vec::new();
    let mut passes: Vec<Pass> = Vec::new();
    if setting.domain.walls.iter().all(|wall| wall.is_straight()) {
        return (orbits, passes);
    }
    let mut quiet = 0;
    for pass in 0..MOST_PASSES {
        let factor = REFINEMENT.powi(pass as i32);
        let resolution = Resolution {
            rays: (FIRST_RAYS as f64 * factor.sqrt()) as usize,
            spread: SPREAD * setting.domain.size,
            smallest_gap: FIRST_GAP / factor,
        };
        let wanted = (FIRST_SOURCES as f64 * factor).round() as usize;
        let sources = sources(setting.domain, setting.symmetry, wanted, |wall| {
            !setting.domain.walls[wall].is_straight()
        });
        let found: Vec<Harvest> = sources
            .par_iter()
            .map(|source| from_source(setting, source, &resolution, &orbits))
            .collect();
        let before = orbits.len();
        let rays = found.iter().map(|harvest| harvest.rays).sum();
        for orbit in found.into_iter().flat_map(|harvest| harvest.orbits) {
            insert(setting, &mut orbits, orbit);
        }
        passes.push(Pass {
            sources: sources.len(),
            smallest_gap: resolution.smallest_gap,
            rays,
            added: orbits.len() - before,
        });
        quiet = if pass > 0 && orbits.len() == before {
            quiet + 1
        } else {
            0
        };
        if quiet >= QUIET_PASSES {
            break;
        }
    }
    sort(&mut orbits);
    (orbits, passes)
}

/// Shortest first; equal lengths by bounces and word, so that the order does not depend on rounding.
pub(crate) fn sort(orbits: &mut [Orbit]) {
    orbits.sort_by(|a, b| {
        if (a.length - b.length).abs() > SAME_LENGTH * a.length {
            a.length.total_cmp(&b.length)
        } else {
            (a.points.len(), &a.word).cmp(&(b.points.len(), &b.word))
        }
    });
}

/// Orbits whose lengths differ by more than this (relative) are different ones.
const SAME_LENGTH: f64 = 1e-9;

/// Adds an orbit unless it, or its reverse, is there up to symmetry.
pub(crate) fn insert(setting: &Setting, orbits: &mut Vec<Orbit>, orbit: Orbit) -> bool {
    let new = !is_known(setting, orbits, &orbit.points, orbit.symmetry, orbit.length);
    if new {
        orbits.push(orbit);
    }
    new
}

fn is_known(
    setting: &Setting,
    orbits: &[Orbit],
    points: &[super::periodic::OrbitPoint],
    element: usize,
    length: f64,
) -> bool {
    let comparison = &setting.comparison;
    let mut own: Option<[Vec<Phase>; 2]> = None;
    orbits
        .iter()
        .filter(|other| {
            (other.length - length).abs() < SAME_LENGTH * length
                && other.points.len() == points.len()
        })
        .any(|other| {
            let [ahead, back] =
                own.get_or_insert_with(|| [phases(points), comparison.reversed(points, element)]);
            let there = phases(&other.points);
            comparison.meet(ahead, &there) || comparison.meet(back, &there)
        })
}

/// Direction (generic on purpose) by which one of the symmetric copies of a point is chosen.
const GENERIC: Vec2 = Vec2::new(0.803_142_9, 0.595_779_3);
/// Sources sit at this fraction of their cell: a generic one, so that no ray is aimed at a corner or along an axis.
const OFFSET: f64 = 0.381_966;

/// About `wanted` points on one symmetry copy of the walls that `choose` selects, evenly spaced in arc length.
pub(crate) fn sources(
    domain: &Domain,
    symmetry: &Symmetry,
    wanted: usize,
    choose: impl Fn(usize) -> bool,
) -> Vec<Source> {
    let chosen: Vec<usize> = (0..domain.walls.len())
        .filter(|&wall| choose(wall))
        .collect();
    let total: f64 = chosen.iter().map(|&wall| domain.lengths[wall]).sum();
    let spacing = total / (wanted * symmetry.order()) as f64;
    let mut sources = Vec::new();
    for wall in chosen {
        let count = (domain.lengths[wall] / spacing).ceil().max(2.0) as usize;
        let extent = domain.walls[wall].extent();
        for i in 0..count {
            let t = extent * (i as f64 + OFFSET) / count as f64;
            let frame = domain.walls[wall].frame(t);
            if is_chosen_copy(symmetry, frame.point) {
                sources.push(Source {
                    wall,
                    t,
                    point: frame.point,
                    tangent: frame.tangent,
                    spacing: frame.speed * extent / count as f64,
                });
            }
        }
    }
    sources
}

fn is_chosen_copy(symmetry: &Symmetry, point: Vec2) -> bool {
    let height = |p: Vec2| (p - symmetry.center).dot(&GENERIC);
    let own = height(point);
    (1..symmetry.order()).all(|g| height(symmetry.apply(g, point)) <= own)
}

/// The periodic point may lie this many source spacings away.
const FAR_SPACINGS: f64 = 4.0;
/// The periodic direction may differ by this angle (radians).
const FAR_ANGLE: f64 = 0.8;

/// What one source adds.
struct Harvest {
    orbits: Vec<Orbit>,
    rays: usize,
}

fn from_source(
    setting: &Setting,
    source: &Source,
    resolution: &Resolution,
    known: &[Orbit],
) -> Harvest {
    let reach = Reach {
        length: setting.max_length + resolution.spread,
        bounces: setting.max_bounces,
        straight_only: false,
    };
    let mut hunt = Hunt {
        setting,
        source,
        spread: resolution.spread,
        nearby: Nearby::new(setting.max_bounces),
        found: Vec::new(),
        space: Workspace::default(),
    };
    for orbit in known {
        hunt.nearby.add(setting, source, orbit);
    }
    let inverses: Vec<usize> = (0..setting.symmetry.order())
        .map(|g| setting.symmetry.inverse(g))
        .collect();
    let mut rays = 0;
    shoot(
        setting.domain,
        setting.tracer,
        source,
        &reach,
        resolution,
        &mut |track| {
            rays += 1;
            for n in 0..track.steps.len() {
                let step = &track.steps[n];
                if setting.domain.walls[step.wall].is_straight() {
                    continue;
                }
                for (element, &inverse) in inverses.iter().enumerate() {
                    if let Some(shift) = hunt.shift(track, step, inverse)
                        && !hunt.nearby.explains(track, n + 1, shift)
                    {
                        hunt.try_orbit(track, n, element);
                    }
                }
            }
        },
    );
    Harvest {
        orbits: hunt.found,
        rays,
    }
}

/// The search from one source.
struct Hunt<'a> {
    setting: &'a Setting<'a>,
    source: &'a Source,
    spread: f64,
    nearby: Nearby,
    found: Vec<Orbit>,
    space: Workspace,
}

impl Hunt<'_> {
    /// Where the linearised return map puts the nearest periodic point, in (transverse displacement, angle) from the ray's
    /// start; `None` if that is far away.
    fn shift(&self, track: &Track, step: &Step, inverse: usize) -> Option<Vec2> {
        let symmetry = self.setting.symmetry;
        let back = symmetry.apply(inverse, step.point) - self.source.point;
        if back.norm_squared() > self.spread * self.spread {
            return None;
        }
        let direction = symmetry.turn(inverse, step.direction);
        let start = track.direction;
        let aside = left(start);
        let angle = aside.dot(&direction).atan2(start.dot(&direction));
        let mismatch = Vec2::new(aside.dot(&back), angle);
        let map = step.map * symmetry.elements[inverse].det();
        let shift = (Mat2::identity() - map).try_inverse()? * mismatch;
        let cosine = start.dot(&left(self.source.tangent)).max(LEAST_COSINE);
        (shift.x.abs() < FAR_SPACINGS * self.source.spacing * cosine && shift.y.abs() < FAR_ANGLE)
            .then_some(shift)
    }

    fn try_orbit(&mut self, track: &Track, last: usize, element: usize) {
        let setting = self.setting;
        let mut path = closed_path(
            setting.domain,
            setting.symmetry,
            self.source,
            &track.steps[..=last],
            element,
        );
        if refine(setting.domain, &mut path, &mut self.space).is_none() {
            return;
        }
        if let Some(orbit) = analyse::orbit(setting, &path, &self.space.form) {
            self.nearby.add(setting, self.source, &orbit);
            insert(setting, &mut self.found, orbit);
        }
    }
}

/// Cosine below which a grazing ray's window is not narrowed further.
const LEAST_COSINE: f64 = 0.05;
/// A known orbit explains a candidate if it lies within this fraction of the predicted shift from the predicted place.
const EXPLAINS: f64 = 0.15;

/// Phase points of known orbits near a source, by number of bounces.
struct Nearby {
    points: Vec<Vec<Phase>>,
}

impl Nearby {
    fn new(max_bounces: usize) -> Self {
        Self {
            points: vec![Vec::new(); max_bounces + 1],
        }
    }

    fn add(&mut self, setting: &Setting, source: &Source, orbit: &Orbit) {
        let window = 2.0 * FAR_SPACINGS * source.spacing;
        let ahead = phases(&orbit.points);
        let back = setting.comparison.reversed(&orbit.points, orbit.symmetry);
        for (point, direction) in ahead.into_iter().chain(back) {
            for g in 0..setting.symmetry.order() {
                let image = setting.symmetry.apply(g, point);
                if (image - source.point).norm_squared() < window * window {
                    self.points[orbit.bounces()].push((image, setting.symmetry.turn(g, direction)));
                }
            }
        }
    }

    /// Is there a known orbit with that many bounces where the shift points?
    fn explains(&self, track: &Track, bounces: usize, shift: Vec2) -> bool {
        let aside = left(track.direction);
        let near = EXPLAINS * shift.norm() + SAME_LENGTH;
        self.points[bounces].iter().any(|(point, direction)| {
            let place = aside.dot(&(point - track.start)) - shift.x;
            let angle = aside.dot(direction).atan2(track.direction.dot(direction)) - shift.y;
            place * place + angle * angle < near * near
        })
    }
}

/// The closed path that follows a ray from its source to a step near the source's image.
fn closed_path(
    domain: &Domain,
    symmetry: &Symmetry,
    source: &Source,
    steps: &[Step],
    element: usize,
) -> ClosedPath {
    let mut bounces = vec![Bounce {
        wall: source.wall,
        t: source.t,
    }];
    let mut links = Vec::new();
    let mut straight = Vec::new();
    let mut unfold = Isometry::identity();
    for (i, step) in steps.iter().enumerate() {
        let is_last = i + 1 == steps.len();
        if let Shape::Line(line) = &domain.walls[step.wall].shape
            && !is_last
        {
            unfold = unfold.after(&Isometry::reflection(line));
            straight.push(step.wall);
            continue;
        }
        if is_last {
            unfold = unfold.after(&Isometry::of_element(symmetry, element));
        } else {
            bounces.push(Bounce {
                wall: step.wall,
                t: step.t,
            });
        }
        links.push(Link {
            straight: std::mem::take(&mut straight),
            unfold: std::mem::replace(&mut unfold, Isometry::identity()),
        });
    }
    ClosedPath {
        bounces,
        links,
        element,
    }
}
