//! Where two pieces of walls touch.

use super::NEAR_VERTEX;
use super::piece::Piece;
use crate::billiard::{Arc, Domain, Line, Shape, Vec2, cross, left};
use std::f64::consts::PI;

/// Sine of the angle below which two lines count as parallel; their ends are compared instead.
const PARALLEL: f64 = 1e-12;

/// Looks for contacts in a domain.
pub(super) struct Contacts<'a> {
    pub(super) domain: &'a Domain,
    /// Distance below which two walls touch.
    pub(super) touching: f64,
}

/// Points at which two walls may meet, and how far around them they are not compared.
struct Shared {
    points: Vec<Vec2>,
    radius: f64,
}

impl Shared {
    fn holds(&self, point: Vec2) -> bool {
        self.points
            .iter()
            .any(|shared| (shared - point).norm() <= self.radius)
    }

    fn holds_piece(&self, piece: &Piece) -> bool {
        self.points.iter().any(|shared| {
            [piece.start, piece.end]
                .iter()
                .all(|end| (end - shared).norm() + piece.bulge <= self.radius)
        })
    }
}

impl Contacts<'_> {
    /// A point at which two pieces touch although they should not.
    pub(super) fn of(&self, a: &Piece, b: &Piece) -> Option<Vec2> {
        let (first, second) = (&self.domain.walls[a.wall], &self.domain.walls[b.wall]);
        if first.twin == Some(b.wall) {
            return None;
        }
        if a.wall == b.wall && a.place.abs_diff(b.place) <= 1 {
            return None;
        }
        let shared = self.shared(a.wall, b.wall);
        let candidates = match (&first.shape, &second.shape) {
            (Shape::Line(p), Shape::Line(q)) => line_line(p, q),
            (Shape::Line(p), Shape::Arc(q)) | (Shape::Arc(q), Shape::Line(p)) => {
                line_arc(p, q, self.touching)
            }
            (Shape::Arc(p), Shape::Arc(q)) => arc_arc(p, q, self.touching),
            _ => return self.on_curves(a, b, &shared),
        };
        let probes = [first, second].into_iter().flat_map(|wall| {
            let middle = wall.point(0.5 * wall.extent());
            [wall.start(), middle, wall.end()]
        });
        candidates.into_iter().chain(probes).find(|&point| {
            !shared.holds(point)
                && self.distance(a.wall, point) <= self.touching
                && self.distance(b.wall, point) <= self.touching
        })
    }

    /// Vertices that two walls share; the faces of a thin wall share those of their twins too.
    fn shared(&self, a: usize, b: usize) -> Shared {
        let domain = self.domain;
        let faces = |wall: usize| [Some(wall), domain.walls[wall].twin].into_iter().flatten();
        let mut points = Vec::new();
        for first in faces(a) {
            for second in faces(b) {
                if domain.next(first) == second {
                    points.push(domain.vertices[second].point);
                }
                if domain.next(second) == first {
                    points.push(domain.vertices[first].point);
                }
            }
        }
        let shorter = domain.lengths[a].min(domain.lengths[b]);
        Shared {
            points,
            radius: (NEAR_VERTEX * domain.size).min(0.25 * shorter),
        }
    }

    /// Distance of a point from a straight wall or an arc.
    fn distance(&self, wall: usize, point: Vec2) -> f64 {
        match &self.domain.walls[wall].shape {
            Shape::Line(line) => {
                let span = line.end - line.start;
                let part = (point - line.start).dot(&span) / span.norm_squared();
                (line.start + span * part.clamp(0.0, 1.0) - point).norm()
            }
            Shape::Arc(arc) => {
                let radial = point - arc.center;
                if within_sweep(arc, radial) {
                    (radial.norm() - arc.radius).abs()
                } else {
                    let wall = &self.domain.walls[wall];
                    (wall.start() - point)
                        .norm()
                        .min((wall.end() - point).norm())
                }
            }
            Shape::Curve(_) => f64::INFINITY,
        }
    }

    /// Halves the longer of two pieces until they are apart or so short that they touch.
    fn on_curves(&self, a: &Piece, b: &Piece, shared: &Shared) -> Option<Vec2> {
        if a.apart(b, 0.0) || (shared.holds_piece(a) && shared.holds_piece(b)) {
            return None;
        }
        let (longer, other) = if a.extent() >= b.extent() {
            (a, b)
        } else {
            (b, a)
        };
        if longer.extent() <= self.touching {
            return Some(0.5 * (longer.start + longer.end)).filter(|&point| !shared.holds(point));
        }
        longer
            .halves(&self.domain.walls[longer.wall])
            .iter()
            .find_map(|half| self.on_curves(half, other, shared))
    }
}

/// Is the direction within the angles of the arc?
fn within_sweep(arc: &Arc, radial: Vec2) -> bool {
    let turned = (radial.y.atan2(radial.x) - arc.from) * arc.sweep.signum();
    turned.rem_euclid(2.0 * PI) <= arc.sweep.abs()
}

fn line_line(p: &Line, q: &Line) -> Vec<Vec2> {
    let (r, s) = (p.end - p.start, q.end - q.start);
    let sine = cross(r, s);
    if sine.abs() <= PARALLEL * r.norm() * s.norm() {
        return Vec::new();
    }
    vec![p.start + r * (cross(q.start - p.start, s) / sine)]
}

/// Points of the whole line on the whole circle; the foot of the perpendicular where it is a tangent within `touching`.
fn line_arc(line: &Line, arc: &Arc, touching: f64) -> Vec<Vec2> {
    let direction = (line.end - line.start).normalize();
    let foot = line.start + direction * (arc.center - line.start).dot(&direction);
    let distance = (foot - arc.center).norm();
    if distance > arc.radius + touching {
        return Vec::new();
    }
    let half = (arc.radius - distance) * (arc.radius + distance);
    let half = half.max(0.0).sqrt();
    let mut points = vec![foot - direction * half, foot + direction * half];
    if arc.radius - distance < touching {
        points.push(foot);
    }
    points
}

/// Common points of two circles; the point between them where they are tangent within `touching`.
fn arc_arc(p: &Arc, q: &Arc, touching: f64) -> Vec<Vec2> {
    let between = q.center - p.center;
    let distance = between.norm();
    let apart = distance > p.radius + q.radius + touching;
    let nested = distance < (p.radius - q.radius).abs() - touching;
    if apart || nested || distance <= touching {
        // Concentric circles touch only if they are the same; then the ends and middles of the arcs tell.
        return Vec::new();
    }
    let direction = between / distance;
    let along = 0.5 * (distance + (p.radius - q.radius) * (p.radius + q.radius) / distance);
    let half = ((p.radius - along) * (p.radius + along)).max(0.0).sqrt();
    let foot = p.center + direction * along;
    let touch = p.center + direction * (p.radius * along.signum());
    vec![
        foot + left(direction) * half,
        foot - left(direction) * half,
        touch,
    ]
}
