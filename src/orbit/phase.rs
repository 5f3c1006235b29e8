//! Comparison of orbits by the positions and directions of their bounces, under all group elements.

use super::periodic::OrbitPoint;
use crate::billiard::{Domain, Symmetry, Vec2};

/// Points closer than this fraction of the size, with directions closer than this angle, are the same. Orbits are refined
/// to 1e-11, and distinct ones found so far differ by more than 1e-3.
const SAME: f64 = 1e-7;

/// Position and direction.
pub(crate) type Phase = (Vec2, Vec2);

/// Compares phase points up to symmetry.
pub(crate) struct Comparison<'a> {
    symmetry: &'a Symmetry,
    near: f64,
}

impl<'a> Comparison<'a> {
    pub(crate) fn new(domain: &Domain, symmetry: &'a Symmetry) -> Self {
        Self {
            symmetry,
            near: SAME * domain.size,
        }
    }

    /// Does `element` take phase point a to phase point b?
    pub(crate) fn takes(&self, element: usize, a: Phase, b: Phase) -> bool {
        (self.symmetry.apply(element, a.0) - b.0).norm_squared() < self.near * self.near
            && (self.symmetry.turn(element, a.1) - b.1).norm_squared() < SAME * SAME
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

    /// Start, end and direction of each flight of an orbit closed by `element`. Several bounces in one corner are joined by
    /// flights without length, which are left out: only the direction after the last of them means anything.
    fn flights(&self, points: &[OrbitPoint], element: usize) -> Vec<(Vec2, Vec2, Vec2)> {
        let n = points.len();
        (0..n)
            .map(|i| {
                let end = if i + 1 < n {
                    points[i + 1].point
                } else {
                    self.symmetry.apply(element, points[0].point)
                };
                (points[i].point, end, points[i].direction)
            })
            .filter(|(start, end, _)| (end - start).norm_squared() > self.near * self.near)
            .collect()
    }

    /// Phase points of an orbit just after its bounces.
    pub(crate) fn ahead(&self, points: &[OrbitPoint], element: usize) -> Vec<Phase> {
        self.flights(points, element)
            .into_iter()
            .map(|(start, _, direction)| (start, direction))
            .collect()
    }

    /// Phase points of the orbit run backwards.
    pub(crate) fn reversed(&self, points: &[OrbitPoint], element: usize) -> Vec<Phase> {
        self.flights(points, element)
            .into_iter()
            .map(|(_, end, direction)| (end, -direction))
            .collect()
    }
}
