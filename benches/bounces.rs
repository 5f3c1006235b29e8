//! Bounces per second on one core, per kind of wall: one ray through the full map, and several rays side by side.
#![allow(missing_docs)]

use criterion::{BenchmarkId, Criterion, Throughput, criterion_group, criterion_main};
use orbitsum::billiard::{Domain, Event, Lanes, Origin, Ray, Rays, Tracer};
use orbitsum::system::load;
use std::hint::black_box;
use std::path::Path;

/// Bounces per measured call.
const BOUNCES: usize = 4096;

fn shape(name: &str) -> Domain {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(format!("billiards/{name}.toml"));
    match load(&path, &[]) {
        Ok(system) => system.domain,
        Err(error) => panic!("{}", error.render()),
    }
}

/// A ray from a wall, at a generic angle.
fn start(domain: &Domain, number: usize) -> Ray {
    let part = (0.137 + 0.618_033_988_749_895 * number as f64).fract();
    let angle = 3.0 * (0.211 + 0.754_877_666_246_693 * number as f64).fract() - 1.5;
    let wall = number % domain.walls.len();
    let t = part * domain.walls[wall].extent();
    let frame = domain.walls[wall].frame(t);
    Ray {
        point: frame.point,
        direction: frame.normal() * angle.cos() + frame.tangent * angle.sin(),
        origin: Origin::Wall { wall, t },
    }
}

/// The length of a trajectory.
fn single(tracer: &Tracer, mut ray: Ray, bounces: usize) -> f64 {
    let mut length = 0.0;
    for _ in 0..bounces {
        let Event::Wall(hit) = tracer.next(&ray) else {
            return length;
        };
        length += hit.distance;
        ray = Tracer::reflect(ray.direction, &hit);
    }
    length
}

fn several<const N: usize>(lanes: &Lanes<'_>, mut rays: Rays<N>, bounces: usize) -> f64 {
    let mut length = [0.0; N];
    for _ in 0..bounces / N {
        lanes.bounce(&mut rays);
        for (sum, distance) in length.iter_mut().zip(&rays.distance) {
            *sum += distance;
        }
    }
    length.iter().sum()
}

fn measure_lanes<const N: usize>(
    group: &mut criterion::BenchmarkGroup<'_, criterion::measurement::WallTime>,
    name: &str,
    domain: &Domain,
    lanes: &Lanes<'_>,
) {
    let starts: [Ray; N] = std::array::from_fn(|number| start(domain, number));
    let Ok(rays) = Rays::new(&starts) else { return };
    group.bench_function(BenchmarkId::new(format!("{N} rays"), name), |bencher| {
        bencher.iter(|| several(black_box(lanes), black_box(rays), BOUNCES));
    });
}

fn bounces(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("bounces");
    group.throughput(Throughput::Elements(BOUNCES as u64));
    for name in [
        "rectangle",
        "pentagon",
        "disk",
        "stadium",
        "sinai",
        "ellipse",
        "limacon",
        "oval",
    ] {
        let domain = shape(name);
        let tracer = Tracer::new(&domain);
        let ray = start(&domain, 3);
        group.bench_function(BenchmarkId::new("map", name), |bencher| {
            bencher.iter(|| single(black_box(&tracer), black_box(ray), BOUNCES));
        });
        if let Some(lanes) = Lanes::new(&domain, &tracer) {
            measure_lanes::<1>(&mut group, name, &domain, &lanes);
            measure_lanes::<8>(&mut group, name, &domain, &lanes);
            measure_lanes::<16>(&mut group, name, &domain, &lanes);
        }
    }
    group.finish();
}

criterion_group! {
    name = benches;
    config = Criterion::default().sample_size(20).measurement_time(std::time::Duration::from_millis(800)).warm_up_time(std::time::Duration::from_millis(200));
    targets = bounces
}
criterion_main!(benches);
