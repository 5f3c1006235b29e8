//! Search for all periodic orbits with a bounce on a curved wall.
//!
//! From a set of points on the curved walls (one symmetry copy of them) refined fans of rays are shot. Wherever a ray comes
//! back near the image of its start under a group element, the linearised return map says how far the nearest periodic
//! point is; if it is near, Newton's method on the length function takes over. The search is repeated with a finer start
//! set until a whole pass adds nothing.

use super::analyse::{self, Setting};
use super::fan::{Reach, Resolution, Source, Step, Track, shoot};
use super::passes::{Gain, Pass, Plan, sources, until_settled};
use super::path::{Bounce, ClosedPath, LengthForm, Link, Workspace, refine};
use super::periodic::{Orbit, OrbitKind, OrbitPoint};
use super::phase::Phase;
use crate::billiard::{Domain, Isometry, Mat2, Shape, Symmetry, Vec2, Wall, left};
use rayon::prelude::*;
use std::collections::{HashMap, HashSet};
use std::hash::{BuildHasher, Hasher};

/// Sources on the curved walls in the first pass, for one symmetry copy.
const FIRST_SOURCES: usize = 12;
/// Rays of a fan before refinement.
const FIRST_RAYS: usize = 40;
/// Smallest angle between rays in the first pass, radians.
const FIRST_GAP: f64 = 5e-5;
/// Neighbouring rays may land this far apart, as a fraction of the size, before they are refined.
const SPREAD: f64 = 0.25;
/// What the search from curved walls finds.
#[derive(Default)]
pub(crate) struct Curved {
    /// Isolated orbits, shortest first.
    pub(crate) orbits: Vec<Orbit>,
    /// Families that are not isolated.
    pub(crate) families: Vec<CurvedFamily>,
    /// What the passes did.
    pub(crate) passes: Vec<Pass>,
}

/// All orbits with a curved bounce up to the limits of `setting`.
pub(crate) fn curved_orbits(setting: &Setting) -> Curved {
    let mut all = Curved::default();
    if setting.domain.walls.iter().all(Wall::is_straight) {
        return all;
    }
    let plan = Plan {
        sources: FIRST_SOURCES,
        resolution: Resolution {
            rays: FIRST_RAYS,
            spread: SPREAD * setting.domain.size,
            smallest_gap: FIRST_GAP,
        },
        straight: false,
    };
    all.passes = until_settled(setting, &plan, |sources, resolution| {
        let found: Vec<Harvest> = sources
            .par_iter()
            .map(|source| from_source(setting, source, resolution, &all.orbits))
            .collect();
        let before = all.orbits.len();
        let rays = found.iter().map(|harvest| harvest.rays).sum();
        for harvest in found {
            for orbit in harvest.orbits {
                insert(setting, &mut all.orbits, orbit);
            }
            for family in harvest.families {
                join_family(&mut all.families, family);
            }
        }
        Gain {
            rays,
            added: all.orbits.len() - before,
        }
    });
    sort(&mut all.orbits);
    all.families.sort_by(|a, b| a.length.total_cmp(&b.length));
    all
}

/// A coarse search: how many orbits it finds, and how many rays it follows.
pub(crate) fn scout(setting: &Setting) -> (usize, usize) {
    let domain = setting.domain;
    let resolution = Resolution {
        rays: FIRST_RAYS,
        spread: SPREAD * domain.size,
        smallest_gap: SCOUT_GAP,
    };
    let sources = sources(setting, SCOUT_SOURCES, false);
    let found: Vec<Harvest> = sources
        .par_iter()
        .map(|source| from_source(setting, source, &resolution, &[]))
        .collect();
    let rays = found.iter().map(|harvest| harvest.rays).sum();
    let mut orbits = Vec::new();
    for orbit in found.into_iter().flat_map(|harvest| harvest.orbits) {
        insert(setting, &mut orbits, orbit);
    }
    (orbits.len(), rays)
}

/// Sources and smallest angle of a coarse search: it finds most orbits at a twentieth of the cost.
const SCOUT_SOURCES: usize = 4;
const SCOUT_GAP: f64 = 1e-3;

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

