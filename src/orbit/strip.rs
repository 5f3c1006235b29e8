//! Strips of parallel orbits between straight walls, and the flat isolated orbits (odd ones and those on axes) among them.
//!
//! A ray that meets straight walls only is unfolded into a straight line. If the isometry that takes the start of the path
//! to its end has no linear part, all rays of the strip close along its translation; if it is a glide reflection, the one
//! ray along its axis closes.

use super::analyse::{self, Draft, Setting, bounce_along, chords_are_free, is_primitive};
use super::fan::{Reach, Resolution, Source, Track, follow_direction, shoot};
use super::passes::{Gain, Pass, Plan, until_settled};
use super::periodic::{Orbit, OrbitPoint};
use super::search::{insert, sort};
use crate::billiard::{
    Condition, Domain, Isometry, Mat2, Shape, Vec2, VertexKind, cross, flight, left,
};
use rayon::prelude::*;

/// What a strip's edge runs into.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum StripEdge {
    /// It runs along a straight wall; the wall's sign (-1 Dirichlet, +1 Neumann).
    Wall(f64),
    /// It ends in a corner that does not diffract.
    Regular,
    /// It ends at a joint, where the straight wall goes over into a curved one.
    Joint,
    /// It ends at a corner that diffracts (missing in the sum).
    Corner,
    /// It is cut off by a wall that it grazes (missing in the sum).
    Grazing,
}

/// A strip of parallel periodic orbits.
#[derive(Clone, Debug)]
pub struct Strip {
    /// Wall numbers (from 1) in the order of the bounces.
    pub word: String,
    /// The orbit near the middle of the strip.
    pub points: Vec<OrbitPoint>,
    /// Length of the reduced orbits.
    pub length: f64,
    /// Width, every orbit counted once: length x width is the area of the strip in (position, direction).
    pub width: f64,
    /// Product of the wall signs along the reduced orbit.
    pub sign: f64,
    /// Group element that closes the reduced orbit.
    pub symmetry: usize,
    /// Reduced orbits in the full one.
    pub copies: usize,
    /// 2 if the strip run backwards is another one (up to symmetry), else 1.
    pub partner: u8,
    /// Edges, each counted once.
    pub edges: Vec<StripEdge>,
    /// Where the strip leaves each wall: wall, interval of its parameter, direction.
    beams: Vec<Beam>,
}

#[derive(Clone, Copy, Debug)]
struct Beam {
    wall: usize,
    low: f64,
    high: f64,
    direction: Vec2,
}

impl Strip {
    /// Bounces of the reduced orbit.
    #[must_use]
    pub fn bounces(&self) -> usize {
        self.points.len()
    }

    /// Does something that leaves `point` of a wall along `direction` belong to the strip, up to symmetry?
    fn holds(&self, setting: &Setting, point: Vec2, direction: Vec2) -> bool {
        (0..setting.symmetry.order()).any(|g| {
            let at = setting.symmetry.apply(g, point);
            let along = setting.symmetry.turn(g, direction);
            self.beams
                .iter()
                .any(|beam| beam.holds(setting.domain, at, along).is_some())
        })
    }
}

impl Beam {
    /// Parameter at which the beam contains a phase point.
    fn holds(&self, domain: &Domain, point: Vec2, direction: Vec2) -> Option<f64> {
        let Shape::Line(line) = &domain.walls[self.wall].shape else {
            return None;
        };
        let tangent = (line.end - line.start).normalize();
        let offset = point - line.start;
        let t = tangent.dot(&offset);
        let near = SAME * domain.size;
        let inside = t > self.low - near && t < self.high + near;
        (inside
            && cross(tangent, offset).abs() < near
            && (direction - self.direction).norm() < SAME)
            .then_some(t)
    }
}

/// Linear parts closer to the identity than this are the identity, and directions closer than this are the same: formula
/// coordinates carry some 1e-10.
const SAME: f64 = 1e-8;
/// Sources on the straight walls in the first pass, for one symmetry copy.
const FIRST_SOURCES: usize = 16;
/// Rays of a fan before refinement.
const FIRST_RAYS: usize = 48;
/// Smallest angle between rays in the first pass, radians.
const FIRST_GAP: f64 = 2e-3;
/// Generic place inside a strip, where no orbit is special.
const GENERIC: f64 = 0.381_966;
/// Steps of the march from a known orbit of a strip to its edge, per wall.
const MARCH: usize = 128;

/// Strips and flat isolated orbits up to the limits of `setting`.
pub(crate) struct Flat {
    pub(crate) strips: Vec<Strip>,
    pub(crate) orbits: Vec<Orbit>,
    pub(crate) passes: Vec<Pass>,
}

