//! Orbits along the edge of a strip, hit by hit at the joint where a straight wall goes over into an arc.
//!
//! Such an orbit sees the flat wall on one side and the arc on the other, so that neither the term of a family nor that of
//! an isolated orbit applies. Within a narrow band around the orbit (width (D/k)^(1/2)) the motion is a chain of flights of
//! length D between hits at transverse positions s of that joint, and the n-fold repetition has the coefficient
//!
//! J_n(c) = tr K^n - tr_{s<0} K_flat^n,
//! K(s, s') = e^(i (s-s')^2/2) / sqrt(2 pi i) * (e^(-i c s^2) for s > 0, 1 for s < 0),
//!
//! c = D kappa / cos(theta), with the curvature kappa of the arc and the angle of incidence theta. The strip itself is
//! subtracted: its term counts the side s < 0. With L the length of the single orbit and sigma its sign per passage, the
//! level density has the term (L / pi) Re[sigma^n J_n e^(i n k L)].
//!
//! What is known of J_n (the reference script of the table has more on the first two):
//!
//! * Turning all s by 45 degrees in the complex plane makes the flights real Gaussians and the arc a factor e^(c s^2):
//!   J_n is real for c < 0 and, for c > 0, the boundary value at c - i0 of one analytic function.
//! * It has no bifurcations where the orbit of the arc alone has them (c = 2, or 1 - c = cos(2 pi m / n)): the closed
//!   paths that would cause them have hits on both sides of the joint. It is only not smooth at c = 1 - cos(pi / m),
//!   2 <= m <= n, where paths from the joint to itself are stationary. Above c = 1 it is analytic, for every n.
//! * For |c| to infinity the arc absorbs, and J_n = -(1 / (2 pi n)) sum_{j=1}^{n-1} ((n-j)/j)^(1/2) - i / (2 (2 n c)^(1/2)),
//!   up to terms of order 1/c. The constant is the mean maximum of a Gaussian bridge of n steps (F. Spitzer, Trans. Am. Math. Soc. 82, 323,
//!   1956, for the maximum of partial sums), the next term one hit on the arc between steps that stay outside it, which
//!   have probability 1/n (E. Sparre Andersen, Math. Scand. 1, 263, 1953; both from memory).

use num_complex::Complex64;
use serde::Deserialize;
use std::f64::consts::PI;
use std::sync::OnceLock;

/// The largest repetition in the table.
pub(crate) const LARGEST_REPETITION: u32 = 20;
/// From the third repetition on, arcs that focus are tabulated from this c on: at c = 1 the coefficients are not analytic.
pub(crate) const SMALLEST_FOCUSING: f64 = 1.02;
/// From the third repetition on, arcs that defocus are tabulated for -c from this value on; towards zero J_n diverges.
pub(crate) const SMALLEST_DEFOCUSING: f64 = 0.01;
/// Error of the interpolated table; ten times what the check rows of the table show, to cover values between them.
#[cfg(test)]
const TABLE_ERROR: f64 = 1e-10;

/// Nodes and values, written by tests/reference/joint_chain.py.
const TABLE: &str = include_str!("../../data/joint_chain.csv");

/// The coefficient J_n(c) of the n-fold repetition of an orbit along the edge of a strip at a joint with an arc.
///
/// `c` = D kappa / cos(theta), positive where the arc focuses and negative where it defocuses. The value for n = 1 is half
/// of an isolated orbit's term, for n = 2 a closed form; both hold for every c but zero. From n = 3 on the values are
/// interpolated, with an error below 1e-10, for c >= 1.02 and c <= -0.01.
///
/// `None` for n = 0, for c = 0 or not finite, and where the table ends: n > 20, or n >= 3 and -0.01 < c < 1.02. Taking
/// half of the isolated orbit's term there misses a real part of about 0.1 and is wrong near the bifurcations of the arc's
/// own orbit, where that term diverges and J_n does not.
pub(crate) fn chain_coefficient(repetition: u32, c: f64) -> Option<Complex64> {
    if c == 0.0 || !c.is_finite() {
        return None;
    }
    match repetition {
        0 => None,
        1 => Some(single(c)),
        2 => Some(double(c)),
        _ => table()?.coefficient(repetition, c),
    }
}

