//! The fast sum against direct summation.
//!
//! 1e5 terms on 1e6 points at accuracy 1e-10. Direct summation is timed on a thousandth of the points. For one thread set
//! RAYON_NUM_THREADS=1; tests/reference/fast_sum_yardstick.py times a general-purpose library on the same task.

use std::hint::black_box;

use criterion::{Criterion, criterion_group, criterion_main};
use num_complex::Complex64;
use orbitsum::trace::{Amplitude, Term, UniformGrid, sum_at, sum_on_grid};

const TERMS: usize = 100_000;
const POINTS: usize = 1_000_000;
const ACCURACY: f64 = 1e-10;

/// Terms with lengths up to `longest`, spread by multiples of irrational numbers.
fn terms(longest: f64, amplitude: Amplitude) -> Vec<Term> {
    let fraction = |index: usize, stride: f64| (index as f64 * stride).fract();
    let term = |index| Term {
        length: longest * fraction(index, 0.618_033_988_749_895),
        coefficient: Complex64::cis(6.0 * fraction(index, 0.414_213_562_373_095)),
        amplitude,
        repetition: 1,
    };
    (0..TERMS).map(term).collect()
}

fn fast_sum(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("1e5 terms");
    group.sample_size(10);
    let grid = UniformGrid {
        start: 20.0,
        step: 1e-3,
        count: POINTS,
    };
    let sorted = |mut terms: Vec<Term>| {
        terms.sort_by(|a, b| a.length.total_cmp(&b.length));
        terms
    };
    let narrow = sorted(terms(100.0, Amplitude::Constant));
    let wide = terms(6000.0, Amplitude::Constant);
    let tori = sorted(terms(100.0, Amplitude::Torus { slope: 0.0 }));
    let cases = [
        ("lengths to 100", &narrow),
        ("lengths over the whole period", &wide),
        ("tori", &tori),
    ];
    for (name, terms) in cases {
        group.bench_function(format!("fast, 1e6 points, {name}"), |bencher| {
            bencher.iter(|| black_box(sum_on_grid(terms, &grid, 0.0, ACCURACY)));
        });
    }
    let few = UniformGrid {
        count: POINTS / 1000,
        ..grid
    };
    group.bench_function("direct, 1e3 points, lengths to 100", |bencher| {
        let points = few.points();
        bencher.iter(|| black_box(sum_at(&narrow, &points, 0.0)));
    });
    group.finish();
}

criterion_group!(benches, fast_sum);
criterion_main!(benches);
