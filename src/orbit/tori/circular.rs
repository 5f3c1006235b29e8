//! Tori of disk, annulus and circular sectors.
//!
//! Everything is computed for outer radius 1 and scaled at the end: lengths by R, k R for k.
//! theta is half of the angle that one chord subtends at the centre, b the impact parameter.

use super::TorusLimits;
use super::family::{FamilyKind, LeftOut, LeftOutKind, TorusFamily, TorusSum, Wave, gcd};
use super::phase::{quarters_at, quarters_caustic_to, reflection, stationary_point};
use crate::billiard::Condition;
use crate::trace::Amplitude;
use std::f64::consts::{FRAC_PI_2, PI, SQRT_2};

/// Angles (radians) and impact parameters (of radius 1) nearer than this are equal: the diameter and tangent tori must be
/// recognised from w pi/v in rounded arithmetic, and the next rational torus with a thousand bounces is 1e-6 away.
const SAME: f64 = 1e-9;

/// A diffraction coefficient smaller than this is that of a centre which does not diffract.
const NO_DIFFRACTION: f64 = 1e-12;

/// Angular factor of the diffraction at a sector's centre above which a torus of chords passes so near to the centre that
/// both overlap; there the phase correction of the centre's term is cut by its clamp at k R = 50.
const OVERLAP: f64 = 4.0;

/// Tori that pass the inner circle nearer than this (difference of impact parameters, of the outer radius) are named as
/// grazing: at k R = 50 the penumbra, about (k R)^(-2/3), is as wide.
const GRAZING: f64 = 0.07;

/// Chords of a circle of radius `radius` that turn by `opening` w in v bounces, at impact parameters of at least `ratio`.
struct Chords<'a> {
    radius: f64,
    opening: f64,
    ratio: f64,
    wall: Condition,
    /// Weight of a family with winding number w.
    weight: &'a dyn Fn(u32) -> f64,
}

impl Chords<'_> {
    /// N = weight f/(pi v) sqrt(pi k sin(theta)/v) sin(k L - 2 pi v alpha + pi/4 + 2 v delta + eta), theta = opening w/v,
    /// L = 2 v sin(theta), f = 1 for the diameter, else 2 (half of that where the chord touches the inner circle).
    fn add(&self, limits: &TorusLimits, sum: &mut TorusSum) {
        // A chord with theta = pi/2 is the shortest way to turn by opening w: L >= 4 opening w/pi.
        for w in 1.. {
            let turn = self.opening * f64::from(w);
            let shortest = 4.0 * turn / PI * self.radius;
            if shortest > limits.max_length * (1.0 + SAME) {
                break;
            }
            let first = (turn / self.ratio.acos() - SAME).ceil().max(1.0);
            self.add_winding(w, first as u32, limits, sum);
        }
    }

    fn add_winding(&self, w: u32, first: u32, limits: &TorusLimits, sum: &mut TorusSum) {
        for v in first..=first.max(limits.max_bounces.saturating_add(1)) {
            let theta = (self.opening * f64::from(w) / f64::from(v)).min(FRAC_PI_2);
            let length = 2.0 * f64::from(v) * theta.sin() * self.radius;
            if length > limits.max_length {
                break;
            }
            let diameter = FRAC_PI_2 - theta < SAME;
            let tangent = !diameter && theta.cos() - self.ratio < SAME;
            let directions = if diameter { 1 } else { 2 };
            let half = if tangent { 0.5 } else { 1.0 };
            let amplitude = (self.weight)(w) * half * f64::from(directions) / (PI * f64::from(v))
                * (PI * self.radius * theta.sin() / f64::from(v)).sqrt();
            if v > limits.max_bounces {
                // The phases of neighbouring v differ by an odd number of quarter turns, so the rest of the series is its
                // first term divided by |1 - i|.
                sum.left_out.push(LeftOut {
                    kind: LeftOutKind::ManyBounces { winding: w },
                    length,
                    amplitude: amplitude.abs() / SQRT_2,
                    power: 0.5,
                });
                break;
            }
            if self.ratio > 0.0 && theta.cos() - self.ratio < GRAZING {
                push_grazing(length, amplitude, sum);
            }
            // The diameter has impact parameter zero exactly.
            let b = if diameter { 0.0 } else { theta.cos() };
            let slope = 2.0 * f64::from(v) * reflection(self.wall, theta.sin(), b)
                + stationary_point(v, b, theta.sin(), None);
            sum.push(
                TorusFamily {
                    kind: if tangent {
                        FamilyKind::TangentChords
                    } else {
                        FamilyKind::Chords
                    },
                    winding: w,
                    bounces: v,
                    outer_bounces: v,
                    length,
                    directions,
                    repetition: gcd(v, w),
                },
                &Wave {
                    amplitude,
                    quarters: v * quarters_caustic_to(self.wall),
                    eighths: 1,
                    law: Amplitude::Torus {
                        slope: slope / self.radius,
                    },
                },
            );
        }
    }
}

