//! Rational tori of the ellipse: where they are, how long their orbits are, and their twist.
//!
//! In elliptic coordinates x = c cosh(mu) cos(nu), y = c sinh(mu) sin(nu) the motion separates (k = 1):
//! p_mu^2 = c^2 (cosh(mu)^2 - g), p_nu^2 = c^2 (g - cos(nu)^2). Orbits with g > 1 touch a confocal ellipse of half axis
//! c sqrt(g) and go around the foci (rotations); with g < 1 they touch a confocal hyperbola and pass between them
//! (librations). All integrals below were reduced to Legendre's form by hand; the tests compare lengths and closure with
//! bounces traced on the wall, and rotation numbers' slopes with differences.

use super::carlson::{Amplitude, COMPLETE, Integrals, Parameter, delta, first_kind, integrals};
use crate::billiard::Condition;
use std::f64::consts::PI;

/// Steps of the bisection for a torus of given rotation number: the bracket is at most 1500 wide in u, and 1e-15 of the
/// rounding of u is reached well before.
const BISECTIONS: usize = 70;

/// Smallest u of [`Parameter::logistic`]: 1 - m = 1e-304 there, and the torus has no weight long before.
const SEPARATRIX: f64 = -700.0;

/// Largest u: m = 1e-304, the orbit along the short axis.
const AXIS: f64 = 700.0;

/// Ellipse with half axes `long` > `short`.
#[derive(Clone, Copy, Debug)]
pub(super) struct Ellipse {
    pub(super) long: f64,
    pub(super) short: f64,
    pub(super) condition: Condition,
}

/// What a rational torus needs for its term.
#[derive(Clone, Copy, Debug)]
pub(super) struct Torus {
    /// Length of the closed orbits.
    pub(super) length: f64,
    /// d omega/dJ, omega per period of the radial motion.
    pub(super) twist: f64,
}

impl Ellipse {
    /// Half of the distance of the foci.
    pub(super) fn focus(&self) -> f64 {
        ((self.long - self.short) * (self.long + self.short)).sqrt()
    }

    /// Torus of rotations with w turns in n bounces; none if it is too near to the separatrix to have any weight.
    pub(super) fn rotation(&self, w: u32, n: u32) -> Option<Torus> {
        let u = self.solve_rotation(f64::from(w) / f64::from(n))?;
        Some(self.rotation_at(u, w, n))
    }

    /// u of [`Parameter::logistic`] at which the rotation number is the wanted one.
    fn solve_rotation(&self, wanted: f64) -> Option<f64> {
        // c/sqrt(m) < long, that is exp(u) < (short/c)^2.
        let wall = 2.0 * (self.short / self.focus()).ln();
        bisect(|u| self.rotation_number(u) - wanted, SEPARATRIX, wall)
    }

    /// sin(phi) = caustic/long for the rotation with parameter m = (c/caustic)^2.
    fn rotation_amplitude(&self, parameter: Parameter) -> Amplitude {
        let (c, a) = (self.focus(), self.long);
        // cos^2 = 1 - c^2/(m a^2) = (b^2/a^2) - (c^2/a^2) (1 - m)/m
        let cos2 = (self.short.powi(2) - c * c * parameter.complement / parameter.m) / (a * a);
        Amplitude {
            sin: c / (parameter.m.sqrt() * a),
            cos: cos2.max(0.0).sqrt(),
        }
    }

    /// omega = (1 - F(phi|m)/K(m))/2 turns per bounce.
    fn rotation_number(&self, u: f64) -> f64 {
        let parameter = Parameter::logistic(u);
        let phi = self.rotation_amplitude(parameter);
        0.5 * (1.0 - first_kind(phi, parameter) / first_kind(COMPLETE, parameter))
    }

    /// With q = c/sqrt(m) the caustic's half axis: J = (2/pi) q E(m), dJ/dq = (2/pi) K(m), and
    /// L = 2 n q (cot(phi) Delta - E(m) + E(phi|m)) + 4 w q E(m).
    fn rotation_at(&self, u: f64, w: u32, n: u32) -> Torus {
        let parameter = Parameter::logistic(u);
        let phi = self.rotation_amplitude(parameter);
        let (part, full) = (integrals(phi, parameter), integrals(COMPLETE, parameter));
        let q = self.focus() / parameter.m.sqrt();
        let root = delta(phi, parameter);
        let length =
            2.0 * f64::from(n) * q * (phi.cos / phi.sin * root - full.second + part.second)
                + 4.0 * f64::from(w) * q * full.second;
        // d phi/dq = 1/(a cos phi), dm/dq = -2 m/q
        let turning = 1.0 / (root * self.long * phi.cos);
        let slope =
            -0.5 * (ratio_slope(&part, &full) * -2.0 * parameter.m / q + turning / full.first);
        Torus {
            length,
            twist: slope / (2.0 / PI * full.first),
        }
    }

