//! How far the levels of a discretisation are from those of the domain.
//!
//! The residual of a computed wave is tested with the functions of the next two polynomial degrees. What a richer space would
//! lower the level by is the energy of the correction that they allow (hierarchical error estimate: Bank & Smith, SIAM J. Numer.
//! Anal. 30 (1993) 921), here with the interior functions solved for exactly and the edge functions one by one.

use super::fields::Fields;
use super::mesh::{Cell, Mesh};
use super::space::{Leaf, Space};
use crate::dense::{self, Matrix, Symmetric};
use faer::MatRef;
use rayon::prelude::*;

/// Degrees that are added to test the residual.
const EXTRA: usize = 2;
/// The estimate leaves out the coupling of edges and all degrees beyond the next two: this much more is stated.
const SAFETY: f64 = 3.0;
/// Rounding error of an entry of a matrix in units of the last digit: a few times the root of the number of quadrature points, some
/// five hundred, that it is a sum over.
const ROUNDING: f64 = 48.0;

/// The functions of the next degrees on the elements of one kind: new edge functions first, new interior functions behind.
#[derive(Debug)]
struct Surplus {
    /// For each function that the wave has: its place among those of the richer element.
    known: Vec<usize>,
    /// Stiffness and mass between all functions of the richer element (rows) and the new ones (columns).
    stiffness: Matrix,
    mass: Matrix,
    /// Number of new edge functions.
    rim: usize,
    /// The inverse of the stiffness of the new interior functions, and its product with their coupling to the new edge functions.
    inverse: Matrix,
    coupling: Matrix,
    /// Stiffness of each new edge function with the new interior functions solved for.
    pivots: Vec<f64>,
}

/// A new edge function of a leaf holds `coefficient` times one unknown of the richer space.
#[derive(Clone, Copy, Debug)]
struct NewEdge {
    /// Number of the new function.
    column: usize,
    unknown: usize,
    coefficient: f64,
}

/// Estimates the errors of all waves of one space.
#[derive(Debug)]
pub(super) struct Estimator {
    /// By the kinds of the elements of the richer space.
    kinds: Vec<Surplus>,
    /// Kind and new edge functions of every leaf.
    leaves: Vec<(usize, Vec<NewEdge>)>,
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
        let kinds: Vec<Surplus> = richer
            .kinds
            .par_iter()
            .map(|&element| Surplus::new(space, &richer, element))
            .collect();
        let leaves: Vec<(usize, Vec<NewEdge>)> = richer
            .leaves
            .iter()
            .map(|leaf| {
                let kind = richer.elements[leaf.element].kind;
                (kind, new_edges(leaf, &kinds[kind]))
            })
            .collect();
        let mut pivots = vec![0.0; richer.size];
        for (kind, edges) in &leaves {
            for edge in edges {
                let weight = edge.coefficient * edge.coefficient;
                pivots[edge.unknown] += weight * kinds[*kind].pivots[edge.column];
            }
        }
        Self {
            kinds,
            leaves,
            pivots,
        }
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
        for (leaf, (kind, edges)) in space.leaves.iter().zip(&self.leaves) {
            let part = &self.kinds[*kind];
            let local = widened(leaf, space, part, vectors);
            let residual = part.residual(&local, &values);
            part.add_interior(&residual, &mut lowered);
            part.add_edges(edges, &residual, &mut on_edges);
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
        let inner = self.interior(residual);
        let solved = dense::product(inner, self.inverse.as_ref());
        for (row, sum) in lowered.iter_mut().enumerate() {
            for column in 0..inner.ncols() {
                *sum += inner[(row, column)] * solved[(row, column)];
            }
        }
    }

    fn add_edges(&self, edges: &[NewEdge], residual: &Matrix, on_edges: &mut Matrix) {
        if edges.is_empty() {
            return;
        }
        let taken = dense::product(self.interior(residual), self.coupling.as_ref());
        for edge in edges {
            for row in 0..residual.nrows() {
                let own = residual[(row, edge.column)] - taken[(row, edge.column)];
                on_edges[(row, edge.unknown)] += edge.coefficient * own;
            }
        }
    }

    /// The columns of the new interior functions.
    fn interior<'a>(&self, residual: &'a Matrix) -> MatRef<'a, f64> {
        residual.subcols(self.rim, residual.ncols() - self.rim)
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

impl Surplus {
    fn new(space: &Space, richer: &Space, element: usize) -> Self {
        let rich = &richer.elements[element];
        let known = known_places(space, richer, element);
        let new = new_places(&known, rich.selection.len());
        let rim = new.iter().take_while(|&&place| place < rich.rim).count();
        let columns = |a, b| {
            let matrix = rich
                .matrices
                .combine(&richer.reference, &rich.selection, a, b);
            super::factor::gather(&matrix, &new)
        };
        let stiffness = columns(1.0, 0.0);
        let inside = new.len() - rim;
        let own = Matrix::from_fn(inside, inside, |i, j| stiffness[(new[rim + i], rim + j)]);
        let across = Matrix::from_fn(inside, rim, |i, j| stiffness[(new[rim + i], j)]);
        let inverse = Symmetric::new(own.as_ref()).inverse();
        let coupling = dense::product(inverse.as_ref(), across.as_ref());
        let pivot = |edge: usize| {
            let solved: f64 = (0..inside)
                .map(|row| across[(row, edge)] * coupling[(row, edge)])
                .sum();
            stiffness[(new[edge], edge)] - solved
        };
        Self {
            pivots: (0..rim).map(pivot).collect(),
            mass: columns(0.0, 1.0),
            known,
            stiffness,
            rim,
            inverse,
            coupling,
        }
    }
}

/// Places of the richer element's functions, `count` of them, that the wave does not have.
fn new_places(known: &[usize], count: usize) -> Vec<usize> {
    let mut is_new = vec![true; count];
    for &place in known {
        is_new[place] = false;
    }
    (0..count).filter(|&place| is_new[place]).collect()
}

/// What the new edge functions of a leaf of the richer space are made of.
fn new_edges(leaf: &Leaf, kind: &Surplus) -> Vec<NewEdge> {
    let new = new_places(&kind.known, kind.stiffness.nrows());
    leaf.entries
        .iter()
        .filter_map(|entry| {
            let column = new.iter().position(|&place| place == entry.local)?;
            Some(NewEdge {
                column,
                unknown: leaf.rim[entry.slot],
                coefficient: entry.coefficient,
            })
        })
        .collect()
}

/// For each function of an element its place in the richer one.
fn known_places(space: &Space, richer: &Space, element: usize) -> Vec<usize> {
    let rich = &richer.elements[element];
    let element = &space.elements[element];
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
