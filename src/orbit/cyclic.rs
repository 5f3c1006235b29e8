//! Symmetric cyclic tridiagonal matrices: the Hessian of a closed path's length.

use nalgebra::DMatrix;

/// Pivots smaller than this fraction of the largest entry are replaced by it: the inertia of a matrix that is not itself
/// nearly singular is unchanged by so small a shift.
const SMALLEST_PIVOT: f64 = 1e-14;
/// A last pivot below this fraction of the largest entry belongs to a singular matrix: orbits in families reach 1e-12, and
/// isolated ones so close to a bifurcation have no term that could be used.
const SINGULAR: f64 = 1e-10;

/// A symmetric matrix with entries on the diagonal, beside it, and in the two corners: `off[i]` couples i and i + 1, the
/// last one couples the last index with 0. For one index the coupling counts twice on the diagonal, for two indices the two
/// couplings add.
#[derive(Clone, Debug, Default)]
pub(crate) struct Cyclic {
    pub(crate) diagonal: Vec<f64>,
    pub(crate) off: Vec<f64>,
}

/// Elimination with the last index as border: pivots of the tridiagonal part, and the last pivot.
#[derive(Default)]
pub(crate) struct Elimination {
    pivots: Vec<f64>,
    last: f64,
    border: Vec<f64>,
}

impl Cyclic {
    /// The same matrix repeated `times` times around the cycle, the closing coupling multiplied by `sign`.
    pub(crate) fn repeated(&self, times: usize, sign: f64) -> Self {
        let mut off = self.off.repeat(times);
        if let Some(closing) = off.last_mut() {
            *closing *= sign;
        }
        Self {
            diagonal: self.diagonal.repeat(times),
            off,
        }
    }

    /// The whole matrix.
    pub(crate) fn dense(&self) -> DMatrix<f64> {
        let n = self.diagonal.len();
        let mut full = DMatrix::zeros(n, n);
        for i in 0..n {
            let next = (i + 1) % n;
            full[(i, i)] += self.diagonal[i];
            full[(i, next)] += self.off[i];
            full[(next, i)] += self.off[i];
        }
        full
    }

    fn scale(&self) -> f64 {
        self.diagonal
            .iter()
            .chain(&self.off)
            .fold(f64::MIN_POSITIVE, |largest, x| largest.max(x.abs()))
    }

    fn last_diagonal(&self) -> f64 {
        let n = self.diagonal.len();
        let twice = if n == 1 { 2.0 * self.off[0] } else { 0.0 };
        self.diagonal[n - 1] + twice
    }

    fn eliminate(&self, into: &mut Elimination) {
        let n = self.diagonal.len();
        let smallest = SMALLEST_PIVOT * self.scale();
        into.pivots.clear();
        into.border.clear();
        into.border.resize(n - 1, 0.0);
        if n >= 2 {
            into.border[0] += self.off[n - 1];
            into.border[n - 2] += self.off[n - 2];
        }
        into.last = self.last_diagonal();
        for i in 0..n - 1 {
            let mut pivot = self.diagonal[i];
            if i > 0 {
                let factor = self.off[i - 1] / into.pivots[i - 1];
                pivot -= factor * self.off[i - 1];
                into.border[i] -= factor * into.border[i - 1];
            }
            if pivot.abs() < smallest {
                pivot = smallest;
            }
            into.last -= into.border[i] * into.border[i] / pivot;
            into.pivots.push(pivot);
        }
    }

    /// Number of negative eigenvalues (Sylvester's law of inertia).
    pub(crate) fn negative(&self) -> usize {
        let mut elimination = Elimination::default();
        self.eliminate(&mut elimination);
        elimination
            .pivots
            .iter()
            .chain(std::iter::once(&elimination.last))
            .filter(|&&pivot| pivot < 0.0)
            .count()
    }

    /// Determinant.
    #[cfg(test)]
    pub(crate) fn determinant(&self) -> f64 {
        let mut elimination = Elimination::default();
        self.eliminate(&mut elimination);
        elimination.pivots.iter().product::<f64>() * elimination.last
    }

    /// Solves matrix * x = right in O(n), with `elimination` as memory. If the matrix is singular the last component is set
    /// to zero: of a family of solutions that one is taken.
    pub(crate) fn solve(&self, right: &[f64], elimination: &mut Elimination, x: &mut Vec<f64>) {
        let n = right.len();
        self.eliminate(elimination);
        let Elimination {
            pivots,
            last,
            border,
        } = elimination;
        x.clear();
        x.extend_from_slice(right);
        for i in 1..n.saturating_sub(1) {
            x[i] -= self.off[i - 1] / pivots[i - 1] * x[i - 1];
        }
        let carried: f64 = (0..n - 1).map(|i| border[i] * x[i] / pivots[i]).sum();
        let singular = last.abs() <= SINGULAR * self.scale();
        x[n - 1] = if singular {
            0.0
        } else {
            (right[n - 1] - carried) / *last
        };
        for i in (0..n - 1).rev() {
            let next = if i + 1 < n - 1 {
                self.off[i] * x[i + 1]
            } else {
                0.0
            };
            x[i] = (x[i] - next - border[i] * x[n - 1]) / pivots[i];
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    proptest! {
        /// Against nalgebra's dense symmetric eigenvalues and determinant.
        #[test]
        fn inertia_and_solution_agree_with_dense_algebra(
            entries in prop::collection::vec((-3.0..3.0f64, -2.0..2.0f64), 1..12),
            right in prop::collection::vec(-1.0..1.0f64, 12),
        ) {
            let matrix = Cyclic {
                diagonal: entries.iter().map(|e| e.0).collect(),
                off: entries.iter().map(|e| e.1).collect(),
            };
            let full = matrix.dense();
            let values = full.clone().symmetric_eigenvalues();
            prop_assume!(values.iter().all(|v| v.abs() > 1e-3));
            prop_assert_eq!(matrix.negative(), values.iter().filter(|v| **v < 0.0).count());
            let determinant = full.determinant();
            prop_assert!((matrix.determinant() - determinant).abs() < 1e-8 * (1.0 + determinant.abs()));
            let n = entries.len();
            let mut x = Vec::new();
            matrix.solve(&right[..n], &mut Elimination::default(), &mut x);
            let back = full * nalgebra::DVector::from_vec(x);
            for i in 0..n {
                prop_assert!((back[i] - right[i]).abs() < 1e-7);
            }
        }
    }
}
