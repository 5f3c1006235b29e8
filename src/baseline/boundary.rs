//! What the walls and corners of a domain contribute to the Weyl expansion.

use crate::billiard::{Condition, Domain, Shape, Vertex, Wall, cross, quadrature};
use std::f64::consts::PI;

/// Angles (radians) closer than this are the same: the error of a tangent in a file written with ten digits.
const SAME_ANGLE: f64 = 1e-7;
/// A wall whose curvature times the domain's size stays below this is straight at its end.
const STRAIGHT: f64 = 1e-9;
/// A wall whose curvature at its end times the domain's size exceeds this ends in a cusp.
const CUSP_CURVATURE: f64 = 1e6;
/// Below this inner angle (radians) the two walls of a corner are tangent to each other, and the expansion has other powers
/// of k than a corner gives.
const ZERO_ANGLE: f64 = 1e-6;
/// Steps in which the turning of a curve's tangent is added up; each must turn by less than half a turn.
const TURNING_STEPS: usize = 1024;

/// Integral of the curvature along a wall: the angle by which its tangent turns.
pub(super) fn turning(wall: &Wall) -> f64 {
    match &wall.shape {
        Shape::Line(_) => 0.0,
        Shape::Arc(arc) => arc.sweep,
        Shape::Curve(_) => {
            let tangent = |i: usize| {
                wall.frame(wall.extent() * i as f64 / TURNING_STEPS as f64)
                    .tangent
            };
            (0..TURNING_STEPS)
                .map(|i| {
                    let (a, b) = (tangent(i), tangent(i + 1));
                    cross(a, b).atan2(a.dot(&b))
                })
                .sum()
        }
    }
}

/// Constant of a corner of inner angle alpha, or `None` at a corner of angle zero.
///
/// Like walls: (pi^2 - alpha^2)/(24 pi alpha) (Kac 1966, with the closed form of McKean & Singer 1967); unlike walls: -(pi^2 + 2 alpha^2)/(48 pi alpha)
/// (Baltes & Hilf 1976). Where nothing happens (alpha = pi, like walls) it vanishes.
pub(super) fn corner_constant(domain: &Domain, vertex: &Vertex) -> Option<f64> {
    let alpha = vertex.angle;
    if alpha < ZERO_ANGLE {
        return None;
    }
    Some(if like(domain, vertex) {
        (PI * PI - alpha * alpha) / (24.0 * PI * alpha)
    } else {
        -(PI * PI + 2.0 * alpha * alpha) / (48.0 * PI * alpha)
    })
}

fn like(domain: &Domain, vertex: &Vertex) -> bool {
    domain.walls[vertex.before].condition == domain.walls[vertex.after].condition
}

/// A cusp: inner angle 2 pi, but not the free end of a thin wall.
pub(super) fn is_cusp(domain: &Domain, vertex: &Vertex) -> bool {
    let tip = domain.walls[vertex.after].twin == Some(vertex.before);
    (vertex.angle - 2.0 * PI).abs() < SAME_ANGLE && !tip
}

/// Curvature at the vertex of the wall that ends there and of the one that begins, zero on straight walls.
pub(super) fn curvatures(domain: &Domain, vertex: &Vertex) -> [f64; 2] {
    let before = &domain.walls[vertex.before];
    let ends = [
        before.frame(before.extent()).curvature,
        domain.walls[vertex.after].frame(0.0).curvature,
    ];
    ends.map(|curvature| {
        if curvature.abs() * domain.size < STRAIGHT {
            0.0
        } else {
            curvature
        }
    })
}

/// Coefficient of 1/k of the smooth walls: (1/(256 pi)) integral of curvature^2 ds for D, five times that for N
/// (Stewartson & Waechter 1971 for D). `None` if the integral does not converge (a cusp).
pub(super) fn smooth_inverse(domain: &Domain) -> Option<f64> {
    let bent = domain.vertices.iter().any(|vertex| {
        let ends = curvatures(domain, vertex);
        // NaN counts as bent.
        !ends
            .iter()
            .all(|kappa| kappa.abs() * domain.size < CUSP_CURVATURE)
    });
    if bent {
        return None;
    }
    let sum: f64 = domain
        .walls
        .iter()
        .map(|wall| {
            let factor = match wall.condition {
                Condition::Dirichlet => 1.0,
                Condition::Neumann => 5.0,
            };
            factor * quadrature::along(wall, |frame| frame.curvature * frame.curvature)
        })
        .sum();
    Some(sum / (256.0 * PI)).filter(|value| value.is_finite())
}

/// Coefficient of 1/k of a corner, where it is known.
///
/// By its dimension the coefficient is linear in the curvatures of both walls. It vanishes between straight walls (whose corners
/// have no such term), where like walls meet smoothly, and, by mirror symmetry, where like walls have opposite curvatures (the
/// tip of a curved thin wall). At right angles each wall of curvature kappa contributes +-kappa/(32 pi) (D) or
/// +-3 kappa/(32 pi) (N), the upper sign if the other wall is like it; this follows from the zeros of Bessel functions on half and quarter
/// disks.
pub(super) fn corner_inverse(domain: &Domain, vertex: &Vertex) -> Option<f64> {
    let [before, after] = curvatures(domain, vertex);
    let like = like(domain, vertex);
    let scale = STRAIGHT / domain.size;
    if (before == 0.0 && after == 0.0) || (like && (before + after).abs() < scale) {
        return Some(0.0);
    }
    if like && (vertex.angle - PI).abs() < SAME_ANGLE {
        return Some(0.0);
    }
    if (vertex.angle - 0.5 * PI).abs() > SAME_ANGLE {
        return None;
    }
    let sign = if like { 1.0 } else { -1.0 };
    let share = |wall: usize, curvature: f64| {
        let factor = match domain.walls[wall].condition {
            Condition::Dirichlet => 1.0,
            Condition::Neumann => 3.0,
        };
        sign * factor * curvature / (32.0 * PI)
    };
    Some(share(vertex.before, before) + share(vertex.after, after))
}
