//! Expected fluctuation of the unsmoothed staircase about its smooth part.

use super::term::Term;
use crate::baseline::saturation_fluctuation;
use num_complex::Complex64;
use serde::Serialize;
use std::f64::consts::PI;

/// How the levels beyond the reach of the known orbits are spread.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Statistics {
    /// Uncorrelated, as the levels of integrable shapes: form factor 1 (Berry & Tabor, Proc. R. Soc. A 356, 1977).
    Uncorrelated,
    /// As the eigenvalues of the Gaussian orthogonal ensemble, for chaotic shapes.
    Orthogonal,
}

/// Levels of one symmetry class.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ClassDensity {
    /// Density in k, each level counted `dimension` times.
    pub density: f64,
    /// Dimension of the class.
    pub dimension: usize,
}

/// Terms whose lengths differ by less than this fraction interfere however wide the window is.
const SAME_LENGTH: f64 = 1e-9;

/// Root-mean-square fluctuation of the staircase near k, in levels.
///
/// `terms` are all terms of orbits up to `max_length`. Their mean square, each length by itself (the diagonal sum), is taken
/// from them; what longer orbits add is taken from the form factor of random levels, sigma^2 = (1/(2 pi^2)) integral of
/// K(tau)/tau^2 dtau from tau = max_length/(2 pi density), for each class by itself (Berry, Proc. R. Soc. A 400, 1985, 229).
#[must_use]
pub fn expected_fluctuation(
    terms: &[Term],
    k: f64,
    max_length: f64,
    classes: &[ClassDensity],
    statistics: Statistics,
) -> f64 {
    let beyond: f64 = classes
        .iter()
        .filter(|class| class.density > 0.0 && class.dimension > 0)
        .map(|class| {
            let dimension = class.dimension as f64;
            let distinct = class.density / dimension;
            let own = match statistics {
                Statistics::Orthogonal => saturation_fluctuation(distinct, max_length).powi(2),
                // (1/(2 pi^2)) (2 pi density/max_length)
                Statistics::Uncorrelated => distinct / (PI * max_length),
            };
            dimension * dimension * own
        })
        .sum();
    (mean_square(terms, k) + beyond).sqrt()
}

/// Root-mean-square fluctuation, in levels, of the mean of the staircase over from..to.
///
/// The mean of a wave of length l over a width w is sin(l w/2)/(l w/2) times its value at the middle, so what long orbits
/// contribute averages out; beyond `max_length` the square of that factor is taken as 2/(l w)^2.
#[must_use]
pub fn mean_fluctuation(
    terms: &[Term],
    [from, to]: [f64; 2],
    max_length: f64,
    classes: &[ClassDensity],
    statistics: Statistics,
) -> f64 {
    let (middle, width) = (0.5 * (from + to), to - from);
    let averaged: Vec<Term> = terms
        .iter()
        .map(|term| {
            let phase = 0.5 * term.length * width;
            let share = if phase > 0.0 {
                phase.sin() / phase
            } else {
                1.0
            };
            Term {
                coefficient: term.coefficient * share,
                ..*term
            }
        })
        .collect();
    let beyond = expected_fluctuation(&[], middle, max_length, classes, statistics);
    let share = (2.0 / (max_length * width).powi(2)).min(1.0);
    (mean_square(&averaged, middle) + share * beyond * beyond).sqrt()
}

/// Mean square of the sum of terms near k: half the squared amplitude of each length.
#[must_use]
pub fn mean_square(terms: &[Term], k: f64) -> f64 {
    waves(terms, k).iter().map(|wave| wave.mean_square).sum()
}

/// All terms of one length together, near some k.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Wave {
    /// The length.
    pub length: f64,
    /// Mean square of the wave in the staircase: half its squared amplitude.
    pub mean_square: f64,
}

