//! Pieces of walls with boxes around them.

use crate::billiard::{Domain, Shape, Vec2, Wall, cross, left};
use std::f64::consts::PI;

/// Angle by which the tangent turns on one piece of a curve at most. A piece that turns by less than half a turn does not
/// cross itself, nor does it cross its neighbour if both together turn by less.
const LARGEST_TURN: f64 = PI / 3.0;
/// Pieces into which every curve is cut at first, so that no wiggle hides between the points at which it is looked at.
const FIRST_PIECES: usize = 32;
/// Depth to which a piece is halved because it turns too much (a tighter bend than 1e-6 of the curve counts as a corner).
const DEEPEST: u32 = 20;

/// Axis-parallel box.
#[derive(Clone, Copy, Debug)]
pub(super) struct Bounds {
    pub(super) low: Vec2,
    pub(super) high: Vec2,
}

impl Bounds {
    pub(super) fn of(points: &[Vec2]) -> Self {
        let mut bounds = Self {
            low: Vec2::repeat(f64::INFINITY),
            high: Vec2::repeat(f64::NEG_INFINITY),
        };
        for point in points {
            bounds.low = bounds.low.inf(point);
            bounds.high = bounds.high.sup(point);
        }
        bounds
    }

    pub(super) fn grown(&self, by: f64) -> Self {
        Self {
            low: self.low - Vec2::repeat(by),
            high: self.high + Vec2::repeat(by),
        }
    }

    pub(super) fn meets(&self, other: &Self) -> bool {
        self.low.x <= other.high.x
            && other.low.x <= self.high.x
            && self.low.y <= other.high.y
            && other.low.y <= self.high.y
    }

    pub(super) fn contains(&self, point: Vec2) -> bool {
        self.low.x <= point.x
            && point.x <= self.high.x
            && self.low.y <= point.y
            && point.y <= self.high.y
    }
}

/// A piece of a wall between two of its parameters.
#[derive(Clone, Debug)]
pub(super) struct Piece {
    pub(super) wall: usize,
    /// Place among the pieces of its wall.
    pub(super) place: usize,
    pub(super) from: f64,
    pub(super) to: f64,
    pub(super) start: Vec2,
    pub(super) end: Vec2,
    /// No point of the piece is farther than this from the chord.
    pub(super) bulge: f64,
    pub(super) bounds: Bounds,
}

impl Piece {
    /// The piece of a wall between two parameters, with the end points given.
    pub(super) fn between(wall: &Wall, index: usize, range: [f64; 2], ends: [Vec2; 2]) -> Self {
        let [from, to] = range;
        let [start, end] = ends;
        let bulge = bulge(wall, from, to);
        Self {
            wall: index,
            place: 0,
            from,
            to,
            start,
            end,
            bulge,
            bounds: Bounds::of(&[start, end]).grown(bulge),
        }
    }

    /// Both halves.
    pub(super) fn halves(&self, wall: &Wall) -> [Self; 2] {
        let middle = 0.5 * (self.from + self.to);
        let point = wall.point(middle);
        [
            Self::between(wall, self.wall, [self.from, middle], [self.start, point]),
            Self::between(wall, self.wall, [middle, self.to], [point, self.end]),
        ]
    }

    /// Length of the chord with the bulge on both of its sides.
    pub(super) fn extent(&self) -> f64 {
        (self.end - self.start).norm() + 2.0 * self.bulge
    }

    /// Is there a line that keeps the pieces apart by more than `gap`?
    pub(super) fn apart(&self, other: &Self, gap: f64) -> bool {
        !self.bounds.grown(gap).meets(&other.bounds)
            || self.beside(other, gap)
            || other.beside(self, gap)
    }

    /// Does the other piece lie wholly on one side of the strip around the chord of this one?
    fn beside(&self, other: &Self, gap: f64) -> bool {
        let chord = self.end - self.start;
        let length = chord.norm();
        if length == 0.0 {
            return false;
        }
        let normal = left(chord) / length;
        let reach = self.bulge + other.bulge + gap;
        let (a, b) = (
            normal.dot(&(other.start - self.start)),
            normal.dot(&(other.end - self.start)),
        );
        a.min(b) > reach || a.max(b) < -reach
    }
}

/// Bound on the distance of a piece from its chord: h^2/8 times the largest second derivative, which on a curve is
/// estimated from the second derivative at both ends and the middle and the third derivative there.
fn bulge(wall: &Wall, from: f64, to: f64) -> f64 {
    let h = to - from;
    match &wall.shape {
        Shape::Line(_) => 0.0,
        Shape::Arc(arc) => {
            // Sagitta up to half a turn, the diameter beyond.
            let half = 0.5 * h / arc.radius;
            if half < 0.5 * PI {
                arc.radius * (1.0 - half.cos())
            } else {
                2.0 * arc.radius
            }
        }
        Shape::Curve(curve) => {
            let largest = [from, 0.5 * (from + to), to]
                .map(|t| {
                    let [_, _, second, third] = curve.derivatives(t);
                    second.norm() + 0.5 * h * third.norm()
                })
                .into_iter()
                .fold(0.0, f64::max);
            h * h / 8.0 * largest
        }
    }
}

/// All pieces of all walls: lines and arcs whole, curves cut where they turn.
pub(super) fn all(domain: &Domain) -> Vec<Piece> {
    (0..domain.walls.len())
        .flat_map(|wall| of_wall(domain, wall))
        .collect()
}

/// Pieces of one wall; their ends at vertices are exactly those of the neighbouring walls.
pub(super) fn of_wall(domain: &Domain, index: usize) -> Vec<Piece> {
    let wall = &domain.walls[index];
    let ends = [
        domain.vertices[index].point,
        domain.vertices[domain.next(index)].point,
    ];
    let mut pieces = Vec::new();
    if matches!(wall.shape, Shape::Curve(_)) {
        let step = wall.extent() / FIRST_PIECES as f64;
        for i in 0..FIRST_PIECES {
            let (from, to) = (i as f64 * step, (i + 1) as f64 * step);
            let start = if i == 0 { ends[0] } else { wall.point(from) };
            let last = i + 1 == FIRST_PIECES;
            let end = if last { ends[1] } else { wall.point(to) };
            let to = if last { wall.extent() } else { to };
            let whole = Piece::between(wall, index, [from, to], [start, end]);
            push_bent(wall, whole, DEEPEST, &mut pieces);
        }
    } else {
        pieces.push(Piece::between(wall, index, [0.0, wall.extent()], ends));
    }
    for (place, piece) in pieces.iter_mut().enumerate() {
        piece.place = place;
    }
    pieces
}

/// Halves a piece until it turns little.
fn push_bent(wall: &Wall, piece: Piece, depth: u32, pieces: &mut Vec<Piece>) {
    let tangent = |t: f64| wall.frame(t).tangent;
    let middle = tangent(0.5 * (piece.from + piece.to));
    let turn = |a: Vec2, b: Vec2| cross(a, b).atan2(a.dot(&b)).abs();
    let turned = turn(tangent(piece.from), middle) + turn(middle, tangent(piece.to));
    if depth == 0 || turned < LARGEST_TURN {
        pieces.push(piece);
        return;
    }
    for half in piece.halves(wall) {
        push_bent(wall, half, depth - 1, pieces);
    }
}
