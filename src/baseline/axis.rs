//! What rotations and reflections contribute to the counts of symmetry classes: N_g(k), the smooth part of the sum over
//! levels of the character of g.

use super::boundary::{curvatures, is_cusp};
use crate::billiard::{
    Boundary, Condition, Domain, Interior, Shape, Symmetry, Vec2, Vertex, cross, left,
};
use std::f64::consts::PI;

/// A point within this fraction of the domain's size of an axis, or of a wall, lies on it: ten times the error that
/// the detection of the symmetry group allows.
const ON_AXIS: f64 = 1e-8;
/// A crossing closer than this fraction of the size to a vertex on the axis is that vertex.
const SAME_CROSSING: f64 = 1e-6;
/// Steps in which arcs and curves are searched for crossings with an axis. A wall crosses an axis of symmetry at right
/// angles, so two crossings are never close together.
const STEPS: usize = 512;
/// Halvings of a step: down to rounding.
const HALVINGS: usize = 60;

/// N_g(k) = linear k + constant + inverse/k.
#[derive(Clone, Copy, Debug)]
pub(super) struct ElementCount {
    pub(super) linear: f64,
    pub(super) constant: f64,
    /// `None` where it is not known.
    pub(super) inverse: Option<f64>,
}

/// An end of an axis: where it runs into a wall or a corner.
struct End {
    /// Position along the axis.
    place: f64,
    condition: Condition,
    /// Inner angle of the corner, pi on a smooth wall.
    angle: f64,
    /// Curvature of the wall, `None` in a corner where the next order is not known.
    curvature: Option<f64>,
}

/// Count of a group element other than the identity.
pub(super) fn element_count(domain: &Domain, symmetry: &Symmetry, element: usize) -> ElementCount {
    let matrix = &symmetry.elements[element].matrix;
    if symmetry.elements[element].det() > 0.0 {
        return rotation_count(domain, symmetry.center, matrix[(0, 0)]);
    }
    let axis = symmetry
        .axes()
        .into_iter()
        .find(|&(reflection, _)| reflection == element)
        .map_or(Vec2::x(), |(_, direction)| direction);
    reflection_count(domain, symmetry.center, axis)
}

/// 1/(4 sin^2(theta/2)) if the centre lies inside the domain, with no further powers of 1/k.
///
/// Zero if the centre lies in a hole. Zero also if it lies on a thin wall: the rotation (then by half a turn) takes every point
/// near the centre to the other face, and no short path leads there.
fn rotation_count(domain: &Domain, center: Vec2, cosine: f64) -> ElementCount {
    let on_wall = Boundary::new(domain)
        .nearest(center, ON_AXIS * domain.size, |_, _| true)
        .is_some();
    let constant = if domain.contains(center) && !on_wall {
        1.0 / (2.0 * (1.0 - cosine))
    } else {
        0.0
    };
    ElementCount {
        linear: 0.0,
        constant,
        inverse: Some(0.0),
    }
}

/// N_g = length k/(2 pi) + sum over the ends of the axis of -+pi/(8 alpha) (D, N), the difference of the counts of both halves with N
/// and with D on the axis; next order at a smooth end of curvature kappa: -kappa/(16 pi k) for D, +3 kappa/(16 pi k) for N.
///
/// Where a thin wall lies along the axis, both halves have that wall's condition there in either case: this part of the axis
/// does not count. A cusp on the axis is an end with alpha = 2 pi, as the tip of a thin wall is.
fn reflection_count(domain: &Domain, center: Vec2, axis: Vec2) -> ElementCount {
    let section = AxisSection {
        domain,
        center,
        axis,
    };
    let ends = section.ends();
    let constant = ends
        .iter()
        .map(|end| end.condition.sign() * PI / (8.0 * end.angle))
        .sum();
    let inverse = ends
        .iter()
        .map(|end| {
            let factor = match end.condition {
                Condition::Dirichlet => -1.0,
                Condition::Neumann => 3.0,
            };
            end.curvature.map(|kappa| factor * kappa / (16.0 * PI))
        })
        .sum();
    ElementCount {
        linear: section.length(&ends) / (2.0 * PI),
        constant,
        inverse,
    }
}

/// An axis of symmetry in a domain.
struct AxisSection<'a> {
    domain: &'a Domain,
    center: Vec2,
    axis: Vec2,
}

