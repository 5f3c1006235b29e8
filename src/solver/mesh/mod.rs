//! Triangles that fill the cell exactly: straight inside, with curved edges along curved walls, in layers around corners.

mod bow;
mod cell;
mod grade;
mod outline;
mod topology;
mod triangulate;

pub(super) use bow::Bow;
pub(super) use cell::{Cell, Side};
pub(super) use topology::{Mesh, Triangle, same_length};

use crate::billiard::{Vec2, cross};
use outline::Outline;
use std::collections::BTreeMap;
use thiserror::Error;

/// Next to a singular point edges within this part of the domain's size are taken to be straight: there the energy is that of a
/// part of this order at most, and what a curved edge adds is of the order of this to the power 3/2 even at a cusp.
const STRAIGHT: f64 = 1e-9;
/// Rounds of halving edges until all triangles are well shaped.
const ROUNDS: usize = 40;

/// Why a shape could not be cut into elements.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum MeshError {
    /// The walls come too close to each other for elements of the smallest size that was tried.
    #[error(
        "the shape could not be cut into triangles: near ({}, {}) walls come too close to each other or turn too sharply", .near.x, .near.y
    )]
    Degenerate {
        /// Where.
        near: Vec2,
    },
}

/// An edge along the boundary of the cell.
#[derive(Clone, Copy, Debug)]
struct BoundaryEdge {
    nodes: [usize; 2],
    piece: usize,
    t: [f64; 2],
    /// Taken to be straight although its wall is curved: it is shorter than any bow that counts.
    straight: bool,
}

impl BoundaryEdge {
    fn t_at(&self, node: usize) -> f64 {
        if self.nodes[0] == node {
            self.t[0]
        } else {
            self.t[1]
        }
    }
}

/// Triangles in the making.
struct Draft<'a> {
    cell: &'a Cell,
    points: Vec<Vec2>,
    /// Corners (counter-clockwise) and the part of the full polynomial degree that the triangle gets.
    triangles: Vec<([usize; 3], f64)>,
    edges: BTreeMap<[usize; 2], BoundaryEdge>,
    /// Nodes in the layers around a singular point: that point and the distance from it, which may be far below the last digit of
    /// the position.
    offsets: BTreeMap<usize, (usize, Vec2)>,
}

impl Draft<'_> {
    fn take_edge(&mut self, a: usize, b: usize) -> Option<BoundaryEdge> {
        self.edges.remove(&[a.min(b), a.max(b)])
    }

    fn put_edge(&mut self, edge: BoundaryEdge) {
        let [a, b] = edge.nodes;
        self.edges.insert([a.min(b), a.max(b)], edge);
    }

    /// A part of an edge along a wall, if it is one, that leads to a singular point.
    fn put_part(
        &mut self,
        whole: Option<&BoundaryEdge>,
        center: usize,
        nodes: [usize; 2],
        t: [f64; 2],
    ) {
        if let Some(&BoundaryEdge { piece, .. }) = whole {
            let length = t
                .map(|t| self.wall_point(piece, t))
                .map(|point| (point - self.points[center]).norm());
            self.put_edge(BoundaryEdge {
                nodes,
                piece,
                t,
                straight: length[1].max(length[0]) * grade::RATIO < STRAIGHT * self.cell.size,
            });
        }
    }

    fn wall_point(&self, piece: usize, t: f64) -> Vec2 {
        self.cell.pieces[piece].wall.point(t)
    }

    /// A new node next to a singular point.
    fn add_near(&mut self, center: usize, offset: Vec2) -> usize {
        let node = self.points.len();
        self.points.push(self.points[center] + offset);
        self.offsets.insert(node, (center, offset));
        node
    }

    /// Corners of a triangle relative to a point close to them, and that point.
    fn places(&self, nodes: [usize; 3]) -> ([Vec2; 3], Vec2) {
        let Some(&(center, _)) = nodes.iter().find_map(|node| self.offsets.get(node)) else {
            return (nodes.map(|node| self.points[node]), Vec2::zeros());
        };
        let near = nodes.map(|node| match self.offsets.get(&node) {
            Some(&(own, offset)) if own == center => Some(offset),
            None if node == center => Some(Vec2::zeros()),
            _ => None,
        });
        match near {
            [Some(a), Some(b), Some(c)] => ([a, b, c], self.points[center]),
            _ => (nodes.map(|node| self.points[node]), Vec2::zeros()),
        }
    }
}