/// Adds an orbit unless it, or its reverse, is there up to symmetry. An orbit through a joint may be found with either wall
/// of the joint; that with more bounces on curved walls stays, since the bounces at joints must be variables of its length.
pub(crate) fn insert(setting: &Setting, orbits: &mut Vec<Orbit>, orbit: Orbit) {
    match position(setting, orbits, &orbit) {
        None => orbits.push(orbit),
        Some(index) => {
            let curved = |orbit: &Orbit| {
                let is_curved =
                    |point: &&OrbitPoint| !setting.domain.walls[point.wall].is_straight();
                orbit.points.iter().filter(is_curved).count()
            };
            if curved(&orbit) > curved(&orbits[index]) {
                orbits[index] = orbit;
            }
        }
    }
}

fn position(setting: &Setting, orbits: &[Orbit], orbit: &Orbit) -> Option<usize> {
    let comparison = &setting.comparison;
    let mut own: Option<[Vec<Phase>; 2]> = None;
    orbits.iter().position(|other| {
        if (other.length - orbit.length).abs() > SAME_LENGTH * orbit.length
            || other.points.len() != orbit.points.len()
        {
            return false;
        }
        let [ahead, back] = own.get_or_insert_with(|| {
            [
                comparison.ahead(&orbit.points, orbit.symmetry),
                comparison.reversed(&orbit.points, orbit.symmetry),
            ]
        });
        let there = comparison.ahead(&other.points, other.symmetry);
        comparison.meet(ahead, &there) || comparison.meet(back, &there)
    })
}

/// The periodic point may lie this many source spacings away.
const FAR_SPACINGS: f64 = 4.0;
/// The periodic direction may differ by this angle (radians).
const FAR_ANGLE: f64 = 0.3;

/// A family of orbits with bounces on curved walls, all of the same length (such as the two-bounce orbits of two facing arcs
/// that pass through each other's centres). Its term is not in the sum.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CurvedFamily {
    /// Length of the reduced orbits.
    pub length: f64,
    /// Their bounces.
    pub bounces: usize,
}

fn join_family(families: &mut Vec<CurvedFamily>, new: CurvedFamily) {
    let same = |family: &CurvedFamily| {
        family.bounces == new.bounces
            && (family.length - new.length).abs() < SAME_FAMILY * new.length
    };
    if !families.iter().any(same) {
        families.push(new);
    }
}

/// Members of a family agree in length to the square of the error of their points.
const SAME_FAMILY: f64 = 1e-6;

/// What one source adds.
struct Harvest {
    orbits: Vec<Orbit>,
    families: Vec<CurvedFamily>,
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
        nearby: Nearby::new(source),
        found: Vec::new(),
        families: Vec::new(),
        tried: HashSet::default(),
        space: Workspace::default(),
    };
    for orbit in known.iter().filter(|orbit| orbit.kind != OrbitKind::Joint) {
        hunt.nearby.add(setting, orbit);
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
            let mut kind = Kind {
                bounces: 0,
                curved: 0,
            };
            for n in 0..track.steps.len() {
                let step = &track.steps[n];
                kind.bounces += 1;
                if setting.domain.walls[step.wall].is_straight() {
                    continue;
                }
                // The bounce at step n is the image of that at the source.
                kind.curved += 1;
                for (element, &inverse) in inverses.iter().enumerate() {
                    if let Some(shift) = hunt.shift(track, step, inverse)
                        && !hunt.nearby.explains(track, kind, shift)
                    {
                        hunt.try_orbit(track, n, element);
                    }
                }
            }
        },
    );
    Harvest {
        orbits: hunt.found,
        families: hunt.families,
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
    families: Vec<CurvedFamily>,
    tried: HashSet<u64, Mixing>,
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
        // The sine stands for the angle: exact where it matters, when the ray nearly closes.
        let mismatch = Vec2::new(aside.dot(&back), aside.dot(&direction));
        if start.dot(&direction) < 0.0 {
            return None;
        }
        let map = step.map * symmetry.elements[inverse].det();
        let difference = Mat2::identity() - map;
        if difference.determinant().abs() < FAMILY_DETERMINANT {
            // In a family there is no nearest point; what nearly closes is refined.
            return (mismatch.norm() < FAMILY_MISMATCH).then_some(mismatch);
        }
        let shift = difference.try_inverse()? * mismatch;
        let cosine = start.dot(&left(self.source.tangent)).max(LEAST_COSINE);
        (shift.x.abs() < FAR_SPACINGS * self.source.spacing * cosine && shift.y.abs() < FAR_ANGLE)
            .then_some(shift)
    }

    /// The path in rough outline: the walls that it meets and the cells of its bounce points, hashed.
    fn outline(&self, track: &Track, last: usize, element: usize) -> u64 {
        let cell = OUTLINE_CELL * self.setting.domain.size;
        let mut hasher = Mixing.build_hasher();
        hasher.write_usize(element);
        for step in &track.steps[..=last] {
            let place = (step.point / cell).map(|x| x.floor() as i32);
            hasher.write_usize(step.wall);
            hasher.write_i32(place.x);
            hasher.write_i32(place.y);
        }
        hasher.finish()
    }

    fn try_orbit(&mut self, track: &Track, last: usize, element: usize) {
        let setting = self.setting;
        if !self.tried.insert(self.outline(track, last, element)) {
            return;
        }
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
        if self.nearby.has(
            Kind {
                bounces: path.count(),
                curved: path.bounces.len(),
            },
            first_phase(&path, &self.space.form),
        ) {
            return;
        }
        if let Some(orbit) = analyse::orbit(setting, &path, &self.space.form) {
            if orbit.is_marginal() {
                join_family(
                    &mut self.families,
                    CurvedFamily {
                        length: orbit.length,
                        bounces: orbit.bounces(),
                    },
                );
            } else {
                // The other side of a joint must not be taken for explained.
                if orbit.kind != OrbitKind::Joint {
                    self.nearby.add(setting, &orbit);
                }
                insert(setting, &mut self.found, orbit);
            }
        }
    }
}

