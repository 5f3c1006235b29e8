//! Levels next to a shift: block Lanczos iteration with the inverse of stiffness - shift x mass.
//!
//! Ericsson & Ruhe, Math. Comp. 35 (1980) 1251; the block form finds levels of any multiplicity up to its width, and blocks
//! are kept orthogonal to all earlier ones.

use super::factor::Factor;
use super::space::Space;
use crate::dense::{self, Into, Matrix};

/// Vectors per block: wider than any degeneracy that symmetry forces, and a full vector register.
const WIDTH: usize = 8;
/// Blocks between two looks at what has converged.
const LOOK_EVERY: usize = 3;
/// Ratio of the smallest to the largest eigenvalue of the products of a block's vectors below which they are taken to depend on each
/// other: two passes of orthonormalisation restore what is lost above.
const DEPENDENT: f64 = 1e-26;
/// Largest residual of a converged pair relative to its reciprocal: its vector is then good enough for the estimate of its error.
const LARGEST_RESIDUAL: f64 = 1e-5;
/// Vectors per wanted level after which the iteration gives up.
const MOST_PER_LEVEL: usize = 6;
/// ... and for few levels at least this many.
const LEAST_LIMIT: usize = 160;

/// Eigenvalues and eigenvectors of the pencil (stiffness, mass).
#[derive(Debug)]
pub(super) struct Pairs {
    /// Ascending.
    pub(super) values: Vec<f64>,
    /// What the unfinished iteration may have left of error in each value.
    pub(super) remainders: Vec<f64>,
    /// One row per eigenvalue, one column per unknown; of norm one in the mass matrix.
    pub(super) vectors: Matrix,
    /// Have all pairs in the wanted range converged?
    pub(super) converged: bool,
}

impl Pairs {
    /// What is found where the iteration cannot even begin.
    fn none(space: &Space) -> Self {
        Self {
            values: Vec::new(),
            remainders: Vec::new(),
            vectors: Matrix::zeros(0, space.size),
            converged: false,
        }
    }
}

/// What is looked for.
#[derive(Clone, Copy, Debug)]
pub(super) struct Wanted {
    /// From this value ...
    pub(super) from: f64,
    /// ... up to, but without, this one.
    pub(super) to: f64,
    /// About so many pairs.
    pub(super) expected: usize,
    /// Error that the iteration may leave, relative to the value.
    pub(super) accuracy: f64,
}

/// All wanted pairs, from the factorised matrix at `shift` in the middle of the range.
pub(super) fn pairs_near(space: &Space, factor: &Factor<'_>, shift: f64, wanted: &Wanted) -> Pairs {
    let &Wanted {
        from,
        to,
        expected,
        accuracy,
    } = wanted;
    let limit = (MOST_PER_LEVEL * expected).max(LEAST_LIMIT).min(space.size);
    let mut basis = Basis::new(space, limit.div_ceil(WIDTH) + 1);
    let reach = (to - shift).max(shift - from);
    if !basis.start(factor) {
        return Pairs::none(space);
    }
    let mut looked = None;
    let mut blocks = 0;
    while blocks * WIDTH < limit {
        let full = basis.extend(factor);
        blocks += 1;
        let due = blocks * WIDTH >= expected + WIDTH && blocks % LOOK_EVERY == 0;
        if due || full || (blocks + 1) * WIDTH > limit {
            let found = basis.ritz(shift);
            let done = full || found.covers(shift, reach, accuracy);
            looked = Some(found);
            if done {
                break;
            }
        }
    }
    let found = looked.unwrap_or_else(|| basis.ritz(shift));
    let mut pairs = basis.select(&found, shift, wanted);
    pairs.converged = found.covers(shift, reach, accuracy);
    pairs
}

/// Ritz values by descending distance in 1/(value - shift).
struct Ritz {
    values: Vec<f64>,
    residuals: Vec<f64>,
    vectors: Matrix,
    /// What the operator adds in the block that follows the basis.
    tails: Matrix,
}

impl Ritz {
    /// Bound for the error of a value from its residual r and its distance from the nearest other one: r^2/gap, and never more
    /// than r (Parlett, The Symmetric Eigenvalue Problem (1980), theorem 11.7.1), for the reciprocals that are iterated.
    fn remainder(&self, index: usize, shift: f64) -> f64 {
        let reciprocal = |i: usize| 1.0 / (self.values[i] - shift);
        let own = reciprocal(index);
        let residual = self.residuals[index] * own.abs();
        let gap = (0..self.values.len())
            .map(|other| (reciprocal(other) - own).abs())
            .filter(|&distance| distance > residual)
            .fold(f64::INFINITY, f64::min);
        let error = residual.min(residual * residual / gap);
        error / (own * own)
    }

