//! Number variance and spectral rigidity of the Gaussian orthogonal ensemble (density 1), exact for infinite matrices.

use crate::billiard::quadrature;
use num_complex::Complex64;
use std::f64::consts::{FRAC_PI_2, PI, TAU};
use std::sync::LazyLock;

/// Euler's constant.
const EULER: f64 = 0.577_215_664_901_532_9;
/// Argument up to which sine and cosine integral are summed as power series: 1e-15 is left of terms of size 10 there.
const LARGEST_SERIES: f64 = 4.0;
/// Terms of the continued fraction at most; 100 are needed at the smallest argument it is used for.
const MOST_FRACTIONS: usize = 500;

/// Step of the table of moments, mean spacings: one panel of ten nodes holds half a period of the number variance.
const STEP: f64 = 0.5;
/// Length up to which the rigidity is integrated; beyond it its expansion is good to 5e-6.
const LONGEST: f64 = 200.0;

/// Variance of the number of levels in an interval of `length` mean spacings.
///
/// Sigma^2 = 2 U + (Si(pi L)/pi)^2 - Si(pi L)/pi, where U = (ln(2 pi L) + g + 1 - cos(2 pi L) - Ci(2 pi L))/pi^2 + L (1 - (2/pi) Si(2 pi L)) is that
/// of the unitary ensemble (Mehta, Random Matrices; Guhr, Mueller-Groeling & Weidenmueller, Phys. Rep. 299 (1998) 189, from
/// memory; a test compares with the integral over the form factor).
pub(super) fn number_variance(length: f64) -> f64 {
    let (sine, entire) = sine_and_entire_cosine_integral(TAU * length);
    let unitary =
        (entire + 1.0 - (TAU * length).cos()) / (PI * PI) + length * (1.0 - sine / FRAC_PI_2);
    let half = sine_and_entire_cosine_integral(PI * length).0 / PI;
    2.0 * unitary + half * half - half
}

/// Mean square distance of the staircase from the best straight line over `length` mean spacings.
///
/// Delta3 = (2/L^4) integral of (L^3 - 2 L^2 r + r^3) Sigma^2(r) dr from 0 to L (Mehta, Random Matrices, from memory); for large L it is
/// (ln(2 pi L) + g - 5/4 - pi^2/8)/pi^2 with Euler's constant g (Dyson & Mehta, J. Math. Phys. 4 (1963) 701).
pub(super) fn rigidity(length: f64) -> f64 {
    if length <= 0.0 {
        return 0.0;
    }
    if length > LONGEST {
        return expansion(length);
    }
    let index = ((length / STEP) as usize).min(MOMENTS.len() - 1);
    let from = STEP * index as f64;
    let mut moments = MOMENTS[index];
    add_moments(&mut moments, from, length);
    let [zeroth, first, third] = moments;
    2.0 * (length.powi(3) * zeroth - 2.0 * length.powi(2) * first + third) / length.powi(4)
}

/// The rigidity of long intervals with its next term 1/(pi^2 L), which was found numerically; what follows is 0.11/L^2.
fn expansion(length: f64) -> f64 {
    ((TAU * length).ln() + EULER - 1.25 - PI * PI / 8.0 + 1.0 / length) / (PI * PI)
}

/// Integrals of Sigma^2, r Sigma^2 and r^3 Sigma^2 from 0 to multiples of the step.
static MOMENTS: LazyLock<Vec<[f64; 3]>> = LazyLock::new(|| {
    let steps = (LONGEST / STEP) as usize;
    let mut moments = [0.0; 3];
    let mut table = vec![moments];
    for index in 0..steps {
        let from = STEP * index as f64;
        add_moments(&mut moments, from, from + STEP);
        table.push(moments);
    }
    table
});

fn add_moments(moments: &mut [f64; 3], from: f64, to: f64) {
    for (r, weight) in quadrature::nodes(from, to) {
        let variance = weight * number_variance(r);
        moments[0] += variance;
        moments[1] += variance * r;
        moments[2] += variance * r.powi(3);
    }
}

