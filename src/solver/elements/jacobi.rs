//! Jacobi polynomials and the quadrature rules built on their zeros.

use crate::dense::{self, Matrix};

/// Coefficients of the recurrence P_{n+1} = (slope x + offset) P_n - back P_{n-1} of the Jacobi polynomials P_n^{(a, b)}.
///
/// Source: Abramowitz & Stegun (1964), 22.7.1.
#[derive(Clone, Copy, Debug)]
struct Step {
    slope: f64,
    offset: f64,
    back: f64,
}

fn step(n: usize, a: f64, b: f64) -> Step {
    let n = n as f64;
    let sum = a + b;
    if n == 0.0 {
        return Step {
            slope: 0.5 * (sum + 2.0),
            offset: 0.5 * (a - b),
            back: 0.0,
        };
    }
    let c = 2.0 * n + sum;
    let norm = 2.0 * (n + 1.0) * (n + sum + 1.0) * c;
    Step {
        slope: (c + 1.0) * (c + 2.0) * c / norm,
        offset: (c + 1.0) * (a * a - b * b) / norm,
        back: 2.0 * (n + a) * (n + b) * (c + 2.0) / norm,
    }
}

/// A polynomial in several variables at one point: value and gradient with respect to `N` coordinates.
#[derive(Clone, Copy, Debug)]
pub(super) struct Jet<const N: usize> {
    pub(super) value: f64,
    pub(super) gradient: [f64; N],
}

impl<const N: usize> Jet<N> {
    pub(super) fn constant(value: f64) -> Self {
        Self {
            value,
            gradient: [0.0; N],
        }
    }

    pub(super) fn plus(self, other: Self) -> Self {
        Self {
            value: self.value + other.value,
            gradient: std::array::from_fn(|i| self.gradient[i] + other.gradient[i]),
        }
    }

    pub(super) fn times(self, other: Self) -> Self {
        Self {
            value: self.value * other.value,
            gradient: std::array::from_fn(|i| {
                self.gradient[i] * other.value + self.value * other.gradient[i]
            }),
        }
    }

    pub(super) fn scaled(self, factor: f64) -> Self {
        Self {
            value: factor * self.value,
            gradient: self.gradient.map(|g| factor * g),
        }
    }
}

/// t^n P_n^{(a, b)}(x/t) for n = 0 ..= `degree`: polynomials in x and t, also at t = 0.
pub(super) fn scaled<const N: usize>(
    degree: usize,
    a: f64,
    b: f64,
    x: Jet<N>,
    t: Jet<N>,
) -> Vec<Jet<N>> {
    let mut values = vec![Jet::constant(1.0)];
    let t_squared = t.times(t);
    for n in 0..degree {
        let Step {
            slope,
            offset,
            back,
        } = step(n, a, b);
        let forward = x.scaled(slope).plus(t.scaled(offset)).times(values[n]);
        let next = if n == 0 {
            forward
        } else {
            forward.plus(t_squared.times(values[n - 1]).scaled(-back))
        };
        values.push(next);
    }
    values
}

/// Gauss rule with `count` points on (0, 1) for the weight (1 - x)^`power`, `power` 0 or 1: points and weights.
///
/// Eigenvalues of the tridiagonal matrix of the recurrence (Golub & Welsch, Math. Comp. 23 (1969) 221).
pub(super) fn gauss(count: usize, power: usize) -> Vec<(f64, f64)> {
    let (a, total) = (power as f64, 1.0 / (power as f64 + 1.0));
    let steps: Vec<Step> = (0..count).map(|n| step(n, a, 0.0)).collect();
    let mut tridiagonal = Matrix::zeros(count, count);
    for n in 0..count {
        tridiagonal[(n, n)] = -steps[n].offset / steps[n].slope;
        if n > 0 {
            let off = (steps[n].back / (steps[n].slope * steps[n - 1].slope)).sqrt();
            tridiagonal[(n, n - 1)] = off;
            tridiagonal[(n - 1, n)] = off;
        }
    }
    let (nodes, vectors) = dense::eigen(&tridiagonal);
    nodes
        .iter()
        .enumerate()
        .map(|(i, x)| (0.5 * (1.0 + x), total * vectors[(0, i)] * vectors[(0, i)]))
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn gauss_rules_integrate_powers() {
        for power in [0, 1] {
            let rule = gauss(12, power);
            for degree in 0..24 {
                let sum: f64 = rule.iter().map(|(x, w)| w * x.powi(degree)).sum();
                let d = f64::from(degree);
                let exact = if power == 0 {
                    1.0 / (d + 1.0)
                } else {
                    1.0 / ((d + 1.0) * (d + 2.0))
                };
                assert!((sum - exact).abs() < 1e-14, "{power} {degree}");
            }
        }
    }

    #[test]
    fn scaled_polynomials_are_those_of_the_quotient() {
        let (x, t) = (0.3, 0.7);
        let jets = scaled(
            6,
            1.0,
            1.0,
            Jet {
                value: x,
                gradient: [1.0, 0.0],
            },
            Jet {
                value: t,
                gradient: [0.0, 1.0],
            },
        );
        // P_2^{(1,1)}(z) = (15 z^2 - 3)/4 (Abramowitz & Stegun, 22.3.2).
        let z: f64 = x / t;
        assert!((jets[2].value - t * t * (15.0 * z * z - 3.0) / 4.0).abs() < 1e-15);
        assert!((jets[2].gradient[0] - 7.5 * x).abs() < 1e-14);
        assert!((jets[2].gradient[1] + 1.5 * t).abs() < 1e-14);
    }
}
