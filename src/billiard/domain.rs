//! A flat domain: its walls in order, the vertices where they meet, area and perimeter.

use super::{Condition, Shape, Vec2, Wall, cross};
use std::ops::Range;
use thiserror::Error;

/// What a closed chain of walls bounds.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Role {
    /// The outer outline, counter-clockwise.
    Outer,
    /// A hole, walked clockwise so that the interior of the domain is on the left.
    Hole,
    /// A thin wall: one face there, the other face back.
    Slit,
}

/// A closed chain of walls.
#[derive(Clone, Debug)]
pub struct WallLoop {
    /// Indices of its walls in [`Domain::walls`].
    pub walls: Range<usize>,
    /// What it bounds.
    pub role: Role,
}

/// How two walls meet.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum VertexKind {
    /// Same tangent, same curvature, same condition: nothing happens here.
    Smooth,
    /// Same tangent, a jump of curvature.
    Joint,
    /// An angle pi/n between straight walls, or between a straight wall and an arc (n = 2), that does not diffract: a ray
    /// into it goes on after n reflections.
    Regular {
        /// Number of reflections.
        n: u32,
    },
    /// Any other corner (also a change of condition on a smooth wall): rays stop here, and it diffracts.
    Corner,
}

/// The point where wall `before` ends and wall `after` begins.
#[derive(Clone, Copy, Debug)]
pub struct Vertex {
    /// Position.
    pub point: Vec2,
    /// Wall that ends here.
    pub before: usize,
    /// Wall that begins here.
    pub after: usize,
    /// Inner angle in (0, 2 pi]; pi where the walls have the same tangent.
    pub angle: f64,
    /// Kind.
    pub kind: VertexKind,
}

/// A validated domain.
#[derive(Clone, Debug)]
pub struct Domain {
    /// All walls, loop by loop, the outer outline first.
    pub walls: Vec<Wall>,
    /// Closed chains of walls.
    pub loops: Vec<WallLoop>,
    /// `vertices[w]` is the vertex at the start of wall w.
    pub vertices: Vec<Vertex>,
    /// Area.
    pub area: f64,
    /// Total length of the walls, both faces of slits.
    pub perimeter: f64,
    /// Largest distance between two points of the bounding box: the size that tolerances refer to.
    pub size: f64,
    /// Arc length of each wall.
    pub lengths: Vec<f64>,
}

/// Why a chain of walls is not a domain. Wall numbers count from 0 through all loops in the order given.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum GeometryError {
    /// A loop does not close.
    #[error("the outline does not close: it ends at ({}, {}) and begins at ({}, {})", .end.x, .end.y, .start.x, .start.y)]
    Open {
        /// Last wall of the loop.
        wall: usize,
        /// Where the loop begins.
        start: Vec2,
        /// Where it ends.
        end: Vec2,
    },
    /// A wall without length.
    #[error("this wall has no length")]
    NoLength {
        /// The wall.
        wall: usize,
    },
    /// The outer outline runs clockwise.
    #[error("the outline runs clockwise: the interior must lie on its left")]
    Clockwise {
        /// First wall of the loop.
        wall: usize,
    },
    /// Two walls cross or touch.
    #[error("this wall crosses another one at ({}, {})", .at.x, .at.y)]
    Crossing {
        /// One wall.
        wall: usize,
        /// The other one.
        other: usize,
        /// Where.
        at: Vec2,
    },
    /// A hole or slit lies outside the outline or inside another hole.
    #[error("this wall does not lie inside the outline")]
    Outside {
        /// The wall.
        wall: usize,
    },
    /// Something on the wall is not a finite number, or its speed vanishes inside it.
    #[error("{what}")]
    Irregular {
        /// The wall.
        wall: usize,
        /// Parameter where it happens.
        t: f64,
        /// What happens there.
        what: String,
    },
}

/// Signed area of the closed chain of walls (counter-clockwise positive).
#[must_use]
pub(crate) fn signed_area(walls: &[Wall]) -> f64 {
    walls
        .iter()
        .map(|wall| super::quadrature::along(wall, |frame| 0.5 * cross(frame.point, frame.tangent)))
        .sum()
}

