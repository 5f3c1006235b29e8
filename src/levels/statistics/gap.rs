//! Exact gap probability of the Gaussian orthogonal ensemble, with or without missing levels.
//!
//! E(n; s) is the probability that an interval of s mean spacings holds n levels. With the eigenvalues lambda of the kernels
//!
//! ```text
//! K+-(x, y) = S(x - y) +- S(x + y) on 0 < x, y < s/2,   S(x) = sin(pi x)/(pi x),   D+-(u) = product of (1 - lambda + lambda u)
//! ```
//!
//! D+ generates E(2n) + E(2n - 1) and D- generates E(2n) + E(2n + 1) (Mehta, Random Matrices, chapter on the orthogonal
//! ensemble, from memory). Hence the sum over n of z^n E(n; s) is (D+(z^2) + z D-(z^2))/(1 + z). Where each level is missing with
//! probability z by itself, that sum is the probability of seeing none. The eigenvalues come from Gauss-Legendre quadrature of the
//! kernels, which converges exponentially (Bornemann, Math. Comp. 79 (2010) 871).

use nalgebra::DMatrix;
use std::f64::consts::PI;
use std::sync::LazyLock;

/// Degree of the polynomials that stand for the gap probability on one panel; with the length of a panel the second derivative
/// comes out to 1e-10 (a test compares with twice the panels' number of nodes).
const DEGREE: usize = 18;
/// Length of a panel, mean spacings.
const PANEL: f64 = 1.5;
/// Number of panels: beyond 24 spacings even a list with half of its levels missing has no gaps (probability below 1e-8).
const PANELS: usize = 16;
/// Quadrature nodes at s = 0, and further ones per mean spacing: the kernel oscillates half a period per spacing on each side, so two
/// nodes resolve it.
const NODES: f64 = 14.0;
const NODES_PER_SPACING: f64 = 1.5;

/// Probability of a gap and its first two derivatives with respect to its length.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Gap {
    pub(super) value: f64,
    pub(super) slope: f64,
    pub(super) curvature: f64,
}

impl Gap {
    /// Gap probability exp(-s) of uncorrelated levels.
    pub(super) fn uncorrelated(s: f64) -> Self {
        let value = (-s).exp();
        Self {
            value,
            slope: -value,
            curvature: value,
        }
    }

    /// What becomes of the derivatives when the length is given in another unit: s = scale t.
    pub(super) fn scaled(self, scale: f64) -> Self {
        Self {
            value: self.value,
            slope: scale * self.slope,
            curvature: scale * scale * self.curvature,
        }
    }

    /// Independent sequences leave a gap together where each of them does.
    pub(super) fn times(self, other: Self) -> Self {
        Self {
            value: self.value * other.value,
            slope: self.slope * other.value + self.value * other.slope,
            curvature: self.curvature * other.value
                + 2.0 * self.slope * other.slope
                + self.value * other.curvature,
        }
    }
}

/// Gap probability of the ensemble (density 1) of whose levels a fraction is seen, as a function of the length of the gap in mean
/// spacings of the complete sequence.
#[derive(Clone, Debug)]
pub(super) struct GapCurve {
    panels: Vec<[Vec<f64>; 3]>,
}

impl GapCurve {
    /// The curve where each level is seen with probability `observed`.
    pub(super) fn new(observed: f64) -> Self {
        let panels = TABLE
            .iter()
            .map(|nodes| {
                let values: Vec<f64> = nodes.iter().map(|node| node.gap(1.0 - observed)).collect();
                let value = coefficients(&values);
                let slope = derivative(&value);
                let curvature = derivative(&slope);
                [value, slope, curvature]
            })
            .collect();
        Self { panels }
    }