fn push_grazing(length: f64, amplitude: f64, sum: &mut TorusSum) {
    sum.left_out.push(LeftOut {
        kind: LeftOutKind::Grazing,
        length,
        amplitude: amplitude.abs(),
        power: 0.5,
    });
}

/// Disk.
pub(super) fn disk(radius: f64, wall: Condition, limits: &TorusLimits, sum: &mut TorusSum) {
    Chords {
        radius,
        opening: PI,
        ratio: 0.0,
        wall,
        weight: &|_| 1.0,
    }
    .add(limits, sum);
}

/// Annulus; `ratio` is inner over outer radius.
pub(super) struct Annulus {
    pub(super) outer_radius: f64,
    pub(super) ratio: f64,
    pub(super) outer: Condition,
    pub(super) inner: Condition,
}

impl Annulus {
    pub(super) fn add(&self, limits: &TorusLimits, sum: &mut TorusSum) {
        Chords {
            radius: self.outer_radius,
            opening: PI,
            ratio: self.ratio,
            wall: self.outer,
            weight: &|_| 1.0,
        }
        .add(limits, sum);
        let gap = 2.0 * self.outer_radius * (1.0 - self.ratio);
        let pairs = (limits.max_length / gap * (1.0 + SAME)).floor() as u32;
        for v in 1..=pairs {
            for w in 0..v {
                if (PI * f64::from(w) / f64::from(v)).cos() - self.ratio < SAME {
                    break;
                }
                self.add_between(v, w, limits, sum);
            }
        }
    }

    /// N = f/(pi v) sqrt(pi k sqrt((1-b^2)(r^2-b^2))/(v l)) sin(k L - 2 pi v alpha - pi/4 + 2 v (delta_o - delta_i) + eta),
    /// theta = pi w/v, l = sqrt(1 + r^2 - 2 r cos(theta)) the length of one flight, L = 2 v l, b = r sin(theta)/l,
    /// f = 1 for w = 0, else 2, r the inner radius.
    fn add_between(&self, v: u32, w: u32, limits: &TorusLimits, sum: &mut TorusSum) {
        let (r, pairs) = (self.ratio, f64::from(v));
        let theta = PI * f64::from(w) / pairs;
        let flight = (1.0 + r * r - 2.0 * r * theta.cos()).sqrt();
        let length = 2.0 * pairs * flight * self.outer_radius;
        if length > limits.max_length * (1.0 + SAME) {
            return;
        }
        let b = r * theta.sin() / flight;
        let outer = (1.0 - b * b).sqrt();
        // r cos(angle of incidence on the inner circle), without the cancellation of r^2 - b^2.
        let inner = r * (theta.cos() - r) / flight;
        let directions = if w == 0 { 1 } else { 2 };
        let amplitude = f64::from(directions) / (PI * pairs)
            * (PI * self.outer_radius * outer * inner / (pairs * flight)).sqrt();
        let Some(bounces) = v.checked_mul(2).filter(|&n| n <= limits.max_bounces) else {
            sum.left_out.push(LeftOut {
                kind: LeftOutKind::ManyBounces { winding: w },
                length,
                amplitude,
                power: 0.5,
            });
            return;
        };
        if r - b < GRAZING {
            push_grazing(length, amplitude, sum);
        }
        let slope =
            2.0 * pairs * (reflection(self.outer, outer, b) - reflection(self.inner, inner, b))
                + stationary_point(v, b, outer, Some(inner));
        sum.push(
            TorusFamily {
                kind: FamilyKind::BetweenCircles,
                winding: w,
                bounces,
                outer_bounces: v,
                length,
                directions,
                repetition: gcd(v, w),
            },
            &Wave {
                amplitude,
                quarters: v * (quarters_at(self.outer) + quarters_at(self.inner)),
                eighths: -1,
                law: Amplitude::Torus {
                    slope: slope / self.outer_radius,
                },
            },
        );
    }
}

/// Circular sector.
pub(super) struct Sector {
    pub(super) radius: f64,
    pub(super) opening: f64,
    pub(super) arc: Condition,
    pub(super) radial: [Condition; 2],
}

