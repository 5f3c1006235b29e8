//! Factorisation of stiffness - shift x mass along the dissection tree, its inertia, and solutions.

use super::dense::{self, Into, Matrix, Symmetric};
use super::dissection::{Below, Dissection, Node};
use super::space::Space;

/// What a node keeps for solutions: with A the node's matrix on eliminated unknowns e and rim r, the inverse of A_ee and
/// A_ee^-1 A_er.
#[derive(Debug)]
struct Kept {
    inverse: Matrix,
    coupling: Matrix,
}

/// A factorised matrix.
#[derive(Debug)]
pub(super) struct Factor<'a> {
    tree: &'a Dissection,
    kept: Vec<Kept>,
    /// Number of negative eigenvalues: the number of levels below the shift.
    pub(super) negative: usize,
}

/// Number of eigenvalues of the pencil (stiffness, mass) below a shift, by Sylvester's law of inertia.
pub(super) fn count_below(space: &Space, tree: &Dissection, shift: f64) -> usize {
    Elimination::new(space, tree, shift, false).run().1
}

impl<'a> Factor<'a> {
    pub(super) fn new(space: &Space, tree: &'a Dissection, shift: f64) -> Self {
        let (kept, negative) = Elimination::new(space, tree, shift, true).run();
        Self {
            tree,
            kept,
            negative,
        }
    }

    /// Replaces the right sides by the solutions: one column per unknown, one row per right side.
    pub(super) fn solve(&self, block: &mut Matrix) {
        for (node, kept) in self.tree.nodes.iter().zip(&self.kept) {
            let own = gather(block, &node.eliminated);
            if !node.rim.is_empty() {
                let onward = dense::product(own.as_ref(), kept.coupling.as_ref());
                for (column, &unknown) in node.rim.iter().enumerate() {
                    let target = block.col_mut(unknown);
                    subtract(target, onward.col(column));
                }
            }
            let solved = dense::product(own.as_ref(), kept.inverse.as_ref());
            scatter(block, &node.eliminated, &solved);
        }
        for (node, kept) in self.tree.nodes.iter().zip(&self.kept).rev() {
            if node.rim.is_empty() || node.eliminated.is_empty() {
                continue;
            }
            let rim = gather(block, &node.rim);
            let back = dense::product(rim.as_ref(), kept.coupling.transpose());
            for (column, &unknown) in node.eliminated.iter().enumerate() {
                subtract(block.col_mut(unknown), back.col(column));
            }
        }
    }
}

fn subtract(target: faer::ColMut<'_, f64>, amount: faer::ColRef<'_, f64>) {
    for (t, a) in target.iter_mut().zip(amount.iter()) {
        *t -= a;
    }
}

/// The columns of the given unknowns.
pub(super) fn gather(block: &Matrix, unknowns: &[usize]) -> Matrix {
    let mut picked = Matrix::zeros(block.nrows(), unknowns.len());
    for (column, &unknown) in unknowns.iter().enumerate() {
        picked.col_mut(column).copy_from(block.col(unknown));
    }
    picked
}

fn scatter(block: &mut Matrix, unknowns: &[usize], values: &Matrix) {
    for (column, &unknown) in unknowns.iter().enumerate() {
        block.col_mut(unknown).copy_from(values.col(column));
    }
}

/// One run up the tree.
struct Elimination<'a> {
    space: &'a Space,
    tree: &'a Dissection,
    shift: f64,
    /// Are solutions wanted, or the inertia alone?
    keep: bool,
    /// Position of every unknown in the front that is being set up.
    position: Vec<usize>,
}

impl<'a> Elimination<'a> {
    fn new(space: &'a Space, tree: &'a Dissection, shift: f64, keep: bool) -> Self {
        Self {
            space,
            tree,
            shift,
            keep,
            position: vec![usize::MAX; space.size],
        }
    }

    fn run(mut self) -> (Vec<Kept>, usize) {
        let mut rest: Vec<Option<Matrix>> = Vec::with_capacity(self.tree.nodes.len());
        let mut all = Vec::with_capacity(self.tree.nodes.len());
        let mut negative = 0;
        for node in &self.tree.nodes {
            let front = self.front(node, &mut rest);
            let count = node.eliminated.len();
            let own = Symmetric::new(front.submatrix(0, 0, count, count));
            negative += own.negative();
            let rim = front.nrows() - count;
            let across = front.submatrix(0, count, count, rim);
            let coupling = if self.keep {
                let inverse = own.inverse();
                let coupling = dense::product(inverse.as_ref(), across);
                all.push(Kept {
                    inverse,
                    coupling: coupling.clone(),
                });
                coupling
            } else {
                own.solve(across)
            };
            let mut schur = front.submatrix(count, count, rim, rim).to_owned();
            dense::multiply(
                schur.as_mut(),
                Into::Sum,
                across.transpose(),
                coupling.as_ref(),
                -1.0,
            );
            rest.push(Some(schur));
        }
        (all, negative)
    }

    /// The matrix of a node, eliminated unknowns first.
    fn front(&mut self, node: &Node, rest: &mut [Option<Matrix>]) -> Matrix {
        let order = node.eliminated.iter().chain(&node.rim);
        for (position, &unknown) in order.enumerate() {
            self.position[unknown] = position;
        }
        let size = node.eliminated.len() + node.rim.len();
        let mut front = Matrix::zeros(size, size);
        match node.below {
            Below::Leaf(leaf) => self.add_leaf(leaf, &mut front),
            Below::Pair(first, second) => {
                for child in [first, second] {
                    if let Some(schur) = rest[child].take() {
                        self.add_child(&self.tree.nodes[child].rim, &schur, &mut front);
                    }
                }
            }
        }
        front
    }

    fn add_leaf(&self, leaf: usize, front: &mut Matrix) {
        let leaf = &self.space.leaves[leaf];
        let element = &self.space.elements[leaf.element];
        let local =
            element
                .matrices
                .combine(&self.space.reference, &element.selection, 1.0, -self.shift);
        let places: Vec<(usize, usize, f64)> = leaf
            .entries
            .iter()
            .map(|entry| {
                let position = self.position[leaf.unknowns[entry.slot]];
                (entry.local, position, entry.coefficient)
            })
            .collect();
        for &(j, column, b) in &places {
            for &(i, row, a) in &places {
                front[(row, column)] += a * b * local[(i, j)];
            }
        }
    }

    fn add_child(&self, rim: &[usize], schur: &Matrix, front: &mut Matrix) {
        let places: Vec<usize> = rim.iter().map(|&unknown| self.position[unknown]).collect();
        for (j, &column) in places.iter().enumerate() {
            for (i, &row) in places.iter().enumerate() {
                front[(row, column)] += schur[(i, j)];
            }
        }
    }
}
