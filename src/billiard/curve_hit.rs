//! Where a ray meets a curved wall, without losing a root.
//!
//! A curve is cut where its curvature changes sign and then into pieces that turn by little. Such a piece is convex and
//! lies in the triangle of its end points and the point where its end tangents meet (its apex), so a straight line meets it
//! at most twice, and the two roots lie on either side of the point where the piece runs parallel to the ray.

use super::{Curve, Vec2, cross};
use std::f64::consts::PI;

/// Largest turning of a piece, radians: small enough that its triangle is thin, large enough that there are few pieces.
const LARGEST_TURN: f64 = PI / 16.0;
/// Samples per curve in the search for changes of the sign of curvature and for the turning.
const SAMPLES: usize = 512;
/// Parameters closer than this fraction of the piece belong to the same point.
const SAME_PARAMETER: f64 = 1e-9;
/// Steps after which the bracketed Newton iteration has long converged (bisection alone needs 52).
const LARGEST_STEPS: usize = 80;

/// A convex piece of a curve, parameters [from, to] of its wall.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Piece {
    pub(crate) from: f64,
    pub(crate) to: f64,
    start: Vec2,
    end: Vec2,
    apex: Vec2,
    start_tangent: Vec2,
    end_tangent: Vec2,
}

/// Cuts a curve of parameter range [0, extent] into convex pieces.
pub(crate) fn cut(curve: &Curve, extent: f64) -> Vec<Piece> {
    let mut cuts = vec![0.0];
    let mut turned = 0.0;
    let mut last = direction(curve, 0.0, extent);
    let mut last_bend = bend(curve, 0.5 * extent / SAMPLES as f64);
    for i in 1..=SAMPLES {
        let t = extent * i as f64 / SAMPLES as f64;
        let before = extent * (i as f64 - 1.0) / SAMPLES as f64;
        let here = direction(curve, t, extent);
        let middle = extent * (i as f64 - 0.5) / SAMPLES as f64;
        let here_bend = bend(curve, middle);
        if i > 1 && here_bend * last_bend < 0.0 {
            let low = extent * (i as f64 - 1.5) / SAMPLES as f64;
            let zero = bisect(low, middle, |t| bend(curve, t));
            if zero > cuts[cuts.len() - 1] + SAME_PARAMETER * extent {
                cuts.push(zero);
            }
            turned = 0.0;
        }
        turned += cross(last, here).atan2(last.dot(&here)).abs();
        if turned > LARGEST_TURN && before > cuts[cuts.len() - 1] + SAME_PARAMETER * extent {
            cuts.push(before);
            turned = cross(last, here).atan2(last.dot(&here)).abs();
        }
        last = here;
        last_bend = here_bend;
    }
    cuts.push(extent);
    cuts.windows(2)
        .map(|ends| Piece::new(curve, ends[0], ends[1], extent))
        .collect()
}

fn bend(curve: &Curve, t: f64) -> f64 {
    let [_, first, second, _] = curve.derivatives(t);
    cross(first, second)
}

fn direction(curve: &Curve, t: f64, extent: f64) -> Vec2 {
    // At a cusp the speed vanishes: step off it by far less than a sample.
    let [_, first, second, _] = curve.derivatives(t);
    if first.norm() > 1e-9 * second.norm() {
        return first.normalize();
    }
    let inward = if t < 0.5 * extent { second } else { -second };
    inward.normalize()
}

impl Piece {
    fn new(curve: &Curve, from: f64, to: f64, extent: f64) -> Self {
        let start = curve.derivatives(from)[0];
        let end = curve.derivatives(to)[0];
        let start_tangent = direction(curve, from, extent);
        let end_tangent = direction(curve, to, extent);
        let turn = cross(start_tangent, end_tangent);
        let chord = end - start;
        // Where the end tangents meet; a piece that does not turn is its own chord.
        let apex = if turn.abs() > 1e-12 {
            start + start_tangent * (cross(chord, end_tangent) / turn)
        } else {
            start + chord * 0.5
        };
        Self {
            from,
            to,
            start,
            end,
            apex,
            start_tangent,
            end_tangent,
        }
    }