    /// sin(phi) = c/a for all librations.
    fn libration_amplitude(&self) -> Amplitude {
        Amplitude {
            sin: self.focus() / self.long,
            cos: self.short / self.long,
        }
    }

    /// Rotation number of the orbit along the short axis: oscillations of a neighbouring orbit per two bounces.
    pub(super) fn axis_rotation(&self) -> f64 {
        let phi = self.libration_amplitude();
        1.0 - 2.0 / PI * phi.sin.atan2(phi.cos)
    }

    /// Omega = 1 - F(phi|m)/K(m), m = g.
    fn libration_number(&self, u: f64) -> f64 {
        let parameter = Parameter::logistic(u);
        1.0 - first_kind(self.libration_amplitude(), parameter) / first_kind(COMPLETE, parameter)
    }

    /// Torus of librations with w oscillations in n periods of two bounces.
    pub(super) fn libration(&self, w: u32, n: u32) -> Option<Torus> {
        let u = self.solve_libration(f64::from(w) / f64::from(n))?;
        Some(self.libration_at(u, w, n))
    }

    /// The torus of librations that shrinks to the short axis; meaningful where w/n is [`Ellipse::axis_rotation`].
    pub(super) fn axis_libration(&self, w: u32, n: u32) -> Torus {
        self.libration_at(AXIS, w, n)
    }

    /// The same for librations.
    fn solve_libration(&self, wanted: f64) -> Option<f64> {
        bisect(|u| self.libration_number(u) - wanted, SEPARATRIX, AXIS)
    }

    /// J = (2c/pi) (E - (1 - m) K), dJ/dm = (c/pi) K, and
    /// L = 4 c n (cot(phi) Delta + (1 - m)(K - F) - E + E(phi|m)) + 4 c w (E - (1 - m) K).
    fn libration_at(&self, u: f64, w: u32, n: u32) -> Torus {
        let parameter = Parameter::logistic(u);
        let phi = self.libration_amplitude();
        let (part, full) = (integrals(phi, parameter), integrals(COMPLETE, parameter));
        let c = self.focus();
        let crossing = phi.cos / phi.sin * delta(phi, parameter)
            + parameter.complement * (full.first - part.first)
            - full.second
            + part.second;
        let along = full.second - parameter.complement * full.first;
        Torus {
            length: 4.0 * c * (f64::from(n) * crossing + f64::from(w) * along),
            twist: -ratio_slope(&part, &full) / (c / PI * full.first),
        }
    }
}

/// d/dm of F(phi|m)/K(m) at fixed phi.
fn ratio_slope(part: &Integrals, full: &Integrals) -> f64 {
    (part.slope - part.first / full.first * full.slope) / full.first
}