/// c^(-1/2) / (2 sqrt(2)) on the side c - i0.
fn single(c: f64) -> Complex64 {
    let modulus = 0.5 / (2.0 * c.abs()).sqrt();
    if c > 0.0 {
        Complex64::new(0.0, -modulus)
    } else {
        Complex64::new(modulus, 0.0)
    }
}

/// J_2 = (A + 2 B - 1) / (4 pi), from the traces over two hits in polar coordinates, the radius integrated:
///
/// A = int_0^(pi/2) dphi / (1 - c - sin 2phi + i0)          (both hits on the arc),
/// B = int_0^(pi/2) dphi / (1 + sin 2phi - c cos^2 phi + i0)    (one hit on the arc),
///
/// and -1 from the flat wall. With t = tan phi both denominators are quadratic.
fn double(c: f64) -> Complex64 {
    let imaginary = double_both(c).im + 2.0 * double_one(c).im;
    let real = if 0.5 < c && c < 1.5 {
        double_real_near_one(c)
    } else {
        double_both(c).re + 2.0 * double_one(c).re
    };
    Complex64::new(real - 1.0, imaginary) / (4.0 * PI)
}

/// A = -int_0^inf dt / (b t^2 + 2 t + b + i0), b = c - 1, with roots of real t > 0 for 0 < c < 1 only.
fn double_both(c: f64) -> Complex64 {
    let b = c - 1.0;
    let discriminant = c * (2.0 - c);
    let root = discriminant.abs().sqrt();
    if discriminant >= 0.0 {
        let imaginary = if c < 1.0 { -PI / root } else { 0.0 };
        Complex64::new(-over_argument(root, f64::atanh), imaginary)
    } else if b > 0.0 {
        Complex64::new(-over_argument(root, f64::atan), 0.0)
    } else {
        Complex64::new((PI - root.atan()) / root, 0.0)
    }
}

/// B = int_1^inf dt / (t^2 - c + i0), with a root in the range for c > 1 only.
fn double_one(c: f64) -> Complex64 {
    let root = c.abs().sqrt();
    if c > 1.0 {
        Complex64::new((1.0 / root).atanh() / root, -PI / (2.0 * root))
    } else if c == 1.0 {
        // The end point is the root: the limit of the imaginary part from above, which A continues from below.
        Complex64::new(f64::INFINITY, -PI / 2.0)
    } else if c > 0.0 {
        Complex64::new(over_argument(root, f64::atanh), 0.0)
    } else {
        Complex64::new(over_argument(root, f64::atan), 0.0)
    }
}

/// Re(A + 2 B) where each of them has a logarithm of |c - 1| and the two nearly cancel.
fn double_real_near_one(c: f64) -> f64 {
    let distance = (c - 1.0).abs();
    let (both, one) = ((c * (2.0 - c)).sqrt(), c.sqrt());
    let logarithm = if distance == 0.0 {
        0.0
    } else {
        distance.ln() * (1.0 / both - 1.0 / one)
    };
    2.0 * one.ln_1p() / one - both.ln_1p() / both + logarithm
}

/// f(x) / x for an odd function with slope one at zero.
fn over_argument(x: f64, odd: fn(f64) -> f64) -> f64 {
    if x == 0.0 { 1.0 } else { odd(x) / x }
}

/// A row of the table.
#[derive(Debug, Deserialize)]
struct Row {
    kind: Kind,
    repetition: u32,
    at: f64,
    re: f64,
    im: f64,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "lowercase")]
enum Kind {
    /// Node in x = c^(-1/2), value J_n.
    Focusing,
    /// Node in y = z / (1 + z), z = (-c)^(-1/2), value J_n / (1 + z): J_n grows like z.
    Defocusing,
    /// Not a node: c and J_n for tests, from another contour.
    Check,
    /// Not a node: c and J_3 for tests, from orthant probabilities.
    Orthant,
}

/// Chebyshev points of the second kind in ascending order with the values there.
#[derive(Debug, Default)]
struct Interpolant {
    nodes: Vec<f64>,
    values: Vec<Complex64>,
}

