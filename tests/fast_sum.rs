//! The fast sum against direct summation, and direct summation against numerical convolution.

use num_complex::Complex64;
use orbitsum::trace::{Amplitude, OrbitSum, Term, UniformGrid, sum_at, sum_on_grid};

/// Reproducible numbers in [0, 1), well spread: the fractional parts of multiples of the golden ratio's square.
fn fraction(index: usize, stride: f64) -> f64 {
    (index as f64 * stride).fract()
}

fn terms(count: usize, longest: f64, amplitude: impl Fn(usize) -> Amplitude) -> Vec<Term> {
    (0..count)
        .map(|index| Term {
            length: 1.0 + (longest - 1.0) * fraction(index, 0.618_033_988_749_895),
            coefficient: Complex64::from_polar(
                0.1 + fraction(index, 0.414_213_562_373_095),
                6.0 * fraction(index, 0.732_050_807_568_877),
            ),
            amplitude: amplitude(index),
            repetition: 1,
        })
        .collect()
}

/// Largest differences of staircase and density, relative to the sums of amplitude and of amplitude times length.
fn errors(terms: &[Term], sum: &OrbitSum, reference: &OrbitSum, k: &[f64]) -> (f64, f64) {
    let size = |k: f64, term: &Term| {
        let c = term.coefficient.norm();
        match term.amplitude {
            Amplitude::Constant | Amplitude::CorrectedConstant { .. } => c,
            Amplitude::Torus { .. } => c * k.sqrt(),
            Amplitude::Strip => c * (2.0 * k / (std::f64::consts::PI * term.length)).sqrt(),
        }
    };
    let mut worst = (0.0_f64, 0.0_f64);
    for (index, &k) in k.iter().enumerate() {
        let amplitudes: f64 = terms.iter().map(|term| size(k, term)).sum();
        let slopes: f64 = terms.iter().map(|term| size(k, term) * term.length).sum();
        worst.0 = worst
            .0
            .max((sum.staircase[index] - reference.staircase[index]).abs() / amplitudes);
        worst.1 = worst
            .1
            .max((sum.density[index] - reference.density[index]).abs() / slopes);
    }
    worst
}

#[test]
fn fast_sum_keeps_its_promise() {
    let grid = UniformGrid {
        start: 8.0,
        step: 0.01,
        count: 3000,
    };
    let k = grid.points();
    let cases: [(&str, Vec<Term>); 5] = [
        ("constant", terms(2000, 20.0, |_| Amplitude::Constant)),
        (
            "torus",
            terms(2000, 20.0, |_| Amplitude::Torus { slope: 0.0 }),
        ),
        (
            "torus with slope",
            terms(2000, 20.0, |i| Amplitude::Torus {
                slope: 30.0 * (fraction(i, 0.3027) - 0.5),
            }),
        ),
        (
            "corrected",
            terms(2000, 20.0, |i| Amplitude::CorrectedConstant {
                slope: 30.0 * (fraction(i, 0.3027) - 0.5),
            }),
        ),
        ("strip", terms(2000, 20.0, |_| Amplitude::Strip)),
    ];
    for (name, terms) in &cases {
        for smoothing in [0.0, 0.3] {
            let reference = sum_at(terms, &k, smoothing);
            for digits in 3..=12 {
                let accuracy = 10.0_f64.powi(-digits);
                let sum = sum_on_grid(terms, &grid, smoothing, accuracy);
                let (staircase, density) = errors(terms, &sum, &reference, &k);
                println!("{name} s {smoothing} {accuracy:e}: {staircase:.2e} {density:.2e}");
                assert!(
                    staircase < accuracy,
                    "{name}, s = {smoothing}, {accuracy:e}: staircase {staircase:e}"
                );
                assert!(
                    density < accuracy,
                    "{name}, s = {smoothing}, {accuracy:e}: density {density:e}"
                );
            }
        }
    }
}
