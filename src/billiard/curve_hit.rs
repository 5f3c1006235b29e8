//! Where a ray meets a curved wall, without losing a root.
//!
//! Each convex piece of the curve (see [`super::curve_piece`]) is met at most twice. Signs of the distances of its ends, its
//! apex and its most distant point from the ray decide how often, and each root stays inside a bracket in which the sign
//! changes. The first guess comes from a polynomial that stands for the piece; one evaluation of the curve with its
//! derivatives then gives position, tangent and curvature at the root.

use super::curve_piece::{Piece, cut};
use super::{Curve, Hit, Ray, Vec2, cross};

/// A start this close to a piece (fraction of the curve) counts as lying on it. Ten times the distance within which rounding
/// blurs the side on which a wall of the domain's curvature passes a ray that grazes it.
const ON_PIECE: f64 = 1e-7;
/// A ray that runs parallel to the wall this close to its start (fraction of the piece) grazes it.
const GRAZING: f64 = 1e-9;
/// Tangents of two walls that meet smoothly may differ by this angle (radians) from rounding.
const SAME_TANGENT: f64 = 1e-12;
/// Steps after which the bracketed Newton iteration has long converged (bisection alone needs 52).
const LARGEST_STEPS: usize = 80;
/// Newton steps on the polynomial: it is nearly linear, and the error is squared by each.
const GUESS_STEPS: usize = 4;
/// A guess closer to the root than this fraction of the piece is completed by its Taylor series of third order, whose
/// relative error is then 1e-24 in position and 1e-12 in curvature.
const TAYLOR: f64 = 1e-6;
/// Evaluations of the curve before the bracketed iteration takes over; a good guess needs one, a fair one two.
const CORRECTIONS: usize = 3;
/// Ratio of first to second derivative below which a curve is at rest (a cusp).
const AT_REST: f64 = 1e-12;

/// A curved wall as rays see it.
#[derive(Clone, Debug)]
pub(crate) struct CurvedWall {
    pub(crate) wall: usize,
    pub(crate) curve: Curve,
    pub(crate) extent: f64,
    pieces: Vec<Piece>,
    /// Does the wall go on smoothly into the next one at its start and at its end?
    smooth_ends: [bool; 2],
}

/// A point of the curve that a ray meets.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Meeting {
    pub(crate) distance: f64,
    t: f64,
    point: Vec2,
    first: Vec2,
    second: Vec2,
}

/// A straight line seen from the curve: signed distance of a point from it.
#[derive(Clone, Copy)]
struct Sight {
    origin: Vec2,
    direction: Vec2,
}

impl Sight {
    #[inline]
    fn off(&self, point: Vec2) -> f64 {
        cross(self.direction, point - self.origin)
    }

    #[inline]
    fn along(&self, point: Vec2) -> f64 {
        self.direction.dot(&(point - self.origin))
    }

    /// May a meeting with the piece lie between -`behind` and `limit`?
    fn passes(&self, piece: &Piece, behind: f64, limit: f64) -> bool {
        let [a, b, c] = [piece.start, piece.end, piece.apex].map(|point| self.along(point));
        a.min(b).min(c) < limit && a.max(b).max(c) > -behind
    }
}

impl CurvedWall {
    pub(crate) fn new(wall: usize, curve: &Curve, extent: f64, smooth_ends: [bool; 2]) -> Self {
        Self {
            wall,
            curve: curve.clone(),
            extent,
            pieces: cut(curve, extent),
            smooth_ends,
        }
    }

    /// The nearest meeting of the ray with the inner side of the wall between -`behind` and `best`. `own` are
    /// parameters at which the ray may start on this wall; that meeting is not reported.
    pub(crate) fn meet(
        &self,
        ray: &Ray,
        own: [Option<f64>; 2],
        behind: f64,
        best: f64,
    ) -> Option<Meeting> {
        let sight = Sight {
            origin: ray.point,
            direction: ray.direction,
        };
        let mut nearest: Option<Meeting> = None;
        let mut limit = best;
        let mut a = sight.off(self.pieces[0].start);
        for piece in &self.pieces {
            let b = sight.off(piece.end);
            let at_start = a;
            a = b;
            let start = own.into_iter().flatten().find(|&t| self.holds(piece, t));
            let found = if let Some(t) = start {
                self.other_root(piece, sight, t)
            } else if at_start < 0.0 && b >= 0.0 {
                // Along the wall the ray goes from its right to its left: it comes from the inner side.
                sight
                    .passes(piece, behind, limit)
                    .then(|| self.single_root(piece, sight, at_start, b))
            } else if (at_start < 0.0) == (b < 0.0)
                && (sight.off(piece.apex) < 0.0) != (at_start < 0.0)
                && sight.passes(piece, behind, limit)
            {
                self.facing_root_of_two(piece, sight, at_start)
            } else {
                None
            };
            if let Some(meeting) = found
                && meeting.distance > -behind
                && meeting.distance < limit
            {
                limit = meeting.distance;
                nearest = Some(meeting);
            }
        }
        nearest
    }