    fn holds(&self, t: f64) -> bool {
        let slack = SAME_PARAMETER * (self.to - self.from);
        t >= self.from - slack && t <= self.to + slack
    }
}

/// A straight line seen from the curve: signed distance of a point from it.
#[derive(Clone, Copy)]
struct Sight {
    origin: Vec2,
    direction: Vec2,
}

impl Sight {
    fn off(&self, point: Vec2) -> f64 {
        cross(self.direction, point - self.origin)
    }
}

/// Parameters at which the line through `origin` along `direction` meets the piece, at most two. `own` is the parameter of
/// the point of this piece that the ray starts from, which is not reported.
pub(crate) fn roots(
    curve: &Curve,
    piece: &Piece,
    origin: Vec2,
    direction: Vec2,
    own: Option<f64>,
) -> [Option<f64>; 2] {
    let sight = Sight { origin, direction };
    if let Some(t) = own.filter(|&t| piece.holds(t)) {
        return [other_root(curve, piece, sight, t), None];
    }
    let (a, b) = (sight.off(piece.start), sight.off(piece.end));
    if (a < 0.0) != (b < 0.0) {
        return [Some(root(curve, sight, piece.from, piece.to, a)), None];
    }
    if (sight.off(piece.apex) < 0.0) == (a < 0.0) {
        return [None, None];
    }
    let Some(parallel) = parallel_point(curve, piece, direction) else {
        return [None, None];
    };
    let peak = sight.off(curve.derivatives(parallel)[0]);
    if (peak < 0.0) == (a < 0.0) {
        return [None, None];
    }
    [
        Some(root(curve, sight, piece.from, parallel, a)),
        Some(root(curve, sight, parallel, piece.to, peak)),
    ]
}

/// The second meeting of a line with a piece that it starts from.
fn other_root(curve: &Curve, piece: &Piece, sight: Sight, own: f64) -> Option<f64> {
    let parallel = parallel_point(curve, piece, sight.direction)?;
    let peak = sight.off(curve.derivatives(parallel)[0]);
    let (from, to, far) = if own < parallel {
        (parallel, piece.to, sight.off(piece.end))
    } else {
        (piece.from, parallel, sight.off(piece.start))
    };
    let grazing = (parallel - own).abs() <= SAME_PARAMETER * (piece.to - piece.from);
    if grazing || (far < 0.0) == (peak < 0.0) {
        return None;
    }
    let at_from = if own < parallel { peak } else { far };
    Some(root(curve, sight, from, to, at_from))
}

/// Parameter at which the piece runs parallel to `direction`, if it does.
fn parallel_point(curve: &Curve, piece: &Piece, direction: Vec2) -> Option<f64> {
    let (a, b) = (
        cross(direction, piece.start_tangent),
        cross(direction, piece.end_tangent),
    );
    if (a < 0.0) == (b < 0.0) {
        return None;
    }
    Some(newton(piece.from, piece.to, a, |t| {
        let [_, first, second, _] = curve.derivatives(t);
        (cross(direction, first), cross(direction, second))
    }))
}

fn root(curve: &Curve, sight: Sight, from: f64, to: f64, at_from: f64) -> f64 {
    newton(from, to, at_from, |t| {
        let [point, first, _, _] = curve.derivatives(t);
        (sight.off(point), cross(sight.direction, first))
    })
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
        let step = f / slope;
        let next = t - step;
        let inside = next > low && next < high;
        let next = if inside { next } else { 0.5 * (low + high) };
        if (next - t).abs() <= 2.0 * f64::EPSILON * (to.abs() + from.abs()) {
            return next;
        }
        t = next;
    }
    t
}

fn bisect(from: f64, to: f64, value: impl Fn(f64) -> f64) -> f64 {
    let at_from = value(from);
    let (mut low, mut high) = (from, to);
    for _ in 0..LARGEST_STEPS {
        let middle = 0.5 * (low + high);
        if (value(middle) < 0.0) == (at_from < 0.0) {
            low = middle;
        } else {
            high = middle;
        }
    }
    0.5 * (low + high)
}