/// Zero of a decreasing function between two points; none if it has one sign at both.
fn bisect(function: impl Fn(f64) -> f64, mut low: f64, mut high: f64) -> Option<f64> {
    if function(low) < 0.0 || function(high) > 0.0 {
        return None;
    }
    for _ in 0..BISECTIONS {
        let middle = 0.5 * (low + high);
        if function(middle) > 0.0 {
            low = middle;
        } else {
            high = middle;
        }
    }
    Some(0.5 * (low + high))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::billiard::Vec2;

    const SHAPES: [f64; 3] = [0.8, 0.6, 0.25];

    fn ellipse(short: f64) -> Ellipse {
        Ellipse {
            long: 1.0,
            short,
            condition: Condition::Dirichlet,
        }
    }

    /// Next point and direction on the ellipse x^2 + y^2/b^2 = 1, and the length of the flight.
    fn bounce(short: f64, point: Vec2, direction: Vec2) -> (Vec2, Vec2, f64) {
        let metric = |a: Vec2, b: Vec2| a.x * b.x + a.y * b.y / (short * short);
        let flight = -2.0 * metric(point, direction) / metric(direction, direction);
        let next = point + direction * flight;
        let normal = Vec2::new(next.x, next.y / (short * short)).normalize();
        (
            next,
            direction - normal * 2.0 * normal.dot(&direction),
            flight,
        )
    }

    /// Follows n bounces; returns the distance from the start and the length.
    fn follow(short: f64, start: Vec2, direction: Vec2, n: u32) -> (f64, f64) {
        let (mut point, mut towards, mut length) = (start, direction, 0.0);
        for _ in 0..n {
            let (next, reflected, flight) = bounce(short, point, towards);
            (point, towards, length) = (next, reflected, length + flight);
        }
        (
            (point - start).norm() + (towards - direction).norm(),
            length,
        )
    }

    #[test]
    fn rotations_close_with_the_stated_length() {
        for short in SHAPES {
            let ellipse = ellipse(short);
            for (w, n) in [(1, 3), (1, 4), (1, 9), (2, 5), (3, 10)] {
                let u = ellipse
                    .solve_rotation(f64::from(w) / f64::from(n))
                    .expect("torus exists");
                let caustic = ellipse.focus() / Parameter::logistic(u).m.sqrt();
                // From the end of the long axis, tangent to the confocal ellipse: sin(angle to the axis) = q'/sqrt(1 - c^2), q'
                // its half axis along y (a tangent y = t (1 - x) has t^2 = q'^2/(1 - q^2)).
                let across2 = caustic.powi(2) - ellipse.focus().powi(2);
                let slope = (across2 / (1.0 - caustic.powi(2))).sqrt();
                let direction = Vec2::new(-1.0, slope).normalize();
                let (gap, length) = follow(short, Vec2::new(1.0, 0.0), direction, n);
                let torus = ellipse.rotation_at(u, w, n);
                assert!(gap < 1e-8, "{short} {w}/{n}: gap {gap:e}");
                assert!(
                    (length - torus.length).abs() < 1e-10,
                    "{short} {w}/{n}: {length} {}",
                    torus.length
                );
            }
        }
    }

    #[test]
    fn librations_close_with_the_stated_length() {
        for (short, w, n) in [
            (0.8, 2, 3),
            (0.8, 3, 4),
            (0.8, 5, 6),
            (0.6, 1, 2),
            (0.6, 3, 7),
            (0.25, 1, 3),
        ] {
            let ellipse = ellipse(short);
            let u = ellipse
                .solve_libration(f64::from(w) / f64::from(n))
                .expect("torus exists");
            // From the end of the short axis, tangent to the hyperbola x^2/q^2 - y^2/q'^2 = 1: the line y = b - t x has
            // b^2 = q^2 t^2 - q'^2.
            let caustic2 = ellipse.focus().powi(2) * Parameter::logistic(u).m;
            let across2 = ellipse.focus().powi(2) - caustic2;
            let slope = ((short * short + across2) / caustic2).sqrt();
            let direction = Vec2::new(1.0, -slope).normalize();
            let (gap, length) = follow(short, Vec2::new(0.0, short), direction, 2 * n);
            let torus = ellipse.libration_at(u, w, n);
            assert!(gap < 1e-8, "{short} {w}/{n}: gap {gap:e}");
            assert!(
                (length - torus.length).abs() < 1e-10,
                "{short} {w}/{n}: {length} {}",
                torus.length
            );
        }
    }

    #[test]
    fn twist_is_the_slope_of_the_rotation_number() {
        // J from its closed forms, omega by differences in u.
        let ellipse = ellipse(0.6);
        let c = ellipse.focus();
        let action = |u: f64, rotation: bool| {
            let parameter = Parameter::logistic(u);
            let full = integrals(COMPLETE, parameter);
            if rotation {
                2.0 / PI * c / parameter.m.sqrt() * full.second
            } else {
                2.0 * c / PI * (full.second - parameter.complement * full.first)
            }
        };
        // The last u is 0.025 from the wall, where omega has a square-root end: the difference is off by (step/0.025)^2.
        let step = 1e-5;
        for u in [-3.0, -1.0, -0.6] {
            let rotations = (ellipse.rotation_number(u + step) - ellipse.rotation_number(u - step))
                / (action(u + step, true) - action(u - step, true));
            let librations = (ellipse.libration_number(u + step)
                - ellipse.libration_number(u - step))
                / (action(u + step, false) - action(u - step, false));
            let (a, b) = (
                ellipse.rotation_at(u, 1, 3).twist,
                ellipse.libration_at(u, 1, 2).twist,
            );
            assert!((rotations / a - 1.0).abs() < 1e-6, "{u}: {rotations} {a}");
            assert!((librations / b - 1.0).abs() < 1e-6, "{u}: {librations} {b}");
        }
    }

    #[test]
    fn axis_rotation_number_is_that_of_the_monodromy() {
        // One bounce turns a neighbouring orbit by psi, cos(psi) = bend - 1 with every bounce reversing the transverse
        // direction: without the reversal it turns by pi - psi.
        for short in SHAPES {
            let psi = (2.0 * short * short - 1.0).acos();
            let expected = (PI - psi) / PI;
            assert!((ellipse(short).axis_rotation() - expected).abs() < 1e-12);
        }
    }
}
