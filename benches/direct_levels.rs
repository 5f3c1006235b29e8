//! Directly computed levels of the quarter stadium on one thread: time per level, and how it grows with k.
//!
//! `cargo bench --bench direct_levels -- --quick`. The windows hold 60 to 140 levels; their number is in the name, so that a time
//! divided by it is the time per level.

use criterion::{Criterion, criterion_group, criterion_main};
use orbitsum::billiard::detect;
use orbitsum::solver::Solver;
use orbitsum::system::load;
use std::hint::black_box;
use std::path::Path;

/// Windows of k and the relative accuracy that is asked for.
const CASES: [(f64, f64, f64); 6] = [
    (0.0, 40.0, 1e-5),
    (0.0, 40.0, 1e-10),
    (47.5, 52.5, 1e-8),
    (75.0, 80.0, 1e-8),
    (75.0, 80.0, 1e-10),
    (95.0, 100.0, 1e-8),
];

fn levels(bench: &mut Criterion) {
    let threads = rayon::ThreadPoolBuilder::new()
        .num_threads(1)
        .build()
        .expect("one thread");
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("billiards/quarter-stadium.toml");
    let system = load(&path, &[]).expect("a shipped shape");
    let symmetry = detect(&system.domain);
    let mut group = bench.benchmark_group("quarter stadium, one thread");
    group.sample_size(10);
    for (from, to, accuracy) in CASES {
        let solve = || {
            let solver = Solver::new(&system.domain, &symmetry, None)
                .expect("a regular shape")
                .with_accuracy(accuracy);
            threads.install(|| solver.levels(from, to).expect("levels"))
        };
        let count = solve().found();
        let name = format!("k {from} to {to}, accuracy {accuracy:.0e}, {count} levels");
        group.bench_function(name, |bencher| bencher.iter(|| black_box(solve())));
    }
    group.finish();
}

criterion_group!(benches, levels);
criterion_main!(benches);