/// Finds all strips and flat isolated orbits.
pub(crate) fn flat_orbits(setting: &Setting) -> Flat {
    let mut flat = Flat {
        strips: Vec::new(),
        orbits: Vec::new(),
        passes: Vec::new(),
    };
    let domain = setting.domain;
    if domain
        .walls
        .iter()
        .filter(|wall| wall.is_straight())
        .count()
        < 2
    {
        return flat;
    }
    let plan = Plan {
        sources: FIRST_SOURCES,
        resolution: Resolution {
            rays: FIRST_RAYS,
            spread: f64::INFINITY,
            smallest_gap: FIRST_GAP,
        },
        straight: true,
    };
    flat.passes = until_settled(setting, &plan, |sources, resolution| {
        let found: Vec<Candidates> = sources
            .par_iter()
            .map(|source| from_source(setting, source, resolution))
            .collect();
        let before = flat.strips.len() + flat.orbits.len();
        let rays = found.iter().map(|candidates| candidates.rays).sum();
        for candidates in found {
            for strip in candidates.strips {
                add_strip(setting, &mut flat.strips, strip);
            }
            for orbit in candidates.orbits {
                insert(setting, &mut flat.orbits, orbit);
            }
        }
        Gain {
            rays,
            added: flat.strips.len() + flat.orbits.len() - before,
        }
    });
    sort(&mut flat.orbits);
    flat.strips.sort_by(|a, b| {
        if (a.length - b.length).abs() > SAME * a.length {
            a.length.total_cmp(&b.length)
        } else {
            (a.points.len(), &a.word).cmp(&(b.points.len(), &b.word))
        }
    });
    flat
}

fn add_strip(setting: &Setting, strips: &mut Vec<Strip>, strip: Strip) {
    if !is_known(setting, strips, &strip.points, strip.symmetry) {
        strips.push(strip);
    }
}

fn is_known(setting: &Setting, strips: &[Strip], points: &[OrbitPoint], element: usize) -> bool {
    let ahead = points[0];
    let back = setting.comparison.reversed(points, element)[0];
    strips.iter().any(|strip| {
        strip.holds(setting, ahead.point, ahead.direction) || strip.holds(setting, back.0, back.1)
    })
}

#[derive(Default)]
struct Candidates {
    strips: Vec<Strip>,
    orbits: Vec<Orbit>,
    rays: usize,
}

fn from_source(setting: &Setting, source: &Source, resolution: &Resolution) -> Candidates {
    let reach = Reach {
        length: setting.max_length * (1.0 + 1e-6) + 0.1 * setting.domain.size,
        bounces: setting.max_bounces,
        straight_only: true,
    };
    let mut found = Candidates::default();
    let Some(own) = mirror(setting.domain, source.wall) else {
        return found;
    };
    shoot(
        setting.domain,
        setting.tracer,
        source,
        &reach,
        resolution,
        &mut |track| {
            found.rays += 1;
            let mut unfold = Isometry::identity();
            for n in 0..track.steps.len() {
                for element in 0..setting.symmetry.order() {
                    let closing = Isometry::of_element(setting.symmetry, element);
                    if !lands_on(setting, source, track, n, element) {
                        continue;
                    }
                    let total = unfold.after(&closing).after(&own);
                    consider(setting, source, track, n, element, &total, &mut found);
                }
                if let Some(reflection) = mirror(setting.domain, track.steps[n].wall) {
                    unfold = unfold.after(&reflection);
                }
            }
        },
    );
    found
}

fn mirror(domain: &Domain, wall: usize) -> Option<Isometry> {
    match &domain.walls[wall].shape {
        Shape::Line(line) => Some(Isometry::reflection(line)),
        _ => None,
    }
}

/// Does the group element take the source's wall to the wall of step n?
fn lands_on(setting: &Setting, source: &Source, track: &Track, n: usize, element: usize) -> bool {
    let Shape::Line(line) = &setting.domain.walls[track.steps[n].wall].shape else {
        return false;
    };
    let tangent = (line.end - line.start).normalize();
    let image = setting.symmetry.apply(element, source.point);
    let along = setting.symmetry.turn(element, source.tangent);
    let near = SAME * setting.domain.size;
    cross(tangent, image - line.start).abs() < near
        && (cross(tangent, along)).abs() < SAME
        && tangent.dot(&(image - line.start)) > -near
        && tangent.dot(&(image - line.end)) < near
}