/// Two points closer than this fraction of the domain's size are the same point: a file written by hand, or by a program
/// that prints ten digits, must still close.
const CLOSING: f64 = 1e-9;
/// Tangents that differ by less than this angle (radians) meet smoothly.
const SAME_ANGLE: f64 = 1e-7;
/// Relative difference of curvatures (in units of 1/size) below which a smooth joint has no jump.
const SAME_CURVATURE: f64 = 1e-6;
/// Largest n for which an angle is recognised as pi/n.
const LARGEST_N: u32 = 64;

impl Domain {
    /// Builds a domain from closed chains of walls: the outer outline first (counter-clockwise), then holes (turned
    /// clockwise here if they are not) and slits (already there and back, with their twins set).
    ///
    /// # Errors
    /// A chain that does not close, has a wall without length, or an outline that runs clockwise. Crossings are looked for
    /// by [`Domain::check_crossings`].
    pub fn new(chains: Vec<(Role, Vec<Wall>)>) -> Result<Self, GeometryError> {
        let mut walls: Vec<Wall> = Vec::new();
        let mut loops = Vec::new();
        for (role, chain) in chains {
            let first = walls.len();
            let area = signed_area(&chain);
            check_chain(&chain, first)?;
            if role == Role::Outer && area <= 0.0 {
                return Err(GeometryError::Clockwise { wall: first });
            }
            if role == Role::Hole && area > 0.0 {
                walls.extend(chain.iter().rev().map(Wall::reversed));
            } else {
                walls.extend(chain);
            }
            loops.push(WallLoop {
                walls: first..walls.len(),
                role,
            });
        }
        let lengths: Vec<f64> = walls.iter().map(arc_length).collect();
        let size = bounding_size(&walls);
        let mut domain = Self {
            area: signed_area(&walls),
            perimeter: lengths.iter().sum(),
            lengths,
            size,
            vertices: Vec::new(),
            walls,
            loops,
        };
        domain.vertices = (0..domain.walls.len())
            .map(|wall| domain.meet(wall))
            .collect();
        Ok(domain)
    }

    /// The same domain with straight walls that continue each other, under the same condition, joined to one. How an outline
    /// is drawn then does not matter to what is found in it; walls are numbered anew.
    #[must_use]
    pub fn joined(&self) -> Self {
        let chains = self
            .loops
            .iter()
            .map(|chain| (chain.role, self.joined_loop(chain)))
            .collect();
        // A chain of fewer walls along the same points is a domain as the longer one was.
        Self::new(chains).unwrap_or_else(|_| self.clone())
    }

    fn joined_loop(&self, chain: &WallLoop) -> Vec<Wall> {
        let continues = |wall: usize| {
            let vertex = &self.vertices[wall];
            vertex.kind == VertexKind::Smooth
                && self.walls[vertex.before].is_straight()
                && self.walls[wall].is_straight()
        };
        let range = chain.walls.clone();
        // Begin where a wall does not continue the one before it.
        let Some(first) = range.clone().find(|&wall| !continues(wall)) else {
            return self.walls[range].to_vec();
        };
        if chain.role == Role::Slit {
            return self.walls[range].to_vec();
        }
        let mut joined: Vec<Wall> = Vec::new();
        for wall in (first..range.end).chain(range.start..first) {
            match (
                joined.last_mut().map(|last| &mut last.shape),
                &self.walls[wall].shape,
            ) {
                (Some(Shape::Line(last)), Shape::Line(line)) if continues(wall) => {
                    last.end = line.end
                }
                _ => joined.push(self.walls[wall].clone()),
            }
        }
        joined
    }

    /// Total length of the walls under one condition, both faces of slits.
    #[must_use]
    pub fn length_under(&self, condition: Condition) -> f64 {
        self.walls
            .iter()
            .zip(&self.lengths)
            .filter(|(wall, _)| wall.condition == condition)
            .map(|(_, length)| length)
            .sum()
    }

    /// The wall before `wall` in its loop.
    #[must_use]
    pub fn previous(&self, wall: usize) -> usize {
        let range = self.loop_of(wall);
        if wall == range.start {
            range.end - 1
        } else {
            wall - 1
        }
    }

    /// The wall after `wall` in its loop.
    #[must_use]
    pub fn next(&self, wall: usize) -> usize {
        let range = self.loop_of(wall);
        if wall + 1 == range.end {
            range.start
        } else {
            wall + 1
        }
    }

