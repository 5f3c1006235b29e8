//! Plane curves given by formulas, and cubic splines.

use super::formula::{Jet, Number, Tape};
use crate::billiard::{PlaneCurve, Vec2};

/// x(t) and y(t) as formulas.
#[derive(Debug)]
pub(super) struct Parametric {
    /// Tape with the outputs x and y in the variable t.
    pub(super) tape: Tape,
}

/// r(t) as a formula, t being the angle about a centre.
#[derive(Debug)]
pub(super) struct Polar {
    /// Tape with the output r in the variable t.
    pub(super) tape: Tape,
    /// Where r is measured from.
    pub(super) center: Vec2,
}

fn vectors(x: Jet, y: Jet) -> [Vec2; 4] {
    std::array::from_fn(|order| Vec2::new(x.0[order], y.0[order]))
}

impl PlaneCurve for Parametric {
    fn derivatives(&self, u: f64) -> [Vec2; 4] {
        let [x, y] = self.tape.evaluate(&[Jet::variable(u)]);
        vectors(x, y)
    }
}

impl PlaneCurve for Polar {
    fn derivatives(&self, u: f64) -> [Vec2; 4] {
        let [r] = self.tape.evaluate(&[Jet::variable(u)]);
        let (sin, cos) = u.sin_cos();
        let (x, y) = (
            r * Jet([cos, -sin, -cos, sin]),
            r * Jet([sin, cos, -sin, -cos]),
        );
        vectors(x.offset(self.center.x), y.offset(self.center.y))
    }
}

/// One piece of a cubic spline: a polynomial in u, which runs from 0 to the chord length of the piece.
#[derive(Debug)]
pub(super) struct Cubic {
    /// Coefficients of 1, u, u^2, u^3.
    coefficients: [Vec2; 4],
    /// Chord length.
    pub(super) length: f64,
}

impl PlaneCurve for Cubic {
    fn derivatives(&self, u: f64) -> [Vec2; 4] {
        let [a, b, c, d] = self.coefficients;
        [
            a + (b + (c + d * u) * u) * u,
            b + (c * 2.0 + d * (3.0 * u)) * u,
            c * 2.0 + d * (6.0 * u),
            d * 6.0,
        ]
    }
}

/// Twice continuously differentiable cubic spline through the points, with the chord length as its parameter (de Boor, A
/// Practical Guide to Splines, chapter IV). Closed: the last piece leads back to the first point, and the spline is periodic.
/// Open: the second derivative vanishes at both ends. Neighbouring points must differ, and there must be at least three.
pub(super) fn spline(points: &[Vec2], closed: bool) -> Vec<Cubic> {
    let count = points.len();
    let pieces = if closed { count } else { count - 1 };
    let end = |piece: usize| points[(piece + 1) % count];
    let lengths: Vec<f64> = (0..pieces).map(|i| (end(i) - points[i]).norm()).collect();
    let slopes: Vec<Vec2> = (0..pieces)
        .map(|i| (end(i) - points[i]) / lengths[i])
        .collect();
    let second = if closed {
        periodic_second(&lengths, &slopes)
    } else {
        natural_second(&lengths, &slopes)
    };
    (0..pieces)
        .map(|i| {
            let (left, right, h) = (second[i], second[(i + 1) % second.len()], lengths[i]);
            Cubic {
                coefficients: [
                    points[i],
                    slopes[i] - (left * 2.0 + right) * (h / 6.0),
                    left * 0.5,
                    (right - left) / (6.0 * h),
                ],
                length: h,
            }
        })
        .collect()
}

/// Second derivatives at the knots of an open spline.
fn natural_second(lengths: &[f64], slopes: &[Vec2]) -> Vec<Vec2> {
    let inner = lengths.len() - 1;
    let diagonal: Vec<f64> = (0..inner)
        .map(|i| 2.0 * (lengths[i] + lengths[i + 1]))
        .collect();
    let right: Vec<Vec2> = (0..inner)
        .map(|i| (slopes[i + 1] - slopes[i]) * 6.0)
        .collect();
    let mut second = vec![Vec2::zeros()];
    second.extend(tridiagonal(&diagonal, &lengths[1..inner], &right));
    second.push(Vec2::zeros());
    second
}

