//! Unfolded sequences of random levels.
#![allow(dead_code)]

use faer::{Mat, Side};
use orbitsum::levels::statistics::{LevelStatistics, Reference, level_statistics};
use std::f64::consts::{PI, TAU};

/// Xorshift with a multiplier (Vigna, ACM Trans. Math. Softw. 42 (2016)).
pub(crate) struct Random(u64);

impl Random {
    /// A generator of its own for every seed; seeds that lie together must not give sequences that do.
    pub(crate) fn new(seed: u64) -> Self {
        // Finaliser of MurmurHash3, from memory; any fixed scrambling serves.
        let mut state = seed.wrapping_add(0x9e37_79b9_7f4a_7c15);
        for factor in [0xff51_afd7_ed55_8ccd, 0xc4ce_b9fe_1a85_ec53] {
            state = (state ^ (state >> 33)).wrapping_mul(factor);
        }
        Self((state ^ (state >> 33)).max(1))
    }

    /// Evenly distributed over 0..1.
    pub(crate) fn uniform(&mut self) -> f64 {
        self.0 ^= self.0 >> 12;
        self.0 ^= self.0 << 25;
        self.0 ^= self.0 >> 27;
        (self.0.wrapping_mul(0x2545_f491_4f6c_dd1d) >> 11) as f64 / (1_u64 << 53) as f64
    }

    /// Standard normal (Box & Muller, Ann. Math. Stat. 29 (1958) 610).
    pub(crate) fn normal(&mut self) -> f64 {
        let radius = (-2.0 * (1.0 - self.uniform()).ln()).sqrt();
        radius * (TAU * self.uniform()).cos()
    }
}

/// Middle levels of a matrix of the Gaussian orthogonal ensemble, unfolded by the semicircle (Wigner, Ann. Math. 67 (1958) 325). Of `size`
/// levels the inner `share` are kept.
pub(crate) fn orthogonal(size: usize, share: f64, random: &mut Random) -> Vec<f64> {
    let mut matrix = Mat::<f64>::zeros(size, size);
    for column in 0..size {
        matrix[(column, column)] = 2_f64.sqrt() * random.normal();
        for row in column + 1..size {
            matrix[(row, column)] = random.normal();
        }
    }
    let eigenvalues = matrix
        .self_adjoint_eigenvalues(Side::Lower)
        .expect("the eigenvalues converge");
    let radius = 2.0 * (size as f64).sqrt();
    let count = |level: &f64| {
        let x = (level / radius).clamp(-1.0, 1.0);
        size as f64 * (0.5 + (x * (1.0 - x * x).sqrt() + x.asin()) / PI)
    };
    let cut = (0.5 * (1.0 - share) * size as f64).round() as usize;
    eigenvalues[cut..size - cut].iter().map(count).collect()
}

/// Positions of a Poisson process of density 1.
pub(crate) fn uncorrelated(count: usize, random: &mut Random) -> Vec<f64> {
    (0..count)
        .scan(0.0, |position, _| {
            *position -= (1.0 - random.uniform()).ln();
            Some(*position)
        })
        .collect()
}

/// Each level is kept with a probability.
pub(crate) fn thinned(levels: &[f64], kept: f64, random: &mut Random) -> Vec<f64> {
    levels
        .iter()
        .copied()
        .filter(|_| random.uniform() < kept)
        .collect()
}

/// Independent sequences in one list of density 1.
pub(crate) fn superposed(sequences: &[Vec<f64>], shares: &[f64]) -> Vec<f64> {
    let mut all: Vec<f64> = sequences
        .iter()
        .zip(shares)
        .flat_map(|(levels, share)| levels.iter().map(move |level| (level - levels[0]) / share))
        .collect();
    all.sort_by(f64::total_cmp);
    let last = sequences
        .iter()
        .zip(shares)
        .map(|(levels, share)| (levels[levels.len() - 1] - levels[0]) / share)
        .fold(f64::INFINITY, f64::min);
    all.retain(|level| *level <= last);
    all
}

/// Size of the random matrices and the inner share of their levels that is used: 300 levels, as many as the lists of shapes hold.
pub(crate) const SIZE: usize = 400;
pub(crate) const INNER: f64 = 0.75;

/// Statistics of unfolded levels without orbits.
pub(crate) fn measure(positions: &[f64], expected: &Reference) -> LevelStatistics {
    level_statistics(positions, expected, None).expect("a list with statistics")
}

/// Mean and its standard error.
pub(crate) fn mean(values: impl IntoIterator<Item = f64>) -> (f64, f64) {
    let values: Vec<f64> = values.into_iter().collect();
    let count = values.len() as f64;
    let mean = values.iter().sum::<f64>() / count;
    let square: f64 = values.iter().map(|value| (value - mean).powi(2)).sum();
    (mean, (square / (count * (count - 1.0))).sqrt())
}

/// The mean is the expected one within three standard errors.
pub(crate) fn assert_mean(values: impl IntoIterator<Item = f64>, expected: f64, what: &str) {
    let (mean, error) = mean(values);
    assert!(
        (mean - expected).abs() < 3.0 * error,
        "{what}: {mean} +- {error}, expected {expected}"
    );
}