fn consider(
    setting: &Setting,
    source: &Source,
    track: &Track,
    n: usize,
    element: usize,
    total: &Isometry,
    found: &mut Candidates,
) {
    let path = FlatPath {
        walls: track.steps[..n].iter().map(|step| step.wall).collect(),
        element,
    };
    if (total.linear - Mat2::identity()).norm() < SAME {
        if let Some(strip) = strip(setting, source, track, &path, total.shift, &found.strips) {
            found.strips.push(strip);
        }
    } else if total.linear.determinant() < 0.0
        && let Some(orbit) = glide_orbit(setting, source, track, &path, total)
    {
        insert(setting, &mut found.orbits, orbit);
    }
}

/// Straight walls met between the first bounce and its image under `element`.
struct FlatPath {
    walls: Vec<usize>,
    element: usize,
}

fn strip(
    setting: &Setting,
    source: &Source,
    track: &Track,
    path: &FlatPath,
    shift: Vec2,
    known: &[Strip],
) -> Option<Strip> {
    let length = shift.norm();
    let direction = shift / length;
    if length > setting.max_length * (1.0 + 1e-12) || direction.dot(&track.direction) < 0.5 {
        return None;
    }
    let domain = setting.domain;
    let n = path.walls.len() + 1;
    let leaves = |t: f64| Source {
        t,
        point: domain.walls[source.wall].point(t),
        ..*source
    };
    let reach = Reach {
        length: f64::INFINITY,
        bounces: n,
        straight_only: true,
    };
    let last_wall = track.steps[n - 1].wall;
    let same_word = |t: f64| {
        let ray = follow_direction(domain, setting.tracer, &leaves(t), direction, &reach);
        ray.steps.len() == n
            && ray.steps.iter().map(|step| step.wall).eq(path
                .walls
                .iter()
                .copied()
                .chain([last_wall]))
    };
    if !same_word(source.t) {
        return None;
    }
    let quick = bounce_along(domain, source.wall, source.t, direction, &path.walls)?;
    if is_known(setting, known, &quick, path.element) {
        return None;
    }
    let extent = domain.walls[source.wall].extent();
    let low = edge(source.t, 0.0, extent, &same_word);
    let high = edge(source.t, extent, extent, &same_word);
    let middle = bounce_along(
        domain,
        source.wall,
        low + GENERIC * (high - low),
        direction,
        &path.walls,
    )?;
    if !is_primitive(setting, &middle, path.element) {
        return None;
    }
    let own = Beam {
        wall: source.wall,
        low,
        high,
        direction,
    };
    let turns = own_visits(setting, &own, &middle);
    let cosine = direction.dot(&left(source.tangent));
    let mut edges = vec![classify(setting, source, direction, path, [low, high])];
    if turns == 1 {
        edges.push(classify(setting, source, direction, path, [high, low]));
    }
    let mut strip = Strip {
        word: analyse::word(&middle),
        length,
        width: (high - low) * cosine / turns as f64,
        sign: middle
            .iter()
            .map(|point| domain.walls[point.wall].condition)
            .map(Condition::sign)
            .product(),
        symmetry: path.element,
        copies: analyse::copies(
            setting,
            &setting.comparison.ahead(&middle, path.element),
            path.element,
        ),
        partner: 2,
        edges,
        beams: beams(setting, source, direction, path, [low, high])?,
        points: middle,
    };
    let back = setting.comparison.reversed(&strip.points, path.element)[0];
    if strip.holds(setting, back.0, back.1) {
        strip.partner = 1;
    }
    Some(strip)
}

/// The edge of the interval around `inside` towards `end` on which `valid` holds.
fn edge(inside: f64, end: f64, extent: f64, valid: &dyn Fn(f64) -> bool) -> f64 {
    let step = (end - inside).signum() * extent / MARCH as f64;
    let mut good = inside;
    let mut bad = end;
    let mut t = inside + step;
    while (end - t) * step > 0.0 {
        if !valid(t) {
            bad = t;
            break;
        }
        good = t;
        t += step;
    }
    for _ in 0..60 {
        let middle = 0.5 * (good + bad);
        if valid(middle) {
            good = middle;
        } else {
            bad = middle;
        }
    }
    0.5 * (good + bad)
}

/// How often one orbit of the strip passes through the beam that it starts in (twice if an odd orbit runs in its middle).
fn own_visits(setting: &Setting, own: &Beam, points: &[OrbitPoint]) -> usize {
    let mut places: Vec<f64> = Vec::new();
    for point in points {
        for g in 0..setting.symmetry.order() {
            let at = setting.symmetry.apply(g, point.point);
            let along = setting.symmetry.turn(g, point.direction);
            if let Some(t) = own.holds(setting.domain, at, along)
                && places
                    .iter()
                    .all(|other| (other - t).abs() > SAME * setting.domain.size)
            {
                places.push(t);
            }
        }
    }
    places.len().max(1)
}

