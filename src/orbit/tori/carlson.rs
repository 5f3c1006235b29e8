//! Elliptic integrals from Carlson's symmetric forms.
//!
//! Both the parameter m and 1 - m are given by the caller, because near the separatrix of an ellipse 1 - m is far below
//! the rounding of m.

/// Relative spread of the arguments below which the series is used; its first neglected term is of sixth order.
const SPREAD: f64 = 2e-3;

/// Carlson's R_F(x, y, z), at most one argument zero (Carlson, Numer. Algorithms 10, 1995; DLMF 19.36.1).
fn rf(mut x: f64, mut y: f64, mut z: f64) -> f64 {
    loop {
        let mean = (x + y + z) / 3.0;
        let (dx, dy) = (1.0 - x / mean, 1.0 - y / mean);
        let dz = -dx - dy;
        if dx.abs().max(dy.abs()).max(dz.abs()) < SPREAD {
            let e2 = dx * dy - dz * dz;
            let e3 = dx * dy * dz;
            let series = 1.0 - e2 / 10.0 + e3 / 14.0 + e2 * e2 / 24.0 - 3.0 * e2 * e3 / 44.0;
            return series / mean.sqrt();
        }
        let shift = (x * y).sqrt() + (y * z).sqrt() + (z * x).sqrt();
        (x, y, z) = (0.25 * (x + shift), 0.25 * (y + shift), 0.25 * (z + shift));
    }
}

/// Carlson's R_D(x, y, z), z positive, at most one of x and y zero (same source; DLMF 19.36.2).
fn rd(mut x: f64, mut y: f64, mut z: f64) -> f64 {
    let (mut sum, mut scale) = (0.0, 1.0);
    loop {
        let mean = (x + y + 3.0 * z) / 5.0;
        let (dx, dy) = (1.0 - x / mean, 1.0 - y / mean);
        let dz = -(dx + dy) / 3.0;
        if dx.abs().max(dy.abs()).max(dz.abs()) < SPREAD {
            let (p, q) = (dx * dy, dz * dz);
            let e2 = p - 6.0 * q;
            let e3 = (3.0 * p - 8.0 * q) * dz;
            let e4 = 3.0 * (p - q) * q;
            let e5 = p * dz * q;
            let series = 1.0 - 3.0 * e2 / 14.0 + e3 / 6.0 + 9.0 * e2 * e2 / 88.0
                - 3.0 * e4 / 22.0
                - 9.0 * e2 * e3 / 52.0
                + 3.0 * e5 / 26.0;
            return 3.0 * sum + scale * series / (mean * mean.sqrt());
        }
        let shift = (x * y).sqrt() + (y * z).sqrt() + (z * x).sqrt();
        sum += scale / (z.sqrt() * (z + shift));
        scale *= 0.25;
        (x, y, z) = (0.25 * (x + shift), 0.25 * (y + shift), 0.25 * (z + shift));
    }
}

/// Parameter m of elliptic integrals together with 1 - m.
#[derive(Clone, Copy, Debug)]
pub(super) struct Parameter {
    /// m, in (0, 1).
    pub(super) m: f64,
    /// 1 - m.
    pub(super) complement: f64,
}

impl Parameter {
    /// m = 1/(1 + exp(u)), so that both ends of (0, 1) are reached with full relative accuracy.
    pub(super) fn logistic(u: f64) -> Self {
        let (small, large) = (
            (-u.abs()).exp() / (1.0 + (-u.abs()).exp()),
            1.0 / (1.0 + (-u.abs()).exp()),
        );
        if u > 0.0 {
            Self {
                m: small,
                complement: large,
            }
        } else {
            Self {
                m: large,
                complement: small,
            }
        }
    }
}

/// Integrals of the first kind F, of the second kind E, and the derivative of F with respect to m, over [0, phi].
#[derive(Clone, Copy, Debug)]
pub(super) struct Integrals {
    /// F(phi | m).
    pub(super) first: f64,
    /// E(phi | m).
    pub(super) second: f64,
    /// dF/dm = (integral of cos^2/Delta - sin cos/Delta)/(2 (1 - m)) at fixed phi.
    pub(super) slope: f64,
}

