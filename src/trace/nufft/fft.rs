//! A Fourier transform of the fine grid that keeps to the cache and runs in parallel.
//!
//! A long transform of N = N1 N2 cells is done in four steps (Bailey, J. Supercomputing 4, 1990): with g = N2 g1 + g2 and
//! m = m1 + N1 m2,
//!
//! ```text
//! sum_g b(g) exp(2 pi i m g/N)
//!     = sum_g2 exp(2 pi i m2 g2/N2) [exp(2 pi i m1 g2/N) sum_g1 b(N2 g1 + g2) exp(2 pi i m1 g1/N1)]
//! ```
//!
//! N1 transforms of length N2 and N2 of length N1, each in a core's own cache, [`LANES`] of them at a time so that memory is read
//! and written in whole cache lines. A long transform by rustfft spends as much time on making its tables.

use std::f64::consts::PI;
use std::sync::Arc;

use num_complex::Complex64;
use rayon::prelude::*;
use rustfft::{Fft, FftPlanner};

/// Neighbouring columns or rows that are done together: two cache lines of values.
const LANES: usize = 8;

/// Grids up to this size fit into a core's cache and are transformed at once.
const SPLIT_FROM: usize = 1 << 14;

/// Steps after which the powers of a root of unity are computed afresh: rounding stays near 1e-15.
const RESTART: usize = 16;

/// A transform of fixed length with exponent +i, not normalised.
pub(super) enum GridTransform {
    /// A short one.
    Whole(Arc<dyn Fft<f64>>),
    /// One in four steps.
    Split {
        /// Of length N1.
        along_columns: Arc<dyn Fft<f64>>,
        /// Of length N2.
        along_rows: Arc<dyn Fft<f64>>,
    },
}

/// What [`GridTransform::run`] returns.
pub(in crate::trace) struct Spectrum {
    /// For every group of [`LANES`] values of m1: for every m2 the values of the group.
    values: Vec<Complex64>,
    /// N1 and N2; of a short transform the values stand in order and N1 is 0.
    rows: usize,
    columns: usize,
}

impl GridTransform {
    /// A transform of at least `wanted` cells, an even number.
    pub(super) fn new(wanted: usize) -> Self {
        let mut planner = FftPlanner::new();
        if wanted < SPLIT_FROM {
            return Self::Whole(planner.plan_fft_inverse(2 * smooth_number(wanted.div_ceil(2))));
        }
        // Both factors are multiples of LANES with small prime factors; among the pairs near a square, the smallest product.
        let root = (wanted as f64).sqrt() / LANES as f64;
        let pair = |smaller: usize| {
            let rows = LANES * smooth_number(smaller);
            (rows, LANES * smooth_number(wanted.div_ceil(LANES * rows)))
        };
        let candidates = (root as usize / 2).max(1)..=root as usize + 1;
        let (rows, columns) = candidates
            .map(pair)
            .min_by_key(|(rows, columns)| rows * columns)
            .unwrap_or((LANES, wanted));
        Self::Split {
            along_columns: planner.plan_fft_inverse(rows),
            along_rows: planner.plan_fft_inverse(columns),
        }
    }

    /// Number of cells.
    pub(super) fn len(&self) -> usize {
        match self {
            Self::Whole(fft) => fft.len(),
            Self::Split {
                along_columns,
                along_rows,
            } => along_columns.len() * along_rows.len(),
        }
    }

    /// Transforms a grid.
    pub(super) fn run(&self, mut grid: Vec<Complex64>) -> Spectrum {
        match self {
            Self::Whole(fft) => {
                fft.process(&mut grid);
                Spectrum {
                    values: grid,
                    rows: 0,
                    columns: 0,
                }
            }
            Self::Split {
                along_columns,
                along_rows,
            } => {
                let (rows, columns) = (along_columns.len(), along_rows.len());
                let twisted = transform_columns(along_columns.as_ref(), &grid, columns);
                transform_rows(along_rows.as_ref(), &twisted, rows, &mut grid);
                Spectrum {
                    values: grid,
                    rows,
                    columns,
                }
            }
        }
    }
}

/// Transforms the columns of the grid and twists them. The result holds for every group of columns: for every m1 the values of
/// the group.
fn transform_columns(fft: &dyn Fft<f64>, grid: &[Complex64], columns: usize) -> Vec<Complex64> {
    let rows = fft.len();
    let mut result = vec![Complex64::ZERO; grid.len()];
    let buffers = || Buffers::new(fft);
    result
        .par_chunks_mut(LANES * rows)
        .enumerate()
        .for_each_init(buffers, |buffers, (group, result)| {
            let first = group * LANES;
            for (row, line) in grid.chunks_exact(columns).enumerate() {
                for (lane, value) in line[first..first + LANES].iter().enumerate() {
                    buffers.lines[lane * rows + row] = *value;
                }
            }
            fft.process_with_scratch(&mut buffers.lines, &mut buffers.scratch);
            let turn = 2.0 * PI / grid.len() as f64;
            let steps: [Complex64; LANES] =
                std::array::from_fn(|lane| Complex64::cis(turn * (first + lane) as f64));
            let mut twist = [Complex64::ONE; LANES];
            for (row, result) in result.chunks_exact_mut(LANES).enumerate() {
                if row % RESTART == 0 {
                    twist = std::array::from_fn(|lane| {
                        Complex64::cis(turn * ((first + lane) * row) as f64)
                    });
                }
                for lane in 0..LANES {
                    result[lane] = buffers.lines[lane * rows + row] * twist[lane];
                    twist[lane] *= steps[lane];
                }
            }
        });
    result
}