    /// Has the pair converged to a relative accuracy?
    fn has_converged(&self, index: usize, shift: f64, accuracy: f64) -> bool {
        let value = self.values[index];
        // Rounding of the reciprocals sets in here.
        let floor = 4.0 * f64::EPSILON * (value - shift).abs();
        self.residuals[index] <= LARGEST_RESIDUAL
            && self.remainder(index, shift) <= (accuracy * value.abs()).max(floor)
    }

    /// Have all pairs within `reach` of the shift, and one beyond, converged?
    fn covers(&self, shift: f64, reach: f64, accuracy: f64) -> bool {
        for index in 0..self.values.len() {
            if !self.has_converged(index, shift, accuracy) {
                return false;
            }
            if (self.values[index] - shift).abs() > reach {
                return true;
            }
        }
        false
    }
}

/// The vectors so far, block by block. Rows are vectors, columns unknowns.
struct Basis<'a> {
    space: &'a Space,
    vectors: Vec<Matrix>,
    /// mass x vectors.
    weighted: Vec<Matrix>,
    /// The operator in the basis.
    projected: Matrix,
    /// The last block's coupling to the block that follows.
    beyond: Matrix,
    /// Complete vectors.
    count: usize,
}

impl<'a> Basis<'a> {
    fn new(space: &'a Space, blocks: usize) -> Self {
        let rows = blocks * WIDTH;
        Self {
            space,
            vectors: Vec::with_capacity(blocks),
            weighted: Vec::with_capacity(blocks),
            projected: Matrix::zeros(rows, rows),
            beyond: Matrix::zeros(WIDTH, WIDTH),
            count: 0,
        }
    }

    /// The first block. False if it has no eight independent finite vectors.
    fn start(&mut self, factor: &Factor<'_>) -> bool {
        let mut block = Matrix::zeros(WIDTH, self.space.size);
        let mut state = 0x9e37_79b9_7f4a_7c15_u64;
        for column in 0..self.space.size {
            for row in 0..WIDTH {
                // A fixed sequence without structure (xorshift, Marsaglia 2003): the same start every time.
                state ^= state << 13;
                state ^= state >> 7;
                state ^= state << 17;
                block[(row, column)] = (state >> 11) as f64 / (1_u64 << 53) as f64 - 0.5;
            }
        }
        let mut block = mass_times(self.space, &block);
        factor.solve(&mut block);
        self.append(&block).is_some()
    }

    /// Orthonormalises a block in the mass matrix and writes it behind the last one. Returns its factor: block = factor x rows.
    fn append(&mut self, block: &Matrix) -> Option<Matrix> {
        let mut rows = block.clone();
        let mut weighted = mass_times(self.space, &rows);
        let mut total = Matrix::identity(WIDTH, WIDTH);
        // Twice, since the first pass loses digits where the vectors of the block are nearly parallel.
        for _ in 0..2 {
            let gram = dense::product(rows.as_ref(), weighted.transpose());
            let (values, vectors) = dense::eigen(&gram);
            let largest = values.last().copied().unwrap_or(0.0);
            // Also false for numbers that are not finite.
            let independent = values[0] > DEPENDENT * largest && largest.is_finite();
            if !independent {
                return None;
            }
            // rows -> diag(1/root) V^T rows; factor: V diag(root).
            let forward = Matrix::from_fn(WIDTH, WIDTH, |i, j| vectors[(j, i)] / values[i].sqrt());
            let back = Matrix::from_fn(WIDTH, WIDTH, |i, j| vectors[(i, j)] * values[j].sqrt());
            rows = dense::product(forward.as_ref(), rows.as_ref());
            weighted = dense::product(forward.as_ref(), weighted.as_ref());
            total = dense::product(total.as_ref(), back.as_ref());
        }
        self.vectors.push(rows);
        self.weighted.push(weighted);
        Some(total)
    }

