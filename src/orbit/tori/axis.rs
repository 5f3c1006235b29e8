//! The two isolated orbits of the ellipse, along its axes.

use super::TorusLimits;
use super::confocal::Ellipse;
use super::ellipse::BIFURCATION;
use super::family::{FamilyKind, LeftOut, LeftOutKind, TorusFamily, TorusSum, Wave};
use super::phase::quarters_at;
use crate::trace::Amplitude;
use std::f64::consts::PI;

/// |det(M^r - 1)| below which an axis orbit is reported as near to a bifurcation; for 0.3 the measured coefficient of the
/// staircase (reflected orbit, half axes 1 and 0.8) was 0.16 to 0.22 of itself off at k near 20.
const NEAR_BIFURCATION: f64 = 0.5;

/// An orbit of two bounces at normal incidence on walls of the same curvature.
struct AxisOrbit {
    kind: FamilyKind,
    /// Distance of the bounce points.
    distance: f64,
    /// Curvature times distance.
    bend: f64,
}

/// Adds both axis orbits with all repetitions: N = 1/(pi r) |det(M^r - 1)|^(-1/2) sin(r k L - mu pi/2) (Gutzwiller, J. Math.
/// Phys. 12, 1971).
pub(super) fn add(ellipse: &Ellipse, limits: &TorusLimits, sum: &mut TorusSum) {
    let ratio = ellipse.short / ellipse.long;
    let orbits = [
        AxisOrbit {
            kind: FamilyKind::ShortAxis,
            distance: 2.0 * ellipse.short,
            bend: 2.0 * ratio * ratio,
        },
        AxisOrbit {
            kind: FamilyKind::LongAxis,
            distance: 2.0 * ellipse.long,
            bend: 2.0 / (ratio * ratio),
        },
    ];
    for orbit in orbits {
        let most = (limits.max_length / (2.0 * orbit.distance)).floor() as u32;
        for r in 1..=most.min(limits.max_bounces / 2) {
            let turns = ellipse.axis_rotation() * f64::from(r);
            if orbit.kind == FamilyKind::ShortAxis
                && (turns - turns.round()).abs() < BIFURCATION * f64::from(r)
            {
                // The libration that leaves the axis here stands for both.
                continue;
            }
            orbit.add(r, quarters_at(ellipse.condition), sum);
        }
    }
}

impl AxisOrbit {
    fn add(&self, r: u32, quarters_per_bounce: u32, sum: &mut TorusSum) {
        let amplitude = 1.0 / (PI * f64::from(r) * self.determinant(r).sqrt());
        let length = 2.0 * f64::from(r) * self.distance;
        sum.push(
            TorusFamily {
                kind: self.kind,
                winding: 0,
                bounces: 2 * r,
                outer_bounces: 2 * r,
                length,
                directions: 1,
                repetition: r,
            },
            &Wave {
                amplitude,
                quarters: self.negative_eigenvalues(r) + 2 * r * quarters_per_bounce,
                eighths: 0,
                law: Amplitude::Constant,
            },
        );
        if self.determinant(r) < NEAR_BIFURCATION {
            sum.left_out.push(LeftOut {
                kind: LeftOutKind::NearBifurcation,
                length,
                amplitude,
                power: 0.0,
            });
        }
    }

    /// |det(M^r - 1)|. One bounce has trace 2 (bend - 1), so M^r has trace 2 cos(2 r psi) with cos(psi) = bend - 1.
    fn determinant(&self, r: u32) -> f64 {
        let half_trace = self.bend - 1.0;
        let r = f64::from(r);
        if half_trace.abs() < 1.0 {
            4.0 * (r * half_trace.acos()).sin().powi(2)
        } else {
            4.0 * (r * half_trace.acosh()).sinh().powi(2)
        }
    }

    /// Negative eigenvalues of the length Hessian of 2r bounces, a circulant with 2/D - 2 kappa on the diagonal and 1/D
    /// beside it (the tangents at both ends are opposite): (2/D) (1 - kappa D + cos(pi j/r)), j = 0 .. 2r - 1.
    fn negative_eigenvalues(&self, r: u32) -> u32 {
        (0..2 * r)
            .filter(|&j| 1.0 - self.bend + (PI * f64::from(j) / f64::from(r)).cos() < 0.0)
            .count() as u32
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::billiard::Condition;

    #[test]
    fn first_repetitions_of_the_ellipse_with_axes_1_and_0_8() {
        // From the traces of one bounce, 2 (bend - 1) = 0.56 and 4.25 (worked out by hand): short axis -0.1658 cos(kL), long axis
        // -0.0849 sin(kL).
        let ellipse = Ellipse {
            long: 1.0,
            short: 0.8,
            condition: Condition::Dirichlet,
        };
        let mut sum = TorusSum::default();
        add(&ellipse, &TorusLimits::up_to(5.0), &mut sum);
        assert_eq!(sum.terms.len(), 2);
        let short = sum.terms[0].coefficient;
        let long = sum.terms[1].coefficient;
        assert!(
            (short.re + 0.1658).abs() < 1e-4 && short.im.abs() < 1e-12,
            "{short}"
        );
        // Re[c exp(i x)] = -Im(c) sin(x)
        assert!(
            (long.im - 0.0849).abs() < 1e-4 && long.re.abs() < 1e-12,
            "{long}"
        );
    }
}
