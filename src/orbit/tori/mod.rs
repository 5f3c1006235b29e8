//! Tori of integrable billiards: disk, annulus, circular sectors, ellipse.
//!
//! In these shapes almost every periodic orbit belongs to a family that fills a torus of phase space. The staircase is the
//! Poisson sum over the two quantum numbers; its stationary points are the rational tori and give one term each
//! (Berry & Tabor, Proc. R. Soc. A 349, 1976):
//!
//! N(k) = sum over tori of f/(pi n) sqrt(k/(n |omega'(J)|)) sin(k L - 2 pi n alpha - (pi/4) sgn omega'),
//!
//! n periods of the radial motion, omega = w/n the rotation number, J = (1/2 pi) closed integral of p ds over a section,
//! alpha the sum of the phase losses, f the number of directions.
//!
//! * [`recognise()`] decides whether a domain is one of these shapes.
//! * [`terms`] lists the families and their terms, with the phase of next order in 1/k where it is known (not for the
//!   ellipse), and says what it leaves out.
//!
//! Stationary phase fails for tori with many bounces, above about (kR)^(1/3) for one turn (whispering gallery), however
//! many of them are summed: their phase correction exceeds its clamp. That error is not part of [`TorusSum::left_out`],
//! which holds what the *truncation* leaves.

mod axis;
mod carlson;
mod circular;
mod confocal;
mod conic;
mod ellipse;
mod family;
mod phase;
mod recognise;

pub use family::{FamilyKind, LeftOut, LeftOutKind, TorusFamily, TorusSum};
pub use recognise::recognise;

use crate::billiard::Condition;

/// An integrable shape. Lengths are in the domain's unit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Integrable {
    /// Disk.
    Disk {
        /// Radius.
        radius: f64,
        /// Condition on the wall.
        condition: Condition,
    },
    /// Ring between two concentric circles.
    Annulus {
        /// Outer radius.
        outer_radius: f64,
        /// Inner radius.
        inner_radius: f64,
        /// Condition on the outer circle.
        outer: Condition,
        /// Condition on the inner circle.
        inner: Condition,
    },
    /// Circular sector: an arc and two radial walls from its centre.
    Sector {
        /// Radius.
        radius: f64,
        /// Opening angle in (0, 2 pi), radians.
        opening: f64,
        /// Condition on the arc.
        arc: Condition,
        /// Conditions on the radial wall where the arc ends and on the one where it begins.
        radial: [Condition; 2],
    },
    /// Ellipse that is not a circle.
    Ellipse {
        /// Half of the long axis.
        long: f64,
        /// Half of the short axis.
        short: f64,
        /// Condition on the wall.
        condition: Condition,
    },
}

/// Default of [`TorusLimits::max_bounces`].
///
/// The tail of the series of tori with w turns on a disk of radius R is about sqrt(2 w k R)/V^2 level when it is cut
/// after V bounces (the terms fall as 2 sqrt(w k R)/v^2 and their phases step by a quarter turn): 2e-4 at V = 240,
/// w = 1, kR = 100, before the factor exp(-(2 pi w s R)^2/2) of the smoothing. So at s L_max >= 3, where the cut in length leaves
/// about 1e-3, the cut in bounces does not matter.
pub const DEFAULT_MAX_BOUNCES: u32 = 240;

/// Which tori are summed.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TorusLimits {
    /// Longest orbit, repetitions included, in the domain's unit of length.
    pub max_length: f64,
    /// Largest number of bounces on the walls (radial walls of a sector not counted), repetitions included.
    pub max_bounces: u32,
}

impl TorusLimits {
    /// All orbits up to a length, with the default limit of bounces.
    #[must_use]
    pub fn up_to(max_length: f64) -> Self {
        Self {
            max_length,
            max_bounces: DEFAULT_MAX_BOUNCES,
        }
    }
}

/// Families of an integrable shape, one term for each of them and each repetition, sorted by length.
///
/// The number of families grows as `max_length` x `max_bounces` (over the opening, for a narrow sector); a limit of length that is not finite gives none.
#[must_use]
pub fn terms(shape: &Integrable, limits: &TorusLimits) -> TorusSum {
    let mut sum = TorusSum::default();
    if !limits.max_length.is_finite() {
        return sum;
    }
    match *shape {
        Integrable::Disk { radius, condition } => {
            circular::disk(radius, condition, limits, &mut sum);
        }
        Integrable::Annulus {
            outer_radius,
            inner_radius,
            outer,
            inner,
        } => circular::Annulus {
            outer_radius,
            ratio: inner_radius / outer_radius,
            outer,
            inner,
        }
        .add(limits, &mut sum),
        Integrable::Sector {
            radius,
            opening,
            arc,
            radial,
        } => circular::Sector {
            radius,
            opening,
            arc,
            radial,
        }
        .add(limits, &mut sum),
        Integrable::Ellipse {
            long,
            short,
            condition,
        } => confocal::Ellipse {
            long,
            short,
            condition,
        }
        .add(limits, &mut sum),
    }
    sum.sort();
    sum
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn condition() -> impl Strategy<Value = Condition> {
        prop_oneof![Just(Condition::Dirichlet), Just(Condition::Neumann)]
    }

    fn shape() -> impl Strategy<Value = Integrable> {
        let numbers = (
            0.1..10.0_f64,
            0.0..1.0_f64,
            condition(),
            condition(),
            condition(),
        );
        (0..4, numbers).prop_map(|(kind, (radius, fraction, a, b, c))| match kind {
            0 => Integrable::Disk {
                radius,
                condition: a,
            },
            1 => Integrable::Annulus {
                outer_radius: radius,
                inner_radius: radius * (0.001 + 0.99 * fraction),
                outer: a,
                inner: b,
            },
            2 => Integrable::Sector {
                radius,
                opening: 0.05 + 6.2 * fraction,
                arc: a,
                radial: [b, c],
            },
            _ => Integrable::Ellipse {
                long: radius,
                short: radius * (0.02 + 0.979 * fraction),
                condition: a,
            },
        })
    }

    proptest! {
        #[test]
        fn terms_are_finite_sorted_and_within_the_limits(shape in shape(), max_length in 0.1..40.0_f64, max_bounces in 0..60_u32) {
            let limits = TorusLimits { max_length, max_bounces };
            let sum = terms(&shape, &limits);
            prop_assert_eq!(sum.terms.len(), sum.families.len());
            for (family, term) in sum.families.iter().zip(&sum.terms) {
                prop_assert!(term.coefficient.is_finite() && term.length > 0.0);
                prop_assert!(term.length <= max_length * (1.0 + 1e-8) && family.bounces <= max_bounces);
                prop_assert_eq!(family.bounces % family.repetition, 0);
            }
            prop_assert!(sum.families.is_sorted_by(|a, b| a.length <= b.length));
            prop_assert!(sum.left_out.iter().all(|part| part.amplitude.is_finite()));
        }
    }

    #[test]
    fn a_limit_that_is_not_finite_gives_nothing() {
        let shape = Integrable::Disk {
            radius: 1.0,
            condition: Condition::Neumann,
        };
        for max_length in [f64::NAN, f64::INFINITY, -1.0] {
            assert!(
                terms(&shape, &TorusLimits::up_to(max_length))
                    .terms
                    .is_empty()
            );
        }
    }
}