/// |det(1 - M)| of a ray below which it runs in a family of orbits.
const FAMILY_DETERMINANT: f64 = 1e-7;
/// How nearly (length and angle) a ray in a family must close to be refined.
const FAMILY_MISMATCH: f64 = 0.1;
/// Cells, as a fraction of the size, into which bounce points are sorted: paths whose points lie in the same cells lead
/// Newton's method to the same orbit, since they differ by less than the steps it is allowed to take.
const OUTLINE_CELL: f64 = 0.12;

/// Cosine below which a grazing ray's window is not narrowed further.
const LEAST_COSINE: f64 = 0.05;
/// A known orbit explains a candidate if it lies within this fraction of the predicted shift from the predicted place.
const EXPLAINS: f64 = 0.3;

/// A hash of small integer keys that costs a few multiplications (FNV-1a on words): the keys come from our own geometry, so
/// no one can choose them to collide.
#[derive(Clone, Copy, Default)]
struct Mixing;

impl BuildHasher for Mixing {
    type Hasher = Mixer;
    fn build_hasher(&self) -> Mixer {
        Mixer(0xcbf2_9ce4_8422_2325)
    }
}

struct Mixer(u64);

impl Mixer {
    fn mix(&mut self, value: u64) {
        self.0 = (self.0 ^ value).wrapping_mul(0x0000_0100_0000_01b3);
        self.0 ^= self.0 >> 29;
    }
}

impl Hasher for Mixer {
    fn finish(&self) -> u64 {
        self.0
    }
    fn write(&mut self, bytes: &[u8]) {
        bytes.iter().for_each(|&byte| self.mix(u64::from(byte)));
    }
    fn write_i32(&mut self, value: i32) {
        self.mix(u64::from(value.cast_unsigned()));
    }
    fn write_u64(&mut self, value: u64) {
        self.mix(value);
    }
    fn write_usize(&mut self, value: usize) {
        self.mix(value as u64);
    }
}

/// How many bounces an orbit has, in all and on curved walls. Orbits that differ in this are never taken for each other,
/// however close they are: next to a joint an orbit with one wall of it lies beside one with the other.
#[derive(Clone, Copy)]
struct Kind {
    bounces: usize,
    curved: usize,
}

impl Kind {
    fn of(domain: &Domain, walls: impl Iterator<Item = usize>) -> Self {
        walls.fold(
            Self {
                bounces: 0,
                curved: 0,
            },
            |kind, wall| Self {
                bounces: kind.bounces + 1,
                curved: kind.curved + usize::from(!domain.walls[wall].is_straight()),
            },
        )
    }
}

