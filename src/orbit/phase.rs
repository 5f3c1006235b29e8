//! Comparison of orbits by the positions and directions of their bounces, under all group elements.

use super::periodic::OrbitPoint;
use crate::billiard::{Domain, Isometry, Line, Mat2, Shape, Symmetry, Vec2, VertexKind};

/// Points closer than this fraction of the size, with directions closer than this angle, are the same. Orbits are refined
/// to 1e-11, and distinct ones found so far differ by more than 1e-3.
const SAME: f64 = 1e-7;

/// Compares phase points up to symmetry.
pub(crate) struct Comparison<'a> {
    symmetry: &'a Symmetry,
    size: f64,
    /// Corners that do not diffract, with the reflections across their straight walls: a bounce in such a corner has no
    /// single direction, only one up to these reflections.
    corners: Vec<(Vec2, Vec<Mat2>)>,
}

impl<'a> Comparison<'a> {
    pub(crate) fn new(domain: &Domain, symmetry: &'a Symmetry) -> Self {
        let reflection = |wall: usize| match &domain.walls[wall].shape {
            Shape::Line(Line { start, end }) => Some(
                Isometry::reflection(&Line {
                    start: *start,
                    end: *end,
                })
                .linear,
            ),
            _ => None,
        };
        Self {
            symmetry,
            corners: domain
                .vertices
                .iter()
                .filter(|vertex| matches!(vertex.kind, VertexKind::Regular { .. }))
                .map(|vertex| {
                    let mirrors = [vertex.before, vertex.after]
                        .into_iter()
                        .filter_map(reflection);
                    (vertex.point, mirrors.collect())
                })
                .collect(),
            size: domain.size,
        }
    }

    /// Does `element` take phase point a (position, direction) to phase point b?
    pub(crate) fn takes(&self, element: usize, a: Phase, b: Phase) -> bool {
        let near = SAME * self.size;
        if (self.symmetry.apply(element, a.0) - b.0).norm_squared() > near * near {
            return false;
        }
        let direction = self.symmetry.turn(element, a.1);
        let same = |d: Vec2| (d - b.1).norm_squared() < SAME * SAME;
        same(direction)
            || self
                .corners
                .iter()
                .filter(|(corner, _)| (corner - b.0).norm_squared() < near * near)
                .any(|(_, mirrors)| mirrors.iter().any(|mirror| same(mirror * direction)))
    }

    /// The first element that takes a to b.
    pub(crate) fn element(&self, a: Phase, b: Phase) -> Option<usize> {
        (0..self.symmetry.order()).find(|&element| self.takes(element, a, b))
    }

    /// Do two orbits share a phase point up to symmetry?
    pub(crate) fn meet(&self, a: &[Phase], b: &[Phase]) -> bool {
        a.iter()
            .any(|x| b.iter().any(|y| self.element(*x, *y).is_some()))
    }

    /// Phase points of the orbit run backwards: at every bounce the direction after it is the reverse of the direction
    /// before it. The first bounce is replaced by its image under the closing element, which is known to be the same.
    pub(crate) fn reversed(&self, points: &[OrbitPoint], element: usize) -> Vec<Phase> {
        let n = points.len();
        (0..n)
            .map(|i| {
                let next = if i + 1 < n {
                    points[i + 1].point
                } else {
                    self.symmetry.apply(element, points[0].point)
                };
                (next, -points[i].direction)
            })
            .collect()
    }
}

/// Position and direction.
pub(crate) type Phase = (Vec2, Vec2);

/// Phase points just after the bounces.
pub(crate) fn phases(points: &[OrbitPoint]) -> Vec<Phase> {
    points
        .iter()
        .map(|point| (point.point, point.direction))
        .collect()
}