/// Sine and cosine of an amplitude phi in [0, pi/2].
#[derive(Clone, Copy, Debug)]
pub(super) struct Amplitude {
    /// sin(phi).
    pub(super) sin: f64,
    /// cos(phi).
    pub(super) cos: f64,
}

/// phi = pi/2: complete integrals.
pub(super) const COMPLETE: Amplitude = Amplitude { sin: 1.0, cos: 0.0 };

/// Delta = sqrt(1 - m sin^2 phi), without cancellation at m -> 1.
pub(super) fn delta(phi: Amplitude, parameter: Parameter) -> f64 {
    (phi.cos * phi.cos + parameter.complement * phi.sin * phi.sin).sqrt()
}

/// F(phi | m) alone.
pub(super) fn first_kind(phi: Amplitude, parameter: Parameter) -> f64 {
    phi.sin * rf(phi.cos * phi.cos, delta(phi, parameter).powi(2), 1.0)
}

/// All three integrals; F = sin R_F(cos^2, Delta^2, 1), D = sin^3/3 R_D(cos^2, Delta^2, 1), E = F - m D (DLMF 19.25).
pub(super) fn integrals(phi: Amplitude, parameter: Parameter) -> Integrals {
    let root = delta(phi, parameter);
    let first = first_kind(phi, parameter);
    let d = phi.sin.powi(3) / 3.0 * rd(phi.cos * phi.cos, root * root, 1.0);
    Integrals {
        first,
        second: first - parameter.m * d,
        slope: (first - d - phi.sin * phi.cos / root) / (2.0 * parameter.complement),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn parameter(m: f64) -> Parameter {
        Parameter {
            m,
            complement: 1.0 - m,
        }
    }

    #[test]
    fn complete_integrals_match_the_handbook() {
        // Abramowitz & Stegun, Table 17.1: K and E at m = 0.5 and 0.9.
        for (m, k, e) in [
            (0.5, 1.854_074_677_301_372, 1.350_643_881_047_676),
            (0.9, 2.578_092_113_348_173, 1.104_774_732_704_073),
        ] {
            let found = integrals(COMPLETE, parameter(m));
            assert!(
                (found.first - k).abs() < 1e-14 && (found.second - e).abs() < 1e-14,
                "{found:?}"
            );
        }
    }

    #[test]
    fn incomplete_integrals_match_quadrature() {
        for (phi, m) in [(0.3_f64, 0.2), (1.0, 0.7), (1.4, 0.99)] {
            let amplitude = Amplitude {
                sin: phi.sin(),
                cos: phi.cos(),
            };
            let quad = |power: f64| {
                crate::billiard::quadrature::integrate(0.0, phi, 16, |t| {
                    (1.0 - m * t.sin().powi(2)).powf(power)
                })
            };
            let found = integrals(amplitude, parameter(m));
            assert!((found.first - quad(-0.5)).abs() < 1e-13);
            assert!((found.second - quad(0.5)).abs() < 1e-13);
            // dF/dm = (1/2) integral of sin^2/Delta^3
            let slope = crate::billiard::quadrature::integrate(0.0, phi, 16, |t| {
                0.5 * t.sin().powi(2) * (1.0 - m * t.sin().powi(2)).powf(-1.5)
            });
            assert!(
                (found.slope / slope - 1.0).abs() < 1e-11,
                "{} {slope}",
                found.slope
            );
        }
    }

    #[test]
    fn first_kind_grows_logarithmically_at_the_separatrix() {
        // K -> ln(4/sqrt(1 - m)) (DLMF 19.12.1)
        let found = first_kind(COMPLETE, Parameter::logistic(-200.0));
        assert!((found - (4.0_f64.ln() + 100.0)).abs() < 1e-12, "{found}");
    }
}