impl Mesh {
    /// Cuts the cell into triangles with edges of about `length`.
    ///
    /// # Errors
    /// Walls that come too close to each other.
    pub(super) fn new(cell: &Cell, length: f64) -> Result<Self, MeshError> {
        let mut outline = Outline::new(cell, length);
        let mut extra: Vec<Vec2> = Vec::new();
        for _ in 0..ROUNDS {
            let poor = match attempt(cell, &outline, &extra, length) {
                Attempt::Done(mesh) => return Ok(mesh),
                Attempt::Halve(segments) => segments,
                Attempt::Add(points) => {
                    extra.extend(points);
                    continue;
                }
            };
            if outline.segments.len() > outline::MOST_SEGMENTS {
                break;
            }
            let poor = if poor.is_empty() {
                (0..outline.segments.len()).collect()
            } else {
                poor
            };
            outline.halve(cell, poor);
        }
        let near = outline
            .conflicts()
            .first()
            .map_or(cell.center, |&segment| outline.chord(segment)[0]);
        Err(MeshError::Degenerate { near })
    }
}

/// What came of one outline.
enum Attempt {
    Done(Mesh),
    /// These segments are too long.
    Halve(Vec<usize>),
    /// These points must be nodes.
    Add(Vec<Vec2>),
}

fn attempt(cell: &Cell, outline: &Outline, extra: &[Vec2], length: f64) -> Attempt {
    let conflicts = outline.conflicts();
    if !conflicts.is_empty() {
        return Attempt::Halve(conflicts);
    }
    let singular = singular_nodes(cell, outline);
    let bridges: Vec<usize> = (0..outline.segments.len())
        .filter(|&s| {
            let ends = outline.segments[s].nodes;
            ends.iter()
                .all(|end| singular.iter().any(|(node, _)| node == end))
        })
        .collect();
    if !bridges.is_empty() {
        return Attempt::Halve(bridges);
    }
    let Some(straight) = triangulate::triangulate(outline, cell, length, extra) else {
        return Attempt::Halve(Vec::new());
    };
    let between = between_singular(&straight, &singular);
    if !between.is_empty() {
        return Attempt::Add(between);
    }
    let mut draft = Draft {
        cell,
        points: straight.points,
        triangles: straight.triangles.into_iter().map(|t| (t, 1.0)).collect(),
        edges: BTreeMap::new(),
        offsets: BTreeMap::new(),
    };
    for segment in &outline.segments {
        draft.put_edge(BoundaryEdge {
            nodes: segment.nodes,
            piece: segment.piece,
            t: segment.t,
            straight: false,
        });
    }
    for &(node, exponent) in &singular {
        grade::grade(&mut draft, node, exponent);
    }
    match topology::connect(&draft) {
        Ok(mesh) => Attempt::Done(mesh),
        Err(piece_ranges) => Attempt::Halve(segments_in(outline, &piece_ranges)),
    }
}

/// Segments of the outline that hold one of the given places (piece and parameter).
fn segments_in(outline: &Outline, places: &[(usize, f64)]) -> Vec<usize> {
    let holds = |segment: &outline::Segment| {
        places.iter().any(|&(piece, t)| {
            segment.piece == piece
                && t >= segment.t[0].min(segment.t[1])
                && t <= segment.t[0].max(segment.t[1])
        })
    };
    (0..outline.segments.len())
        .filter(|&segment| holds(&outline.segments[segment]))
        .collect()
}

/// Nodes of the outline at singular points, with their exponents.
fn singular_nodes(cell: &Cell, outline: &Outline) -> Vec<(usize, f64)> {
    cell.singularities
        .iter()
        .filter_map(|singular| {
            outline
                .nodes
                .iter()
                .position(|node| (node - singular.point).norm() < cell::SAME_POINT * cell.size)
                .map(|node| (node, singular.exponent))
        })
        .collect()
}

/// Middles of the edges that join two singular points.
fn between_singular(straight: &triangulate::Straight, singular: &[(usize, f64)]) -> Vec<Vec2> {
    let is_singular = |node: usize| singular.iter().any(|(other, _)| *other == node);
    let mut edges: Vec<[usize; 2]> = straight
        .triangles
        .iter()
        .flat_map(|&[a, b, c]| [[a, b], [b, c], [c, a]])
        .map(|[a, b]| [a.min(b), a.max(b)])
        .filter(|edge| edge.iter().all(|&node| is_singular(node)))
        .collect();
    edges.sort_unstable();
    edges.dedup();
    edges
        .iter()
        .map(|[a, b]| 0.5 * (straight.points[*a] + straight.points[*b]))
        .collect()
}

/// Twice the area of the triangle with these corners, positive if they run counter-clockwise.
fn doubled_area([a, b, c]: [Vec2; 3]) -> f64 {
    cross(b - a, c - a)
}