    fn loop_of(&self, wall: usize) -> Range<usize> {
        self.loops
            .iter()
            .map(|chain| chain.walls.clone())
            .find(|range| range.contains(&wall))
            .unwrap_or(0..self.walls.len())
    }

    /// Vertex at the start of a wall.
    fn meet(&self, after: usize) -> Vertex {
        let before = self.previous(after);
        let (a, b) = (&self.walls[before], &self.walls[after]);
        let (end, start) = (a.frame(a.extent()), b.frame(0.0));
        let turned = cross(end.tangent, start.tangent).atan2(end.tangent.dot(&start.tangent));
        // A thin wall's tip turns by half a turn to the right (the inner angle is 2 pi).
        let angle = if b.twin == Some(before) || is_cusp(a, b) {
            2.0 * std::f64::consts::PI
        } else {
            std::f64::consts::PI - turned
        };
        Vertex {
            point: start.point,
            before,
            after,
            angle,
            kind: self.classify(a, b, angle, end.curvature - start.curvature),
        }
    }

    fn classify(&self, a: &Wall, b: &Wall, angle: f64, jump: f64) -> VertexKind {
        let like = a.condition == b.condition;
        if (angle - std::f64::consts::PI).abs() < SAME_ANGLE {
            return match (like, jump.abs() * self.size > SAME_CURVATURE) {
                (false, _) => VertexKind::Corner,
                (true, true) => VertexKind::Joint,
                (true, false) => VertexKind::Smooth,
            };
        }
        let straight = a.is_straight() && b.is_straight();
        let arc_and_line = matches!(
            (&a.shape, &b.shape),
            (Shape::Arc(_), Shape::Line(_)) | (Shape::Line(_), Shape::Arc(_))
        );
        for n in 2..=LARGEST_N {
            let fits = (angle - std::f64::consts::PI / f64::from(n)).abs() < SAME_ANGLE;
            if fits && (like || n % 2 == 0) && (straight || (arc_and_line && n == 2)) {
                return VertexKind::Regular { n };
            }
        }
        VertexKind::Corner
    }
}

/// Do both walls come to rest at their common point (a cusp, such as that of a cardioid)?
fn is_cusp(a: &Wall, b: &Wall) -> bool {
    let at_rest = |wall: &Wall, t: f64| match &wall.shape {
        Shape::Curve(curve) => {
            let [_, first, second, _] = curve.derivatives(t);
            first.norm() < CLOSING * second.norm()
        }
        _ => false,
    };
    at_rest(a, a.extent()) && at_rest(b, 0.0)
}

fn check_chain(chain: &[Wall], first: usize) -> Result<(), GeometryError> {
    let size = bounding_size(chain);
    for (offset, wall) in chain.iter().enumerate() {
        let index = first + offset;
        let length = arc_length(wall);
        if !length.is_finite() || !size.is_finite() {
            return Err(GeometryError::Irregular {
                wall: index,
                t: 0.0,
                what: "the wall has a point that is not finite".into(),
            });
        }
        if length <= CLOSING * size {
            return Err(GeometryError::NoLength { wall: index });
        }
        let next = &chain[(offset + 1) % chain.len()];
        if (wall.end() - next.start()).norm() > CLOSING * size {
            return Err(GeometryError::Open {
                wall: index,
                start: next.start(),
                end: wall.end(),
            });
        }
    }
    Ok(())
}

fn arc_length(wall: &Wall) -> f64 {
    match wall.shape {
        Shape::Line(_) | Shape::Arc(_) => wall.extent(),
        Shape::Curve(_) => super::quadrature::along(wall, |_| 1.0),
    }
}

/// Points per wall at which its extent in the plane is sampled.
const SAMPLES: usize = 64;

/// Diagonal of the box around the walls.
fn bounding_size(walls: &[Wall]) -> f64 {
    let mut low = Vec2::repeat(f64::INFINITY);
    let mut high = Vec2::repeat(f64::NEG_INFINITY);
    for wall in walls {
        let samples = if wall.is_straight() { 1 } else { SAMPLES };
        for i in 0..=samples {
            let point = wall.point(wall.extent() * i as f64 / samples as f64);
            low = low.inf(&point);
            high = high.sup(&point);
        }
    }
    (high - low).norm()
}
