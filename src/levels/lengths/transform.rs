//! Exponential sums over a grid of lengths.

use crate::trace::UniformGrid;
use num_complex::Complex64;
use rayon::prelude::*;

/// Lengths that one thread does at a time; so many turns of a phase by multiplication lose two digits at most.
const CHUNK: usize = 64;

/// Phases that turn side by side, so that none waits for its own product.
const SIDE_BY_SIDE: usize = 8;

/// sum_j strength_j exp(-i k_j l) at all lengths of a grid. The result does not depend on the number of threads.
pub(super) fn transform(sources: &[(f64, f64)], lengths: &UniformGrid) -> Vec<Complex64> {
    let turns: Vec<Block> = sources
        .chunks(SIDE_BY_SIDE)
        .map(|part| Block::new(part.iter().map(|(k, _)| Complex64::cis(-k * lengths.step))))
        .collect();
    let mut sums = vec![Complex64::ZERO; lengths.count];
    sums.par_chunks_mut(CHUNK)
        .enumerate()
        .for_each(|(chunk, sums)| {
            let begin = lengths.point(chunk * CHUNK);
            for (part, turns) in sources.chunks(SIDE_BY_SIDE).zip(&turns) {
                let mut waves = Block::new(
                    part.iter()
                        .map(|(k, strength)| Complex64::from_polar(*strength, -k * begin)),
                );
                for sum in sums.iter_mut() {
                    *sum += waves.sum();
                    waves.turn(turns);
                }
            }
        });
    sums
}

/// Some complex numbers, zeros at the end where there are fewer.
struct Block {
    re: [f64; SIDE_BY_SIDE],
    im: [f64; SIDE_BY_SIDE],
}

impl Block {
    fn new(values: impl Iterator<Item = Complex64>) -> Self {
        let mut block = Self {
            re: [0.0; SIDE_BY_SIDE],
            im: [0.0; SIDE_BY_SIDE],
        };
        for (index, value) in values.take(SIDE_BY_SIDE).enumerate() {
            block.re[index] = value.re;
            block.im[index] = value.im;
        }
        block
    }

    fn sum(&self) -> Complex64 {
        Complex64::new(self.re.iter().sum(), self.im.iter().sum())
    }

    fn turn(&mut self, by: &Self) {
        for index in 0..SIDE_BY_SIDE {
            let (re, im) = (self.re[index], self.im[index]);
            self.re[index] = re * by.re[index] - im * by.im[index];
            self.im[index] = re * by.im[index] + im * by.re[index];
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sums_are_those_of_single_phases() {
        let sources: Vec<(f64, f64)> = (0..50)
            .map(f64::from)
            .map(|i| (3.0 + 0.9 * i + (7.0 * i).sin(), (1.3 * i).cos()))
            .collect();
        let lengths = UniformGrid {
            start: 0.3,
            step: 0.05,
            count: 200,
        };
        for (index, sum) in transform(&sources, &lengths).iter().enumerate() {
            let l = lengths.point(index);
            let expected: Complex64 = sources
                .iter()
                .map(|(k, strength)| strength * Complex64::cis(-k * l))
                .sum();
            assert!((sum - expected).norm() < 1e-11);
        }
    }
}
