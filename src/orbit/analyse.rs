//! From a stationary closed path to a periodic orbit: is it real, is it primitive, what fixes it, how does it close?

use super::chain::chain_coefficient;
use super::joint;
use super::path::{ClosedPath, LengthForm};
use super::periodic::{Closure, Fixing, Orbit, OrbitKind, OrbitPoint};
use super::phase::{Comparison, Phase};
use crate::billiard::{
    Condition, Domain, Event, Mat2, Origin, Ray, Shape, Symmetry, Tracer, Vec2, VertexKind, cross,
    left,
};
use num_complex::Complex64;
use std::f64::consts::FRAC_PI_2;

/// A point may miss its wall, and a chord may end early, by this fraction of the domain's size.
const SLACK: f64 = 1e-8;
/// Determinants below this are zero: the closure belongs to a family.
const SINGULAR: f64 = 1e-7;
/// Bounces that meet the wall at less than this sine are grazing, and not real reflections.
const GRAZING: f64 = 1e-7;

/// What the analysis needs to know of the system.
pub(crate) struct Setting<'a> {
    pub(crate) domain: &'a Domain,
    pub(crate) symmetry: &'a Symmetry,
    pub(crate) tracer: &'a Tracer,
    pub(crate) comparison: Comparison<'a>,
    pub(crate) max_length: f64,
    pub(crate) max_bounces: usize,
}

/// Turns a stationary path into an orbit; `None` if it is not a real, primitive orbit within the limits.
pub(crate) fn orbit(setting: &Setting, path: &ClosedPath, form: &LengthForm) -> Option<Orbit> {
    let length = form.length();
    if length > setting.max_length || path.count() > setting.max_bounces {
        return None;
    }
    let points = bounce_points(setting, path, form)?;
    chords_are_free(setting, &points, path.element).then_some(())?;
    is_primitive(setting, &points, path.element).then_some(())?;
    let monodromy = path.monodromy(form, setting.symmetry.elements[path.element].det());
    let draft = Draft {
        element: path.element,
        length,
        monodromy: monodromy.matrix(),
        determinant: monodromy.determinant(),
        residual: form.residual(),
        points,
    };
    Some(finish(setting, draft, Some((path, form))))
}

/// What is known of an orbit before its symmetry is.
pub(crate) struct Draft {
    pub(crate) element: usize,
    pub(crate) length: f64,
    pub(crate) monodromy: Mat2,
    pub(crate) determinant: f64,
    pub(crate) residual: f64,
    pub(crate) points: Vec<OrbitPoint>,
}

/// Completes an orbit. `curved` holds path and length form of an orbit with bounces on curved walls; without it the orbit
/// is flat and its Hessian has no negative eigenvalue.
pub(crate) fn finish(
    setting: &Setting,
    draft: Draft,
    curved: Option<(&ClosedPath, &LengthForm)>,
) -> Orbit {
    let Draft {
        element,
        length,
        monodromy,
        determinant,
        residual,
        points,
    } = draft;
    let comparison = &setting.comparison;
    let here = comparison.ahead(&points, element);
    let partner = if comparison.meet(&comparison.reversed(&points, element), &here) {
        1
    } else {
        2
    };
    let fixed_by = fixing(setting, &points, element);
    let joint = points
        .iter()
        .any(|point| at_joint(setting.domain, point.point));
    // A flat orbit on an axis closes both with and without the reflection: in one of the two ways with its whole strip.
    let flat_family = curved.is_none() && fixed_by.len() > 1;
    let kind = match (joint, flat_family, fixed_by.len()) {
        (true, ..) => OrbitKind::Joint,
        (_, true, _) => OrbitKind::InStrip,
        (_, _, 1) => OrbitKind::Isolated,
        _ => OrbitKind::Axis,
    };
    let dirichlet = points
        .iter()
        .filter(|point| setting.domain.walls[point.wall].condition == Condition::Dirichlet)
        .count();
    let mut orbit = Orbit {
        word: word(&points),
        copies: copies(setting, &here, element),
        length,
        monodromy,
        determinant,
        symmetry: element,
        partner,
        kind,
        residual,
        dirichlet,
        fixed_by,
        closures: Vec::new(),
        chain: None,
        points,
    };
    orbit.chain = curved.and_then(|(path, form)| chain(setting, &orbit, path, form));
    orbit.closures = closures(setting, &orbit, curved);
    orbit
}

