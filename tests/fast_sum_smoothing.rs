//! Smoothed terms against numerical convolution, tabulated Bessel functions and each other.

use num_complex::Complex64;
use orbitsum::trace::{Amplitude, SmoothedTerms, Term, Value};

fn term(amplitude: Amplitude, length: f64) -> Term {
    Term {
        length,
        coefficient: Complex64::ONE,
        amplitude,
        repetition: 1,
    }
}

fn at(term: Term, smoothing: f64, k: f64) -> Value {
    SmoothedTerms::new(&[term], smoothing).at(k)
}

/// Numerical convolution at 40 digits by mpmath; the table names the script that made it.
#[test]
fn smoothed_terms_against_multiple_precision() {
    let table = include_str!("reference/fast_sum_smoothed_terms.csv");
    let mut rows = 0;
    for line in table.lines().filter(|line| !line.starts_with('#')).skip(1) {
        let (name, numbers) = line.split_once(',').expect("a name and numbers");
        let numbers: Vec<f64> = numbers
            .split(',')
            .map(|field| field.parse().expect("a number"))
            .collect();
        let [k, length, smoothing, staircase, density] = numbers[..] else {
            panic!("five numbers: {line}")
        };
        let amplitude = match name {
            "strip" => Amplitude::Strip,
            "torus" => Amplitude::Torus { slope: 0.0 },
            _ => Amplitude::Constant,
        };
        let value = at(term(amplitude, length), smoothing, k);
        // Sizes before smoothing; phases k l carry 1e-16 each.
        let size = (1.0 + k) * (1.0 + 1e-2 * k * length);
        assert!(
            (value.staircase - staircase).abs() < 1e-13 * size,
            "{line}: {}",
            value.staircase
        );
        assert!(
            (value.density - density).abs() < 1e-13 * size * (1.0 + length),
            "{line}: {}",
            value.density
        );
        rows += 1;
    }
    assert_eq!(rows, 36);
}

/// J0 and J1 of Abramowitz & Stegun, Table 9.1 (from memory), through N = k J1(k l) and dN/dk = k l J0(k l); below x = 17 the
/// term is evaluated directly, above by Hankel's series.
#[test]
fn strips_are_bessel_functions() {
    let table = [
        (1.0, 0.765_197_686_6, 0.440_050_585_7),
        (2.0, 0.223_890_779_1, 0.576_724_807_8),
        (5.0, -0.177_596_771_3, -0.327_579_137_6),
        (10.0, -0.245_935_764_5, 0.043_472_746_2),
    ];
    for (x, j0, j1) in table {
        for k in [0.5, 4.0] {
            let value = at(term(Amplitude::Strip, x / k), 0.0, k);
            assert!(
                (value.staircase / k - j1).abs() < 1e-10,
                "J1({x}) = {}",
                value.staircase / k
            );
            assert!(
                (value.density / x - j0).abs() < 1e-10,
                "J0({x}) = {}",
                value.density / x
            );
        }
    }
    // Across the change from one way to the other, against libm.
    for index in 0..200 {
        let x = 10.0 + 0.1 * f64::from(index);
        let value = at(term(Amplitude::Strip, x / 3.0), 0.0, 3.0);
        assert!(
            (value.staircase / 3.0 - libm::j1(x)).abs() < 1e-14,
            "J1({x})"
        );
        assert!((value.density / x - libm::j0(x)).abs() < 1e-14, "J0({x})");
    }
}

/// Trapezoidal rule over nine standard deviations on both sides of a term that is smoothed by `inner` already.
fn convolved(term: Term, inner: f64, smoothing: f64, k: f64) -> Value {
    const STEPS: i32 = 4000;
    let (mut sum, mut norm) = (Value::default(), 0.0);
    for step in -STEPS..=STEPS {
        let t = 9.0 * f64::from(step) / f64::from(STEPS);
        let weight = (-0.5 * t * t).exp();
        let value = at(term, inner, k + smoothing * t);
        sum.staircase += weight * value.staircase;
        sum.density += weight * value.density;
        norm += weight;
    }
    Value {
        staircase: sum.staircase / norm,
        density: sum.density / norm,
    }
}

