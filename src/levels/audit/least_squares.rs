//! Generalised least squares on the rest of a record.

use super::explain::Explained;
use crate::dense::{Cholesky, Matrix, dot};

/// Coefficients of some columns in the rest of a record.
pub(super) struct Estimate {
    pub(super) values: Vec<f64>,
    /// Standard deviations.
    pub(super) errors: Vec<f64>,
}

/// Fits columns to the rest of a record. `allowed` is the prior variance with which each column is already part of the noise; it does
/// not change the estimates and is taken out of their errors (0 where the column is not part of it).
pub(super) fn fit(
    explained: &Explained,
    columns: &[Vec<f64>],
    allowed: &[f64],
) -> Option<Estimate> {
    let whitener = &explained.whitener;
    let rest = whitener.whitened_column(&explained.rest);
    let white: Vec<Vec<f64>> = columns
        .iter()
        .map(|column| whitener.whitened_column(column))
        .collect();
    let count = columns.len();
    let mut normal = Matrix::zeros(count, count);
    let mut right = Matrix::zeros(count, 1);
    for i in 0..count {
        right[(i, 0)] = dot(&white[i], &rest);
        for j in 0..count {
            normal[(i, j)] = dot(&white[i], &white[j]);
        }
    }
    let factor = Cholesky::new(normal.as_ref())?;
    let values = factor.solved(&right);
    let inverse = factor.solved(&Matrix::identity(count, count));
    Some(Estimate {
        values: (0..count).map(|i| values[(i, 0)]).collect(),
        errors: (0..count)
            .map(|i| (inverse[(i, i)] - allowed[i]).max(0.0).sqrt())
            .collect(),
    })
}
