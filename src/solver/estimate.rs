//! How far the levels of a discretisation are from those of the domain.
//!
//! The residual of a computed wave is tested with the functions of the next two polynomial degrees. What a richer space would
//! lower the level by is the energy of the correction that they allow (hierarchical error estimate: Bank & Smith, SIAM J. Numer.
//! Anal. 30 (1993) 921), here with the interior functions solved for exactly and the edge functions one by one.

use super::dense::{self, Matrix, Symmetric};
use super::elements::Function;
use super::fields::Fields;
use super::mesh::{Cell, Mesh};
use super::space::{Leaf, Space};
use rayon::prelude::*;

/// Degrees that are added to test the residual.
const EXTRA: usize = 2;
/// The estimate leaves out the coupling of edges and all degrees beyond the next two: this much more is stated.
const SAFETY: f64 = 3.0;
/// Rounding error of an entry of a matrix in units of the last digit: a few times the root of the number of quadrature points, some
/// five hundred, that it is a sum over.
const ROUNDING: f64 = 48.0;

/// The functions of the next degrees on one leaf.
#[derive(Debug)]
struct Surplus {
    /// For each function that the wave has: its place among those of the richer element.
    known: Vec<usize>,
    /// Rows of the new functions, in the order of the columns.
    new: Vec<usize>,
    /// Stiffness and mass between all functions of the richer element (rows) and the new ones (columns).
    stiffness: Matrix,
    mass: Matrix,
    /// New edge functions: column, unknown, coefficient.
    edges: Vec<(usize, usize, f64)>,
    /// Columns of the new interior functions, the inverse of their stiffness, and its product with their coupling to the columns of
    /// the edges.
    interior: Vec<usize>,
    inverse: Matrix,
    coupling: Matrix,
}

/// Estimates the errors of all waves of one space.
#[derive(Debug)]
pub(super) struct Estimator {
    surplus: Vec<Surplus>,
    /// Stiffness of every unknown on an edge, its neighbourhood solved for.
    pivots: Vec<f64>,
}

impl Estimator {
    pub(super) fn new(
        space: &Space,
        mesh: &Mesh,
        cell: &Cell,
        fields: &Fields,
        degree: usize,
    ) -> Self {
        let richer = Space::new(mesh, cell, fields, degree, EXTRA);
        let surplus: Vec<Surplus> = (0..space.leaves.len())
            .into_par_iter()
            .map(|leaf| surplus(space, &richer, leaf))
            .collect();
        let mut pivots = vec![0.0; richer.size];
        for part in &surplus {
            for (index, &(column, unknown, coefficient)) in part.edges.iter().enumerate() {
                let mut pivot = part.stiffness[(part.new[column], column)];
                for (row, &inner) in part.interior.iter().enumerate() {
                    pivot -=
                        part.stiffness[(part.new[inner], column)] * part.coupling[(row, index)];
                }
                pivots[unknown] += coefficient * coefficient * pivot;
            }
        }
        Self { surplus, pivots }
    }

    /// Rayleigh quotients of the vectors in the rows, and their errors: discretisation and rounding.
    ///
    /// The quotients are better than the values of the iteration, whose rounding errors are relative to the distance from its
    /// shift.
    pub(super) fn assess(&self, space: &Space, vectors: &Matrix) -> (Vec<f64>, Vec<f64>) {
        let count = vectors.nrows();
        let energies = Energies::of(space, vectors);
        let values = energies.quotients();
        let mut on_edges = Matrix::zeros(count, self.pivots.len());
        let mut lowered = vec![0.0; count];
        for (leaf, part) in space.leaves.iter().zip(&self.surplus) {
            let local = widened(leaf, space, part, vectors);
            let residual = part.residual(&local, &values);
            part.add_interior(&residual, &mut lowered);
            part.add_edges(&residual, &mut on_edges);
        }
        for (unknown, &pivot) in self.pivots.iter().enumerate() {
            if pivot > 0.0 {
                for (level, sum) in lowered.iter_mut().enumerate() {
                    *sum += on_edges[(level, unknown)].powi(2) / pivot;
                }
            }
        }
        let errors = lowered
            .iter()
            .zip(energies.sizes)
            .map(|(lowered, size)| SAFETY * lowered + ROUNDING * f64::EPSILON * size)
            .collect();
        (values, errors)
    }
}

impl Surplus {
    /// (stiffness - value x mass) wave, tested with the new functions: one row per wave.
    fn residual(&self, local: &Matrix, values: &[f64]) -> Matrix {
        let mut residual = dense::product(local.as_ref(), self.stiffness.as_ref());
        let mass = dense::product(local.as_ref(), self.mass.as_ref());
        for column in 0..residual.ncols() {
            for (row, value) in values.iter().enumerate() {
                residual[(row, column)] -= value * mass[(row, column)];
            }
        }
        residual
    }

    fn add_interior(&self, residual: &Matrix, lowered: &mut [f64]) {
        let inner = super::factor::gather(residual, &self.interior);
        let solved = dense::product(inner.as_ref(), self.inverse.as_ref());
        for (row, sum) in lowered.iter_mut().enumerate() {
            for column in 0..inner.ncols() {
                *sum += inner[(row, column)] * solved[(row, column)];
            }
        }
    }

    fn add_edges(&self, residual: &Matrix, on_edges: &mut Matrix) {
        if self.edges.is_empty() {
            return;
        }
        let inner = super::factor::gather(residual, &self.interior);
        let taken = dense::product(inner.as_ref(), self.coupling.as_ref());
        for (index, &(column, unknown, coefficient)) in self.edges.iter().enumerate() {
            for row in 0..residual.nrows() {
                on_edges[(row, unknown)] +=
                    coefficient * (residual[(row, column)] - taken[(row, index)]);
            }
        }
    }
}