/// All bounce points, straight walls included; `None` if one lies beyond its wall or is not a reflection from inside.
fn bounce_points(
    setting: &Setting,
    path: &ClosedPath,
    form: &LengthForm,
) -> Option<Vec<OrbitPoint>> {
    let domain = setting.domain;
    let slack = SLACK * domain.size;
    let n = path.bounces.len();
    let mut points = Vec::with_capacity(path.count());
    for i in 0..n {
        let bounce = path.bounces[i];
        let extent = domain.walls[bounce.wall].extent();
        let room = slack / form.frames[i].speed.max(SLACK);
        if bounce.t < -room || bounce.t > extent + room || form.cosines[i] < GRAZING {
            return None;
        }
        let from = form.frames[i].point;
        let target = path.links[i].unfold.apply(form.frames[(i + 1) % n].point);
        let direction = (target - from) / form.chords[i];
        points.push(OrbitPoint {
            wall: bounce.wall,
            t: bounce.t,
            point: from,
            direction,
        });
        extend_along(domain, &mut points, &path.links[i].straight)?;
    }
    Some(points)
}

/// Bounce points of a path that leaves a wall at parameter t along `direction` and meets the straight `walls` in order, or
/// `None` if it misses one. Corners are no obstacle: several bounces may lie in one point.
pub(crate) fn bounce_along(
    domain: &Domain,
    wall: usize,
    t: f64,
    direction: Vec2,
    walls: &[usize],
) -> Option<Vec<OrbitPoint>> {
    let mut points = vec![OrbitPoint {
        wall,
        t,
        point: domain.walls[wall].point(t),
        direction,
    }];
    extend_along(domain, &mut points, walls)?;
    Some(points)
}

/// Follows the last of `points` along straight walls.
fn extend_along(domain: &Domain, points: &mut Vec<OrbitPoint>, walls: &[usize]) -> Option<()> {
    let slack = SLACK * domain.size;
    for &wall in walls {
        let OrbitPoint {
            point, direction, ..
        } = *points.last()?;
        let Shape::Line(line) = &domain.walls[wall].shape else {
            return None;
        };
        let tangent = (line.end - line.start).normalize();
        let facing = cross(tangent, direction);
        if facing > -GRAZING {
            return None;
        }
        let distance = cross(tangent, line.start - point) / facing;
        let here = point + direction * distance;
        let t = tangent.dot(&(here - line.start));
        if distance < -slack || t < -slack || t > domain.lengths[wall] + slack {
            return None;
        }
        let normal = left(tangent);
        points.push(OrbitPoint {
            wall,
            t,
            point: here,
            direction: direction - normal * (2.0 * direction.dot(&normal)),
        });
    }
    Some(())
}

/// Does every chord run through the interior, without meeting a wall before its end?
pub(crate) fn chords_are_free(setting: &Setting, points: &[OrbitPoint], element: usize) -> bool {
    let slack = SLACK * setting.domain.size;
    let n = points.len();
    (0..n).all(|i| {
        let from = points[i];
        let to = if i + 1 < n {
            points[i + 1].point
        } else {
            setting.symmetry.apply(element, points[0].point)
        };
        let length = (to - from.point).norm();
        if length < slack {
            return true;
        }
        let ray = Ray {
            point: from.point,
            direction: (to - from.point) / length,
            origin: origin(setting.domain, from),
        };
        match setting.tracer.next(&ray) {
            Event::Wall(hit) | Event::Corner { hit, .. } => hit.distance > length - slack,
            Event::Escaped => false,
        }
    })
}

/// A bounce point as the start of a ray; in a corner both walls are left.
fn origin(domain: &Domain, from: OrbitPoint) -> Origin {
    let near = SLACK * domain.size;
    let after = domain.next(from.wall);
    for vertex in [from.wall, after] {
        if (domain.vertices[vertex].point - from.point).norm() < near {
            return Origin::Vertex(vertex);
        }
    }
    Origin::Wall {
        wall: from.wall,
        t: from.t,
    }
}

pub(crate) fn is_primitive(setting: &Setting, points: &[OrbitPoint], element: usize) -> bool {
    let here = setting.comparison.ahead(points, element);
    here.iter()
        .skip(1)
        .all(|&later| setting.comparison.element(here[0], later).is_none())
}

/// The elements that fix every point of the orbit, and the reflection across the walls that it runs along.
fn fixing(setting: &Setting, points: &[OrbitPoint], element: usize) -> Vec<Fixing> {
    let symmetry = setting.symmetry;
    let near = SLACK * setting.domain.size;
    let end = symmetry.apply(element, points[0].point);
    let fixes = |h: usize| {
        points
            .iter()
            .map(|point| point.point)
            .chain([end])
            .all(|point| (symmetry.apply(h, point) - point).norm() < near)
    };
    let mut fixed: Vec<Fixing> = (0..symmetry.order())
        .filter(|&h| fixes(h))
        .map(Fixing::Element)
        .collect();
    if let Some(sign) = wall_followed(setting, points, element) {
        fixed.push(Fixing::Wall(sign));
    }
    fixed
}

/// Sign of the straight walls that every chord of the orbit runs along, if it does.
fn wall_followed(setting: &Setting, points: &[OrbitPoint], element: usize) -> Option<f64> {
    let n = points.len();
    let mut sign = None;
    for i in 0..n {
        let from = points[i].point;
        let to = if i + 1 < n {
            points[i + 1].point
        } else {
            setting.symmetry.apply(element, points[0].point)
        };
        if (to - from).norm() < SLACK * setting.domain.size {
            continue;
        }
        sign = Some(wall_along(setting.domain, from, to)?);
    }
    sign
}