/// Si(x) and g + ln x - Ci(x), the integral of (1 - cos t)/t, for x >= 0.
fn sine_and_entire_cosine_integral(x: f64) -> (f64, f64) {
    if x > LARGEST_SERIES {
        // E1(i x) = -Ci(x) + i (Si(x) - pi/2) (Abramowitz & Stegun 5.2.21, 5.2.23).
        let integral = exponential_integral(x);
        return (integral.im + FRAC_PI_2, EULER + x.ln() + integral.re);
    }
    // Abramowitz & Stegun 5.2.14, 5.2.16: terms x^n/(n n!) with alternating signs, odd ones for Si, even ones for the other.
    let (mut sine, mut cosine) = (0.0, 0.0);
    let mut power = 1.0;
    for n in 1..40 {
        let order = f64::from(n);
        power *= x / order;
        let sign = if (n - 1) / 2 % 2 == 0 { 1.0 } else { -1.0 };
        *if n % 2 == 1 { &mut sine } else { &mut cosine } += sign * power / order;
    }
    (sine, cosine)
}

/// E1(i x) = exp(-i x)/(i x + 1 - 1/(i x + 3 - 4/(i x + 5 - 9/...))) (Abramowitz & Stegun 5.1.22, contracted), from the front by the
/// method of Lentz (Appl. Opt. 15 (1976) 668).
fn exponential_integral(x: f64) -> Complex64 {
    let mut denominator = Complex64::new(1.0, x);
    let mut inverse = denominator.inv();
    let mut value = inverse;
    // The first ratio is the denominator itself: nothing stands before it.
    let mut ratio = Complex64::from(1e100);
    for n in 1..MOST_FRACTIONS {
        let order = n as f64;
        denominator += 2.0;
        inverse = (denominator - order * order * inverse).inv();
        ratio = denominator - order * order / ratio;
        let factor = ratio * inverse;
        value *= factor;
        if (factor - 1.0).norm() < 1e-16 {
            break;
        }
    }
    value * Complex64::cis(-x)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::baseline::orthogonal_form_factor;

    /// Abramowitz & Stegun, Tables 5.1 and 5.2 (from memory, checked with scipy 1.17.1).
    #[test]
    fn sine_and_cosine_integral_are_those_of_the_handbook() {
        for (x, sine, cosine) in [
            (1.0, 0.946_083_070_367_183, 0.337_403_922_900_968),
            (4.0, 1.758_203_138_949_053, -0.140_981_697_886_930),
            (5.0, 1.549_931_244_944_674, -0.190_029_749_656_644),
            (10.0, 1.658_347_594_218_874, -0.045_456_433_004_455),
            (100.0, 1.562_225_466_889_056, -0.005_148_825_142_610),
        ] {
            let (si, entire) = sine_and_entire_cosine_integral(x);
            assert!((si - sine).abs() < 1e-14, "{x}: {si}");
            assert!((EULER + x.ln() - entire - cosine).abs() < 1e-14, "{x}");
        }
    }

    /// (2/pi^2) integral of K sin^2(pi L tau)/tau^2, the tail beyond tau = 40 from K = 1.
    #[test]
    fn the_closed_form_is_the_integral_over_the_form_factor() {
        for length in [0.3, 1.0, 4.5] {
            let part = |from: f64, to: f64| {
                quadrature::integrate(from, to, 2000, |tau| {
                    orthogonal_form_factor(tau) * ((PI * length * tau).sin() / tau).powi(2)
                })
            };
            // Beyond: the mean of sin^2 is 1/2, and its oscillating part adds less than 1/(4 pi L tau^2).
            let integral = part(0.0, 1.0) + part(1.0, 200.0) + 0.5 / 200.0;
            let value = 2.0 / (PI * PI) * integral;
            assert!(
                (number_variance(length) - value).abs() < 2e-6 / length,
                "{length}: {} {value}",
                number_variance(length)
            );
        }
    }

    #[test]
    fn the_rigidity_joins_its_expansion() {
        assert!((rigidity(LONGEST) - expansion(LONGEST)).abs() < 5e-6);
        // L/15 for short intervals.
        assert!((rigidity(0.01) / 0.01 - 1.0 / 15.0).abs() < 1e-3);
    }
}
