//! Tori of the ellipse, leading order.
//!
//! In elliptic coordinates x = c cosh(mu) cos(nu), y = c sinh(mu) sin(nu) the motion separates (k = 1):
//! p_mu^2 = c^2 (cosh(mu)^2 - g), p_nu^2 = c^2 (g - cos(nu)^2). Orbits with g > 1 touch a confocal ellipse of half axis
//! c sqrt(g) and go around the foci (rotations); with g < 1 they touch a confocal hyperbola and pass between them
//! (librations). All integrals below were reduced to Legendre's form by hand; the tests compare lengths and closure with
//! bounces traced on the wall, and rotation numbers' slopes with differences.

use super::TorusLimits;
use super::axis;
use super::carlson::{Amplitude, COMPLETE, Integrals, Parameter, delta, first_kind, integrals};
use super::family::{FamilyKind, LeftOut, LeftOutKind, TorusFamily, TorusSum, Wave, gcd};
use super::phase::{quarters_at, quarters_caustic_to};
use crate::billiard::Condition;
use crate::trace;
use std::f64::consts::{PI, SQRT_2};

/// Steps of the bisection for a torus of given rotation number: the bracket is at most 1500 wide in u, and 1e-15 of the
/// rounding of u is reached well before.
const BISECTIONS: usize = 70;

/// Smallest u of [`Parameter::logistic`]: 1 - m = 1e-304 there, and the torus has no weight long before.
const SEPARATRIX: f64 = -700.0;

/// Largest u: m = 1e-304, the orbit along the short axis.
const AXIS: f64 = 700.0;

/// A rotation number nearer than this to that of the short axis is a bifurcation of the axis orbit, exactly.
pub(super) const BIFURCATION: f64 = 1e-9;

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
    /// Half axis of the caustic on the long axis.
    pub(super) caustic: f64,
}

impl Ellipse {
    /// Half of the distance of the foci.
    pub(super) fn focus(&self) -> f64 {
        ((self.long - self.short) * (self.long + self.short)).sqrt()
    }

    /// All tori and both axis orbits within the limits.
    pub(super) fn add(&self, limits: &TorusLimits, sum: &mut TorusSum) {
        self.add_rotations(limits, sum);
        self.add_librations(limits, sum);
        axis::add(self, limits, sum);
    }

    /// N = 2/(pi n) sqrt(k/(n |omega'|)) sin(k L - 2 pi n alpha - (pi/4) sgn omega'), omega = w/n in (0, 1/2), alpha =
    /// 3/4 (Dirichlet) or 1/4 (Neumann).
    fn add_rotations(&self, limits: &TorusLimits, sum: &mut TorusSum) {
        for w in 1.. {
            // 2w + 1 bounces are the fewest; a closed polygon around both foci with w turns is longer than 4 w c, and one
            // with n >= 2w bounces around a confocal ellipse of half axes >= 0 is longer than 4 w times the short axis.
            if 4.0 * f64::from(w) * self.focus().max(self.short) > limits.max_length {
                break;
            }
            for n in 2 * w + 1..=(2 * w + 1).max(limits.max_bounces.saturating_add(1)) {
                let Some(torus) = self.rotation(w, n) else {
                    continue;
                };
                if torus.length > limits.max_length {
                    break;
                }
                let amplitude = 2.0 / (PI * f64::from(n)) / (f64::from(n) * torus.twist.abs()).sqrt();
                if n > limits.max_bounces {
                    // As for chords of a circle: neighbouring terms differ by a quarter turn.
                    sum.left_out.push(LeftOut {
                        kind: LeftOutKind::ManyBounces { winding: w },
                        length: torus.length,
                        amplitude: amplitude / SQRT_2,
                        power: 0.5,
                    });
                    break;
                }
                sum.push(
                    family(FamilyKind::Rotation, w, n, torus.length, gcd(n, w)),
                    &wave(amplitude, n * quarters_caustic_to(self.condition), torus.twist),
                );
            }
        }
    }

