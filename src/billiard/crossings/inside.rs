//! Which points lie inside the domain.

use super::piece::{self, Bounds, Piece};
use crate::billiard::{Domain, Role, Vec2, detect};

/// Pieces of walls shorter than this fraction of the domain's size are taken to be straight.
const SHORTEST: f64 = 1e-15;
/// Points along each side of the bounding box that are tried for a point well inside.
const GRID: usize = 11;
/// Times the distance from a wall is halved in the search for a point inside a thin domain.
const HALVINGS: i32 = 40;

/// Tells which points lie inside a domain: its walls cut into pieces once, for many questions.
///
/// A ray to the right is counted through the walls. A piece of a wall is replaced by its chord where the point lies outside a
/// box around both, and halved where it does not.
#[derive(Debug)]
pub struct Interior<'a> {
    domain: &'a Domain,
    /// Pieces of each loop's walls.
    loops: Vec<Vec<Piece>>,
}

impl<'a> Interior<'a> {
    /// Cuts the walls into pieces.
    #[must_use]
    pub fn new(domain: &'a Domain) -> Self {
        let loops = domain
            .loops
            .iter()
            .map(|chain| {
                let walls = chain.walls.clone();
                walls
                    .flat_map(|wall| piece::of_wall(domain, wall))
                    .collect()
            })
            .collect();
        Self { domain, loops }
    }

    /// Does the point lie inside the outline and outside all holes? Points on a wall may count either way; thin walls
    /// have no inside.
    #[must_use]
    pub fn contains(&self, point: Vec2) -> bool {
        let odd = (0..self.loops.len())
            .filter(|&index| self.domain.loops[index].role != Role::Slit)
            .filter(|&index| self.encloses(index, point))
            .count();
        odd % 2 == 1
    }

    /// Does one closed chain of walls enclose the point?
    pub(super) fn encloses(&self, chain: usize, point: Vec2) -> bool {
        let crossings: usize = self.loops[chain]
            .iter()
            .map(|piece| self.crossings(piece, point))
            .sum();
        crossings % 2 == 1
    }

    /// Crossings (modulo 2) of the ray from the point to the right with a piece.
    fn crossings(&self, piece: &Piece, point: Vec2) -> usize {
        let flat = piece.bulge == 0.0 || piece.extent() <= SHORTEST * self.domain.size;
        if flat || !piece.bounds.contains(point) {
            return usize::from(chord_crosses(piece.start, piece.end, point));
        }
        piece
            .halves(&self.domain.walls[piece.wall])
            .iter()
            .map(|half| self.crossings(half, point))
            .sum()
    }

    /// Corners of a box around all walls.
    fn bounds(&self) -> Bounds {
        let corners: Vec<Vec2> = self
            .loops
            .iter()
            .flatten()
            .flat_map(|piece| [piece.bounds.low, piece.bounds.high])
            .collect();
        Bounds::of(&corners)
    }
}

impl Domain {
    /// Does the point lie inside? For many points of one domain use [`Interior`].
    #[must_use]
    pub fn contains(&self, point: Vec2) -> bool {
        Interior::new(self).contains(point)
    }

    /// A point inside the domain, away from its walls where possible: the one of a grid (and the centre of area) that is
    /// farthest from all walls.
    #[must_use]
    pub fn interior_point(&self) -> Vec2 {
        let boundary = detect::Boundary::new(self);
        let clearance = |point: Vec2| {
            boundary
                .nearest(point, self.size, |_, _| true)
                .map_or(0.0, |frame| (frame.point - point).norm())
        };
        let interior = Interior::new(self);
        let bounds = interior.bounds();
        let span = bounds.high - bounds.low;
        let grid = (0..GRID * GRID).map(|i| {
            let part = |j: usize| (j as f64 + 0.5) / GRID as f64;
            bounds.low + Vec2::new(span.x * part(i % GRID), span.y * part(i / GRID))
        });
        grid.chain([detect::centroid(self)])
            .filter(|&point| interior.contains(point))
            .map(|point| (clearance(point), point))
            .filter(|&(distance, _)| distance > 0.0)
            .max_by(|a, b| a.0.total_cmp(&b.0))
            .map_or_else(|| self.beside_a_wall(&interior), |(_, point)| point)
    }

    /// A point beside the middle of a wall, for domains so thin that no grid point hits them.
    fn beside_a_wall(&self, interior: &Interior) -> Vec2 {
        let frame = self.walls[0].frame(0.5 * self.walls[0].extent());
        (2..HALVINGS)
            .map(|halvings| frame.point + frame.normal() * (self.size * 0.5_f64.powi(halvings)))
            .find(|&point| interior.contains(point))
            .unwrap_or(frame.point)
    }
}

/// Does the ray from the point to the right cross the segment? Ends count as above the ray when they are level with it, so
/// that neighbouring segments share their common end correctly.
fn chord_crosses(start: Vec2, end: Vec2, point: Vec2) -> bool {
    if (start.y >= point.y) == (end.y >= point.y) {
        return false;
    }
    let part = (point.y - start.y) / (end.y - start.y);
    start.x + part * (end.x - start.x) > point.x
}
