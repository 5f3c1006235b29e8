//! The sides of the cell cut into short pieces, one edge of a triangle each.

use super::cell::{Cell, SAME_POINT};
use crate::billiard::{Vec2, Wall, cross};

/// Largest angle in radians through which a wall turns along one edge: the map of a triangle with such an edge is smooth enough
/// for a polynomial degree of 10 or more.
const LARGEST_TURN: f64 = 0.6;
/// Samples per piece of wall in which lengths and turning are added up.
const SAMPLES: usize = 256;
/// An outline that needs more edges than this cannot be drawn at the resolution asked for.
pub(super) const MOST_SEGMENTS: usize = 40_000;

/// A part of a piece of the boundary between two nodes.
#[derive(Clone, Copy, Debug)]
pub(super) struct Segment {
    /// Nodes at its ends.
    pub(super) nodes: [usize; 2],
    pub(super) piece: usize,
    /// The wall's parameter at the ends.
    pub(super) t: [f64; 2],
}

/// Nodes and segments of the boundary.
#[derive(Clone, Debug, Default)]
pub(super) struct Outline {
    pub(super) nodes: Vec<Vec2>,
    pub(super) segments: Vec<Segment>,
}

impl Outline {
    /// Cuts all pieces so that no edge is longer than `length` or turns too far.
    pub(super) fn new(cell: &Cell, length: f64) -> Self {
        let mut outline = Self::default();
        for (index, piece) in cell.pieces.iter().enumerate() {
            let cuts = even_cuts(&piece.wall, [piece.from, piece.to], length);
            let mut previous = outline.node(piece.wall.point(cuts[0]), cell);
            for pair in cuts.windows(2) {
                let next = outline.node(piece.wall.point(pair[1]), cell);
                outline.segments.push(Segment {
                    nodes: [previous, next],
                    piece: index,
                    t: [pair[0], pair[1]],
                });
                previous = next;
            }
        }
        outline
    }

    fn node(&mut self, point: Vec2, cell: &Cell) -> usize {
        let same = |other: &Vec2| (other - point).norm() < SAME_POINT * cell.size;
        self.nodes.iter().position(same).unwrap_or_else(|| {
            self.nodes.push(point);
            self.nodes.len() - 1
        })
    }

    pub(super) fn chord(&self, segment: usize) -> [Vec2; 2] {
        self.segments[segment].nodes.map(|node| self.nodes[node])
    }

    /// Halves the segments of the given numbers, and on a cut those at the same place of the other edge of the wedge.
    pub(super) fn halve(&mut self, cell: &Cell, mut chosen: Vec<usize>) {
        let partners: Vec<usize> = chosen
            .iter()
            .filter_map(|&segment| self.partner(cell, segment))
            .collect();
        chosen.extend(partners);
        chosen.sort_unstable();
        chosen.dedup();
        for segment in chosen {
            let Segment { nodes, piece, t } = self.segments[segment];
            let middle = 0.5 * (t[0] + t[1]);
            let node = self.nodes.len();
            self.nodes.push(cell.pieces[piece].wall.point(middle));
            self.segments[segment] = Segment {
                nodes: [nodes[0], node],
                piece,
                t: [t[0], middle],
            };
            self.segments.push(Segment {
                nodes: [node, nodes[1]],
                piece,
                t: [middle, t[1]],
            });
        }
    }

    /// The segment that the rotation of the group maps this one to or from.
    fn partner(&self, cell: &Cell, segment: usize) -> Option<usize> {
        use super::cell::Side;
        let Side::Cut(edge) = cell.pieces[self.segments[segment].piece].side else {
            return None;
        };
        let radii = |segment: usize| {
            let [a, b] = self.chord(segment);
            [(a - cell.center).norm(), (b - cell.center).norm()]
        };
        let own = radii(segment);
        (0..self.segments.len()).find(|&other| {
            cell.pieces[self.segments[other].piece].side == Side::Cut(1 - edge)
                && radii(other)
                    .iter()
                    .zip(own)
                    .all(|(a, b)| (a - b).abs() < SAME_POINT * cell.size)
        })
    }

