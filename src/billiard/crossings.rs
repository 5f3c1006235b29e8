//! Walls that cross or touch, and what lies inside the walls.

mod contact;
mod inside;
mod piece;

use super::{Domain, GeometryError, Role, Vec2};
use contact::Contacts;
pub use inside::Interior;
use piece::{Bounds, Piece};

/// Walls that come closer than this fraction of the domain's size touch: the same error up to which a loop may stay open.
const TOUCHING: f64 = 1e-9;
/// Two walls that meet at a vertex are not compared within this fraction of the size from it (nor within a quarter of
/// the shorter one): where they meet smoothly, errors of 1e-9 in their ends move their intersection by the square root.
const NEAR_VERTEX: f64 = 1e-4;

impl Domain {
    /// Checks that walls meet at their common vertices only, that no curve crosses itself, and that holes and thin walls lie
    /// inside the outline and outside each other.
    ///
    /// Lines and arcs are compared exactly; pieces of curves are halved until boxes around them are apart or shorter
    /// than 1e-9 of the domain's size, with boxes estimated from second and third derivatives at three points. Walls that
    /// meet at a vertex are not compared within 1e-4 of the size from it.
    ///
    /// # Errors
    /// [`GeometryError::Crossing`], [`GeometryError::Outside`], and [`GeometryError::Irregular`] for a thin wall that touches
    /// another wall (thin walls must stand free).
    pub fn check_crossings(&self) -> Result<(), GeometryError> {
        let pieces = piece::all(self);
        let contacts = Contacts {
            domain: self,
            touching: TOUCHING * self.size,
        };
        for (first, second) in near_pairs(&pieces, contacts.touching) {
            if let Some(at) = contacts.of(&pieces[first], &pieces[second]) {
                return Err(self.contact_error(pieces[first].wall, pieces[second].wall, at));
            }
        }
        self.check_nesting()
    }

    fn contact_error(&self, wall: usize, other: usize, at: Vec2) -> GeometryError {
        let (wall, other) = (wall.max(other), wall.min(other));
        let thin = [wall, other]
            .into_iter()
            .find(|&index| self.walls[index].twin.is_some());
        match thin {
            Some(thin) if self.loop_index(wall) != self.loop_index(other) => {
                GeometryError::Irregular {
                    wall: thin,
                    t: 0.0,
                    what: format!(
                        "this thin wall touches another wall at ({}, {}): a thin wall must stand free inside the outline",
                        at.x, at.y
                    ),
                }
            }
            _ => GeometryError::Crossing { wall, other, at },
        }
    }

    fn loop_index(&self, wall: usize) -> Option<usize> {
        self.loops
            .iter()
            .position(|chain| chain.walls.contains(&wall))
    }

    /// Loops do not cross: one point of each decides where it lies.
    fn check_nesting(&self) -> Result<(), GeometryError> {
        let interior = Interior::new(self);
        for (index, chain) in self.loops.iter().enumerate() {
            let point = self.walls[chain.walls.start].start();
            for (other, outer) in self.loops.iter().enumerate() {
                if other == index || outer.role == Role::Slit {
                    continue;
                }
                let must_be_inside = outer.role == Role::Outer;
                if chain.role != Role::Outer && interior.encloses(other, point) != must_be_inside {
                    return Err(GeometryError::Outside {
                        wall: chain.walls.start,
                    });
                }
            }
        }
        Ok(())
    }
}

/// Pairs of pieces whose boxes come closer than `gap`, by a sweep along x.
fn near_pairs(pieces: &[Piece], gap: f64) -> Vec<(usize, usize)> {
    let boxes: Vec<Bounds> = pieces.iter().map(|piece| piece.bounds.grown(gap)).collect();
    let mut order: Vec<usize> = (0..pieces.len()).collect();
    order.sort_by(|&a, &b| boxes[a].low.x.total_cmp(&boxes[b].low.x));
    let mut active: Vec<usize> = Vec::new();
    let mut pairs = Vec::new();
    for index in order {
        active.retain(|&other| boxes[other].high.x >= boxes[index].low.x);
        pairs.extend(
            active
                .iter()
                .filter(|&&other| boxes[other].meets(&boxes[index]))
                .map(|&other| (other.min(index), other.max(index))),
        );
        active.push(index);
    }
    pairs.sort_unstable();
    pairs
}
