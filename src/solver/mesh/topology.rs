//! Which triangles share which corners and edges.

use super::cell::{Piece, SAME_POINT};
use super::{BoundaryEdge, Bow, Draft, Side, doubled_area};
use crate::billiard::{Vec2, cross};
use crate::solver::elements::EDGES;
use std::collections::BTreeMap;

/// Least ratio of the smallest to the largest Jacobian of a curved triangle: below, its map is too uneven for polynomials.
const LEAST_EVENNESS: f64 = 0.3;
/// Rows of sample points in which the evenness is looked at.
const ROWS: usize = 8;

/// An edge: shared by two triangles, or on the boundary.
#[derive(Clone, Debug)]
pub(in crate::solver) struct Edge {
    /// Its end points (numbers of mesh corners), in the direction in which its modes are counted.
    pub(in crate::solver) ends: [usize; 2],
    /// What it is a part of, if it lies on the boundary, and the wall's parameter at the first and second end.
    pub(in crate::solver) boundary: Option<(Side, [f64; 2])>,
    /// How it bows out, from the first to the second end.
    pub(in crate::solver) bow: Option<Bow>,
}

/// One element.
#[derive(Clone, Debug)]
pub(in crate::solver) struct Triangle {
    /// Its corners relative to `anchor`: next to singular points triangles are smaller than the last digit of their place.
    pub(in crate::solver) points: [Vec2; 3],
    pub(in crate::solver) anchor: Vec2,
    /// Numbers of its corners and edges; edge e lies opposite to corner e.
    pub(in crate::solver) corners: [usize; 3],
    pub(in crate::solver) edges: [usize; 3],
    /// Does edge e run from its first to its second end in the sense of the triangle?
    pub(in crate::solver) forward: [bool; 3],
    /// Part of the full polynomial degree, 0 to 1.
    pub(in crate::solver) quality: f64,
}

/// Triangles, edges and corners. Two triangles on the two faces of a thin wall share neither edges nor corners there.
#[derive(Clone, Debug)]
pub(in crate::solver) struct Mesh {
    pub(in crate::solver) triangles: Vec<Triangle>,
    pub(in crate::solver) edges: Vec<Edge>,
    /// Positions of the corners.
    pub(in crate::solver) corners: Vec<Vec2>,
}

impl Mesh {
    /// Position in the plane of a point of a triangle, and the derivatives of the position by x and y, the coordinates on the
    /// reference triangle.
    pub(in crate::solver) fn map(&self, triangle: &Triangle, [x, y]: [f64; 2]) -> [Vec2; 3] {
        let l = [1.0 - x - y, x, y];
        let slopes = [[-1.0, -1.0], [1.0, 0.0], [0.0, 1.0]];
        let p = triangle.points;
        let mut place = triangle.anchor + p[0] * l[0] + p[1] * l[1] + p[2] * l[2];
        let mut by = [p[1] - p[0], p[2] - p[0]];
        for (index, &[first, second]) in EDGES.iter().enumerate() {
            let Some(bow) = &self.edges[triangle.edges[index]].bow else {
                continue;
            };
            let [a, b] = if triangle.forward[index] {
                [first, second]
            } else {
                [second, first]
            };
            let (value, slope) = bow.at(0.5 * (1.0 + l[b] - l[a]));
            place += value * (l[a] * l[b]);
            for direction in 0..2 {
                let product = slopes[a][direction] * l[b] + l[a] * slopes[b][direction];
                let along = 0.5 * (slopes[b][direction] - slopes[a][direction]);
                by[direction] += value * product + slope * (l[a] * l[b] * along);
            }
        }
        [place, by[0], by[1]]
    }

    /// Are all edges straight?
    pub(in crate::solver) fn is_straight(&self, triangle: &Triangle) -> bool {
        triangle
            .edges
            .iter()
            .all(|&edge| self.edges[edge].bow.is_none())
    }

    fn is_even(&self, triangle: &Triangle) -> bool {
        let mut least = f64::INFINITY;
        let mut most = 0.0_f64;
        for i in 0..=ROWS {
            for j in 0..=ROWS - i {
                let at = [i as f64 / ROWS as f64, j as f64 / ROWS as f64];
                let [_, dx, dy] = self.map(triangle, at);
                least = least.min(cross(dx, dy));
                most = most.max(cross(dx, dy));
            }
        }
        least > LEAST_EVENNESS * most
    }
}