    fn holds(&self, piece: &Piece, t: f64) -> bool {
        let slack = ON_PIECE * self.extent;
        t >= piece.from - slack && t <= piece.to + slack
    }

    /// The root of a piece whose ends lie on different sides of the ray, the start on its right.
    fn single_root(&self, piece: &Piece, sight: Sight, a: f64, b: f64) -> Meeting {
        self.root(
            piece,
            sight,
            [piece.from, piece.to],
            guess(piece, sight, a, b),
        )
    }

    /// Of the two roots of a piece whose ends lie on the same side, the one that the ray meets from the inner side.
    fn facing_root_of_two(&self, piece: &Piece, sight: Sight, a: f64) -> Option<Meeting> {
        let parallel = self.parallel_point(piece, sight.direction)?;
        let peak = sight.off(self.curve.derivatives(parallel)[0]);
        if (peak < 0.0) == (a < 0.0) {
            return None;
        }
        let bracket = if a < 0.0 {
            [piece.from, parallel]
        } else {
            [parallel, piece.to]
        };
        Some(self.root(piece, sight, bracket, 0.5 * (bracket[0] + bracket[1])))
    }

    /// The second meeting of a ray with a piece that it starts from. A ray that leaves a dispersing piece does not meet it
    /// again. On a focusing piece the second meeting lies beyond the point where the piece runs parallel to the ray, as far
    /// as the start lies before it: a ray so flat that rounding hides that point (grazing) meets the wall again at once.
    fn other_root(&self, piece: &Piece, sight: Sight, own: f64) -> Option<Meeting> {
        if !piece.focuses() {
            return None;
        }
        let forward = sight
            .direction
            .dot(&(piece.start_tangent + piece.end_tangent))
            > 0.0;
        let Some(parallel) = self.parallel_point(piece, sight.direction) else {
            return self.grazes_end(piece, sight, own, forward);
        };
        if (parallel - own).abs() <= GRAZING * (piece.to - piece.from) {
            let mirrored = (2.0 * parallel - own).clamp(piece.from, piece.to);
            return self
                .goes_on(own, forward)
                .then(|| self.meeting(sight, mirrored));
        }
        if forward != (own < parallel) {
            return None;
        }
        let (bracket, far) = if forward {
            ([parallel, piece.to], sight.off(piece.end))
        } else {
            ([piece.from, parallel], sight.off(piece.start))
        };
        // The wall runs on the right of the ray around the parallel point when it is walked forward, on the left otherwise.
        let leaves = if forward { far >= 0.0 } else { far < 0.0 };
        if !leaves {
            return None;
        }
        let mirrored = (2.0 * parallel - own).clamp(bracket[0], bracket[1]);
        Some(self.root(piece, sight, bracket, mirrored))
    }

    /// The meeting of a ray that starts at the smooth end of the wall and runs along it, where the tangents of the two ends
    /// that meet there differ by rounding and the parallel point lies between them.
    fn grazes_end(&self, piece: &Piece, sight: Sight, own: f64, forward: bool) -> Option<Meeting> {
        let slack = ON_PIECE * self.extent;
        let (tangent, at_end) = if forward {
            (
                piece.start_tangent,
                piece.from == 0.0 && own < slack && self.smooth_ends[0],
            )
        } else {
            let at_end = piece.to == self.extent && own > self.extent - slack;
            (piece.end_tangent, at_end && self.smooth_ends[1])
        };
        let flat = cross(sight.direction, tangent).abs() < SAME_TANGENT;
        (at_end && flat).then(|| self.meeting(sight, own))
    }

    /// Does the wall go on smoothly from t in the direction of the ray?
    fn goes_on(&self, t: f64, forward: bool) -> bool {
        let slack = ON_PIECE * self.extent;
        if forward {
            t < self.extent - slack || self.smooth_ends[1]
        } else {
            t > slack || self.smooth_ends[0]
        }
    }

    /// The point of the curve at t as a meeting of a ray.
    fn meeting(&self, sight: Sight, t: f64) -> Meeting {
        let [point, first, second, _] = self.curve.derivatives(t);
        Meeting {
            distance: sight.along(point),
            t,
            point,
            first,
            second,
        }
    }