/// Second derivatives at the knots of a closed spline: a cyclic tridiagonal system, reduced to two tridiagonal ones
/// (Sherman & Morrison, Ann. Math. Stat. 21 (1950)).
fn periodic_second(lengths: &[f64], slopes: &[Vec2]) -> Vec<Vec2> {
    let count = lengths.len();
    let before = |i: usize| (i + count - 1) % count;
    let corner = lengths[count - 1];
    // Any multiple of the diagonal serves; minus its first entry keeps the reduced matrix diagonally dominant.
    let shift = -2.0 * (lengths[before(0)] + lengths[0]);
    let mut diagonal: Vec<f64> = (0..count)
        .map(|i| 2.0 * (lengths[before(i)] + lengths[i]))
        .collect();
    diagonal[0] -= shift;
    diagonal[count - 1] -= corner * corner / shift;
    let off = &lengths[..count - 1];
    let right: Vec<Vec2> = (0..count)
        .map(|i| (slopes[i] - slopes[before(i)]) * 6.0)
        .collect();
    let mut edge = vec![Vec2::zeros(); count];
    edge[0] = Vec2::repeat(shift);
    edge[count - 1] = Vec2::repeat(corner);
    let plain = tridiagonal(&diagonal, off, &right);
    let edge = tridiagonal(&diagonal, off, &edge);
    let along = |x: &[Vec2]| x[0] + x[count - 1] * (corner / shift);
    let factor = along(&plain).component_div(&(Vec2::repeat(1.0) + along(&edge)));
    plain
        .iter()
        .zip(&edge)
        .map(|(x, z)| x - z.component_mul(&factor))
        .collect()
}

/// Solves a symmetric, diagonally dominant tridiagonal system for both coordinates by elimination.
fn tridiagonal(diagonal: &[f64], off: &[f64], right: &[Vec2]) -> Vec<Vec2> {
    let count = diagonal.len();
    let mut pivots = diagonal.to_vec();
    let mut solution = right.to_vec();
    for i in 1..count {
        let factor = off[i - 1] / pivots[i - 1];
        pivots[i] -= factor * off[i - 1];
        let before = solution[i - 1];
        solution[i] -= before * factor;
    }
    for i in (0..count).rev() {
        if i + 1 < count {
            let after = solution[i + 1];
            solution[i] -= after * off[i];
        }
        solution[i] /= pivots[i];
    }
    solution
}

#[cfg(test)]
mod tests {
    use super::*;

    fn largest_jump(pieces: &[Cubic], closed: bool) -> f64 {
        let last = if closed {
            pieces.len()
        } else {
            pieces.len() - 1
        };
        (0..last)
            .flat_map(|i| {
                let end = pieces[i].derivatives(pieces[i].length);
                let start = pieces[(i + 1) % pieces.len()].derivatives(0.0);
                (0..3).map(move |order| (end[order] - start[order]).norm())
            })
            .fold(0.0, f64::max)
    }

    #[test]
    fn splines_are_twice_continuously_differentiable() {
        let points: Vec<Vec2> = [(0.0, 0.0), (1.0, 0.2), (1.4, 1.0), (0.3, 1.1), (-0.5, 0.4)]
            .iter()
            .map(|&(x, y)| Vec2::new(x, y))
            .collect();
        for count in 3..=points.len() {
            for closed in [false, true] {
                let pieces = spline(&points[..count], closed);
                assert!(largest_jump(&pieces, closed) < 1e-12);
                for (piece, point) in pieces.iter().zip(&points) {
                    assert!((piece.derivatives(0.0)[0] - point).norm() < 1e-15);
                }
            }
            let open = spline(&points[..count], false);
            let last = &open[count - 2];
            assert!(open[0].derivatives(0.0)[2].norm() < 1e-14);
            assert!(last.derivatives(last.length)[2].norm() < 1e-13);
        }
    }

    /// The error of a cubic spline through equidistant points of a smooth closed curve falls with the fourth power of the
    /// distance (de Boor, chapter V).
    #[test]
    fn spline_of_a_circle_converges_with_fourth_order() {
        let error = |count: usize| {
            let points: Vec<Vec2> = (0..count)
                .map(|i| {
                    let angle = std::f64::consts::TAU * i as f64 / count as f64;
                    Vec2::new(angle.cos(), angle.sin())
                })
                .collect();
            spline(&points, true)
                .iter()
                .map(|piece| (piece.derivatives(0.5 * piece.length)[0].norm() - 1.0).abs())
                .fold(0.0, f64::max)
        };
        let order = (error(16) / error(32)).log2();
        assert!((order - 4.0).abs() < 0.1, "order {order}");
    }
}
