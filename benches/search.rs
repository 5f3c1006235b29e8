//! The complete search for the periodic orbits of the stadium up to length 12 and 20 bounces, on one thread.
#![allow(missing_docs)]

use criterion::{Criterion, criterion_group, criterion_main};
use orbitsum::billiard::{Domain, detect};
use orbitsum::orbit::{Catalogue, Limits};
use orbitsum::system::load;
use std::hint::black_box;
use std::path::Path;

const LIMITS: Limits = Limits {
    max_length: 12.0,
    max_bounces: 20,
};

fn stadium() -> Domain {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("billiards/stadium.toml");
    match load(&path, &[]) {
        Ok(system) => system.domain,
        Err(error) => panic!("{}", error.render()),
    }
}

fn search(criterion: &mut Criterion) {
    let domain = stadium();
    let symmetry = detect(&domain);
    let one_thread = match rayon::ThreadPoolBuilder::new().num_threads(1).build() {
        Ok(pool) => pool,
        Err(error) => panic!("{error}"),
    };
    let mut group = criterion.benchmark_group("search");
    group.sample_size(10);
    group.bench_function("stadium, length 12, 20 bounces, one thread", |bencher| {
        bencher
            .iter(|| one_thread.install(|| black_box(Catalogue::find(&domain, &symmetry, LIMITS))));
    });
    group.finish();
}

criterion_group!(benches, search);
criterion_main!(benches);
