//! Smoothed terms at small k, where the series in 1/k do not reach: within some eight standard deviations of k = 0, and
//! for strips below k l of about 17.
//!
//! Both integrals are done by the trapezoidal rule, which converges geometrically for analytic integrands (Trefethen &
//! Weideman, SIAM Review 56, 2014).

use num_complex::Complex64;

use super::series::gaussian;

/// Half width of the range of integration in standard deviations: what is left out is below 1e-18.
const REACH: f64 = 9.0;

/// Beyond this s l the smoothed term is below 1e-31 of its amplitude, less than the rounding error of the quadrature.
const NOTHING_LEFT: f64 = 12.0;

/// Gaussian mean of k^(1/2) exp(i k l) exp(-i k l), that is A(k) = exp(-(s l)^2/2) E[(k + i s^2 l + s xi)^(1/2)], and its
/// derivative with respect to k.
///
/// For k < 0 the square root is the continuation through the upper half plane, i |k|^(1/2): with it the mean over the real
/// line can be taken along a line above it. At k = 0 without smoothing both results are zero.
pub(super) fn torus(k: f64, length: f64, smoothing: f64) -> (Complex64, Complex64) {
    if smoothing == 0.0 {
        let root = Complex64::new(k, 0.0).sqrt();
        return (
            root,
            if k == 0.0 {
                Complex64::ZERO
            } else {
                0.5 / root
            },
        );
    }
    if smoothing * length > NOTHING_LEFT {
        return (Complex64::ZERO, Complex64::ZERO);
    }
    // In units of s: mean of w^(1/2) over w = zeta + xi, moved up to the line Im w = height. The branch point at w = 0 is
    // then `height` away and the error of the rule is exp(-2 pi height/STEP) = exp(-37).
    const MIN_HEIGHT: f64 = 1.5;
    const STEP: f64 = 0.25;
    let zeta = Complex64::new(k / smoothing, smoothing * length);
    let lift = Complex64::new(0.0, (MIN_HEIGHT - zeta.im).max(0.0));
    let nodes = (REACH / STEP) as i32;
    let (mut mean, mut slope) = (Complex64::ZERO, Complex64::ZERO);
    for node in -nodes..=nodes {
        let xi = f64::from(node) * STEP + lift;
        let weight = (-0.5 * xi * xi).exp();
        let root = (zeta + xi).sqrt();
        mean += weight * root;
        slope += weight * 0.5 / root;
    }
    let norm = STEP / (2.0 * std::f64::consts::PI).sqrt() * gaussian(smoothing * length);
    let scale = smoothing.sqrt();
    (mean * (norm * scale), slope * (norm / scale))
}

/// Gaussian mean of k J1(k l) and its derivative, the mean of k l J0(k l).
pub(super) fn strip(k: f64, length: f64, smoothing: f64) -> (f64, f64) {
    let plain = |k: f64| (k * libm::j1(k * length), k * length * libm::j0(k * length));
    if smoothing == 0.0 {
        return plain(k);
    }
    if smoothing * length > NOTHING_LEFT {
        return (0.0, 0.0);
    }
    // k J1(k l) has no frequency above l, the Gaussian none above REACH/s: no frequency that is left aliases to zero.
    let step = 2.0 * std::f64::consts::PI / (length + REACH / smoothing);
    let nodes = (REACH * smoothing / step).ceil() as i32;
    let (mut mean, mut slope, mut norm) = (0.0, 0.0, 0.0);
    for node in -nodes..=nodes {
        let t = f64::from(node) * step;
        let weight = gaussian(t / smoothing);
        let (value, derivative) = plain(k + t);
        mean += weight * value;
        slope += weight * derivative;
        norm += weight;
    }
    (mean / norm, slope / norm)
}
