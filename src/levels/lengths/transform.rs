//! Exponential sums over a grid of lengths.

use crate::trace::UniformGrid;
use num_complex::Complex64;
use rayon::prelude::*;

/// Lengths that one thread does at a time; so many turns of a phase by multiplication lose two digits at most.
const CHUNK: usize = 64;

/// sum_j strength_j exp(-i k_j l) at all lengths of a grid. The result does not depend on the number of threads.
pub(super) fn transform(sources: &[(f64, f64)], lengths: &UniformGrid) -> Vec<Complex64> {
    let turns: Vec<Complex64> = sources
        .iter()
        .map(|(k, _)| Complex64::cis(-k * lengths.step))
        .collect();
    let mut sums = vec![Complex64::ZERO; lengths.count];
    sums.par_chunks_mut(CHUNK)
        .enumerate()
        .for_each(|(chunk, sums)| {
            let begin = lengths.point(chunk * CHUNK);
            for ((k, strength), turn) in sources.iter().zip(&turns) {
                let mut wave = Complex64::from_polar(*strength, -k * begin);
                for sum in sums.iter_mut() {
                    *sum += wave;
                    wave *= turn;
                }
            }
        });
    sums
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sums_are_those_of_single_phases() {
        let sources: Vec<(f64, f64)> = (0..50)
            .map(|i| f64::from(i))
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
