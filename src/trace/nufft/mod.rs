//! A nonuniform fast Fourier transform of type 1.
//!
//! Computes F(m) = sum_j (c_j exp(i m x_j) + c'_j exp(-i m x_j)) for integers m of a range around zero, from sources at
//! arbitrary x_j and their mirror images: every source is spread over a fine periodic grid with a short kernel, the grid is
//! Fourier transformed, and the result is divided by the kernel's own transform. The kernel is the exponential of a semicircle
//! (Barnett, Magland & af Klinteberg, SIAM J. Sci. Comput. 41, 2019).

mod fft;
mod kernel;
mod spread;

use num_complex::Complex64;

use fft::GridTransform;
pub(super) use fft::Spectrum;
use kernel::{Kernel, MAX_WIDTH};
use spread::Places;
pub(super) use spread::Strength;

/// Smallest accuracy that the transform reaches: below it, rounding in the division by the kernel's transform dominates.
pub(super) const BEST_ACCURACY: f64 = 2e-13;

/// Cells per mode to choose from: few cells make a short transform and wide kernels.
const UPSAMPLINGS: [f64; 3] = [1.25, 1.5, 2.0];

/// Measured cost in nanoseconds: of the transform per cell, of a source per square of its kernel's width.
const CELL_COST: f64 = 40.0;
const SOURCE_COST: f64 = 0.3;

/// A transform of fixed size, accuracy and places of the sources, for any number of sets of strengths.
pub(super) struct Transform {
    modes: usize,
    kernel: Kernel,
    places: Places,
    grid: GridTransform,
    /// 1/(transform of the kernel) for the modes 0, 1, .., modes/2.
    correction: Vec<f64>,
}

impl Transform {
    /// A transform to the modes -modes/2, .., modes - modes/2 - 1 of sources at x_j = 2 pi `turns`, -1/2 <= turns <= 1/2, with
    /// errors below `accuracy` times the sum of |c_j| + |c'_j|.
    pub(super) fn new(turns: &[f64], modes: usize, accuracy: f64) -> Self {
        let (_, upsampling) = cheapest(modes, turns.len(), accuracy);
        Self::with_upsampling(turns, modes, upsampling, accuracy)
    }

    fn with_upsampling(turns: &[f64], modes: usize, upsampling: f64, accuracy: f64) -> Self {
        let kernel = Kernel::new(upsampling, accuracy);
        let wanted = (modes as f64 * upsampling).ceil() as usize;
        let grid = GridTransform::new(wanted.max(2 * kernel.padded));
        let places = Places::new(turns, grid.len(), &kernel);
        let correction = kernel.correction(modes / 2 + 1, grid.len());
        Self {
            modes,
            kernel,
            places,
            grid,
            correction,
        }
    }

    /// Transforms one set of strengths; [`Transform::read`] finds the modes in the result.
    pub(super) fn run(&self, strengths: &[Strength]) -> Spectrum {
        let mut grid = vec![Complex64::ZERO; self.grid.len()];
        self.places.spread(&self.kernel, strengths, &mut grid);
        self.grid.run(grid)
    }

    /// Copies modes out of the result of [`Transform::run`], from number `first` on, counted from the lowest.
    pub(super) fn read(&self, spectrum: &Spectrum, first: usize, target: &mut [Complex64]) {
        let half = self.modes / 2;
        let (negative, positive) =
            target.split_at_mut(half.saturating_sub(first).min(target.len()));
        if !negative.is_empty() {
            spectrum.read(spectrum.len() - half + first, negative);
            let end = half - first + 1;
            let corrections = self.correction[end - negative.len()..end].iter().rev();
            negative
                .iter_mut()
                .zip(corrections)
                .for_each(|(value, correction)| *value *= correction);
        }
        if !positive.is_empty() {
            let begin = first.saturating_sub(half);
            spectrum.read(begin, positive);
            positive
                .iter_mut()
                .zip(&self.correction[begin..])
                .for_each(|(value, correction)| *value *= correction);
        }
    }
}

/// Estimated cost of one transform in nanoseconds.
pub(super) fn cost(modes: usize, sources: usize, accuracy: f64) -> f64 {
    cheapest(modes, sources, accuracy).0
}

/// The cheapest number of cells per mode whose kernel is not too wide, after its cost.
fn cheapest(modes: usize, sources: usize, accuracy: f64) -> (f64, f64) {
    let cost = |upsampling: f64| {
        let width = Kernel::width_for(upsampling, accuracy) as f64;
        CELL_COST * upsampling * modes as f64 + SOURCE_COST * width * width * sources as f64
    };
    let usable = UPSAMPLINGS
        .into_iter()
        .filter(|&upsampling| Kernel::width_for(upsampling, accuracy) <= MAX_WIDTH);
    let costs = usable.map(|upsampling| (cost(upsampling), upsampling));
    costs
        .min_by(|a, b| a.0.total_cmp(&b.0))
        .unwrap_or((f64::INFINITY, UPSAMPLINGS[2]))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// One source and its mirror image: the worst case, since errors of several sources average out.
    #[test]
    fn a_single_source_keeps_the_promise() {
        let modes = 301;
        for upsampling in UPSAMPLINGS {
            for digits in 2..=13 {
                let accuracy = 10.0_f64.powi(-digits);
                if accuracy < BEST_ACCURACY || Kernel::width_for(upsampling, accuracy) > MAX_WIDTH {
                    continue;
                }
                for turns in [-0.5, -0.31, -1e-9, 0.0, 1e-3, 0.1234, 0.2501, 0.4999] {
                    let transform =
                        Transform::with_upsampling(&[turns], modes, upsampling, accuracy);
                    let strength = Strength {
                        source: Complex64::new(0.3, -0.4),
                        mirror: Complex64::new(-0.5, 0.0),
                    };
                    let spectrum = transform.run(&[strength]);
                    let mut values = vec![Complex64::ZERO; modes];
                    transform.read(&spectrum, 0, &mut values);
                    for (index, value) in values.iter().enumerate() {
                        let phase = 2.0
                            * std::f64::consts::PI
                            * turns
                            * (index as f64 - (modes / 2) as f64);
                        let expected = strength.source * Complex64::cis(phase)
                            + strength.mirror * Complex64::cis(-phase);
                        let error = (value - expected).norm();
                        assert!(
                            error < accuracy,
                            "{upsampling} {accuracy:e} at {turns}, mode {index}: {error:e}"
                        );
                    }
                }
            }
        }
    }
}