    /// The gap probability at s. Beyond the table it falls on exponentially, as that of a Poisson sequence would.
    pub(super) fn at(&self, s: f64) -> Gap {
        let end = PANEL * PANELS as f64;
        if s > end {
            let last = self.at(end);
            let rate = if last.value > 0.0 {
                (last.slope / last.value).min(0.0)
            } else {
                return Gap {
                    value: 0.0,
                    slope: 0.0,
                    curvature: 0.0,
                };
            };
            let value = last.value * (rate * (s - end)).exp();
            return Gap {
                value,
                slope: rate * value,
                curvature: rate * rate * value,
            };
        }
        let index = ((s / PANEL) as usize).min(PANELS - 1);
        let x = 2.0 * (s / PANEL - index as f64) - 1.0;
        let [value, slope, curvature] = &self.panels[index];
        Gap {
            value: chebyshev(value, x),
            slope: chebyshev(slope, x),
            curvature: chebyshev(curvature, x),
        }
    }
}

/// Eigenvalues of the kernels for one length of the interval.
#[derive(Clone, Debug)]
struct Kernels {
    even: Vec<f64>,
    odd: Vec<f64>,
}

impl Kernels {
    fn new(s: f64, nodes: usize) -> Self {
        let half = 0.5 * s;
        let rule: Vec<(f64, f64)> = gauss_legendre(nodes)
            .into_iter()
            .map(|(x, w)| (0.5 * half * (1.0 + x), 0.5 * half * w))
            .collect();
        let eigenvalues = |sign: f64| -> Vec<f64> {
            let kernel = DMatrix::from_fn(nodes, nodes, |i, j| {
                let ((x, w), (y, v)) = (rule[i], rule[j]);
                (w * v).sqrt() * (sinc(x - y) + sign * sinc(x + y))
            });
            let values = kernel.symmetric_eigenvalues();
            values.iter().map(|value| value.clamp(0.0, 1.0)).collect()
        };
        Self {
            even: eigenvalues(1.0),
            odd: eigenvalues(-1.0),
        }
    }

    /// Probability that the interval holds no level that is seen, each being missing with probability z.
    fn gap(&self, z: f64) -> f64 {
        let product = |values: &[f64]| -> f64 {
            values
                .iter()
                .map(|lambda| 1.0 - lambda + lambda * z * z)
                .product()
        };
        (product(&self.even) + z * product(&self.odd)) / (1.0 + z)
    }
}

/// The kernels at the Chebyshev points of every panel.
static TABLE: LazyLock<Vec<Vec<Kernels>>> = LazyLock::new(|| {
    (0..PANELS)
        .map(|panel| {
            (0..=DEGREE)
                .map(|index| {
                    let s = PANEL * (panel as f64 + 0.5 * (1.0 + chebyshev_point(index)));
                    Kernels::new(s, (NODES + NODES_PER_SPACING * s).ceil() as usize)
                })
                .collect()
        })
        .collect()
});

fn sinc(x: f64) -> f64 {
    if x == 0.0 {
        1.0
    } else {
        (PI * x).sin() / (PI * x)
    }
}

/// Nodes and weights on [-1, 1]: eigenvalues and first components of the eigenvectors of the matrix of the recurrence of Legendre
/// polynomials (Golub & Welsch, Math. Comp. 23 (1969) 221).
fn gauss_legendre(count: usize) -> Vec<(f64, f64)> {
    let beside = |n: usize| n as f64 / (4.0 * (n * n) as f64 - 1.0).sqrt();
    let matrix = DMatrix::from_fn(count, count, |i, j| match i.abs_diff(j) {
        1 => beside(i.max(j)),
        _ => 0.0,
    });
    let eigen = matrix.symmetric_eigen();
    (0..count)
        .map(|i| {
            (
                eigen.eigenvalues[i],
                2.0 * eigen.eigenvectors[(0, i)].powi(2),
            )
        })
        .collect()
}

/// Extremes of the Chebyshev polynomial of the table's degree, from -1 to 1.
fn chebyshev_point(index: usize) -> f64 {
    -(PI * index as f64 / DEGREE as f64).cos()
}

/// Chebyshev coefficients of the polynomial through values at the Chebyshev points.
fn coefficients(values: &[f64]) -> Vec<f64> {
    TRANSFORM
        .iter()
        .map(|row| row.iter().zip(values).map(|(a, b)| a * b).sum())
        .collect()
}