/// Phase points of known orbits near a source, sorted into cells by number of bounces, place along the wall and direction.
struct Nearby {
    origin: Vec2,
    tangent: Vec2,
    /// Size of a cell: length along the wall, and component of the direction along the wall.
    cell: [f64; 2],
    window: f64,
    cells: HashMap<[i32; 4], Vec<Phase>, Mixing>,
}

impl Nearby {
    fn new(source: &Source) -> Self {
        Self {
            origin: source.point,
            tangent: source.tangent,
            // No explained candidate lies further from its prediction than this.
            cell: [
                EXPLAINS * FAR_SPACINGS.hypot(FAR_ANGLE) * source.spacing.max(LEAST_CELL),
                EXPLAINS * FAR_SPACINGS.hypot(FAR_ANGLE),
            ],
            window: 2.0 * FAR_SPACINGS * source.spacing,
            cells: HashMap::default(),
        }
    }

    fn cell(&self, kind: Kind, point: Vec2, direction: Vec2) -> [i32; 4] {
        let place = self.tangent.dot(&(point - self.origin)) / self.cell[0];
        let along = self.tangent.dot(&direction) / self.cell[1];
        [
            kind.bounces as i32,
            kind.curved as i32,
            place.floor() as i32,
            along.floor() as i32,
        ]
    }

    fn add(&mut self, setting: &Setting, orbit: &Orbit) {
        let kind = Kind::of(setting.domain, orbit.points.iter().map(|point| point.wall));
        let ahead = setting.comparison.ahead(&orbit.points, orbit.symmetry);
        let back = setting.comparison.reversed(&orbit.points, orbit.symmetry);
        for (point, direction) in ahead.into_iter().chain(back) {
            for g in 0..setting.symmetry.order() {
                let image = setting.symmetry.apply(g, point);
                if (image - self.origin).norm_squared() < self.window * self.window {
                    let turned = setting.symmetry.turn(g, direction);
                    let cell = self.cell(kind, image, turned);
                    self.cells.entry(cell).or_default().push((image, turned));
                }
            }
        }
    }

    /// Is this phase point on a known orbit of that kind?
    fn has(&self, kind: Kind, (point, direction): Phase) -> bool {
        let [n, curved, place, along] = self.cell(kind, point, direction);
        let same = |phase: &Phase| {
            (phase.0 - point).norm_squared() + (phase.1 - direction).norm_squared()
                < SAME_PHASE * SAME_PHASE
        };
        (-1..=1).any(|i| {
            (-1..=1).any(|j| {
                self.cells
                    .get(&[n, curved, place + i, along + j])
                    .is_some_and(|cell| cell.iter().any(same))
            })
        })
    }

    /// Is there a known orbit of that kind where the shift points?
    fn explains(&self, track: &Track, kind: Kind, shift: Vec2) -> bool {
        let start = track.direction;
        let aside = left(start);
        let near = EXPLAINS * shift.norm() + SAME_LENGTH;
        // The predicted point, moved along the ray onto the tangent of the wall.
        let slant = aside.dot(&self.tangent);
        let slant = slant.abs().max(LEAST_COSINE).copysign(slant);
        let point = self.origin + self.tangent * (shift.x / slant);
        let [n, curved, place, along] = self.cell(kind, point, start + aside * shift.y);
        let explained = |phase: &Phase| {
            let x = aside.dot(&(phase.0 - track.start)) - shift.x;
            let y = aside.dot(&phase.1) - shift.y;
            x * x + y * y < near * near && start.dot(&phase.1) > 0.0
        };
        (-1..=1).any(|i| {
            (-1..=1).any(|j| {
                self.cells
                    .get(&[n, curved, place + i, along + j])
                    .is_some_and(|cell| cell.iter().any(explained))
            })
        })
    }
}

/// Refined phase points closer than this are the same.
const SAME_PHASE: f64 = 1e-7;

/// Position and direction just after the first bounce of a refined path.
fn first_phase(path: &ClosedPath, form: &LengthForm) -> Phase {
    let next = usize::from(path.bounces.len() > 1);
    let from = form.frames[0].point;
    let to: Vec2 = path.links[0].unfold.apply(form.frames[next].point);
    (from, (to - from) / form.chords[0])
}

/// Smallest size of a cell along the wall, as a part of the largest prediction: spacings are much below 1 only on short
/// walls.
const LEAST_CELL: f64 = 1e-3;

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
