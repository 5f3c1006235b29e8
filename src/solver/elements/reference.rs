//! What all triangles of one polynomial degree share: functions, quadrature and the matrices of the reference triangle.

use super::basis::{Function, evaluate, functions};
use super::jacobi::gauss;
use super::matrices::Selection;
use crate::dense::{self, Into, Matrix};

/// Points per direction beyond the degree: exact for straight triangles, and curved ones add a smooth factor.
const EXTRA_POINTS: usize = 8;

/// The triangle with corners (0, 0), (1, 0), (0, 1).
#[derive(Debug)]
pub(in crate::solver) struct Reference {
    /// Highest degree.
    pub(in crate::solver) degree: usize,
    pub(in crate::solver) functions: Vec<Function>,
    /// What each function is multiplied by, so that its gradient has size one on an equilateral triangle.
    pub(in crate::solver) scales: Vec<f64>,
    /// Quadrature points x, y and weights.
    pub(in crate::solver) points: Vec<[f64; 2]>,
    pub(in crate::solver) weights: Vec<f64>,
    /// Values and derivatives at the points: a row per point, a column per function.
    pub(in crate::solver) values: Matrix,
    pub(in crate::solver) dx: Matrix,
    pub(in crate::solver) dy: Matrix,
    /// Integrals of products: of both x derivatives, of x with y derivatives (symmetrised), of both y derivatives, of values.
    pub(in crate::solver) xx: Matrix,
    pub(in crate::solver) xy: Matrix,
    pub(in crate::solver) yy: Matrix,
    pub(in crate::solver) mass: Matrix,
}

impl Reference {
    pub(in crate::solver) fn new(degree: usize) -> Self {
        let functions = functions(degree);
        let count = degree + EXTRA_POINTS;
        let (points, weights) = triangle_rule(count);
        let mut values = Matrix::zeros(points.len(), functions.len());
        let (mut dx, mut dy) = (values.clone(), values.clone());
        for (row, &[x, y]) in points.iter().enumerate() {
            for (column, jet) in evaluate(degree, x, y).into_iter().enumerate() {
                values[(row, column)] = jet.value;
                dx[(row, column)] = jet.gradient[0];
                dy[(row, column)] = jet.gradient[1];
            }
        }
        let scales = scales(&functions, &weights, &dx, &dy);
        for matrix in [&mut values, &mut dx, &mut dy] {
            for (column, &scale) in scales.iter().enumerate() {
                matrix.col_mut(column).iter_mut().for_each(|x| *x *= scale);
            }
        }
        let xy = integral(&weights, &dx, &dy);
        Self {
            degree,
            xx: integral(&weights, &dx, &dx),
            xy: faer::Scale(0.5) * (&xy + xy.transpose()),
            yy: integral(&weights, &dy, &dy),
            mass: integral(&weights, &values, &values),
            functions,
            scales,
            points,
            weights,
            values,
            dx,
            dy,
        }
    }

    /// Number of corner and edge functions in a selection, in which they come first.
    pub(in crate::solver) fn rim_functions(&self, selection: &Selection) -> usize {
        let on_rim =
            |column: &&usize| !matches!(self.functions[**column], Function::Interior { .. });
        selection.columns.iter().take_while(on_rim).count()
    }

    /// Values and derivatives of all functions (scaled) at any point of the triangle: value, x derivative, y derivative.
    pub(in crate::solver) fn at(&self, [x, y]: [f64; 2]) -> Vec<[f64; 3]> {
        evaluate(self.degree, x, y)
            .into_iter()
            .zip(&self.scales)
            .map(|(jet, &scale)| {
                [jet.value, jet.gradient[0], jet.gradient[1]].map(|part| scale * part)
            })
            .collect()
    }
}

/// Tensor rule on the square, folded onto the triangle: x = s (1 - t), y = t.
fn triangle_rule(count: usize) -> (Vec<[f64; 2]>, Vec<f64>) {
    let (along, up) = (gauss(count, 0), gauss(count, 1));
    let mut points = Vec::with_capacity(count * count);
    let mut weights = Vec::with_capacity(count * count);
    for &(t, upper) in &up {
        for &(s, lower) in &along {
            points.push([s * (1.0 - t), t]);
            weights.push(upper * lower);
        }
    }
    (points, weights)
}

/// 1/norm of the gradient on the equilateral triangle of side 1; corner functions stay as they are.
fn scales(functions: &[Function], weights: &[f64], dx: &Matrix, dy: &Matrix) -> Vec<f64> {
    functions
        .iter()
        .enumerate()
        .map(|(column, function)| {
            if matches!(function, Function::Corner(_)) {
                return 1.0;
            }
            let energy: f64 = weights
                .iter()
                .enumerate()
                .map(|(row, w)| {
                    let (x, y) = (dx[(row, column)], dy[(row, column)]);
                    w * (x * x + y * y - x * y)
                })
                .sum();
            1.0 / (energy * 2.0 / 3.0_f64.sqrt()).sqrt()
        })
        .collect()
}

/// Matrix of the integrals of a_i b_j.
fn integral(weights: &[f64], a: &Matrix, b: &Matrix) -> Matrix {
    let mut weighted = a.clone();
    for column in 0..a.ncols() {
        for (row, w) in weights.iter().enumerate() {
            weighted[(row, column)] *= w;
        }
    }
    let mut result = Matrix::zeros(a.ncols(), b.ncols());
    dense::multiply(
        result.as_mut(),
        Into::Fresh,
        weighted.transpose(),
        b.as_ref(),
        1.0,
    );
    result
}