impl Interpolant {
    /// Barycentric formula of the second kind (J.-P. Berrut, L. N. Trefethen, SIAM Rev. 46, 501, 2004); `None` outside the
    /// nodes, where the polynomial is worthless.
    fn at(&self, x: f64) -> Option<Complex64> {
        let (&first, &last) = (self.nodes.first()?, self.nodes.last()?);
        if !(first..=last).contains(&x) {
            return None;
        }
        let (mut numerator, mut denominator) = (Complex64::ZERO, 0.0);
        for (index, (&node, &value)) in self.nodes.iter().zip(&self.values).enumerate() {
            if x == node {
                return Some(value);
            }
            let end = index == 0 || index + 1 == self.nodes.len();
            let sign = if index % 2 == 0 { 1.0 } else { -1.0 };
            let factor = sign * if end { 0.5 } else { 1.0 } / (x - node);
            numerator += factor * value;
            denominator += factor;
        }
        Some(numerator / denominator)
    }
}

/// Interpolants by repetition, the first for n = 3.
#[derive(Debug, Default)]
struct Table {
    focusing: Vec<Interpolant>,
    defocusing: Vec<Interpolant>,
}

/// The first repetition in the table; closed forms serve the ones before.
const FIRST_REPETITION: u32 = 3;

impl Table {
    fn coefficient(&self, repetition: u32, c: f64) -> Option<Complex64> {
        let index = usize::try_from(repetition.checked_sub(FIRST_REPETITION)?).ok()?;
        if c >= SMALLEST_FOCUSING {
            // The last node is the rounded square root of the smallest c.
            let interpolant = self.focusing.get(index)?;
            interpolant.at(c.sqrt().recip().min(*interpolant.nodes.last()?))
        } else if c <= -SMALLEST_DEFOCUSING {
            let interpolant = self.defocusing.get(index)?;
            let z = (-c).sqrt().recip();
            let y = (z / (1.0 + z)).min(*interpolant.nodes.last()?);
            Some(interpolant.at(y)? * (1.0 + z))
        } else {
            None
        }
    }
}

/// The rows of the embedded table; `None` if a row is malformed, which a test excludes.
fn rows(text: &str) -> Option<Vec<Row>> {
    csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_reader(text.as_bytes())
        .deserialize()
        .collect::<Result<_, _>>()
        .ok()
}

fn parse(text: &str) -> Option<Table> {
    let mut table = Table::default();
    for row in rows(text)? {
        let side = match row.kind {
            Kind::Focusing => &mut table.focusing,
            Kind::Defocusing => &mut table.defocusing,
            Kind::Check | Kind::Orthant => continue,
        };
        if !(FIRST_REPETITION..=LARGEST_REPETITION).contains(&row.repetition) {
            return None;
        }
        let index = usize::try_from(row.repetition - FIRST_REPETITION).ok()?;
        if side.len() <= index {
            side.resize_with(index + 1, Interpolant::default);
        }
        side[index].nodes.push(row.at);
        side[index].values.push(Complex64::new(row.re, row.im));
    }
    Some(table)
}

