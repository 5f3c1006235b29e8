//! The whole `density` command on the quarter stadium, cold: a new process each time, from the system file to the table.
#![allow(missing_docs)]

use criterion::{Criterion, criterion_group, criterion_main};
use std::process::{Command, Stdio};

fn density(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("command");
    group.sample_size(10);
    group.bench_function("density billiards/quarter-stadium.toml", |bencher| {
        bencher.iter(|| {
            let status = Command::new(env!("CARGO_BIN_EXE_orbitsum"))
                .args(["density", "billiards/quarter-stadium.toml"])
                .current_dir(env!("CARGO_MANIFEST_DIR"))
                .stdout(Stdio::null())
                .stderr(Stdio::null())
                .status();
            assert!(matches!(&status, Ok(done) if done.success()), "{status:?}");
        });
    });
    group.finish();
}

criterion_group!(benches, density);
criterion_main!(benches);