#[test]
fn smoothing_is_a_convolution() {
    let amplitudes = [
        Amplitude::Constant,
        Amplitude::Torus { slope: 0.0 },
        Amplitude::Strip,
    ];
    for amplitude in amplitudes {
        for (k, length, smoothing) in [
            (4.0, 3.0, 0.4),
            (9.0, 10.0, 0.4),
            (25.0, 22.0, 0.3),
            (60.0, 8.0, 0.2),
        ] {
            let mut term = term(amplitude, length);
            // Strips take the real part of their coefficient, which is 1 here too.
            term.coefficient = Complex64::new(1.0, 0.7);
            let value = at(term, smoothing, k);
            let expected = convolved(term, 0.0, smoothing, k);
            assert!(
                (value.staircase - expected.staircase).abs() < 1e-12 * k,
                "{amplitude:?} at {k}"
            );
            assert!(
                (value.density - expected.density).abs() < 1e-12 * k * length,
                "{amplitude:?} at {k}"
            );
        }
    }
}

/// The phase correction is taken at k: the smoothed term is turned by it and not smoothed again.
#[test]
fn phase_corrections_turn_the_smoothed_term() {
    for (k, slope) in [(3.0_f64, 1.2_f64), (20.0, -4.0), (2.0, 30.0), (2.0, -30.0)] {
        let plain = Term {
            coefficient: Complex64::cis((slope / k).clamp(-0.5, 0.5)),
            ..term(Amplitude::Torus { slope: 0.0 }, 5.0)
        };
        let corrected = term(Amplitude::Torus { slope }, 5.0);
        let (plain, corrected) = (at(plain, 0.2, k), at(corrected, 0.2, k));
        assert!((plain.staircase - corrected.staircase).abs() < 1e-13);
    }
}

#[test]
fn density_is_the_derivative_of_the_staircase() {
    let amplitudes = [
        Amplitude::Constant,
        Amplitude::Torus { slope: 2.0 },
        Amplitude::CorrectedConstant { slope: -1.5 },
        Amplitude::Strip,
    ];
    for amplitude in amplitudes {
        for smoothing in [0.0, 0.3] {
            for k in [0.7, 1.9, 3.3, 6.0, 12.0, 40.0] {
                let term = term(amplitude, 2.5);
                let h = 1e-2;
                let staircase = |steps: f64| at(term, smoothing, k + steps * h).staircase;
                // Central difference of order eight (Fornberg, Math. Comp. 51, 1988, table 1).
                let weights = [4.0 / 5.0, -1.0 / 5.0, 4.0 / 105.0, -1.0 / 280.0];
                let difference: f64 = (1..)
                    .zip(weights)
                    .map(|(n, weight)| {
                        weight * (staircase(f64::from(n)) - staircase(f64::from(-n)))
                    })
                    .sum();
                let density = at(term, smoothing, k).density;
                assert!(
                    (difference / h - density).abs() < 1e-9,
                    "{amplitude:?}, s = {smoothing}, k = {k}: {density}"
                );
            }
        }
    }
}

/// Two Gaussians one after the other are one: s^2 = s1^2 + s2^2.
#[test]
fn widths_add_in_squares() {
    let (first, second, length, k) = (0.3_f64, 0.4_f64, 3.0, 9.0);
    for amplitude in [
        Amplitude::Constant,
        Amplitude::Torus { slope: 0.0 },
        Amplitude::Strip,
    ] {
        let term = term(amplitude, length);
        let twice = convolved(term, first, second, k);
        let together = at(term, first.hypot(second), k);
        assert!(
            (twice.staircase - together.staircase).abs() < 1e-12,
            "{amplitude:?}"
        );
        assert!(
            (twice.density - together.density).abs() < 1e-11,
            "{amplitude:?}"
        );
    }
}

#[test]
fn degenerate_terms_have_values() {
    for amplitude in [
        Amplitude::Constant,
        Amplitude::Torus { slope: 1.0 },
        Amplitude::Strip,
    ] {
        for (length, smoothing, k) in [
            (0.0, 0.0, 0.0),
            (0.0, 0.3, 0.0),
            (3.0, 0.0, 0.0),
            (3.0, 0.3, -0.5),
            (1e-300, 0.1, 5.0),
            (1e6, 0.3, 5.0),
        ] {
            let value = at(term(amplitude, length), smoothing, k);
            assert!(
                value.staircase.is_finite() && value.density.is_finite(),
                "{amplitude:?} {length} {smoothing} {k}: {value:?}"
            );
        }
    }
}
