//! Expected fluctuation of the staircase about its smooth part when no orbit sum is at hand.

use crate::billiard::quadrature;
use std::f64::consts::PI;

/// Panels of ten nodes for the integrals over the form factor, per unit of the logarithm of time.
const PANELS_PER_LOGARITHM: f64 = 4.0;
/// Logarithm of the time up to which the integral is done numerically; the rest is K = 1 exactly to 1e-9.
const LARGEST_LOGARITHM: f64 = 10.0;

/// Root-mean-square fluctuation of the staircase about the smooth count, in levels, for a chaotic shape with time-reversal
/// symmetry and no other symmetry.
///
/// `mean_density` is the density of levels in k, `shortest_length` the length of the shortest periodic orbit. (For one symmetry
/// class: the density of the class.)
///
/// With the form factor K, sigma^2 = (1/(2 pi^2)) integral K(tau)/tau^2 dtau from tau = shortest_length/(2 pi density): the diagonal sum over
/// orbits makes K = 2 tau for short times, and orbits shorter than the shortest do not exist, which makes the
/// fluctuation saturate (Berry, Proc. R. Soc. A 400, 1985, 229). K is that of the Gaussian orthogonal ensemble (Mehta, Random
/// Matrices). For many levels sigma^2 = (1/pi^2) (ln(2 pi density/shortest_length) + 1 - pi^2/8), Berry's constant.
///
/// Shapes with families of orbits (strips, tori) fluctuate more than this, by an amount that grows with k.
#[must_use]
pub fn saturation_fluctuation(mean_density: f64, shortest_length: f64) -> f64 {
    let shortest_time = shortest_length / (2.0 * PI * mean_density);
    let from = shortest_time.ln();
    if !from.is_finite() {
        return 0.0;
    }
    let to = LARGEST_LOGARITHM.max(from);
    // In x = ln tau: K/tau^2 dtau = K(e^x) e^(-x) dx; the form factor has a kink at tau = 1.
    let part = |from: f64, to: f64| {
        let panels = ((to - from) * PANELS_PER_LOGARITHM).ceil().max(1.0) as usize;
        quadrature::integrate(from, to, panels, |x| {
            orthogonal_form_factor(x.exp()) * (-x).exp()
        })
    };
    let kink = 0.0_f64.clamp(from, to);
    let rest = (-to).exp();
    ((part(from, kink) + part(kink, to) + rest) / (2.0 * PI * PI)).sqrt()
}

/// Form factor of the Gaussian orthogonal ensemble at tau, in Heisenberg times: 2 tau - tau ln(1 + 2 tau) up to tau = 1 and
/// 2 - tau ln((2 tau + 1)/(2 tau - 1)) beyond (Mehta, Random Matrices).
#[must_use]
pub fn orthogonal_form_factor(tau: f64) -> f64 {
    if tau < 1.0 {
        2.0 * tau - tau * (2.0 * tau).ln_1p()
    } else {
        // ln((2 tau + 1)/(2 tau - 1)) = 2 artanh(1/(2 tau))
        2.0 - 2.0 * tau * (0.5 / tau).atanh()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn many_levels_give_the_constant_of_berry() {
        for ratio in [1e3, 1e5, 1e7] {
            let sigma = saturation_fluctuation(ratio / (2.0 * PI), 1.0);
            let expected = (f64::ln(ratio) + 1.0 - PI * PI / 8.0) / (PI * PI);
            // The next term of the expansion is -(2/ratio)/(2 pi^2).
            assert!(
                (sigma * sigma - expected).abs() < 0.2 / ratio + 1e-10,
                "{ratio}: {sigma}"
            );
        }
    }

    #[test]
    fn the_form_factor_is_continuous_and_tends_to_one() {
        assert!((orthogonal_form_factor(1.0 - 1e-12) - orthogonal_form_factor(1.0)).abs() < 1e-11);
        assert!((orthogonal_form_factor(1.0) - (2.0 - 3.0_f64.ln())).abs() < 1e-15);
        // 1 - 1/(12 tau^2) + ...
        assert!((orthogonal_form_factor(100.0) - 1.0 + 1.0 / 120_000.0).abs() < 1e-9);
    }

    #[test]
    fn extreme_input_stays_finite() {
        for (density, length) in [
            (1e-6, 10.0),
            (1.0, 1e-12),
            (1e12, 1.0),
            (0.0, 1.0),
            (1.0, 0.0),
        ] {
            let sigma = saturation_fluctuation(density, length);
            assert!(sigma.is_finite() && sigma >= 0.0);
        }
        assert!(saturation_fluctuation(1e-6, 10.0) < 0.01);
    }
}