fn beams(
    setting: &Setting,
    source: &Source,
    direction: Vec2,
    path: &FlatPath,
    ends: [f64; 2],
) -> Option<Vec<Beam>> {
    let domain = setting.domain;
    let from = bounce_along(domain, source.wall, ends[0], direction, &path.walls)?;
    let to = bounce_along(domain, source.wall, ends[1], direction, &path.walls)?;
    Some(
        from.iter()
            .zip(&to)
            .map(|(a, b)| Beam {
                wall: a.wall,
                low: a.t.min(b.t),
                high: a.t.max(b.t),
                direction: a.direction,
            })
            .collect(),
    )
}

/// What the edge at `ends[0]` of a strip that reaches to `ends[1]` runs into.
fn classify(
    setting: &Setting,
    source: &Source,
    direction: Vec2,
    path: &FlatPath,
    ends: [f64; 2],
) -> StripEdge {
    let domain = setting.domain;
    // Look at the orbit a little inside: walls and vertices that the edge touches are then this close.
    let inside = 1e-6 * (ends[1] - ends[0]);
    let Some(points) = bounce_along(
        domain,
        source.wall,
        ends[0] + inside,
        direction,
        &path.walls,
    ) else {
        return StripEdge::Grazing;
    };
    let near = 8.0 * inside.abs();
    let mut chords: Vec<(Vec2, Vec2)> = points
        .windows(2)
        .map(|pair| (pair[0].point, pair[1].point))
        .collect();
    let last = points[points.len() - 1];
    chords.push((
        last.point,
        setting.symmetry.apply(path.element, points[0].point),
    ));
    let touched: Vec<VertexKind> = domain
        .vertices
        .iter()
        .filter(|vertex| {
            chords
                .iter()
                .any(|&(from, to)| distance_to_segment(vertex.point, from, to) < near)
        })
        .map(|vertex| vertex.kind)
        .collect();
    if touched.contains(&VertexKind::Corner) {
        return StripEdge::Corner;
    }
    let along = chords
        .iter()
        .filter(|(from, to)| (to - from).norm() > 4.0 * near)
        .find_map(|&(from, to)| analyse::wall_within(domain, from, to, near));
    if let Some(sign) = along {
        return StripEdge::Wall(sign);
    }
    if touched.contains(&VertexKind::Joint) {
        StripEdge::Joint
    } else if touched
        .iter()
        .any(|kind| matches!(kind, VertexKind::Regular { .. }))
    {
        StripEdge::Regular
    } else {
        StripEdge::Grazing
    }
}

fn distance_to_segment(point: Vec2, from: Vec2, to: Vec2) -> f64 {
    let span = to - from;
    let along = ((point - from).dot(&span) / span.norm_squared()).clamp(0.0, 1.0);
    (point - from - span * along).norm()
}

/// The orbit along the axis of a glide reflection.
fn glide_orbit(
    setting: &Setting,
    source: &Source,
    track: &Track,
    path: &FlatPath,
    total: &Isometry,
) -> Option<Orbit> {
    // The linear part ((cos a, sin a), (sin a, -cos a)) keeps the direction at a/2.
    let half = 0.5 * total.linear[(0, 1)].atan2(total.linear[(0, 0)]);
    let mut direction = Vec2::new(half.cos(), half.sin());
    if direction.dot(&track.direction) < 0.0 {
        direction = -direction;
    }
    let length = direction.dot(&total.shift);
    if length <= 0.0
        || length > setting.max_length * (1.0 + 1e-12)
        || direction.dot(&track.direction) < 0.5
    {
        return None;
    }
    let on_axis = (total.shift - direction * length) * 0.5;
    let facing = cross(direction, source.tangent);
    let t = source.t + cross(direction, on_axis - source.point) / facing;
    let extent = setting.domain.walls[source.wall].extent();
    let near = SAME * setting.domain.size;
    if !(-near..=extent + near).contains(&t) {
        return None;
    }
    let points = bounce_along(setting.domain, source.wall, t, direction, &path.walls)?;
    chords_are_free(setting, &points, path.element).then_some(())?;
    is_primitive(setting, &points, path.element).then_some(())?;
    let residual = (total.apply(points[0].point) - points[0].point - direction * length).norm();
    let flips = if points.len() % 2 == 0 { 1.0 } else { -1.0 };
    let sign = flips * setting.symmetry.elements[path.element].det();
    Some(analyse::finish(
        setting,
        Draft {
            element: path.element,
            length,
            monodromy: flight(length) * sign,
            determinant: 1.0,
            residual,
            points,
        },
        None,
    ))
}