/// Transforms along g2 for all m1.
fn transform_rows(
    fft: &dyn Fft<f64>,
    twisted: &[Complex64],
    rows: usize,
    result: &mut [Complex64],
) {
    let columns = fft.len();
    let buffers = || Buffers::new(fft);
    result
        .par_chunks_mut(LANES * columns)
        .enumerate()
        .for_each_init(buffers, |buffers, (group, result)| {
            let begin = group * LANES * LANES;
            for (index, tile) in twisted.chunks_exact(LANES * rows).enumerate() {
                let tile = &tile[begin..begin + LANES * LANES];
                for (lane, values) in tile.chunks_exact(LANES).enumerate() {
                    let target = lane * columns + index * LANES;
                    buffers.lines[target..target + LANES].copy_from_slice(values);
                }
            }
            fft.process_with_scratch(&mut buffers.lines, &mut buffers.scratch);
            for (index, result) in result.chunks_exact_mut(LANES).enumerate() {
                for (lane, result) in result.iter_mut().enumerate() {
                    *result = buffers.lines[lane * columns + index];
                }
            }
        });
}

/// Working space of one thread.
struct Buffers {
    lines: Vec<Complex64>,
    scratch: Vec<Complex64>,
}

impl Buffers {
    fn new(fft: &dyn Fft<f64>) -> Self {
        Self {
            lines: vec![Complex64::ZERO; LANES * fft.len()],
            scratch: vec![Complex64::ZERO; fft.get_inplace_scratch_len()],
        }
    }
}

impl Spectrum {
    /// Number of frequencies.
    pub(super) fn len(&self) -> usize {
        self.values.len()
    }

    /// Copies the values at the frequencies `first`, `first` + 1, ... (counted from 0 to the length of the transform).
    pub(super) fn read(&self, first: usize, target: &mut [Complex64]) {
        if self.rows == 0 {
            target.copy_from_slice(&self.values[first..first + target.len()]);
            return;
        }
        let mut done = 0;
        while done < target.len() {
            let (m1, m2) = ((first + done) % self.rows, (first + done) / self.rows);
            let lane = m1 % LANES;
            let count = (LANES - lane).min(target.len() - done);
            let begin = (m1 / LANES * self.columns + m2) * LANES + lane;
            target[done..done + count].copy_from_slice(&self.values[begin..begin + count]);
            done += count;
        }
    }
}

/// The smallest 2^a 3^b 5^c not below `wanted`.
fn smooth_number(wanted: usize) -> usize {
    let mut best = wanted.next_power_of_two();
    let mut fives = 1;
    while fives < best {
        let mut threes = fives;
        while threes < best {
            best = best.min(threes * wanted.div_ceil(threes).next_power_of_two());
            threes *= 3;
        }
        fives *= 5;
    }
    best
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn four_steps_equal_one() {
        for wanted in [100, SPLIT_FROM, 30_000, 100_001] {
            let transform = GridTransform::new(wanted);
            let count = transform.len();
            assert!(count >= wanted);
            let grid: Vec<Complex64> = (0..count)
                .map(|index| Complex64::cis((index as f64 * 0.618).fract() * 7.0))
                .collect();
            let mut expected = grid.clone();
            FftPlanner::new()
                .plan_fft_inverse(count)
                .process(&mut expected);
            let spectrum = transform.run(grid);
            let mut read = vec![Complex64::ZERO; count - 3];
            spectrum.read(3, &mut read);
            for (value, expected) in read.iter().zip(&expected[3..]) {
                assert!(
                    (value - expected).norm() < 1e-12 * (count as f64).sqrt(),
                    "{value} {expected}"
                );
            }
        }
    }

    #[test]
    fn smooth_numbers() {
        // The 5-smooth numbers up to 30 (OEIS A051037).
        let smooth = [
            1, 2, 3, 4, 5, 6, 8, 9, 10, 12, 15, 16, 18, 20, 24, 25, 27, 30,
        ];
        for wanted in 1..=30 {
            let next = smooth.into_iter().find(|&number| number >= wanted);
            assert_eq!(Some(smooth_number(wanted)), next);
        }
    }
}
