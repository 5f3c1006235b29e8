//! Factorisation of stiffness - shift x mass along the dissection tree, its inertia, and solutions.

use super::dissection::{Below, Dissection, Node};
use super::space::Space;
use crate::dense::{self, Into, Matrix, Symmetric};
use faer::MatRef;

/// What is kept for solutions: with A the matrix on eliminated unknowns e and rim r, the inverse of A_ee and A_ee^-1 A_er.
#[derive(Debug)]
struct Kept {
    inverse: Matrix,
    coupling: Matrix,
}

/// A factorised matrix.
#[derive(Debug)]
pub(super) struct Factor<'a> {
    space: &'a Space,
    tree: &'a Dissection,
    /// The interiors of the kinds of elements.
    interiors: Vec<Kept>,
    /// The nodes of the tree above its leaves.
    nodes: Vec<Option<Kept>>,
    /// Number of negative eigenvalues: the number of levels below the shift.
    pub(super) negative: usize,
    /// Largest entry that an elimination left; those of the stiffness matrix are about one. Where the shift is close to a level of a
    /// part of the domain by itself entries grow, and solutions lose as many digits.
    pub(super) largest: f64,
}

/// Number of eigenvalues of the pencil (stiffness, mass) below a shift, by Sylvester's law of inertia.
pub(super) fn count_below(space: &Space, tree: &Dissection, shift: f64) -> usize {
    Elimination::new(space, tree, shift, Purpose::Inertia)
        .run()
        .negative
}

impl<'a> Factor<'a> {
    pub(super) fn new(space: &'a Space, tree: &'a Dissection, shift: f64) -> Self {
        Elimination::new(space, tree, shift, Purpose::Solutions).run()
    }

    /// Replaces the right sides by the solutions: one column per unknown, one row per right side.
    pub(super) fn solve(&self, block: &mut Matrix) {
        for leaf in &self.space.leaves {
            let kept = &self.interiors[self.space.elements[leaf.element].kind];
            let inside = block.subcols(leaf.interior.start, leaf.interior.len());
            let onward = dense::product(inside, kept.coupling.as_ref());
            let solved = dense::product(inside, kept.inverse.as_ref());
            block
                .subcols_mut(leaf.interior.start, leaf.interior.len())
                .copy_from(&solved);
            leaf.accumulate_rim(&onward, -1.0, block);
        }
        for (node, kept) in self.tree.nodes.iter().zip(&self.nodes) {
            let Some(kept) = kept else { continue };
            let own = gather(block, &node.eliminated);
            if !node.rim.is_empty() {
                let onward = dense::product(own.as_ref(), kept.coupling.as_ref());
                subtract(block, &node.rim, &onward);
            }
            let solved = dense::product(own.as_ref(), kept.inverse.as_ref());
            for (column, &unknown) in node.eliminated.iter().enumerate() {
                block.col_mut(unknown).copy_from(solved.col(column));
            }
        }
        for (node, kept) in self.tree.nodes.iter().zip(&self.nodes).rev() {
            let Some(kept) = kept else { continue };
            if !node.rim.is_empty() {
                let rim = gather(block, &node.rim);
                let back = dense::product(rim.as_ref(), kept.coupling.transpose());
                subtract(block, &node.eliminated, &back);
            }
        }
        for leaf in &self.space.leaves {
            let kept = &self.interiors[self.space.elements[leaf.element].kind];
            let mut rim = Matrix::zeros(block.nrows(), kept.coupling.ncols());
            leaf.restrict_rim(block, &mut rim);
            let inside = block.subcols_mut(leaf.interior.start, leaf.interior.len());
            dense::multiply(
                inside,
                Into::Sum,
                rim.as_ref(),
                kept.coupling.transpose(),
                -1.0,
            );
        }
    }
}

/// Takes the columns of `amount` away from those of the given unknowns.
fn subtract(block: &mut Matrix, unknowns: &[usize], amount: &Matrix) {
    for (column, &unknown) in unknowns.iter().enumerate() {
        let source = amount.col_as_slice(column);
        for (t, a) in block.col_as_slice_mut(unknown).iter_mut().zip(source) {
            *t -= a;
        }
    }
}

/// The columns of the given unknowns.
pub(super) fn gather(block: &Matrix, unknowns: &[usize]) -> Matrix {
    let mut picked = Matrix::zeros(block.nrows(), unknowns.len());
    for (column, &unknown) in unknowns.iter().enumerate() {
        picked
            .col_as_slice_mut(column)
            .copy_from_slice(block.col_as_slice(unknown));
    }
    picked
}

/// What a factorisation is for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Purpose {
    Solutions,
    Inertia,
}

/// A matrix of which some unknowns have been eliminated.
struct Eliminated {
    /// What solutions need, if they are wanted.
    kept: Option<Kept>,
    /// Number of negative eigenvalues of the eliminated part.
    negative: usize,
    /// The matrix on the rim.
    schur: Matrix,
    /// Its largest entry.
    largest: f64,
}