impl AxisSection<'_> {
    /// Distance of a point from the axis, positive on its left.
    fn offset(&self, point: Vec2) -> f64 {
        cross(self.axis, point - self.center)
    }

    /// Position of a point along the axis.
    fn place(&self, point: Vec2) -> f64 {
        self.axis.dot(&(point - self.center))
    }

    fn is_on(&self, point: Vec2) -> bool {
        self.offset(point).abs() < ON_AXIS * self.domain.size
    }

    /// All ends, in the order of their places.
    fn ends(&self) -> Vec<End> {
        let at_vertices = self
            .domain
            .vertices
            .iter()
            .filter_map(|vertex| self.end_at(vertex));
        let on_walls = (0..self.domain.walls.len()).flat_map(|wall| self.crossings(wall));
        let mut ends: Vec<End> = at_vertices.chain(on_walls).collect();
        ends.sort_by(|a, b| a.place.total_cmp(&b.place));
        ends
    }

    /// The end at a vertex on the axis. The axis divides the inner angle there into halves, except where the walls on both
    /// sides of the vertex run along the axis.
    fn end_at(&self, vertex: &Vertex) -> Option<End> {
        let tangent = self.domain.walls[vertex.after].frame(0.0).tangent;
        let (sin, cos) = (0.5 * vertex.angle).sin_cos();
        let bisector = tangent * cos + left(tangent) * sin;
        if !self.is_on(vertex.point) || cross(bisector, self.axis).abs() > 0.5 {
            return None;
        }
        let [before, after] = curvatures(self.domain, vertex);
        let smooth = (vertex.angle - PI).abs() < ON_AXIS.sqrt();
        let curvature = if is_cusp(self.domain, vertex) {
            None
        } else if smooth {
            Some(0.5 * (before + after))
        } else {
            (before == 0.0 && after == 0.0).then_some(0.0)
        };
        Some(End {
            place: self.place(vertex.point),
            condition: self.domain.walls[vertex.after].condition,
            angle: vertex.angle,
            curvature,
        })
    }

    /// Ends inside a wall.
    fn crossings(&self, index: usize) -> Vec<End> {
        let wall = &self.domain.walls[index];
        let steps = match wall.shape {
            Shape::Line(_) => 1,
            _ => STEPS,
        };
        let (start, end) = (wall.start(), wall.end());
        if steps == 1 && self.is_on(start) && self.is_on(end) {
            return Vec::new();
        }
        let known: Vec<Vec2> = [start, end]
            .into_iter()
            .filter(|&point| self.is_on(point))
            .collect();
        let offset = |t: f64| self.offset(wall.point(t));
        (0..steps)
            .filter_map(|i| {
                let at = |i: usize| wall.extent() * i as f64 / steps as f64;
                let t = bisect(&offset, at(i), at(i + 1))?;
                let frame = wall.frame(t);
                let is_vertex = known
                    .iter()
                    .any(|vertex| (vertex - frame.point).norm() < SAME_CROSSING * self.domain.size);
                (!is_vertex).then_some(End {
                    place: self.place(frame.point),
                    condition: wall.condition,
                    angle: PI,
                    curvature: Some(frame.curvature),
                })
            })
            .collect()
    }

    /// Length of the axis inside the domain, without the parts along thin walls.
    fn length(&self, ends: &[End]) -> f64 {
        let interior = Interior::new(self.domain);
        ends.windows(2)
            .map(|pair| {
                let gap = pair[1].place - pair[0].place;
                let middle = 0.5 * (pair[0].place + pair[1].place);
                let point = self.center + self.axis * middle;
                let open = interior.contains(point) && !self.is_blocked(middle);
                if open { gap } else { 0.0 }
            })
            .sum()
    }

    /// Does a thin wall run along the axis here?
    fn is_blocked(&self, place: f64) -> bool {
        self.domain.walls.iter().any(|wall| {
            let (start, end) = (wall.start(), wall.end());
            let along = wall.is_straight() && self.is_on(start) && self.is_on(end);
            let (a, b) = (self.place(start), self.place(end));
            along && a.min(b) <= place && place <= a.max(b)
        })
    }
}

/// Root of a function in an interval at whose ends its signs differ.
fn bisect(value: &impl Fn(f64) -> f64, from: f64, to: f64) -> Option<f64> {
    let positive = value(from) >= 0.0;
    if positive == (value(to) >= 0.0) {
        return None;
    }
    let (mut low, mut high) = (from, to);
    for _ in 0..HALVINGS {
        let middle = 0.5 * (low + high);
        if (value(middle) >= 0.0) == positive {
            low = middle;
        } else {
            high = middle;
        }
    }
    Some(0.5 * (low + high))
}