impl Sector {
    /// Tori, weighted by opening/(2 pi) tau^w with tau = +1 for like radial walls and -1 otherwise; then edge and centre.
    pub(super) fn add(&self, limits: &TorusLimits, sum: &mut TorusSum) {
        let like = self.radial[0] == self.radial[1];
        let share = self.opening / (2.0 * PI);
        Chords {
            radius: self.radius,
            opening: self.opening,
            ratio: 0.0,
            wall: self.arc,
            weight: &|w| if like || w % 2 == 0 { share } else { -share },
        }
        .add(limits, sum);
        let most = (limits.max_length / (2.0 * self.radius) * (1.0 + SAME)).floor() as u32;
        for v in 1..=most.min(limits.max_bounces) {
            if like {
                self.add_edge(v, sum);
            }
            self.add_center(v, like, sum);
        }
    }

    /// The orbit of v diameters, from the arc to the centre and back.
    fn radius_orbit(&self, kind: FamilyKind, v: u32) -> TorusFamily {
        TorusFamily {
            kind,
            winding: 0,
            bounces: v,
            outer_bounces: v,
            length: 2.0 * f64::from(v) * self.radius,
            directions: 1,
            repetition: v,
        }
    }

    /// amplitude x sin(phi_v), phi_v = 2 v k R - 2 pi v alpha + 2 v delta.
    fn radius_wave(&self, v: u32, amplitude: f64) -> Wave {
        Wave {
            amplitude,
            quarters: v * quarters_caustic_to(self.arc),
            eighths: 0,
            law: Amplitude::CorrectedConstant {
                slope: self.radius_slope(v),
            },
        }
    }

    /// Coefficient of 1/k in 2 v delta at normal incidence.
    fn radius_slope(&self, v: u32) -> f64 {
        2.0 * f64::from(v) * reflection(self.arc, 1.0, 0.0) / self.radius
    }

    /// Radial walls: eps sin(phi_v)/(2 pi v).
    fn add_edge(&self, v: u32, sum: &mut TorusSum) {
        let amplitude = self.radial[0].sign() / (2.0 * PI * f64::from(v));
        sum.push(
            self.radius_orbit(FamilyKind::RadialEdge, v),
            &self.radius_wave(v, amplitude),
        );
    }

    /// Centre: -cos(phi_v + sigma/(k R))/(2 pi v) times cot(x/2) for like radial walls, 1/sin(x/2) for unlike ones,
    /// x = pi^2 v/opening.
    ///
    /// These are the ends at zero angular momentum of the Poisson integrals, summed over the winding number; or directly: the sum
    /// over the angular orders n = j pi/opening (j = 1, 2, .. or 1/2, 3/2, ..) of exp(2 i v Phi_n), with the radial phase
    /// Phi_n = k - n pi/2 + n^2/(2k) + .. at small n. The term linear in n gives a geometric series, q/(1 - q) or sqrt(q)/(1 - q) with
    /// q = exp(-i x); the quadratic one gives i v/k (pi/opening)^2 times minus the second derivative of that by x, which is
    /// a pure phase: sigma = -(v/2) (pi/opening)^2 / sin(x/2)^2 for like walls, -(v/4) (pi/opening)^2
    /// (1 + cos(x/2)^2)/sin(x/2)^2 for unlike ones. Where x is a multiple of 2 pi the end is the stationary point of the
    /// diameter torus, which is counted there.
    fn add_center(&self, v: u32, like: bool, sum: &mut TorusSum) {
        let (sin, cos) = (0.5 * PI * PI * f64::from(v) / self.opening).sin_cos();
        if sin.abs() < SAME {
            return;
        }
        let angular = if like { cos } else { 1.0 } / sin;
        if angular.abs() < NO_DIFFRACTION {
            return;
        }
        let family = self.radius_orbit(FamilyKind::CenterDiffraction, v);
        let amplitude = -angular / (2.0 * PI * f64::from(v));
        let curved = if like { 2.0 } else { 1.0 + cos * cos };
        let sigma = -0.25 * f64::from(v) * (PI / (self.opening * sin)).powi(2) * curved;
        if angular.abs() > OVERLAP {
            sum.left_out.push(LeftOut {
                kind: LeftOutKind::CenterNearTorus,
                length: family.length,
                amplitude: amplitude.abs(),
                power: 0.0,
            });
        }
        // cos(phi) = sin(phi + pi/2): one quarter turn less is lost, three more are the same.
        let wave = Wave {
            quarters: v * quarters_caustic_to(self.arc) + 3,
            law: Amplitude::CorrectedConstant {
                slope: self.radius_slope(v) + sigma / self.radius,
            },
            ..self.radius_wave(v, amplitude)
        };
        sum.push(family, &wave);
    }
}