    /// N = 1/(pi n) sqrt(k/(n |omega'|)) sin(k L - 2 pi n alpha_mu - pi w - (pi/4) sgn omega'): n periods of two bounces
    /// each, w oscillations between the branches of the hyperbola (two caustics each), alpha_mu = 1 or 0.
    ///
    /// mu runs from -mu0 to mu0 and nu from 0 to pi here, so one torus holds both directions.
    fn add_librations(&self, limits: &TorusLimits, sum: &mut TorusSum) {
        // A period is longer than the short axis there and back.
        let most = (limits.max_length / (4.0 * self.short)).floor() as u32;
        for n in 1..=most {
            let lowest = self.axis_rotation() * f64::from(n);
            for w in (lowest - BIFURCATION * f64::from(n)).ceil().max(1.0) as u32..n {
                let bifurcation = f64::from(w) - lowest < BIFURCATION * f64::from(n);
                let found = if bifurcation { Some(self.libration_at(AXIS, w, n)) } else { self.libration(w, n) };
                let Some(torus) = found.filter(|torus| torus.length <= limits.max_length) else {
                    continue;
                };
                // At a bifurcation the stationary point is the end of the integral: half of it.
                let half = if bifurcation { 0.5 } else { 1.0 };
                let amplitude = half / (PI * f64::from(n)) / (f64::from(n) * torus.twist.abs()).sqrt();
                if 2 * n > limits.max_bounces {
                    sum.left_out.push(LeftOut {
                        kind: LeftOutKind::ManyBounces { winding: w },
                        length: torus.length,
                        amplitude,
                        power: 0.5,
                    });
                    continue;
                }
                let quarters = 2 * (n * quarters_at(self.condition) + w);
                sum.push(
                    TorusFamily {
                        directions: 1,
                        ..family(FamilyKind::Libration, w, 2 * n, torus.length, gcd(n, w))
                    },
                    &wave(amplitude, quarters, torus.twist),
                );
            }
        }
    }

    /// Torus of rotations with w turns in n bounces; none if it is too near to the separatrix to have any weight.
    pub(super) fn rotation(&self, w: u32, n: u32) -> Option<Torus> {
        let wanted = f64::from(w) / f64::from(n);
        // c/sqrt(m) < long, that is exp(u) < (short/c)^2.
        let wall = 2.0 * (self.short / self.focus()).ln();
        let u = bisect(|u| self.rotation_number(u) - wanted, SEPARATRIX, wall)?;
        Some(self.rotation_at(u, w, n))
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
    pub(super) fn rotation_at(&self, u: f64, w: u32, n: u32) -> Torus {
        let parameter = Parameter::logistic(u);
        let phi = self.rotation_amplitude(parameter);
        let (part, full) = (integrals(phi, parameter), integrals(COMPLETE, parameter));
        let q = self.focus() / parameter.m.sqrt();
        let root = delta(phi, parameter);
        let length = 2.0 * f64::from(n) * q * (phi.cos / phi.sin * root - full.second + part.second)
            + 4.0 * f64::from(w) * q * full.second;
        // d phi/dq = 1/(a cos phi), dm/dq = -2 m/q
        let turning = 1.0 / (root * self.long * phi.cos);
        let slope = -0.5 * (ratio_slope(&part, &full) * -2.0 * parameter.m / q + turning / full.first);
        Torus {
            length,
            twist: slope / (2.0 / PI * full.first),
            caustic: q,
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
        let wanted = f64::from(w) / f64::from(n);
        let u = bisect(|u| self.libration_number(u) - wanted, SEPARATRIX, AXIS)?;
        Some(self.libration_at(u, w, n))
    }

    /// J = (2c/pi) (E - (1 - m) K), dJ/dm = (c/pi) K, and
    /// L = 4 c n (cot(phi) Delta + (1 - m)(K - F) - E + E(phi|m)) + 4 c w (E - (1 - m) K).
    pub(super) fn libration_at(&self, u: f64, w: u32, n: u32) -> Torus {
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
            caustic: c * parameter.m.sqrt(),
        }
    }
}

/// d/dm of F(phi|m)/K(m) at fixed phi.
fn ratio_slope(part: &Integrals, full: &Integrals) -> f64 {
    (part.slope - part.first / full.first * full.slope) / full.first
}

fn family(kind: FamilyKind, winding: u32, bounces: u32, length: f64, repetition: u32) -> TorusFamily {
    TorusFamily {
        kind,
        winding,
        bounces,
        outer_bounces: bounces,
        length,
        directions: 2,
        repetition,
    }
}

fn wave(amplitude: f64, quarters: u32, twist: f64) -> Wave {
    Wave {
        amplitude,
        quarters,
        eighths: if twist > 0.0 { -1 } else { 1 },
        law: trace::Amplitude::Torus { slope: 0.0 },
    }
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
