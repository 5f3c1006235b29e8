//! The orbit sum of the quarter stadium against levels computed directly.
//!
//! Levels: data/quarter-stadium.csv, which the command `levels` made (finite elements of high degree, count by matrix inertia; its
//! call is in the first line, its errors stand beside the levels; tests/direct_quarter_stadium.rs holds the solver against an
//! independent code). The residual is the smoothed staircase of the levels minus the smooth count minus the orbit sum, all three
//! smoothed by the same Gaussian, with nothing fitted.

use num_complex::Complex64;
use orbitsum::baseline::weyl;
use orbitsum::billiard::detect;
use orbitsum::levels::{self, ResidualWindow, residual_rms};
use orbitsum::orbit::{Catalogue, ClassWeights, Limits, terms};
use orbitsum::system::{self, System};
use orbitsum::trace::{Amplitude, DEFAULT_ACCURACY, UniformGrid, sum_on_grid};
use std::f64::consts::PI;
use std::path::Path;

/// Window of wave numbers.
const FROM: f64 = 8.0;
const TO: f64 = 42.0;
/// Orbits up to this length.
const LONGEST: f64 = 12.0;
/// (smoothing in mean spacings at the middle of the window, largest rms residual in levels). Measured: 0.0015, 0.0049,
/// 0.0184.
const TARGETS: [(f64, f64); 3] = [(2.8, 0.0025), (2.0, 0.008), (1.3, 0.025)];

fn load(name: &str) -> System {
    system::load(Path::new(name), &[]).expect("a shipped file")
}

/// rms residuals at the smoothings of [`TARGETS`], and the smoothed staircases on the grid.
fn residuals(file: &str, class: Option<&str>, max_bounces: usize) -> Vec<(f64, Vec<f64>)> {
    let list = levels::read(Path::new("data/quarter-stadium.csv")).expect("the list");
    let domain = load(file).domain;
    let symmetry = detect(&domain);
    let irrep = class.map(|name| symmetry.class(name).expect("a class"));
    let limits = Limits {
        max_length: LONGEST,
        max_bounces,
    };
    let catalogue = Catalogue::find(&domain, &symmetry, limits);
    let sum_terms = terms(&catalogue, &ClassWeights::new(&symmetry, irrep));
    let smooth = weyl(&domain, &symmetry, irrep);
    TARGETS
        .iter()
        .map(|&(spacings, _)| {
            let s = spacings * smooth.mean_spacing(0.5 * (FROM + TO));
            let step = s / 8.0;
            let grid = UniformGrid {
                start: FROM,
                step,
                count: ((TO - FROM) / step) as usize + 1,
            };
            let points = grid.points();
            let orbits = sum_on_grid(&sum_terms, &grid, s, DEFAULT_ACCURACY).staircase;
            let of_levels = levels::staircase(&list.values, &points, s);
            let residual: Vec<f64> = points
                .iter()
                .enumerate()
                .map(|(i, &k)| of_levels[i] - smooth.count(k, s) - orbits[i])
                .collect();
            let window = ResidualWindow {
                from: FROM,
                to: TO,
                list_end: 46.0,
                smoothing: s,
            };
            let rms = residual_rms(&points, &residual, &window)
                .rms
                .expect("points");
            (rms, residual)
        })
        .collect()
}

#[test]
fn quarter_and_full_shape_predict_the_levels() {
    let quarter = residuals("billiards/quarter-stadium.toml", None, 24);
    let full = residuals("billiards/stadium.toml", Some("odd,odd"), 20);
    for (((spacings, largest), (rms, a)), (rms_full, b)) in TARGETS.iter().zip(&quarter).zip(&full)
    {
        assert!(rms < largest, "{spacings} spacings, quarter: {rms}");
        assert!(
            rms_full < largest,
            "{spacings} spacings, class of the full shape: {rms_full}"
        );
        // Two routes, one answer. They differ by whispering-gallery orbits alone, since the quarter counts the bounces on
        // its straight walls too and so cuts their series earlier; the test below compares the terms themselves.
        let apart =
            (a.iter().zip(b).map(|(x, y)| (x - y).powi(2)).sum::<f64>() / a.len() as f64).sqrt();
        assert!(
            apart < 0.6 * largest,
            "{spacings} spacings, routes differ by {apart}"
        );
    }
}

/// Coefficients of the constant terms, those of one length added.
fn by_length(file: &str, class: Option<&str>, limits: Limits) -> Vec<(f64, Complex64)> {
    let domain = load(file).domain;
    let symmetry = detect(&domain);
    let irrep = class.map(|name| symmetry.class(name).expect("a class"));
    let catalogue = Catalogue::find(&domain, &symmetry, limits);
    let mut sums: Vec<(f64, Complex64)> = Vec::new();
    for term in terms(&catalogue, &ClassWeights::new(&symmetry, irrep)) {
        if term.amplitude != Amplitude::Constant {
            continue;
        }
        match sums
            .iter_mut()
            .find(|sum| (sum.0 - term.length).abs() < 1e-8)
        {
            Some(sum) => sum.1 += term.coefficient,
            None => sums.push((term.length, term.coefficient)),
        }
    }
    sums
}

/// Every term of the odd-odd class of the full stadium is a term of the quarter, with the same coefficient: corner
/// passages, orbits along walls and axes, joints and their repetitions.
#[test]
fn terms_of_both_routes_agree() {
    let limits = |max_bounces| Limits {
        max_length: 9.5,
        max_bounces,
    };
    let full = by_length("billiards/stadium.toml", Some("odd,odd"), limits(9));
    let quarter = by_length("billiards/quarter-stadium.toml", None, limits(24));
    assert!(full.len() > 30, "{} lengths", full.len());
    for (length, coefficient) in full {
        let other = quarter
            .iter()
            .find(|sum| (sum.0 - length).abs() < 1e-8)
            .map_or(Complex64::ZERO, |sum| sum.1);
        assert!(
            (coefficient - other).norm() < 1e-9,
            "length {length}: {coefficient} and {other}"
        );
    }
}

#[test]
fn mean_spacing_is_that_of_the_area() {
    let domain = load("billiards/quarter-stadium.toml").domain;
    let spacing = weyl(&domain, &detect(&domain), None).mean_spacing(25.0);
    let by_hand = 2.0 * PI / ((1.0 + PI / 4.0) * 25.0 - (4.0 + PI / 2.0) / 2.0);
    assert!(
        (spacing - by_hand).abs() < 1e-4 * by_hand,
        "{spacing} against {by_hand}"
    );
}
