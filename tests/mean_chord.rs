//! Mean chord and Lyapunov exponent of the shapes in billiards/.

use orbitsum::billiard::{Domain, Dynamics, Tracer, dynamics};
use orbitsum::system::load;
use std::f64::consts::PI;
use std::path::Path;

const BOUNCES: usize = 200_000;

fn shape(name: &str, settings: &[(&str, &str)]) -> Domain {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(format!("billiards/{name}.toml"));
    let settings: Vec<(String, String)> = settings
        .iter()
        .map(|&(name, value)| (name.to_owned(), value.to_owned()))
        .collect();
    match load(&path, &settings) {
        Ok(system) => system.domain,
        Err(error) => panic!("{}", error.render()),
    }
}

fn measure(name: &str, settings: &[(&str, &str)]) -> Dynamics {
    let domain = shape(name, settings);
    let found = dynamics(&domain, &Tracer::new(&domain), BOUNCES);
    println!(
        "{name:18} chord {:.6} +- {:.6} exact {:.6} ({:+.1}) lyapunov {:.5} +- {:.5} horizon {:?} stopped {} {}",
        found.mean_chord,
        found.mean_chord_error,
        PI * domain.area / domain.perimeter,
        (found.mean_chord - PI * domain.area / domain.perimeter) / found.mean_chord_error,
        found.lyapunov_per_bounce,
        found.lyapunov_error,
        found.horizon_bounces,
        found.stopped,
        found.escaped
    );
    found
}

#[test]
fn scratch() {
    for entry in
        std::fs::read_dir(Path::new(env!("CARGO_MANIFEST_DIR")).join("billiards")).expect("folder")
    {
        let path = entry.expect("entry").path();
        let name = path
            .file_stem()
            .expect("stem")
            .to_string_lossy()
            .into_owned();
        let t = std::time::Instant::now();
        measure(&name, &[]);
        println!("   {:?}", t.elapsed());
    }
    measure("limacon", &[("e", "1")]);
    measure("limacon", &[("e", "0.9")]);
    measure("limacon", &[("e", "0.1")]);
}