/// The cosine transform that makes coefficients of values.
static TRANSFORM: LazyLock<Vec<Vec<f64>>> = LazyLock::new(|| {
    let halved = |index: usize| {
        if index.is_multiple_of(DEGREE) {
            0.5
        } else {
            1.0
        }
    };
    let entry = |order: usize, index: usize| {
        let angle = PI * (order * (DEGREE - index)) as f64 / DEGREE as f64;
        2.0 / DEGREE as f64 * halved(order) * halved(index) * angle.cos()
    };
    (0..=DEGREE)
        .map(|order| (0..=DEGREE).map(|index| entry(order, index)).collect())
        .collect()
});

/// Coefficients of the derivative with respect to s on a panel, from c'_(n-1) = c'_(n+1) + 2 n c_n.
fn derivative(coefficients: &[f64]) -> Vec<f64> {
    let count = coefficients.len();
    let mut slopes = vec![0.0; count + 1];
    for order in (1..count).rev() {
        slopes[order - 1] = slopes[order + 1] + 2.0 * order as f64 * coefficients[order];
    }
    slopes[0] *= 0.5;
    slopes.truncate(count);
    slopes.iter().map(|slope| 2.0 / PANEL * slope).collect()
}

/// Sum of a Chebyshev series at x in [-1, 1] (Clenshaw's recurrence).
fn chebyshev(coefficients: &[f64], x: f64) -> f64 {
    let (mut next, mut after) = (0.0, 0.0);
    for coefficient in coefficients[1..].iter().rev() {
        (next, after) = (2.0 * x * next - after + coefficient, next);
    }
    x * next - after + coefficients[0]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn twice_the_nodes_change_nothing() {
        for s in [0.1, 1.0, 3.3, 11.0, 24.0] {
            let few = Kernels::new(s, (NODES + NODES_PER_SPACING * s).ceil() as usize);
            let many = Kernels::new(s, 60 + 3 * s as usize);
            for z in [0.0, 0.1, 0.5, 0.9] {
                assert!((few.gap(z) - many.gap(z)).abs() < 1e-13, "{s} {z}");
            }
        }
    }

    /// E = 1 - s + (pi^2/36) s^3 - ..., p = E'' = (pi^2/6) s - (pi^4/60) s^3 + (pi^4/270) s^4 - ... (Mehta, Random Matrices, from memory).
    #[test]
    fn small_spacings_repel_each_other_linearly() {
        let curve = GapCurve::new(1.0);
        for s in [0.0, 0.01, 0.03] {
            let gap = curve.at(s);
            let expected =
                PI * PI / 6.0 * s - PI.powi(4) / 60.0 * s.powi(3) + PI.powi(4) / 270.0 * s.powi(4);
            // The next term is of order s^5.
            assert!((gap.curvature - expected).abs() < s.powi(5) + 1e-9, "{s}");
            assert!((gap.slope + 1.0 - PI * PI / 12.0 * s * s).abs() < 1e-4 * s + 1e-10);
        }
    }

    #[test]
    fn panels_join_smoothly() {
        for observed in [1.0, 0.9, 0.5] {
            let curve = GapCurve::new(observed);
            for panel in 1..=PANELS {
                let s = PANEL * panel as f64;
                let (a, b) = (curve.at(s - 1e-12), curve.at(s + 1e-12));
                assert!((a.value - b.value).abs() < 1e-12);
                assert!((a.slope - b.slope).abs() < 1e-11);
                assert!(
                    (a.curvature - b.curvature).abs() < 1e-9,
                    "{s}: {} {}",
                    a.curvature,
                    b.curvature
                );
            }
        }
    }

    /// Of few seen levels only mean and variance count: ln E = -f s + f^2 (Sigma^2 - s)/2 + O(f^3), the factorial cumulants of their
    /// number. This ties the gap probability to the number variance, which has a formula of its own.
    #[test]
    fn few_levels_are_told_by_their_variance() {
        let observed = 1e-3;
        let curve = GapCurve::new(observed);
        for s in [0.5, 1.0, 5.0, 20.0] {
            let variance = super::super::orthogonal::number_variance(s);
            let expected = -observed * s + 0.5 * observed * observed * (variance - s);
            assert!((curve.at(s).value.ln() - expected).abs() < 1e-9 * s, "{s}");
        }
    }
}
