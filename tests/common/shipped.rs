//! Shapes that are read from system files.
#![allow(dead_code)]

use orbitsum::billiard::Domain;
use orbitsum::system::load;
use std::path::Path;

/// The domain of billiards/NAME.toml with some parameters set.
pub(crate) fn shape(name: &str, settings: &[(&str, &str)]) -> Domain {
    read("billiards", name, settings)
}

/// The domain of tests/shapes/NAME.toml with some parameters set.
pub(crate) fn test_shape(name: &str, settings: &[(&str, &str)]) -> Domain {
    read("tests/shapes", name, settings)
}

fn read(folder: &str, name: &str, settings: &[(&str, &str)]) -> Domain {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(format!("{folder}/{name}.toml"));
    let settings: Vec<(String, String)> = settings
        .iter()
        .map(|&(name, value)| (name.to_owned(), value.to_owned()))
        .collect();
    match load(&path, &settings) {
        Ok(system) => system.domain,
        Err(error) => panic!("{}", error.render()),
    }
}
