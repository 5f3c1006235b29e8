//! Terms of the ellipse, leading order.

use super::TorusLimits;
use super::axis;
use super::confocal::Ellipse;
use super::family::{FamilyKind, LeftOut, LeftOutKind, TorusFamily, TorusSum, Wave, gcd};
use super::phase::{quarters_at, quarters_caustic_to};
use crate::trace::Amplitude;
use std::f64::consts::{PI, SQRT_2};

/// A rotation number nearer than this to that of the short axis is a bifurcation of the axis orbit, exactly.
pub(super) const BIFURCATION: f64 = 1e-9;

impl Ellipse {
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
                let amplitude =
                    2.0 / (PI * f64::from(n)) / (f64::from(n) * torus.twist.abs()).sqrt();
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
                    &wave(
                        amplitude,
                        n * quarters_caustic_to(self.condition),
                        torus.twist,
                    ),
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
                let found = if bifurcation {
                    Some(self.axis_libration(w, n))
                } else {
                    self.libration(w, n)
                };
                let Some(torus) = found.filter(|torus| torus.length <= limits.max_length) else {
                    continue;
                };
                // At a bifurcation the stationary point is the end of the integral: half of it.
                let half = if bifurcation { 0.5 } else { 1.0 };
                let amplitude =
                    half / (PI * f64::from(n)) / (f64::from(n) * torus.twist.abs()).sqrt();
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
}

fn family(
    kind: FamilyKind,
    winding: u32,
    bounces: u32,
    length: f64,
    repetition: u32,
) -> TorusFamily {
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
        law: Amplitude::Torus { slope: 0.0 },
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::billiard::Condition;
    use crate::orbit::tori::{Integrable, terms};

    #[test]
    fn nearly_round_ellipse_has_the_rotations_of_the_disk() {
        let limits = TorusLimits {
            max_length: 13.0,
            max_bounces: 12,
        };
        let disk = terms(
            &Integrable::Disk {
                radius: 1.0,
                condition: Condition::Neumann,
            },
            &limits,
        );
        let difference = 1e-6;
        let ellipse = Integrable::Ellipse {
            long: 1.0,
            short: 1.0 - difference,
            condition: Condition::Neumann,
        };
        let ellipse = terms(&ellipse, &limits);
        let mut compared = 0;
        for (family, term) in disk.families.iter().zip(&disk.terms) {
            if family.directions == 1 {
                continue;
            }
            let same = ellipse.families.iter().position(|other| {
                other.kind == FamilyKind::Rotation
                    && (other.winding, other.bounces) == (family.winding, family.bounces)
            });
            let same = same.expect("the torus survives");
            assert!((ellipse.families[same].length - family.length).abs() < 20.0 * difference);
            let change = (ellipse.terms[same].coefficient / term.coefficient - 1.0).norm();
            assert!(change < 20.0 * difference, "{family:?}: {change:e}");
            compared += 1;
        }
        assert!(compared > 15, "{compared}");
    }

    #[test]
    fn exact_bifurcation_is_half_a_torus_and_no_axis_orbit() {
        // short^2 = long^2/2: bend = 1, the axis orbit turns by a quarter per bounce and is degenerate at r = 2.
        let shape = Integrable::Ellipse {
            long: 1.0,
            short: 0.5_f64.sqrt(),
            condition: Condition::Dirichlet,
        };
        let sum = terms(&shape, &TorusLimits::up_to(6.0));
        let length = 8.0 * 0.5_f64.sqrt();
        let here: Vec<_> = sum
            .families
            .iter()
            .filter(|family| (family.length - length).abs() < 1e-9)
            .collect();
        assert_eq!(here.len(), 1, "{here:?}");
        assert_eq!(here[0].kind, FamilyKind::Libration);
        assert!(sum.terms.iter().all(|term| term.coefficient.is_finite()));
    }
}
