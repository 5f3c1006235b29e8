//! A nonuniform fast Fourier transform of type 1.
//!
//! Computes F(m) = sum_j (c_j exp(i m x_j) + c'_j exp(-i m x_j)) for integers m of a range around zero, from sources at
//! arbitrary x_j and their mirror images: every source is spread over a fine periodic grid with a short kernel, the grid is
//! Fourier transformed, and the result is divided by the kernel's own transform. The kernel is the exponential of a semicircle
//! (Barnett, Magland & af Klinteberg, SIAM J. Sci. Comput. 41, 2019).

mod kernel;
mod spread;

use std::sync::Arc;

use num_complex::Complex64;
use rustfft::{Fft, FftPlanner};

use kernel::Kernel;
use spread::Places;
pub(super) use spread::Strength;

/// Smallest accuracy that the transform reaches: below it, rounding in the division by the kernel's transform dominates.
pub(super) const BEST_ACCURACY: f64 = 1e-13;

/// Cells per mode, the smaller and the larger choice: few cells make a short transform and wide kernels.
const UPSAMPLINGS: [f64; 2] = [1.25, 2.0];

/// Accuracy below which the smaller number of cells is not used: there the kernel's transform falls to 1e-4 within the range of
/// modes and the division amplifies rounding.
const COARSE_LIMIT: f64 = 1e-11;

/// Measured cost in nanoseconds: of the transform per cell, of a source per cell of its kernel's width.
const CELL_COST: f64 = 40.0;
const SOURCE_COST: f64 = 4.0;

/// A transform of fixed size, accuracy and places of the sources, for any number of sets of strengths.
pub(super) struct Transform {
    modes: usize,
    kernel: Kernel,
    places: Places,
    fft: Arc<dyn Fft<f64>>,
    /// 1/(transform of the kernel) for the modes 0, 1, .., modes/2.
    correction: Vec<f64>,
}

impl Transform {
    /// A transform to the modes -modes/2, .., modes - modes/2 - 1 of sources at x_j = 2 pi `turns`, -1/2 <= turns <= 1/2, with
    /// errors below `accuracy` times the sum of |c_j| + |c'_j|.
    pub(super) fn new(turns: &[f64], modes: usize, accuracy: f64) -> Self {
        let (_, upsampling) = cheapest(modes, turns.len(), accuracy);
        let kernel = Kernel::new(upsampling, accuracy);
        let cells = fine_cells(modes, kernel.upsampling, kernel.padded);
        let fft = FftPlanner::new().plan_fft_inverse(cells);
        let places = Places::new(turns, cells, &kernel);
        let correction = kernel.correction(modes / 2 + 1, cells);
        Self {
            modes,
            kernel,
            places,
            fft,
            correction,
        }
    }

    /// Transforms one set of strengths; [`Transform::mode`] finds the modes in the result.
    pub(super) fn run(&self, strengths: &[Strength]) -> Vec<Complex64> {
        let mut grid = vec![Complex64::ZERO; self.fft.len()];
        self.places.spread(&self.kernel, strengths, &mut grid);
        self.fft.process(&mut grid);
        grid
    }

    /// The value of mode number `index`, counted from the lowest, in the grid that [`Transform::run`] returned.
    #[inline(always)]
    pub(super) fn mode(&self, grid: &[Complex64], index: usize) -> Complex64 {
        let half = self.modes / 2;
        if index >= half {
            grid[index - half] * self.correction[index - half]
        } else {
            grid[grid.len() + index - half] * self.correction[half - index]
        }
    }
}

/// Estimated cost of one transform in nanoseconds.
pub(super) fn cost(modes: usize, sources: usize, accuracy: f64) -> f64 {
    cheapest(modes, sources, accuracy).0
}

/// The cheaper number of cells per mode, with its cost.
fn cheapest(modes: usize, sources: usize, accuracy: f64) -> (f64, f64) {
    let cost = |upsampling: f64| {
        let width = Kernel::width_for(upsampling, accuracy) as f64;
        CELL_COST * upsampling * modes as f64 + 2.0 * SOURCE_COST * width * sources as f64
    };
    let [coarse, fine] = UPSAMPLINGS.map(|upsampling| (cost(upsampling), upsampling));
    if accuracy >= COARSE_LIMIT && coarse.0 < fine.0 {
        coarse
    } else {
        fine
    }
}

/// Size of the fine grid: the smallest product of powers of 2, 3 and 5 that has as many cells per mode as wanted.
fn fine_cells(modes: usize, upsampling: f64, width: usize) -> usize {
    let wanted = (modes as f64 * upsampling).ceil() as usize;
    smooth_number(wanted.max(2 * width))
}

/// The smallest 2^a 3^b 5^c that is even and not below `wanted`.
fn smooth_number(wanted: usize) -> usize {
    let mut best = wanted.next_power_of_two().max(2);
    let mut fives = 1;
    while fives < best {
        let mut threes = fives;
        while threes < best {
            let twos = wanted.div_ceil(threes).next_power_of_two().max(2);
            best = best.min(twos * threes);
            threes *= 3;
        }
        fives *= 5;
    }
    best
}
