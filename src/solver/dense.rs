//! Dense linear algebra: the only place that calls the library for it.
//!
//! All calls run on the calling thread (the library is built without its thread pool), so that results do not depend on the
//! number of threads; parallel work is cut into pieces further up.

use faer::linalg::solvers::{DenseSolveCore, Lblt, SelfAdjointEigen, Solve};
use faer::{Accum, MatMut, MatRef, Par, Side};

/// A dense matrix, column by column.
pub(super) type Matrix = faer::Mat<f64>;

/// What happens to the numbers that a product is written over.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Into {
    /// They are replaced.
    Fresh,
    /// The product is added to them.
    Sum,
}

/// target (+)= factor a b.
pub(super) fn multiply(
    target: MatMut<'_, f64>,
    into: Into,
    a: MatRef<'_, f64>,
    b: MatRef<'_, f64>,
    factor: f64,
) {
    let accumulate = match into {
        Into::Fresh => Accum::Replace,
        Into::Sum => Accum::Add,
    };
    faer::linalg::matmul::matmul(target, accumulate, a, b, factor, Par::Seq);
}

/// a b.
pub(super) fn product(a: MatRef<'_, f64>, b: MatRef<'_, f64>) -> Matrix {
    let mut result = Matrix::zeros(a.nrows(), b.ncols());
    multiply(result.as_mut(), Into::Fresh, a, b, 1.0);
    result
}

/// Eigenvalues (ascending) and eigenvectors (columns) of a symmetric matrix, read from its lower half.
pub(super) fn eigen(matrix: &Matrix) -> (Vec<f64>, Matrix) {
    match SelfAdjointEigen::new(matrix.as_ref(), Side::Lower) {
        Ok(found) => (
            found.S().column_vector().iter().copied().collect(),
            found.U().to_owned(),
        ),
        // Only numbers that are not finite stop the iteration; they go on to the caller as such.
        Err(_) => {
            let n = matrix.nrows();
            (vec![f64::NAN; n], Matrix::identity(n, n))
        }
    }
}

/// A factorised symmetric matrix (Bunch & Kaufman, Math. Comp. 31 (1977) 163).
pub(super) struct Symmetric(Lblt<f64>);

impl Symmetric {
    /// Factorises a matrix, read from its lower half.
    pub(super) fn new(matrix: MatRef<'_, f64>) -> Self {
        Self(Lblt::new(matrix, Side::Lower))
    }

    /// Number of negative eigenvalues: the signs of the pivots are those of the eigenvalues (Sylvester's law of inertia).
    pub(super) fn negative(&self) -> usize {
        negative_pivots(&self.0)
    }

    pub(super) fn inverse(&self) -> Matrix {
        self.0.inverse()
    }

    /// Solutions for the columns of a matrix.
    pub(super) fn solve(&self, right: MatRef<'_, f64>) -> Matrix {
        self.0.solve(right)
    }
}

fn negative_pivots(factor: &Lblt<f64>) -> usize {
    let diagonal = factor.B_diag().column_vector();
    let beside = factor.B_subdiag().column_vector();
    let (mut index, mut negative) = (0, 0);
    while index < diagonal.nrows() {
        let a = diagonal[index];
        if beside[index] == 0.0 {
            negative += usize::from(a < 0.0);
            index += 1;
        } else {
            let b = diagonal[index + 1];
            negative += if a * b - beside[index] * beside[index] < 0.0 {
                1
            } else if a < 0.0 {
                2
            } else {
                0
            };
            index += 2;
        }
    }
    negative
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn inertia_is_that_of_the_eigenvalues() {
        // Entries of both signs without structure, from a linear congruential sequence.
        let mut state = 12345_u64;
        let mut next = || {
            state = state
                .wrapping_mul(6364136223846793005)
                .wrapping_add(1442695040888963407);
            (state >> 11) as f64 / (1_u64 << 53) as f64 - 0.5
        };
        for n in [1, 2, 5, 40, 150] {
            let mut matrix = Matrix::zeros(n, n);
            for i in 0..n {
                for j in 0..=i {
                    matrix[(i, j)] = next();
                    matrix[(j, i)] = matrix[(i, j)];
                }
            }
            let (values, _) = eigen(&matrix);
            let factor = Symmetric::new(matrix.as_ref());
            let inverse = factor.inverse();
            assert_eq!(
                factor.negative(),
                values.iter().filter(|&&value| value < 0.0).count()
            );
            let unit = product(matrix.as_ref(), inverse.as_ref());
            for i in 0..n {
                for j in 0..n {
                    let expected = f64::from(u8::from(i == j));
                    assert!((unit[(i, j)] - expected).abs() < 1e-9);
                }
            }
        }
    }
}