/// The terms as waves near k, by length; those of one length interfere.
#[must_use]
pub fn waves(terms: &[Term], k: f64) -> Vec<Wave> {
    let mut amplitudes: Vec<(f64, Complex64)> = terms
        .iter()
        .map(|term| (term.length, term.amplitude_at(k)))
        .collect();
    amplitudes.sort_by(|a, b| a.0.total_cmp(&b.0));
    amplitudes
        .chunk_by(|a, b| b.0 - a.0 <= SAME_LENGTH * b.0)
        .map(|together| {
            let sum: Complex64 = together.iter().map(|(_, amplitude)| amplitude).sum();
            Wave {
                length: together[0].0,
                mean_square: 0.5 * sum.norm_sqr(),
            }
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::super::term::Amplitude;
    use super::*;

    fn strip(length: f64, area: f64) -> Term {
        Term {
            length,
            coefficient: Complex64::from(area),
            amplitude: Amplitude::Strip,
            repetition: 1,
        }
    }

    /// Sides of the rectangle, with a ratio squared that is not rational: no accidental degeneracies.
    const A: f64 = 1.0;
    const B: f64 = 1.272_019_649_514_069;

    /// Terms of a rectangle with Dirichlet walls (exact, see the theta function of its lattice of images).
    fn rectangle(max_length: f64) -> Vec<Term> {
        let most = (max_length / (2.0 * A)) as i32;
        let mut terms = Vec::new();
        for m in 0..=most {
            for n in 0..=most {
                let length = 2.0 * (f64::from(m) * A).hypot(f64::from(n) * B);
                if (m, n) == (0, 0) || length > max_length {
                    continue;
                }
                let images = if m == 0 || n == 0 { 2.0 } else { 4.0 };
                // d = (A B k/2 pi) J0(k l): N = (A B/2 pi) (k/l) J1(k l)
                terms.push(strip(length, images * A * B / (2.0 * PI * length)));
            }
        }
        terms
    }

    /// Root mean square about the smooth count of the exact levels of the rectangle near k.
    fn counted(k: f64) -> f64 {
        let points = 20_000;
        let (from, to) = (0.9 * k, 1.1 * k);
        let most = (to * B / PI) as i32 + 1;
        let mut levels: Vec<f64> = (1..=most)
            .flat_map(|m| (1..=most).map(move |n| PI * (f64::from(m) / A).hypot(f64::from(n) / B)))
            .filter(|level| *level < to)
            .collect();
        levels.sort_by(f64::total_cmp);
        let square: f64 = (0..points)
            .map(|i| {
                let x = from + (to - from) * (f64::from(i) + 0.5) / f64::from(points);
                let below = levels.partition_point(|level| *level < x) as f64;
                let smooth = A * B * x * x / (4.0 * PI) - (A + B) * x / (2.0 * PI) + 0.25;
                (below - smooth).powi(2)
            })
            .sum();
        (square / f64::from(points)).sqrt()
    }

    #[test]
    fn a_rectangle_fluctuates_as_counted() {
        // How far the terms reach must not matter: the rest is filled in.
        for k in [60.0, 200.0] {
            let counted = counted(k);
            for max_length in [8.0, 60.0] {
                let class = ClassDensity {
                    density: A * B * k / (2.0 * PI) - (A + B) / (2.0 * PI),
                    dimension: 1,
                };
                let expected = expected_fluctuation(
                    &rectangle(max_length),
                    k,
                    max_length,
                    &[class],
                    Statistics::Uncorrelated,
                );
                assert!(
                    (expected / counted - 1.0).abs() < 0.1,
                    "k = {k}, orbits up to {max_length}: {expected} against {counted}"
                );
            }
        }
    }

    /// Root mean square over many windows of the mean of the exact staircase of the rectangle less its smooth count.
    #[test]
    fn means_over_windows_fluctuate_as_counted() {
        let (width, windows) = (5.0, 400);
        let centers = |i: i32| 150.0 + 60.0 * f64::from(i) / f64::from(windows);
        let top = 150.0 + 60.0 + width;
        let most = (top * B / PI) as i32 + 1;
        let mut levels: Vec<f64> = (1..=most)
            .flat_map(|m| (1..=most).map(move |n| PI * (f64::from(m) / A).hypot(f64::from(n) / B)))
            .filter(|level| *level < top)
            .collect();
        levels.sort_by(f64::total_cmp);
        let terms = rectangle(40.0);
        let class = ClassDensity {
            density: A * B * 180.0 / (2.0 * PI) - (A + B) / (2.0 * PI),
            dimension: 1,
        };
        let (mut counted, mut expected) = (0.0, 0.0);
        for i in 0..windows {
            let (from, to) = (centers(i) - 0.5 * width, centers(i) + 0.5 * width);
            let mean = crate::levels::mean_staircase(&levels, from, to);
            // Integral of A B k^2/(4 pi) - (A + B) k/(2 pi) + 1/4.
            let smooth = A * B * (to.powi(3) - from.powi(3)) / (12.0 * PI)
                - (A + B) * (to * to - from * from) / (4.0 * PI)
                + 0.25 * width;
            counted += (mean - smooth / width).powi(2) / f64::from(windows);
            expected +=
                mean_fluctuation(&terms, [from, to], 40.0, &[class], Statistics::Uncorrelated)
                    .powi(2)
                    / f64::from(windows);
        }
        let ratio = (expected / counted).sqrt();
        // Sixty units of k hold few independent windows of the shortest orbits.
        assert!((ratio - 1.0).abs() < 0.15, "{expected} against {counted}");
    }

    #[test]
    fn terms_of_one_length_interfere() {
        let wave = |sign: f64| Term {
            length: 2.0,
            coefficient: Complex64::new(0.0, 0.3 * sign),
            amplitude: Amplitude::Constant,
            repetition: 1,
        };
        assert!(mean_square(&[wave(1.0), wave(-1.0)], 10.0) < 1e-30);
        let doubled = mean_square(&[wave(1.0), wave(1.0)], 10.0);
        assert!((doubled - 0.5 * 0.36).abs() < 1e-15);
    }
}
