//! The fast sum against direct summation.

use num_complex::Complex64;
use orbitsum::trace::{Amplitude, OrbitSum, SmoothedTerms, Term, UniformGrid, sum_at, sum_on_grid};
use proptest::prelude::*;

/// Reproducible numbers in [0, 1): fractional parts of multiples of an irrational number.
fn fraction(index: usize, stride: f64) -> f64 {
    (index as f64 * stride).fract()
}

fn terms(count: usize, longest: f64, amplitude: impl Fn(usize) -> Amplitude) -> Vec<Term> {
    let term = |index| Term {
        length: 1.0 + (longest - 1.0) * fraction(index, 0.618_033_988_749_895),
        coefficient: Complex64::from_polar(
            0.1 + fraction(index, 0.414_213_562_373_095),
            6.0 * fraction(index, 0.732_050_807_568_877),
        ),
        amplitude: amplitude(index),
        repetition: 1,
    };
    (0..count).map(term).collect()
}

/// Size of a term before smoothing.
fn size(k: f64, term: &Term) -> f64 {
    let c = term.coefficient.norm();
    match term.amplitude {
        Amplitude::Constant | Amplitude::CorrectedConstant { .. } => c,
        Amplitude::Torus { .. } => c * k.sqrt(),
        Amplitude::Strip => c * (2.0 * k / (std::f64::consts::PI * term.length)).sqrt(),
    }
}