/// Sign of the straight wall that the chord runs along.
pub(crate) fn wall_along(domain: &Domain, from: Vec2, to: Vec2) -> Option<f64> {
    wall_within(domain, from, to, SLACK * domain.size)
}

/// Sign of the straight wall that the chord runs along from end to end, to within a distance. A wall that covers a part of the
/// chord only, such as a slit, is none: the orbit meets its tips, and what a reflection across it would add is diffraction.
pub(crate) fn wall_within(domain: &Domain, from: Vec2, to: Vec2, near: f64) -> Option<f64> {
    domain.walls.iter().find_map(|wall| {
        let Shape::Line(line) = &wall.shape else {
            return None;
        };
        let tangent = (line.end - line.start).normalize();
        let off = |p: Vec2| cross(tangent, p - line.start).abs();
        let length = (line.end - line.start).norm();
        let beside = |p: Vec2| (-near..=length + near).contains(&tangent.dot(&(p - line.start)));
        let along = |p: Vec2| off(p) < near && beside(p);
        (along(from) && along(to)).then_some(wall.condition.sign())
    })
}

/// Is the point a joint of the outline?
pub(crate) fn at_joint(domain: &Domain, point: Vec2) -> bool {
    domain.vertices.iter().any(|vertex| {
        vertex.kind == VertexKind::Joint && (vertex.point - point).norm() < SLACK * domain.size
    })
}

/// Smallest m for which g^m takes the first phase point to itself.
pub(crate) fn copies(setting: &Setting, here: &[Phase], element: usize) -> usize {
    let mut power = element;
    let mut count = 1;
    while !setting.comparison.takes(power, here[0], here[0]) && count <= setting.symmetry.order() {
        power = setting.symmetry.product[element][power];
        count += 1;
    }
    count
}

fn closures(
    setting: &Setting,
    orbit: &Orbit,
    curved: Option<(&ClosedPath, &LengthForm)>,
) -> Vec<Closure> {
    let repetitions = (setting.max_length / orbit.length * (1.0 + 1e-12)).floor() as u32;
    let mut found = Vec::new();
    let mut power = Mat2::identity();
    for repetition in 1..=repetitions {
        power = orbit.monodromy * power;
        for &fixing in &orbit.fixed_by {
            let sign = match fixing {
                Fixing::Element(h) => setting.symmetry.elements[h].det(),
                Fixing::Wall(_) => -1.0,
            };
            // det(h M - 1) = 2 - tr(h M) for det M = 1.
            let determinant = (2.0 - sign * power.trace()).abs();
            // The chain coefficients of a joint stay finite where the one-sided determinant vanishes.
            if determinant < SINGULAR && orbit.chain.is_none() {
                continue;
            }
            let negative = curved.map_or(0, |(_, form)| {
                form.hessian.repeated(repetition as usize, sign).negative()
            });
            let amplitude = match (orbit.chain, orbit.kind, curved) {
                (Some(c), ..) => chain_coefficient(repetition, c),
                (None, OrbitKind::Joint, Some((path, form))) => {
                    joint::amplitude(setting, path, form, repetition as usize, sign)
                }
                _ => Some(Complex64::from_polar(
                    1.0 / determinant.sqrt(),
                    -FRAC_PI_2 * negative as f64,
                )),
            };
            found.push(Closure {
                repetition,
                fixing,
                determinant,
                negative,
                amplitude,
            });
        }
    }
    found
}

/// The parameter of the chain coefficients, if the orbit hits one joint per period and, with the curved wall replaced by the
/// straight one that it joins, belongs to a strip.
fn chain(setting: &Setting, orbit: &Orbit, path: &ClosedPath, form: &LengthForm) -> Option<f64> {
    let flips = if orbit.bounces().is_multiple_of(2) {
        1.0
    } else {
        -1.0
    };
    let flat = flips * setting.symmetry.elements[orbit.symmetry].det();
    let single = path.bounces.len() == 1 && at_joint(setting.domain, form.frames[0].point);
    (single && flat > 0.0).then(|| form.length() * form.frames[0].curvature / form.cosines[0])
}

/// Wall numbers from 1, starting where the sequence is smallest.
pub(crate) fn word(points: &[OrbitPoint]) -> String {
    let walls: Vec<usize> = points.iter().map(|point| point.wall + 1).collect();
    let n = walls.len();
    let best = (0..n)
        .min_by_key(|&shift| (0..n).map(|i| walls[(shift + i) % n]).collect::<Vec<_>>())
        .unwrap_or(0);
    (0..n)
        .map(|i| walls[(best + i) % n].to_string())
        .collect::<Vec<_>>()
        .join("-")
}
