//! Phases of circular tori: boundary losses and the correction of order 1/k.

use crate::billiard::Condition;

/// Quarter turns that one period of the radial motion loses between a caustic and a wall: 2 pi (1/4 + 1/2) at a Dirichlet
/// wall, 2 pi / 4 at a Neumann wall.
pub(super) fn quarters_caustic_to(wall: Condition) -> u32 {
    match wall {
        Condition::Dirichlet => 3,
        Condition::Neumann => 1,
    }
}

/// Quarter turns lost in one reflection from a wall.
pub(super) fn quarters_at(wall: Condition) -> u32 {
    match wall {
        Condition::Dirichlet => 2,
        Condition::Neumann => 0,
    }
}

/// Coefficient of 1/k in the phase delta of a reflection where the radial wave number is k q and the angular momentum k b.
///
/// From the Debye expansions of the Bessel functions and their derivatives (Abramowitz & Stegun 9.3.15 to 9.3.20):
/// Dirichlet -(1/(8q)) (1 + (5/3) b^2/q^2), Neumann +(3/(8q)) (1 + (7/9) b^2/q^2).
pub(super) fn reflection(wall: Condition, q: f64, b: f64) -> f64 {
    let ratio = (b / q).powi(2);
    match wall {
        Condition::Dirichlet => -(1.0 + 5.0 / 3.0 * ratio) / (8.0 * q),
        Condition::Neumann => 3.0 * (1.0 + 7.0 / 9.0 * ratio) / (8.0 * q),
    }
}

/// Coefficient of 1/k in the phase eta, the next order of the stationary-phase integral over the angular momentum k b.
///
/// eta = 5 f3^2/(24 f2^3) - f4/(8 f2^2), f_j = 2 v F_j the derivatives of the action with respect to the angular momentum:
/// F2 = 1/S - 1/T, F3 = b (1/S^3 - 1/T^3), F4 = 1/S^3 + 3 b^2/S^5 - (same with T), S and T the radial wave numbers over k
/// at the outer and at the inner wall (no T without an inner wall).
pub(super) fn stationary_point(v: u32, b: f64, outer: f64, inner: Option<f64>) -> f64 {
    let powers = |q: f64| {
        [
            1.0 / q,
            b / q.powi(3),
            1.0 / q.powi(3) + 3.0 * b * b / q.powi(5),
        ]
    };
    let mut f = powers(outer);
    if let Some(inner) = inner {
        for (value, part) in f.iter_mut().zip(powers(inner)) {
            *value -= part;
        }
    }
    let [f2, f3, f4] = f.map(|value| 2.0 * f64::from(v) * value);
    5.0 * f3 * f3 / (24.0 * f2.powi(3)) - f4 / (8.0 * f2 * f2)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn one_wall_has_the_closed_form() {
        // eta = -(1 + (4/3) cot^2 theta)/(16 v k sin theta)
        for (v, theta) in [(2_u32, 1.3_f64), (3, 1.0), (7, 0.4)] {
            let expected =
                -(1.0 + 4.0 / 3.0 / theta.tan().powi(2)) / (16.0 * f64::from(v) * theta.sin());
            let found = stationary_point(v, theta.cos(), theta.sin(), None);
            assert!((found / expected - 1.0).abs() < 1e-12, "{found} {expected}");
        }
    }
}
