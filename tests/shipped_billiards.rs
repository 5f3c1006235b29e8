//! Every shape in billiards/ loads, and its area and perimeter are those of elementary geometry.

use orbitsum::system::{System, load};
use std::f64::consts::PI;
use std::path::{Path, PathBuf};

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("billiards")
}

fn shape(name: &str, settings: &[(&str, &str)]) -> System {
    let settings: Vec<(String, String)> = settings
        .iter()
        .map(|&(name, value)| (name.to_owned(), value.to_owned()))
        .collect();
    match load(&folder().join(format!("{name}.toml")), &settings) {
        Ok(system) => system,
        Err(error) => panic!("{}", error.render()),
    }
}

fn check(name: &str, settings: &[(&str, &str)], area: f64, perimeter: f64) {
    let system = shape(name, settings);
    let domain = &system.domain;
    assert!(
        (domain.area / area - 1.0).abs() < 1e-12,
        "{name}: area {} instead of {area}",
        domain.area
    );
    assert!(
        (domain.perimeter / perimeter - 1.0).abs() < 1e-12,
        "{name}: perimeter {} instead of {perimeter}",
        domain.perimeter
    );
    assert!(!system.name.is_empty() && !system.about.is_empty());
}

#[test]
fn polygons() {
    check("rectangle", &[], 1.3, 4.6);
    check(
        "rectangle",
        &[("b", "sqrt(2)")],
        2f64.sqrt(),
        2.0 + 8f64.sqrt(),
    );
    check("right-isosceles", &[], 0.5, 2.0 + 2f64.sqrt());
    check("equilateral", &[], 3f64.sqrt() / 4.0, 3.0);
    check("l-shape", &[("a", "2")], 12.0, 16.0);
    // Regular n-gon of side a: area n a^2 / (4 tan(pi/n)).
    check("pentagon", &[], 5.0 / (4.0 * (PI / 5.0).tan()), 5.0);
    // Both faces of the slit count in the perimeter.
    check("slit-square", &[], 1.0, 4.0 + 2.0 * 0.5);
}

#[test]
fn circles_and_lines() {
    check("disk", &[("R", "2")], 4.0 * PI, 4.0 * PI);
    check("half-disk", &[], PI / 2.0, PI + 2.0);
    check("annulus", &[], PI * 0.75, 3.0 * PI);
    check("stadium", &[("R", "0.5")], 4.0 * 0.5 + PI / 4.0, 4.0 + PI);
    check("quarter-stadium", &[], 1.0 + PI / 4.0, 4.0 + PI / 2.0);
    check("sinai", &[], 1.0 - PI / 16.0, 4.0 + PI / 2.0);
    // Triangle of legs 1/2, less an eighth of the disk; the diagonal is 1/sqrt(2) less the radius.
    let eighth = 0.25 + 0.5 + (0.5f64.sqrt() - 0.25) + PI / 16.0;
    check("sinai-eighth", &[], (1.0 - PI / 16.0) / 8.0, eighth);
    check("mushroom", &[], PI / 2.0 + 1.0, 1.0 + 2.0 + 1.0 + PI);
    // Two circular segments of half angle h = acos(d/(2R)), R = 1: area 2 h - (d/2) sqrt(4 - d^2), perimeter 4 h. d = 0.4, then 1.
    let half = 0.2f64.acos();
    check("lemon", &[], 2.0 * half - 0.2 * 3.84f64.sqrt(), 4.0 * half);
    let half = 0.5f64.acos();
    let area = 2.0 * half - 0.5 * 3f64.sqrt();
    check("lemon", &[("d", "1")], area, 4.0 * half);
}

#[test]
fn curves() {
    // Perimeter of the ellipse: 4 a E(m), m = 1 - b^2/a^2 = 0.64; mpmath 1.4.1: 4*ellipe(0.64).
    check("ellipse", &[], 0.6 * PI, ELLIPSE_PERIMETER);
    check("cardioid", &[], 1.5 * PI, 8.0);
    check("limacon", &[("e", "1")], 1.5 * PI, 8.0);
    // Perimeter of the limacon: 4 (1+e) E(4e/(1+e)^2); mpmath 1.4.1: 5.6*ellipe(1.6/1.96).
    check("limacon", &[], PI * (1.0 + 0.08), LIMACON_PERIMETER);
    check("limacon", &[("e", "0")], PI, 2.0 * PI);
    // Perimeter: mpmath 1.4.1, quad of sqrt(r^2 + r'^2) over [0, 2 pi] in 20 parts with 30 digits.
    let squares = 0.12f64.powi(2) + 0.04f64.powi(2) + 0.01f64.powi(2);
    check("oval", &[], PI * (1.0 + squares / 2.0), OVAL_PERIMETER);
}

const ELLIPSE_PERIMETER: f64 = 5.105399772679626;
const LIMACON_PERIMETER: f64 = 6.537133349575565;
const OVAL_PERIMETER: f64 = 6.395935586565089;

/// The folder holds the shapes that are tested here and no others.
#[test]
fn all_files_load() {
    let mut count = 0;
    for entry in std::fs::read_dir(folder()).expect("folder billiards") {
        let path = entry.expect("entry of billiards").path();
        if let Err(error) = load(&path, &[]) {
            panic!("{}", error.render());
        }
        count += 1;
    }
    assert_eq!(count, 19);
}

#[test]
fn faces_of_a_slit_know_each_other() {
    let domain = shape("slit-square", &[]).domain;
    assert_eq!(domain.walls[4].twin, Some(5));
    assert_eq!(domain.walls[5].twin, Some(4));
    for wall in [4, 5] {
        assert!((domain.vertices[wall].angle - 2.0 * PI).abs() < 1e-15);
    }
}