    /// Segments whose chords cross or come so close to another node that triangles between them would be degenerate.
    pub(super) fn conflicts(&self) -> Vec<usize> {
        // Relative to the longer of the two: a node this near to a chord leaves no room for an element.
        const NEAR: f64 = 0.02;
        let mut found = Vec::new();
        let boxes: Vec<[Vec2; 2]> = (0..self.segments.len())
            .map(|segment| {
                let [a, b] = self.chord(segment);
                let margin = Vec2::repeat(NEAR * (b - a).norm());
                [a.inf(&b) - margin, a.sup(&b) + margin]
            })
            .collect();
        for i in 0..self.segments.len() {
            for j in 0..i {
                let apart = (0..2)
                    .any(|d| boxes[i][0][d] > boxes[j][1][d] || boxes[j][0][d] > boxes[i][1][d]);
                if !apart && self.conflict(i, j, NEAR) {
                    found.extend([i, j]);
                }
            }
        }
        found.sort_unstable();
        found.dedup();
        found
    }

    fn conflict(&self, i: usize, j: usize, near: f64) -> bool {
        let (first, second) = (&self.segments[i], &self.segments[j]);
        let shares = |node: usize, other: &Segment| other.nodes.contains(&node);
        let (p, q) = (self.chord(i), self.chord(j));
        let common = first.nodes.iter().filter(|&&n| shares(n, second)).count();
        if common == 2 {
            return true;
        }
        let too_near = |node: usize, other: usize| {
            let [a, b] = self.chord(other);
            let point = self.nodes[node];
            let length = (b - a).norm();
            let along = (point - a).dot(&(b - a)) / (length * length);
            (0.0..=1.0).contains(&along) && cross(b - a, point - a).abs() < near * length * length
        };
        if common == 1 {
            // Neighbours: the far end of one on the other.
            let far = |own: &Segment, other: &Segment| {
                own.nodes.into_iter().find(|&node| !shares(node, other))
            };
            return far(first, second).is_some_and(|node| on_chord(self.nodes[node], q))
                || far(second, first).is_some_and(|node| on_chord(self.nodes[node], p));
        }
        let crosses = (cross(p[1] - p[0], q[0] - p[0]) > 0.0)
            != (cross(p[1] - p[0], q[1] - p[0]) > 0.0)
            && (cross(q[1] - q[0], p[0] - q[0]) > 0.0) != (cross(q[1] - q[0], p[1] - q[0]) > 0.0);
        crosses
            || first.nodes.iter().any(|&node| too_near(node, j))
            || second.nodes.iter().any(|&node| too_near(node, i))
    }
}

/// Does the point lie on the chord, but for rounding?
fn on_chord(point: Vec2, [a, b]: [Vec2; 2]) -> bool {
    let along = (point - a).dot(&(b - a)) / (b - a).norm_squared();
    (0.0..=1.0).contains(&along) && cross(b - a, point - a).abs() < 1e-6 * (b - a).norm_squared()
}

/// Parameters that cut a wall into edges of equal weight, the weight of a stretch being the larger of its length and its turning
/// in units of what one edge may have.
fn even_cuts(wall: &Wall, [from, to]: [f64; 2], length: f64) -> Vec<f64> {
    let samples = if wall.is_straight() { 1 } else { SAMPLES };
    let at = |i: usize| from + (to - from) * i as f64 / samples as f64;
    let mut weight = vec![0.0];
    for i in 0..samples {
        let frames = [wall.frame(at(i)), wall.frame(at(i + 1))];
        let step = (frames[1].point - frames[0].point).norm();
        let turn = cross(frames[0].tangent, frames[1].tangent)
            .atan2(frames[0].tangent.dot(&frames[1].tangent))
            .abs();
        weight.push(weight[i] + (step / length).max(turn / LARGEST_TURN));
    }
    let total = weight[samples];
    let count = (total.ceil() as usize).clamp(1, MOST_SEGMENTS);
    let mut cuts = vec![from];
    let mut i = 0;
    for cut in 1..count {
        let wanted = total * cut as f64 / count as f64;
        while weight[i + 1] < wanted {
            i += 1;
        }
        let part = (wanted - weight[i]) / (weight[i + 1] - weight[i]);
        cuts.push(at(i) + part * (at(i + 1) - at(i)));
    }
    cuts.push(to);
    cuts
}