/// Joins the triangles. On failure: the places (piece and parameter) at which the outline must be cut finer.
pub(super) fn connect(draft: &Draft<'_>) -> Result<Mesh, Vec<(usize, f64)>> {
    let mut by_nodes: BTreeMap<[usize; 2], Vec<(usize, usize)>> = BTreeMap::new();
    for (index, (corners, _)) in draft.triangles.iter().enumerate() {
        for (local, [a, b]) in EDGES.into_iter().enumerate() {
            let (a, b) = (corners[a], corners[b]);
            by_nodes
                .entry([a.min(b), a.max(b)])
                .or_default()
                .push((index, local));
        }
    }
    let (corner_of, corners) = corners(draft, &by_nodes);
    let mut mesh = Mesh {
        triangles: Vec::with_capacity(draft.triangles.len()),
        edges: Vec::new(),
        corners,
    };
    let mut edges_of = vec![[(0, false); 3]; draft.triangles.len()];
    let mut wrong = Vec::new();
    for (nodes, owners) in &by_nodes {
        let boundary = draft.edges.get(nodes);
        let split = boundary.is_some_and(|edge| draft.cell.pieces[edge.piece].two_sided);
        let groups: Vec<&[(usize, usize)]> = if split {
            owners.chunks(1).collect()
        } else {
            vec![owners.as_slice()]
        };
        for group in groups {
            let (index, _) = group[0];
            let [a, b] = oriented(draft, *nodes, boundary);
            let corner = |node: usize| {
                let at = draft.triangles[index].0.iter().position(|&n| n == node);
                corner_of[index][at.unwrap_or(0)]
            };
            let ends = [corner(a), corner(b)];
            let edge = Edge {
                ends,
                boundary: boundary.map(|edge| {
                    let side = draft.cell.pieces[edge.piece].side;
                    (side, [edge.t_at(a), edge.t_at(b)])
                }),
                bow: boundary.and_then(|edge| bow(draft, edge, [a, b], &mut wrong)),
            };
            for &(triangle, local) in group {
                let first = draft.triangles[triangle].0[EDGES[local][0]];
                edges_of[triangle][local] = (mesh.edges.len(), first == a);
            }
            mesh.edges.push(edge);
        }
    }
    for (index, (nodes, quality)) in draft.triangles.iter().enumerate() {
        let (points, anchor) = draft.places(*nodes);
        let triangle = Triangle {
            points,
            anchor,
            corners: corner_of[index],
            edges: edges_of[index].map(|(edge, _)| edge),
            forward: edges_of[index].map(|(_, forward)| forward),
            quality: *quality,
        };
        if doubled_area(triangle.points) <= 0.0
            || (!mesh.is_straight(&triangle) && !mesh.is_even(&triangle))
        {
            wrong.extend(places(draft, nodes));
        }
        mesh.triangles.push(triangle);
    }
    if wrong.is_empty() {
        Ok(mesh)
    } else {
        Err(wrong)
    }
}

/// Middles of the boundary edges of a triangle.
fn places(draft: &Draft<'_>, nodes: &[usize; 3]) -> Vec<(usize, f64)> {
    EDGES
        .iter()
        .filter_map(|&[a, b]| {
            let key = [nodes[a].min(nodes[b]), nodes[a].max(nodes[b])];
            draft.edges.get(&key)
        })
        .filter(|edge| !draft.cell.pieces[edge.piece].is_straight())
        .map(|edge| (edge.piece, 0.5 * (edge.t[0] + edge.t[1])))
        .collect()
}

/// Nodes of an edge in the direction of its modes: from the lower to the higher number, on the edges of a wedge outwards, so
/// that an edge and its image agree.
fn oriented(draft: &Draft<'_>, [a, b]: [usize; 2], boundary: Option<&BoundaryEdge>) -> [usize; 2] {
    let on_cut =
        boundary.is_some_and(|edge| matches!(draft.cell.pieces[edge.piece].side, Side::Cut(_)));
    let radius = |node: usize| (draft.points[node] - draft.cell.center).norm();
    if on_cut && radius(a) > radius(b) {
        [b, a]
    } else {
        [a, b]
    }
}

fn bow(
    draft: &Draft<'_>,
    edge: &BoundaryEdge,
    [a, b]: [usize; 2],
    wrong: &mut Vec<(usize, f64)>,
) -> Option<Bow> {
    let piece: &Piece = &draft.cell.pieces[edge.piece];
    if piece.is_straight() || edge.straight {
        return None;
    }
    let bow = Bow::new(&piece.wall, [edge.t_at(a), edge.t_at(b)], draft.cell.size);
    if bow.is_none() {
        wrong.push((edge.piece, 0.5 * (edge.t[0] + edge.t[1])));
    }
    bow
}

/// Numbers the corners: triangles around a node share it if one gets from one to the next across edges that are not thin
/// walls. Returns the corner numbers of every triangle and the positions.
fn corners(
    draft: &Draft<'_>,
    by_nodes: &BTreeMap<[usize; 2], Vec<(usize, usize)>>,
) -> (Vec<[usize; 3]>, Vec<Vec2>) {
    let count = 3 * draft.triangles.len();
    let mut parent: Vec<usize> = (0..count).collect();
    for (nodes, owners) in by_nodes {
        let split = draft
            .edges
            .get(nodes)
            .is_some_and(|edge| draft.cell.pieces[edge.piece].two_sided);
        if split {
            continue;
        }
        for pair in owners.windows(2) {
            for node in nodes {
                let slot = |triangle: usize| {
                    let corners = draft.triangles[triangle].0;
                    3 * triangle + corners.iter().position(|n| n == node).unwrap_or(0)
                };
                let (a, b) = (
                    root(&parent, slot(pair[0].0)),
                    root(&parent, slot(pair[1].0)),
                );
                parent[a.max(b)] = a.min(b);
            }
        }
    }
    let mut number = vec![usize::MAX; count];
    let mut positions = Vec::new();
    let mut all = Vec::with_capacity(draft.triangles.len());
    for (index, (nodes, _)) in draft.triangles.iter().enumerate() {
        all.push(std::array::from_fn(|local| {
            let top = root(&parent, 3 * index + local);
            if number[top] == usize::MAX {
                number[top] = positions.len();
                positions.push(draft.points[nodes[local]]);
            }
            number[top]
        }));
    }
    (all, positions)
}

fn root(parent: &[usize], mut slot: usize) -> usize {
    while parent[slot] != slot {
        slot = parent[slot];
    }
    slot
}

/// Are two lengths the same but for rounding, in a domain of this size?
pub(in crate::solver) fn same_length(a: f64, b: f64, size: f64) -> bool {
    (a - b).abs() < SAME_POINT * size
}