    /// Parameter at which the piece runs parallel to `direction`, if it does.
    fn parallel_point(&self, piece: &Piece, direction: Vec2) -> Option<f64> {
        let (a, b) = (
            cross(direction, piece.start_tangent),
            cross(direction, piece.end_tangent),
        );
        if (a < 0.0) == (b < 0.0) {
            return None;
        }
        Some(newton(piece.from, piece.to, a, |t| {
            let [_, first, second, _] = self.curve.derivatives(t);
            (cross(direction, first), cross(direction, second))
        }))
    }

    /// The root inside a bracket at whose start the curve lies on the right of the ray (or the two sides at a grazing
    /// root), from a guess.
    fn root(&self, piece: &Piece, sight: Sight, bracket: [f64; 2], guess: f64) -> Meeting {
        let mut t = guess;
        for _ in 0..CORRECTIONS {
            let [point, first, second, third] = self.curve.derivatives(t);
            let off = sight.off(point);
            let slopes = [first, second, third].map(|d| cross(sight.direction, d));
            let mut step = -off / slopes[0];
            // Two more Newton steps, on the Taylor polynomial.
            for _ in 0..2 {
                let value =
                    off + step * (slopes[0] + step * (0.5 * slopes[1] + step * slopes[2] / 6.0));
                let slope = slopes[0] + step * (slopes[1] + 0.5 * step * slopes[2]);
                step -= value / slope;
            }
            let next = t + step;
            if !(next >= bracket[0] && next <= bracket[1]) {
                break;
            }
            if step.abs() <= TAYLOR * (piece.to - piece.from) {
                let point = point + (first + (second * 0.5 + third * (step / 6.0)) * step) * step;
                return Meeting {
                    distance: sight.along(point),
                    t: next,
                    point,
                    first: first + (second + third * (0.5 * step)) * step,
                    second: second + third * step,
                };
            }
            t = next;
        }
        let t = newton(bracket[0], bracket[1], -1.0, |t| {
            let [point, first, _, _] = self.curve.derivatives(t);
            (sight.off(point), cross(sight.direction, first))
        });
        self.meeting(sight, t)
    }

    /// The point of the wall at t as a meeting of a ray (at the ends of the wall).
    pub(crate) fn at(&self, ray: &Ray, t: f64) -> Meeting {
        let sight = Sight {
            origin: ray.point,
            direction: ray.direction,
        };
        self.meeting(sight, t)
    }

    /// The hit that belongs to a meeting.
    pub(crate) fn hit(&self, meeting: &Meeting) -> Hit {
        let speed = meeting.first.norm();
        let scale = meeting.second.norm();
        // At a cusp the curve is at rest; its tangent is that of the second derivative.
        let tangent = if speed > AT_REST * scale {
            meeting.first / speed
        } else if meeting.t < 0.5 * self.extent {
            meeting.second / scale
        } else {
            -meeting.second / scale
        };
        Hit {
            wall: self.wall,
            point: meeting.point,
            tangent,
            curvature: cross(meeting.first, meeting.second) / (speed * speed * speed),
            distance: meeting.distance.max(0.0),
            t: meeting.t,
        }
    }
}

/// Where the polynomial of a piece crosses the ray, given the distances of its ends (of different sign).
fn guess(piece: &Piece, sight: Sight, a: f64, b: f64) -> f64 {
    let mut c = piece
        .polynomial
        .map(|coefficient| cross(sight.direction, coefficient));
    c[0] = a;
    let mut x = a / (a - b);
    for _ in 0..GUESS_STEPS {
        let (mut value, mut slope) = (c[7], 0.0);
        for &coefficient in c[..7].iter().rev() {
            slope = slope * x + value;
            value = value * x + coefficient;
        }
        x = (x - value / slope).clamp(0.0, 1.0);
    }
    piece.from + x * (piece.to - piece.from)
}

/// Newton's method inside a bracket that always holds the sign change; falls back to bisection.
fn newton(from: f64, to: f64, at_from: f64, value: impl Fn(f64) -> (f64, f64)) -> f64 {
    let (mut low, mut high) = (from, to);
    let mut t = 0.5 * (from + to);
    for _ in 0..LARGEST_STEPS {
        let (f, slope) = value(t);
        if f == 0.0 {
            return t;
        }
        if (f < 0.0) == (at_from < 0.0) {
            low = t;
        } else {
            high = t;
        }
        let next = t - f / slope;
        let inside = next > low && next < high;
        let next = if inside { next } else { 0.5 * (low + high) };
        if (next - t).abs() <= 2.0 * f64::EPSILON * (to.abs() + from.abs()) {
            return next;
        }
        t = next;
    }
    t
}
