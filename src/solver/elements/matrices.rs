//! Stiffness and mass matrices of single triangles.

use super::super::mesh::{Mesh, Triangle};
use super::basis::Function;
use super::reference::Reference;
use crate::billiard::{Vec2, cross};
use crate::dense::{self, Into, Matrix};

/// The functions of the reference triangle that an element uses: those up to its degree inside and up to the degrees of its
/// edges there.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(in crate::solver) struct Selection {
    pub(in crate::solver) columns: Vec<usize>,
}

impl Selection {
    pub(in crate::solver) fn new(reference: &Reference, edges: [usize; 3], inside: usize) -> Self {
        let wanted = |function: &Function| match *function {
            Function::Corner(_) => true,
            Function::Edge { edge, order } => order + 2 <= edges[edge],
            Function::Interior { degree } => degree <= inside,
        };
        let columns = (0..reference.functions.len())
            .filter(|&column| wanted(&reference.functions[column]))
            .collect();
        Self { columns }
    }

    pub(in crate::solver) fn len(&self) -> usize {
        self.columns.len()
    }
}

/// How the matrices of an element are known.
#[derive(Clone, Debug)]
pub(in crate::solver) enum ElementMatrices {
    /// A straight triangle: combinations of the reference matrices.
    Straight {
        /// Coefficients of the xx, xy and yy matrices in the stiffness matrix.
        metric: [f64; 3],
        /// Coefficient of the reference mass matrix.
        jacobian: f64,
        /// The mass matrix, where not all functions of the reference triangle are selected.
        mass: Option<Matrix>,
    },
    /// A curved one: matrices of its own, for the selected functions.
    Curved { stiffness: Matrix, mass: Matrix },
}

impl ElementMatrices {
    pub(in crate::solver) fn new(
        mesh: &Mesh,
        triangle: &Triangle,
        reference: &Reference,
        selection: &Selection,
    ) -> Self {
        if mesh.is_straight(triangle) {
            let [p, q, r] = triangle.points;
            let (metric, jacobian) = metric(q - p, r - p);
            let whole = selection.len() == reference.functions.len();
            let columns = &selection.columns;
            let mass = (!whole).then(|| {
                Matrix::from_fn(columns.len(), columns.len(), |i, j| {
                    jacobian * reference.mass[(columns[i], columns[j])]
                })
            });
            return Self::Straight {
                metric,
                jacobian,
                mass,
            };
        }
        let points = reference.points.len();
        let count = selection.len();
        let mut gradients = Matrix::zeros(2 * points, count);
        let mut values = Matrix::zeros(points, count);
        let weighted: Vec<([f64; 4], f64)> = reference
            .points
            .iter()
            .zip(&reference.weights)
            .map(|(&at, &weight)| {
                let [_, dx, dy] = mesh.map(triangle, at);
                let jacobian = cross(dx, dy);
                // Rows of the inverse of the map's derivative, times the root of the weight.
                let factor = (weight / jacobian).sqrt();
                let inverse = [dy.y, -dx.y, -dy.x, dx.x].map(|entry| factor * entry);
                (inverse, (weight * jacobian).sqrt())
            })
            .collect();
        for (target, &column) in selection.columns.iter().enumerate() {
            let (dx, dy) = (reference.dx.col(column), reference.dy.col(column));
            let value = reference.values.col(column);
            for (row, (inverse, root)) in weighted.iter().enumerate() {
                gradients[(row, target)] = inverse[0] * dx[row] + inverse[1] * dy[row];
                gradients[(points + row, target)] = inverse[2] * dx[row] + inverse[3] * dy[row];
                values[(row, target)] = root * value[row];
            }
        }
        Self::Curved {
            stiffness: dense::product(gradients.transpose(), gradients.as_ref()),
            mass: dense::product(values.transpose(), values.as_ref()),
        }
    }

    /// Numbers that are the same for straight elements of the same shape and size, but for rounding; none for curved ones.
    pub(in crate::solver) fn fingerprint(&self) -> Option<Vec<i64>> {
        /// Relative size of a difference that is taken for rounding: far below the error of a level.
        const STEP: f64 = 1e-13;
        let Self::Straight {
            metric, jacobian, ..
        } = self
        else {
            return None;
        };
        let scale = jacobian.log2().floor().exp2();
        let rounded = |x: f64| (x / STEP).round() as i64;
        let mut key: Vec<i64> = metric.iter().map(|&entry| rounded(entry)).collect();
        key.push(rounded(jacobian / scale));
        key.push(scale.log2() as i64);
        Some(key)
    }

    /// a stiffness + b mass for the selected functions.
    pub(in crate::solver) fn combine(
        &self,
        reference: &Reference,
        selection: &Selection,
        a: f64,
        b: f64,
    ) -> Matrix {
        match self {
            Self::Straight {
                metric, jacobian, ..
            } => {
                let [xx, xy, yy] = metric.map(|entry| a * entry);
                let b = b * jacobian;
                let columns = &selection.columns;
                let mut result = Matrix::zeros(columns.len(), columns.len());
                for (target, &column) in columns.iter().enumerate() {
                    let sources = [&reference.xx, &reference.xy, &reference.yy, &reference.mass]
                        .map(|matrix| matrix.col_as_slice(column));
                    let target = result.col_as_slice_mut(target);
                    for (entry, &row) in target.iter_mut().zip(columns) {
                        *entry = xx * sources[0][row]
                            + xy * sources[1][row]
                            + yy * sources[2][row]
                            + b * sources[3][row];
                    }
                }
                result
            }
            Self::Curved { stiffness, mass } => {
                Matrix::from_fn(mass.nrows(), mass.ncols(), |i, j| {
                    a * stiffness[(i, j)] + b * mass[(i, j)]
                })
            }
        }
    }

    /// block x mass: one row per vector, one column per selected function.
    pub(in crate::solver) fn times_mass(&self, reference: &Reference, block: &Matrix) -> Matrix {
        match self {
            Self::Straight {
                jacobian,
                mass: None,
                ..
            } => {
                let mut result = Matrix::zeros(block.nrows(), block.ncols());
                let mass = reference.mass.as_ref();
                dense::multiply(
                    result.as_mut(),
                    Into::Fresh,
                    block.as_ref(),
                    mass,
                    *jacobian,
                );
                result
            }
            Self::Straight {
                mass: Some(mass), ..
            }
            | Self::Curved { mass, .. } => dense::product(block.as_ref(), mass.as_ref()),
        }
    }
}

/// Coefficients of xx, xy (which stands twice) and yy in the stiffness matrix, and the Jacobian, of the triangle with these two
/// sides.
fn metric(u: Vec2, v: Vec2) -> ([f64; 3], f64) {
    let jacobian = cross(u, v);
    let xx = v.norm_squared() / jacobian;
    let xy = -2.0 * u.dot(&v) / jacobian;
    let yy = u.norm_squared() / jacobian;
    ([xx, xy, yy], jacobian)
}