fn table() -> Option<&'static Table> {
    static PARSED: OnceLock<Option<Table>> = OnceLock::new();
    PARSED.get_or_init(|| parse(TABLE)).as_ref()
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]

    use super::*;

    fn close(found: Complex64, expected: Complex64, tolerance: f64) {
        assert!(
            (found - expected).norm() <= tolerance,
            "{found} instead of {expected}"
        );
    }

    /// The half of an isolated orbit's term, 1 / (2 |2 - tr M^n|^(1/2)), tr M = 2 - 2c.
    fn half_rule(repetition: u32, c: f64) -> f64 {
        let angle = Complex64::new(1.0 - c, 0.0).acos();
        let trace = 2.0 * (angle * f64::from(repetition)).cos().re;
        0.5 / (2.0 - trace).abs().sqrt()
    }

    #[test]
    fn one_hit_is_half_of_an_isolated_orbit() {
        for c in [0.05, 0.7, 2.0, 50.0, -0.05, -3.0] {
            let expected = half_rule(1, c);
            let found = chain_coefficient(1, c).unwrap();
            close(Complex64::new(found.norm(), 0.0), expected.into(), 1e-14);
        }
        assert_eq!(chain_coefficient(1, 2.0), Some(Complex64::new(0.0, -0.25)));
    }

    #[test]
    fn two_hits_at_c_two_in_elementary_form() {
        let sqrt2 = 2f64.sqrt();
        let real = -(1.0 - sqrt2.ln_1p() / sqrt2) / (2.0 * PI);
        let expected = Complex64::new(real, -0.25 / sqrt2);
        close(chain_coefficient(2, 2.0).unwrap(), expected, 1e-15);
    }

    /// A and B by the midpoint rule, with c moved off the axis to c - i epsilon (which is what the i0 of both denominators
    /// means for c > 0) and Richardson's extrapolation to epsilon = 0.
    fn double_by_quadrature(c: f64) -> Complex64 {
        let at = |epsilon: f64| {
            let c = Complex64::new(c, -epsilon);
            let steps = 400_000;
            let h = PI / 2.0 / f64::from(steps);
            let mut sum = Complex64::ZERO;
            for step in 0..steps {
                let phi = (f64::from(step) + 0.5) * h;
                let sine = (2.0 * phi).sin();
                sum += h / (1.0 - c - sine) + 2.0 * h / (1.0 + sine - c * phi.cos().powi(2));
            }
            (sum - 1.0) / (4.0 * PI)
        };
        let [one, two, four] = [at(0.005), at(0.01), at(0.02)];
        (8.0 * one - 6.0 * two + four) / 3.0
    }

    #[test]
    fn two_hits_agree_with_quadrature_on_all_branches() {
        for c in [
            0.3, 0.6, 0.9, 1.1, 1.4, 1.6, 2.0, 2.5, 7.0, -0.4, -2.0, -9.0,
        ] {
            close(
                chain_coefficient(2, c).unwrap(),
                double_by_quadrature(c),
                3e-5,
            );
        }
    }

    #[test]
    fn two_hits_are_continuous_where_the_formulas_change() {
        let step = 1e-9;
        for c in [0.5, 1.0, 1.5, 2.0] {
            let [below, at, above] =
                [c - step, c, c + step].map(|c| chain_coefficient(2, c).unwrap());
            close(below, at, 1e-8);
            close(above, at, 1e-8);
        }
        // (ln 2 - 1) / (4 pi) - i/4, the limit of the logarithms that cancel.
        let expected = Complex64::new((2f64.ln() - 1.0) / (4.0 * PI), -0.25);
        close(chain_coefficient(2, 1.0).unwrap(), expected, 1e-15);
    }

    /// Computed with a Gaussian window on the unrotated chain and extrapolated, apart from the table's method; the digits
    /// are those that were certain.
    #[test]
    fn windowed_chain_at_c_two() {
        let expected = [
            (3, -0.09257, -0.14331, 1e-5),
            (4, -0.1128, -0.1236, 1e-4),
            (5, -0.127, -0.110, 1e-3),
        ];
        for (repetition, re, im, tolerance) in expected {
            close(
                chain_coefficient(repetition, 2.0).unwrap(),
                Complex64::new(re, im),
                tolerance,
            );
        }
    }

    #[test]
    fn table_is_complete() {
        let table = parse(TABLE).expect("the table parses");
        let count = (LARGEST_REPETITION - FIRST_REPETITION + 1) as usize;
        for side in [&table.focusing, &table.defocusing] {
            assert_eq!(side.len(), count);
            for interpolant in side {
                let (nodes, steps) = (&interpolant.nodes, interpolant.nodes.len() - 1);
                assert_eq!(nodes[0], 0.0);
                for (index, node) in nodes.iter().enumerate() {
                    let angle = PI * index as f64 / steps as f64;
                    let expected = nodes[steps] * (1.0 - angle.cos()) / 2.0;
                    assert!((node - expected).abs() < 1e-14);
                }
            }
        }
    }

    #[test]
    fn interpolation_reaches_the_check_rows() {
        let mut checked = 0;
        for row in rows(TABLE).expect("the table parses") {
            if matches!(row.kind, Kind::Check | Kind::Orthant) {
                let found = chain_coefficient(row.repetition, row.at).unwrap();
                close(found, Complex64::new(row.re, row.im), TABLE_ERROR);
                checked += 1;
            }
        }
        assert_eq!(checked, 12 * 18 + 7);
    }

    /// -(1 / (2 pi n)) sum_{j=1}^{n-1} ((n-j)/j)^(1/2)
    fn absorbing(repetition: u32) -> f64 {
        let n = f64::from(repetition);
        let sum: f64 = (1..repetition)
            .map(f64::from)
            .map(|j| ((n - j) / j).sqrt())
            .sum();
        -sum / (2.0 * PI * n)
    }

    /// For c < 0 the pattern of signs of three hits selects an orthant of a real Gaussian with the matrix Q of
    /// sum (s_j - s_{j+1})^2 - 2c sum_{s_j > 0} s_j^2, whose weight is det(Q)^(-1/2) (1/8 + sum arcsin(rho) / (4 pi)) with the
    /// correlations rho (F. N. David, Biometrika 40, 458, 1953; from memory). The flat wall's share is that of an absorbing
    /// arc.
    #[test]
    fn three_hits_agree_with_orthant_probabilities() {
        use nalgebra::Matrix3;
        for c in [-0.01, -0.2, -1.0, -6.5, -300.0] {
            let mut expected: f64 = absorbing(3);
            for pattern in 1..8u8 {
                let positive = [0, 1, 2].map(|hit| pattern >> hit & 1 == 1);
                let form: Matrix3<f64> =
                    Matrix3::from_fn(|row, column| match (row == column, positive[row]) {
                        (false, _) => -1.0,
                        (true, true) => 2.0 - 2.0 * c,
                        (true, false) => 2.0,
                    });
                let covariance = form
                    .try_inverse()
                    .expect("Q is definite unless all hits are flat");
                let arcs: f64 = [(0, 1), (1, 2), (2, 0)]
                    .map(|(one, other): (usize, usize)| {
                        let scale: f64 = covariance[(one, one)] * covariance[(other, other)];
                        let sign = if positive[one] == positive[other] {
                            1.0
                        } else {
                            -1.0
                        };
                        (sign * covariance[(one, other)] / scale.sqrt()).asin()
                    })
                    .iter()
                    .sum();
                expected += (0.125 + arcs / (4.0 * PI)) / form.determinant().sqrt();
            }
            close(
                chain_coefficient(3, c).unwrap(),
                expected.into(),
                TABLE_ERROR,
            );
        }
    }

    #[test]
    fn large_c_absorbs() {
        let c = 1e6;
        for repetition in 2..=LARGEST_REPETITION {
            let constant = absorbing(repetition);
            let slope = 0.5 / (2.0 * f64::from(repetition) * c).sqrt();
            let focusing = Complex64::new(constant, -slope);
            close(chain_coefficient(repetition, c).unwrap(), focusing, 1.0 / c);
            let defocusing = Complex64::new(constant + slope, 0.0);
            close(
                chain_coefficient(repetition, -c).unwrap(),
                defocusing,
                1.0 / c,
            );
        }
    }

    /// Towards c = 0 the hits that stay on the arc dominate, with half of the isolated orbit's coefficient.
    #[test]
    fn weak_defocusing_approaches_half_of_an_isolated_orbit() {
        for repetition in 1..=LARGEST_REPETITION {
            let [one, four] = [0.01, 0.04].map(|c| {
                let found = chain_coefficient(repetition, -c).unwrap();
                assert_eq!(found.im, 0.0);
                found.re - half_rule(repetition, -c)
            });
            // What is left is analytic in c, so that it hardly changes.
            assert!((one - four).abs() < 0.05, "{one} {four}");
        }
    }

    #[test]
    fn nothing_is_made_up_outside() {
        for (repetition, c) in [
            (0, 2.0),
            (21, 2.0),
            (3, 1.0),
            (3, -0.005),
            (1, 0.0),
            (2, f64::NAN),
            (2, f64::INFINITY),
        ] {
            assert_eq!(chain_coefficient(repetition, c), None);
        }
        assert!(chain_coefficient(20, SMALLEST_FOCUSING).is_some());
        assert!(chain_coefficient(20, -SMALLEST_DEFOCUSING).is_some());
    }
}