/// Largest differences of staircase and density, relative to the sums of amplitude and of amplitude times length.
fn errors(terms: &[Term], sum: &OrbitSum, reference: &OrbitSum, points: &[f64]) -> (f64, f64) {
    let mut worst = (0.0_f64, 0.0_f64);
    for (index, &k) in points.iter().enumerate() {
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

/// Accuracies 1e-3, 1e-4, ..., 1e-12.
fn accuracies() -> impl Iterator<Item = f64> {
    (3..=12).map(|digits| 10.0_f64.powi(-digits))
}

#[test]
fn fast_sum_keeps_its_promise() {
    let grid = UniformGrid {
        start: 8.0,
        step: 0.02,
        count: 1000,
    };
    let points = grid.points();
    let slope = |index| 30.0 * (fraction(index, 0.302_775_637_731_995) - 0.5);
    let cases = [
        ("constant", terms(400, 20.0, |_| Amplitude::Constant)),
        (
            "constant, lengths beyond a period",
            terms(400, 900.0, |_| Amplitude::Constant),
        ),
        (
            "torus",
            terms(400, 20.0, |_| Amplitude::Torus { slope: 0.0 }),
        ),
        (
            "torus with slope",
            terms(400, 20.0, |i| Amplitude::Torus { slope: slope(i) }),
        ),
        (
            "corrected",
            terms(400, 20.0, |i| Amplitude::CorrectedConstant {
                slope: slope(i),
            }),
        ),
        ("strip", terms(400, 20.0, |_| Amplitude::Strip)),
    ];
    for (name, terms) in &cases {
        for smoothing in [0.0, 0.1] {
            let reference = sum_at(terms, &points, smoothing);
            for accuracy in accuracies() {
                let sum = sum_on_grid(terms, &grid, smoothing, accuracy);
                let (staircase, density) = errors(terms, &sum, &reference, &points);
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

/// A few terms on many points: their errors cannot average out.
#[test]
fn few_terms_on_many_points() {
    let grid = UniformGrid {
        start: 10.0,
        step: 1e-3,
        count: 60_000,
    };
    let points = grid.points();
    for place in 0..4 {
        let length = 3000.0 * fraction(place + 1, 0.618_033_988_749_895);
        let term = |shift: f64| Term {
            length: length + shift,
            coefficient: Complex64::cis(place as f64),
            amplitude: Amplitude::Torus { slope: 0.0 },
            repetition: 1,
        };
        // Many times the same term, so that the fast sum pays.
        let terms: Vec<Term> = (0..500).map(|index| term(1e-9 * index as f64)).collect();
        let sparse: Vec<usize> = (0..points.len()).step_by(997).collect();
        let some: Vec<f64> = sparse.iter().map(|&index| points[index]).collect();
        let reference = sum_at(&terms, &some, 0.0);
        for accuracy in accuracies().take_while(|&accuracy| accuracy > 2e-12) {
            let all = sum_on_grid(&terms, &grid, 0.0, accuracy);
            let sum = OrbitSum {
                staircase: sparse.iter().map(|&index| all.staircase[index]).collect(),
                density: sparse.iter().map(|&index| all.density[index]).collect(),
            };
            let (staircase, density) = errors(&terms, &sum, &reference, &some);
            // The phases themselves are rounded to k l times 1.1e-16, in both sums.
            let rounding = 3.0 * f64::EPSILON * 70.0 * length;
            assert!(
                staircase < accuracy + rounding,
                "{accuracy:e} at {length}: staircase {staircase:e}"
            );
            assert!(
                density < accuracy + rounding,
                "{accuracy:e} at {length}: density {density:e}"
            );
        }
    }
}

/// From k = 0 on, where series and phase corrections do not hold: the grid is cut into parts.
#[test]
fn grids_from_zero() {
    let grid = UniformGrid {
        start: 0.0,
        step: 0.01,
        count: 4000,
    };
    let points = grid.points();
    let amplitudes = |index| match index % 4 {
        0 => Amplitude::Constant,
        1 => Amplitude::Strip,
        2 => Amplitude::Torus {
            slope: (index % 7) as f64 - 3.0,
        },
        _ => Amplitude::CorrectedConstant {
            slope: (index % 5) as f64 - 2.0,
        },
    };
    let terms = terms(300, 12.0, amplitudes);
    let smoothing = 0.3;
    let reference = sum_at(&terms, &points, smoothing);
    let sum = sum_on_grid(&terms, &grid, smoothing, 1e-10);
    // Sizes at k = 1 and above: at k = 0 nothing is left to compare with.
    let from = 100;
    let cut = |sum: &OrbitSum| OrbitSum {
        staircase: sum.staircase[from..].to_vec(),
        density: sum.density[from..].to_vec(),
    };
    let (staircase, density) = errors(&terms, &cut(&sum), &cut(&reference), &points[from..]);
    assert!(
        staircase < 1e-10 && density < 1e-10,
        "{staircase:e} {density:e}"
    );
    for (index, k) in points[..from].iter().enumerate().skip(1) {
        let difference = (sum.staircase[index] - reference.staircase[index]).abs();
        assert!(difference < 1e-9, "{difference:e} at {k}");
    }
}

#[test]
fn threads_do_not_matter() {
    let grid = UniformGrid {
        start: 5.0,
        step: 0.001,
        count: 50_000,
    };
    let amplitude = |i| {
        if i % 2 == 0 {
            Amplitude::Strip
        } else {
            Amplitude::Torus {
                slope: 0.1 * (i % 50) as f64,
            }
        }
    };
    let terms = terms(600, 30.0, amplitude);
    let with_threads = |count| {
        let pool = rayon::ThreadPoolBuilder::new()
            .num_threads(count)
            .build()
            .expect("threads start");
        pool.install(|| sum_on_grid(&terms, &grid, 0.1, 1e-10))
    };
    assert_eq!(with_threads(1), with_threads(5));
}

#[test]
fn empty_sums() {
    let grid = UniformGrid {
        start: 1.0,
        step: 0.1,
        count: 3,
    };
    assert_eq!(sum_on_grid(&[], &grid, 0.1, 1e-10).staircase, [0.0; 3]);
    let nothing = UniformGrid { count: 0, ..grid };
    assert!(
        sum_on_grid(&terms(5, 3.0, |_| Amplitude::Strip), &nothing, 0.1, 1e-10)
            .density
            .is_empty()
    );
}

fn any_amplitude() -> impl Strategy<Value = Amplitude> {
    prop_oneof![
        Just(Amplitude::Constant),
        Just(Amplitude::Strip),
        (-5.0..5.0).prop_map(|slope| Amplitude::Torus { slope }),
        (-5.0..5.0).prop_map(|slope| Amplitude::CorrectedConstant { slope }),
    ]
}

prop_compose! {
    fn any_term()(length in 0.0..60.0, re in -1.0..1.0, im in -1.0..1.0, amplitude in any_amplitude()) -> Term {
        Term { length, coefficient: Complex64::new(re, im), amplitude, repetition: 1 }
    }
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(48))]

    #[test]
    fn fast_equals_direct(
        terms in prop::collection::vec(any_term(), 1..120),
        start in 0.5..30.0,
        step in 1e-4..0.3,
        count in 1_usize..700,
        smoothing in prop_oneof![Just(0.0), 0.02..0.6],
        digits in 3_i32..12,
    ) {
        let grid = UniformGrid { start, step, count };
        let points = grid.points();
        let accuracy = 10.0_f64.powi(-digits);
        let sum = sum_on_grid(&terms, &grid, smoothing, accuracy);
        let reference = sum_at(&terms, &points, smoothing);
        // In the mean over terms: a strip of length zero has no amplitude to compare with.
        let scale: f64 = terms.iter().map(|term| term.coefficient.norm()).sum::<f64>() * points[count - 1].max(1.0);
        for (index, k) in points.iter().enumerate() {
            let staircase = (sum.staircase[index] - reference.staircase[index]).abs();
            let density = (sum.density[index] - reference.density[index]).abs();
            prop_assert!(staircase < accuracy * scale, "staircase {staircase:e} of {scale:e} at {}", k);
            prop_assert!(density < 60.0 * accuracy * scale, "density {density:e} of {scale:e} at {}", k);
        }
    }

    #[test]
    fn sums_are_linear(first in prop::collection::vec(any_term(), 1..9), second in prop::collection::vec(any_term(), 1..9)) {
        let both: Vec<Term> = first.iter().chain(&second).copied().collect();
        let at = |terms: &[Term]| SmoothedTerms::new(terms, 0.2).at(7.3);
        let (one, two, sum) = (at(&first), at(&second), at(&both));
        prop_assert!((one.staircase + two.staircase - sum.staircase).abs() < 1e-12);
        prop_assert!((one.density + two.density - sum.density).abs() < 1e-10);
    }
}
