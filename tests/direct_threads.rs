//! Directly computed levels do not depend on the number of threads, to the last digit.

#[path = "common/direct.rs"]
mod direct;

use direct::{rows, shape, solve, solve_below};
use orbitsum::billiard::detect;

#[test]
fn one_and_three_threads() {
    for (name, top) in [("quarter-stadium", 25.0), ("mushroom", 15.0)] {
        let domain = shape(name, &[]);
        let with = |threads: usize| {
            let pool = rayon::ThreadPoolBuilder::new()
                .num_threads(threads)
                .build()
                .expect("a pool");
            let found = pool.install(|| solve_below(name, &domain, top));
            let bits = |x: f64| x.to_bits();
            found
                .iter()
                .map(|row| (bits(row.k), bits(row.error), row.multiplicity))
                .collect::<Vec<_>>()
        };
        let one = with(1);
        assert!(one.len() > 30, "{name}: {}", one.len());
        assert_eq!(one, with(3), "{name}");
    }
}

/// Levels of a window do not depend on the window by more than their errors.
#[test]
fn overlapping_windows() {
    let domain = shape("quarter-stadium", &[]);
    let symmetry = detect(&domain);
    let list = |window| rows(&solve("quarter stadium", &domain, &symmetry, None, window));
    let wide = list([0.0, 25.0]);
    let narrow = list([15.0, 20.0]);
    let same: Vec<_> = wide
        .iter()
        .filter(|row| (15.0..20.0).contains(&row.k))
        .collect();
    assert_eq!(same.len(), narrow.len());
    for (a, b) in same.iter().zip(&narrow) {
        assert!((a.k - b.k).abs() <= a.error + b.error, "{a:?} and {b:?}");
    }
}
