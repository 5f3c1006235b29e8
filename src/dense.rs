//! Dense linear algebra: the only place that calls the library for it.
//!
//! All calls run on the calling thread (the library is built without its thread pool), so that results do not depend on the
//! number of threads; parallel work is cut into pieces further up.

use faer::diag::Diag;
use faer::dyn_stack::{MemBuffer, MemStack};
use faer::linalg::cholesky::lblt::factor::{self, LbltParams, PivotingStrategy};
use faer::linalg::cholesky::lblt::solve;
use faer::linalg::solvers::{Llt, SelfAdjointEigen};
use faer::linalg::triangular_solve::{
    solve_lower_triangular_in_place, solve_unit_lower_triangular_in_place,
    solve_unit_upper_triangular_in_place, solve_upper_triangular_in_place,
};
use faer::perm::PermRef;
use faer::{Accum, Auto, MatMut, MatRef, Par, Side, Spec};

/// A dense matrix, column by column.
pub(crate) type Matrix = faer::Mat<f64>;

/// What happens to the numbers that a product is written over.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Into {
    /// They are replaced.
    Fresh,
    /// The product is added to them.
    Sum,
}

/// target (+)= factor a b.
pub(crate) fn multiply(
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
pub(crate) fn product(a: MatRef<'_, f64>, b: MatRef<'_, f64>) -> Matrix {
    let mut result = Matrix::zeros(a.nrows(), b.ncols());
    multiply(result.as_mut(), Into::Fresh, a, b, 1.0);
    result
}

/// Scalar product; eight partial sums, in a fixed order, that a processor does at once.
pub(crate) fn dot(a: &[f64], b: &[f64]) -> f64 {
    let mut sums = [0.0; 8];
    let (a_chunks, b_chunks) = (a.chunks_exact(8), b.chunks_exact(8));
    let rest: f64 = a_chunks
        .remainder()
        .iter()
        .zip(b_chunks.remainder())
        .map(|(a, b)| a * b)
        .sum();
    for (a, b) in a_chunks.zip(b_chunks) {
        for (sum, (a, b)) in sums.iter_mut().zip(a.iter().zip(b)) {
            *sum += a * b;
        }
    }
    sums.iter().sum::<f64>() + rest
}

/// Eigenvalues (ascending) and eigenvectors (columns) of a symmetric matrix, read from its lower half.
pub(crate) fn eigen(matrix: &Matrix) -> (Vec<f64>, Matrix) {
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

/// A factorised symmetric matrix: P A P^T = L B L^T with 1 x 1 and 2 x 2 blocks in B.
///
/// Bounded Bunch-Kaufman ("rook") pivoting (Ashcraft, Grimes & Lewis, SIAM J. Matrix Anal. Appl. 20 (1998) 513): with plain partial
/// pivoting entries of L may grow without bound.
pub(crate) struct Symmetric {
    lower: Matrix,
    diagonal: Diag<f64>,
    beside: Diag<f64>,
    forward: Vec<usize>,
    backward: Vec<usize>,
}

impl Symmetric {
    /// Factorises a matrix, read from its lower half.
    pub(crate) fn new(matrix: MatRef<'_, f64>) -> Self {
        let size = matrix.nrows();
        let mut parameters = <LbltParams as Auto<f64>>::auto();
        parameters.pivoting = PivotingStrategy::Rook;
        let parameters = Spec::new(parameters);
        let mut lower = Matrix::zeros(size, size);
        lower.copy_from_triangular_lower(matrix);
        let mut beside = Diag::zeros(size);
        let (mut forward, mut backward) = (vec![0; size], vec![0; size]);
        let mut memory = MemBuffer::new(factor::cholesky_in_place_scratch::<usize, f64>(
            size,
            Par::Seq,
            parameters,
        ));
        factor::cholesky_in_place(
            lower.as_mut(),
            beside.as_mut(),
            &mut forward,
            &mut backward,
            Par::Seq,
            MemStack::new(&mut memory),
            parameters,
        );
        let mut diagonal = Diag::zeros(size);
        for index in 0..size {
            diagonal[index] = lower[(index, index)];
            lower[(index, index)] = 1.0;
        }
        Self {
            lower,
            diagonal,
            beside,
            forward,
            backward,
        }
    }

    /// Number of negative eigenvalues: the signs of the pivots are those of the eigenvalues (Sylvester's law of inertia).
    pub(crate) fn negative(&self) -> usize {
        let (mut index, mut negative) = (0, 0);
        while index < self.lower.nrows() {
            let (a, b) = (self.diagonal[index], self.beside[index]);
            if b == 0.0 {
                negative += usize::from(a < 0.0);
                index += 1;
            } else {
                let c = self.diagonal[index + 1];
                negative += match (a * c - b * b < 0.0, a < 0.0) {
                    (true, _) => 1,
                    (false, true) => 2,
                    (false, false) => 0,
                };
                index += 2;
            }
        }
        negative
    }

    pub(crate) fn inverse(&self) -> Matrix {
        let size = self.lower.nrows();
        self.solve(Matrix::identity(size, size).as_ref())
    }

    /// With A the matrix and C another one: B^-1 L^-1 P C, of which the other factors give the rest, and L^-1 P C.
    ///
    /// C^T A^-1 C is the product of the second's transpose with the first: as stable as elimination row by row, where a product of
    /// C with solutions would lose digits if entries are large.
    pub(crate) fn halves(&self, right: MatRef<'_, f64>) -> (Matrix, Matrix) {
        let mut lower = Matrix::zeros(right.nrows(), right.ncols());
        for column in 0..right.ncols() {
            for (row, &source) in self.forward.iter().enumerate() {
                lower[(row, column)] = right[(source, column)];
            }
        }
        solve_unit_lower_triangular_in_place(self.lower.as_ref(), lower.as_mut(), Par::Seq);
        let mut scaled = lower.clone();
        for column in 0..scaled.ncols() {
            self.divide_by_blocks(scaled.col_as_slice_mut(column));
        }
        (scaled, lower)
    }

    /// A^-1 C from B^-1 L^-1 P C.
    pub(crate) fn finish(&self, scaled: &Matrix) -> Matrix {
        let mut upper = scaled.clone();
        solve_unit_upper_triangular_in_place(self.lower.transpose(), upper.as_mut(), Par::Seq);
        let mut solution = Matrix::zeros(upper.nrows(), upper.ncols());
        for column in 0..upper.ncols() {
            for (row, &target) in self.forward.iter().enumerate() {
                solution[(target, column)] = upper[(row, column)];
            }
        }
        solution
    }

    /// Solves with the 1 x 1 and 2 x 2 blocks.
    fn divide_by_blocks(&self, values: &mut [f64]) {
        let mut index = 0;
        while index < values.len() {
            let (a, b) = (self.diagonal[index], self.beside[index]);
            if b == 0.0 {
                values[index] /= a;
                index += 1;
            } else {
                // Scaled by the larger entry off the diagonal, as pivoting chose it.
                let (a, c) = (a / b, self.diagonal[index + 1] / b);
                let (x, y) = (values[index] / b, values[index + 1] / b);
                let determinant = a * c - 1.0;
                values[index] = (c * x - y) / determinant;
                values[index + 1] = (a * y - x) / determinant;
                index += 2;
            }
        }
    }

    /// Solutions for the columns of a matrix.
    pub(crate) fn solve(&self, right: MatRef<'_, f64>) -> Matrix {
        let size = self.lower.nrows();
        let mut solution = right.to_owned();
        let mut memory = MemBuffer::new(solve::solve_in_place_scratch::<usize, f64>(
            size,
            right.ncols(),
            Par::Seq,
        ));
        solve::solve_in_place(
            self.lower.as_ref(),
            self.diagonal.as_ref(),
            self.beside.as_ref(),
            PermRef::new_checked(&self.forward, &self.backward, size),
            solution.as_mut(),
            Par::Seq,
            MemStack::new(&mut memory),
        );
        solution
    }
}

/// The factor L of a positive definite matrix C = L L^T.
///
/// With C a covariance, L^-1 x has independent components of variance one ("whitening").
pub(crate) struct Cholesky {
    lower: Matrix,
}

impl Cholesky {
    /// Factorises a matrix, read from its lower half; nothing where it is not positive definite.
    pub(crate) fn new(matrix: MatRef<'_, f64>) -> Option<Self> {
        let factor = Llt::new(matrix, Side::Lower).ok()?;
        Some(Self {
            lower: factor.L().to_owned(),
        })
    }

    /// L^-1 times the columns of a matrix.
    pub(crate) fn whitened(&self, columns: MatRef<'_, f64>) -> Matrix {
        let mut result = columns.to_owned();
        solve_lower_triangular_in_place(self.lower.as_ref(), result.as_mut(), Par::Seq);
        result
    }

    /// L^-1 times one column.
    pub(crate) fn whitened_column(&self, column: &[f64]) -> Vec<f64> {
        let whitened = self.whitened(MatRef::from_column_major_slice(column, column.len(), 1));
        whitened.col_as_slice(0).to_vec()
    }

    /// C^-1 times the columns of a matrix.
    pub(crate) fn solved(&self, columns: &Matrix) -> Matrix {
        let mut result = self.whitened(columns.as_ref());
        solve_upper_triangular_in_place(self.lower.transpose(), result.as_mut(), Par::Seq);
        result
    }

    /// Standard deviation of a sum with these weights of variables of covariance C.
    pub(crate) fn deviation(&self, weights: &[f64]) -> f64 {
        let size = self.lower.nrows();
        let square: f64 = (0..size)
            .map(|column| {
                let sum = dot(
                    &self.lower.col_as_slice(column)[column..],
                    &weights[column..],
                );
                sum * sum
            })
            .sum();
        square.sqrt()
    }

    /// ln det C.
    pub(crate) fn log_determinant(&self) -> f64 {
        (0..self.lower.nrows())
            .map(|index| 2.0 * self.lower[(index, index)].ln())
            .sum()
    }
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
            let (scaled, lower) = factor.halves(matrix.as_ref());
            let back = product(lower.transpose(), scaled.as_ref());
            let whole = factor.finish(&scaled);
            for i in 0..n {
                for j in 0..n {
                    assert!((back[(i, j)] - matrix[(i, j)]).abs() < 1e-10);
                    assert!((whole[(i, j)] - f64::from(u8::from(i == j))).abs() < 1e-9);
                }
            }
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