    /// One more block. True if the basis already spans everything that the start block can reach.
    fn extend(&mut self, factor: &Factor<'_>) -> bool {
        let first = self.count;
        let mut block = self.weighted[first / WIDTH].clone();
        factor.solve(&mut block);
        let known = first + WIDTH;
        // First against the two blocks that the iteration couples to, then once against all, so that rounding does not grow.
        let recent = first.saturating_sub(WIDTH);
        let overlap = self.remove(&mut block, recent, known);
        let again = self.remove(&mut block, 0, known);
        let own = |row: usize, column: usize| {
            overlap[(row, first - recent + column)] + again[(row, first + column)]
        };
        for row in 0..WIDTH {
            for column in 0..WIDTH {
                let sum = own(row, column) + own(column, row);
                self.projected[(first + row, first + column)] = 0.5 * sum;
            }
        }
        self.count = known;
        let Some(beyond) = self.append(&block) else {
            self.beyond = Matrix::zeros(WIDTH, WIDTH);
            return true;
        };
        if known + WIDTH <= self.projected.nrows() {
            for row in 0..WIDTH {
                for column in 0..WIDTH {
                    let entry = beyond[(row, column)];
                    self.projected[(known + column, first + row)] = entry;
                    self.projected[(first + row, known + column)] = entry;
                }
            }
        }
        self.beyond = beyond;
        false
    }

    /// Takes the parts along the vectors `from..to` out of a block; returns their sizes.
    fn remove(&self, block: &mut Matrix, from: usize, to: usize) -> Matrix {
        let mut overlaps = Matrix::zeros(WIDTH, to - from);
        for index in from / WIDTH..to / WIDTH {
            let overlap = dense::product(block.as_ref(), self.weighted[index].transpose());
            dense::multiply(
                block.as_mut(),
                Into::Sum,
                overlap.as_ref(),
                self.vectors[index].as_ref(),
                -1.0,
            );
            overlaps
                .submatrix_mut(0, index * WIDTH - from, WIDTH, WIDTH)
                .copy_from(&overlap);
        }
        overlaps
    }

    fn ritz(&self, shift: f64) -> Ritz {
        let count = self.count;
        let projected = self.projected.submatrix(0, 0, count, count).to_owned();
        let (values, vectors) = dense::eigen(&projected);
        let last = vectors.submatrix(count - WIDTH, 0, WIDTH, count);
        let tails = dense::product(self.beyond.transpose(), last);
        let mut order: Vec<usize> = (0..count).collect();
        order.sort_by(|&a, &b| values[b].abs().total_cmp(&values[a].abs()).then(a.cmp(&b)));
        let residual = |index: usize| {
            let tail: f64 = (0..WIDTH).map(|row| tails[(row, index)].powi(2)).sum();
            tail.sqrt() / values[index].abs()
        };
        Ritz {
            values: order.iter().map(|&i| shift + 1.0 / values[i]).collect(),
            residuals: order.iter().map(|&i| residual(i)).collect(),
            vectors: Matrix::from_fn(count, count, |i, j| vectors[(i, order[j])]),
            tails: Matrix::from_fn(WIDTH, count, |i, j| tails[(i, order[j])]),
        }
    }

    /// The pairs in the range, ascending.
    fn select(&self, found: &Ritz, shift: f64, wanted: &Wanted) -> Pairs {
        let mut chosen: Vec<usize> = (0..found.values.len())
            .filter(|&i| (wanted.from..wanted.to).contains(&found.values[i]))
            .filter(|&i| found.has_converged(i, shift, wanted.accuracy))
            .collect();
        chosen.sort_by(|&a, &b| found.values[a].total_cmp(&found.values[b]));
        let count = self.count;
        let mut vectors = Matrix::zeros(chosen.len(), self.space.size);
        // One step of inverse iteration comes free: the part that the basis leaves over lies in the block that follows. It takes
        // out what a vector holds of waves far above the window, which a Rayleigh quotient would weigh heavily (Ericsson & Ruhe).
        let following = count / WIDTH;
        for (index, block) in self.vectors.iter().enumerate().take(following + 1) {
            let weights = Matrix::from_fn(chosen.len(), WIDTH, |i, j| {
                if index == following {
                    found.tails[(j, chosen[i])] * (found.values[chosen[i]] - shift)
                } else {
                    found.vectors[(index * WIDTH + j, chosen[i])]
                }
            });
            dense::multiply(
                vectors.as_mut(),
                Into::Sum,
                weights.as_ref(),
                block.as_ref(),
                1.0,
            );
        }
        let remainders = chosen.iter().map(|&i| found.remainder(i, shift)).collect();
        Pairs {
            remainders,
            values: chosen.iter().map(|&i| found.values[i]).collect(),
            vectors,
            converged: false,
        }
    }
}

/// block x mass: one row per vector, one column per unknown.
pub(super) fn mass_times(space: &Space, block: &Matrix) -> Matrix {
    let mut result = Matrix::zeros(block.nrows(), block.ncols());
    for leaf in &space.leaves {
        let element = &space.elements[leaf.element];
        let local = leaf.restrict(block, element.selection.len());
        let product = element.matrices.times_mass(&space.reference, &local);
        leaf.accumulate(&product, &mut result);
    }
    result
}