/// Coefficients of the waves on the richer element.
fn widened(leaf: &Leaf, space: &Space, part: &Surplus, vectors: &Matrix) -> Matrix {
    let functions = space.elements[leaf.element].selection.len();
    let local = leaf.restrict(vectors, functions);
    let mut wide = Matrix::zeros(local.nrows(), part.stiffness.nrows());
    for (column, &place) in part.known.iter().enumerate() {
        wide.col_mut(place).copy_from(local.col(column));
    }
    wide
}

/// Integrals of waves over the cell.
struct Energies {
    /// Of the squared gradient.
    stiffness: Vec<f64>,
    /// Of the square.
    mass: Vec<f64>,
    /// The sum of the sizes of all products that the first is added up from: what its rounding error is relative to.
    sizes: Vec<f64>,
}

impl Energies {
    fn of(space: &Space, vectors: &Matrix) -> Self {
        let mut sums = Self {
            stiffness: vec![0.0; vectors.nrows()],
            mass: vec![0.0; vectors.nrows()],
            sizes: vec![0.0; vectors.nrows()],
        };
        for leaf in &space.leaves {
            let element = &space.elements[leaf.element];
            let local = leaf.restrict(vectors, element.selection.len());
            let form = |a, b| {
                element
                    .matrices
                    .combine(&space.reference, &element.selection, a, b)
            };
            let (stiffness, mass) = (form(1.0, 0.0), form(0.0, 1.0));
            add_forms(&local, &stiffness, &mut sums.stiffness);
            add_forms(&local, &mass, &mut sums.mass);
            add_forms(&sizes(&local), &sizes(&stiffness), &mut sums.sizes);
        }
        sums
    }

    fn quotients(&self) -> Vec<f64> {
        let pairs = self.stiffness.iter().zip(&self.mass);
        pairs.map(|(stiffness, mass)| stiffness / mass).collect()
    }
}

/// Adds row x matrix x row for every row.
fn add_forms(rows: &Matrix, matrix: &Matrix, sums: &mut [f64]) {
    let product = dense::product(rows.as_ref(), matrix.as_ref());
    for column in 0..rows.ncols() {
        let pair = rows
            .col_as_slice(column)
            .iter()
            .zip(product.col_as_slice(column));
        for (sum, (a, b)) in sums.iter_mut().zip(pair) {
            *sum += a * b;
        }
    }
}

fn sizes(matrix: &Matrix) -> Matrix {
    Matrix::from_fn(matrix.nrows(), matrix.ncols(), |i, j| matrix[(i, j)].abs())
}

fn surplus(space: &Space, richer: &Space, index: usize) -> Surplus {
    let wide = &richer.leaves[index];
    let rich = &richer.elements[wide.element];
    let function = |column: usize| richer.reference.functions[column];
    let known: Vec<usize> = known_places(space, richer, index);
    let mut is_new = vec![true; rich.selection.len()];
    for &place in &known {
        is_new[place] = false;
    }
    let new: Vec<usize> = (0..is_new.len()).filter(|&place| is_new[place]).collect();
    let columns = |matrix: &Matrix| super::factor::gather(matrix, &new);
    let stiffness = columns(
        &rich
            .matrices
            .combine(&richer.reference, &rich.selection, 1.0, 0.0),
    );
    let mass = columns(
        &rich
            .matrices
            .combine(&richer.reference, &rich.selection, 0.0, 1.0),
    );
    let edges: Vec<(usize, usize, f64)> = wide
        .entries
        .iter()
        .filter(|entry| {
            is_new[entry.local]
                && matches!(
                    function(rich.selection.columns[entry.local]),
                    Function::Edge { .. }
                )
        })
        .map(|entry| {
            let column = new.iter().position(|&i| i == entry.local).unwrap_or(0);
            (column, wide.rim[entry.slot], entry.coefficient)
        })
        .collect();
    let interior: Vec<usize> = (0..new.len())
        .filter(|&i| {
            matches!(
                function(rich.selection.columns[new[i]]),
                Function::Interior { .. }
            )
        })
        .collect();
    let own = Matrix::from_fn(interior.len(), interior.len(), |i, j| {
        stiffness[(new[interior[i]], interior[j])]
    });
    let across = Matrix::from_fn(interior.len(), edges.len(), |i, j| {
        stiffness[(new[interior[i]], edges[j].0)]
    });
    let inverse = Symmetric::new(own.as_ref()).inverse();
    Surplus {
        coupling: dense::product(inverse.as_ref(), across.as_ref()),
        known,
        new,
        stiffness,
        mass,
        edges,
        interior,
        inverse,
    }
}

/// For each function of an element its place in the richer one.
fn known_places(space: &Space, richer: &Space, index: usize) -> Vec<usize> {
    let leaf = &space.leaves[index];
    let element = &space.elements[leaf.element];
    let rich = &richer.elements[leaf.element];
    // Interior functions of one degree stand in the same order in both.
    let mut used = vec![false; rich.selection.len()];
    element
        .selection
        .columns
        .iter()
        .map(|&column| {
            let wanted = space.reference.functions[column];
            let place = (0..used.len())
                .find(|&i| {
                    !used[i] && richer.reference.functions[rich.selection.columns[i]] == wanted
                })
                .unwrap_or(0);
            used[place] = true;
            place
        })
        .collect()
}