/// Eliminates the part `own`, coupled by `across` to a rim with the matrix `rim`.
fn eliminate(
    own: MatRef<'_, f64>,
    across: MatRef<'_, f64>,
    rim: MatRef<'_, f64>,
    purpose: Purpose,
) -> Eliminated {
    let factor = Symmetric::new(own);
    let (scaled, lower) = factor.halves(across);
    let mut schur = rim.to_owned();
    dense::multiply(
        schur.as_mut(),
        Into::Sum,
        lower.transpose(),
        scaled.as_ref(),
        -1.0,
    );
    let kept = (purpose == Purpose::Solutions).then(|| Kept {
        inverse: factor.inverse(),
        coupling: factor.finish(&scaled),
    });
    Eliminated {
        kept,
        negative: factor.negative(),
        largest: schur.norm_max(),
        schur,
    }
}

/// One run up the tree.
struct Elimination<'a> {
    space: &'a Space,
    tree: &'a Dissection,
    shift: f64,
    purpose: Purpose,
    /// Position of every unknown in the front that is being set up.
    position: Vec<usize>,
}

impl<'a> Elimination<'a> {
    fn new(space: &'a Space, tree: &'a Dissection, shift: f64, purpose: Purpose) -> Self {
        Self {
            space,
            tree,
            shift,
            purpose,
            position: vec![usize::MAX; space.size],
        }
    }

    fn run(mut self) -> Factor<'a> {
        let kinds: Vec<Eliminated> = self
            .space
            .kinds
            .iter()
            .map(|&element| self.interior(element))
            .collect();
        let mut negative = 0;
        let mut largest = kinds.iter().map(|kind| kind.largest).fold(0.0, f64::max);
        let mut rest: Vec<Option<Matrix>> = Vec::with_capacity(self.tree.nodes.len());
        let mut nodes = Vec::with_capacity(self.tree.nodes.len());
        for node in &self.tree.nodes {
            if let Below::Leaf(leaf) = node.below {
                let kind = &kinds[self.space.elements[self.space.leaves[leaf].element].kind];
                negative += kind.negative;
                rest.push(Some(self.leaf(leaf, node, &kind.schur)));
                nodes.push(None);
                continue;
            }
            let front = self.front(node, &mut rest);
            let own = node.eliminated.len();
            let rim = node.rim.len();
            let done = eliminate(
                front.submatrix(0, 0, own, own),
                front.submatrix(0, own, own, rim),
                front.submatrix(own, own, rim, rim),
                self.purpose,
            );
            negative += done.negative;
            largest = done.largest.max(largest);
            rest.push(Some(done.schur));
            nodes.push(done.kept);
        }
        Factor {
            space: self.space,
            tree: self.tree,
            interiors: kinds.into_iter().filter_map(|kind| kind.kept).collect(),
            nodes,
            negative,
            largest,
        }
    }

    /// Eliminates the interior functions of an element.
    fn interior(&self, element: usize) -> Eliminated {
        let element = &self.space.elements[element];
        let matrix =
            element
                .matrices
                .combine(&self.space.reference, &element.selection, 1.0, -self.shift);
        let (rim, inside) = (element.rim, element.selection.len() - element.rim);
        eliminate(
            matrix.submatrix(rim, rim, inside, inside),
            matrix.submatrix(rim, 0, inside, rim),
            matrix.submatrix(0, 0, rim, rim),
            self.purpose,
        )
    }

    /// The matrix of a leaf on the unknowns of its rim.
    fn leaf(&mut self, leaf: usize, node: &Node, schur: &Matrix) -> Matrix {
        let leaf = &self.space.leaves[leaf];
        self.place(node.rim.iter());
        let places: Vec<(usize, usize, f64)> = leaf
            .entries
            .iter()
            .map(|entry| {
                let position = self.position[leaf.rim[entry.slot]];
                (entry.local, position, entry.coefficient)
            })
            .collect();
        let mut matrix = Matrix::zeros(node.rim.len(), node.rim.len());
        for &(j, column, b) in &places {
            let source = schur.col_as_slice(j);
            let target = matrix.col_as_slice_mut(column);
            for &(i, row, a) in &places {
                target[row] += a * b * source[i];
            }
        }
        matrix
    }

    /// The matrix of a node above the leaves, eliminated unknowns first.
    fn front(&mut self, node: &Node, rest: &mut [Option<Matrix>]) -> Matrix {
        self.place(node.eliminated.iter().chain(&node.rim));
        let size = node.eliminated.len() + node.rim.len();
        let mut front = Matrix::zeros(size, size);
        let children = match node.below {
            Below::Leaf(_) => Vec::new(),
            Below::Pair(first, second) => vec![first, second],
            Below::Only(child) => vec![child],
        };
        for child in children {
            if let Some(schur) = rest[child].take() {
                self.add_child(&self.tree.nodes[child].rim, &schur, &mut front);
            }
        }
        front
    }

    fn place<'b>(&mut self, order: impl Iterator<Item = &'b usize>) {
        for (position, &unknown) in order.enumerate() {
            self.position[unknown] = position;
        }
    }

    fn add_child(&self, rim: &[usize], schur: &Matrix, front: &mut Matrix) {
        let places: Vec<usize> = rim.iter().map(|&unknown| self.position[unknown]).collect();
        for (j, &column) in places.iter().enumerate() {
            let source = schur.col_as_slice(j);
            let target = front.col_as_slice_mut(column);
            for (&row, value) in places.iter().zip(source) {
                target[row] += value;
            }
        }
    }
}
