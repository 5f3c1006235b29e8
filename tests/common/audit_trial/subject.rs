//! The shapes of the trial with their true levels and what the audit is told of them.

use orbitsum::baseline::{Weyl, weyl};
use orbitsum::billiard::{Domain, Symmetry, detect};
use orbitsum::levels::audit::{LeftOut, Prediction};
use orbitsum::levels::read;
use orbitsum::orbit::{Catalogue, ClassWeights, Limits, terms, tori};
use orbitsum::system::load;
use std::f64::consts::PI;
use std::path::Path;

/// Shapes whose orbit sum is exact.
pub(crate) const GROUP_1: [&str; 3] = ["rectangle", "right-isosceles", "equilateral"];
/// Chaotic shapes whose orbit sum has no known gap but higher orders.
pub(crate) const GROUP_2: [&str; 2] = ["quarter-stadium", "cardioid-odd"];
/// Shapes whose orbit sum is one of leading order, lacks diffraction or is poor near bifurcations.
pub(crate) const GROUP_3: [&str; 8] = [
    "disk",
    "annulus",
    "ellipse",
    "sinai-eighth",
    "lemon",
    "oval",
    "pentagon",
    "l-shape",
];
/// All of them.
pub(crate) const SHAPES: [&[&str]; 3] = [&GROUP_1, &GROUP_2, &GROUP_3];

/// Levels of a true list.
const LEVELS: usize = 300;
/// Smoothing that the longest orbits are to allow, in mean spacings at the end of the list, and that smoothing times the longest
/// orbit: finer smoothing places levels better and needs a number of orbits that grows exponentially in chaotic shapes.
const SPACINGS: f64 = 1.5;
const REACH: f64 = 2.5;
/// Longest orbit of a polygon in mean chords of one symmetry copy of it: the strips grow in number as a power of the length.
const POLYGON_CHORDS: f64 = 40.0;

/// The group of a shape, 1 to 3.
pub(crate) fn group(name: &str) -> usize {
    1 + SHAPES
        .iter()
        .position(|shapes| shapes.contains(&name))
        .unwrap_or_else(|| panic!("{name} is no shape of the trial"))
}

/// A shape, or one class of it, with its true levels.
#[derive(Clone, Debug)]
pub(crate) struct Subject {
    pub(crate) name: String,
    pub(crate) prediction: Prediction,
    /// Ascending, each as often as its multiplicity says.
    pub(crate) truth: Vec<f64>,
}

impl Subject {
    /// A shape of `billiards/` and its first 300 levels; NAME-odd is the odd class of NAME.
    pub(crate) fn new(name: &str) -> Self {
        Self::of_list(name, name, LEVELS)
    }

    /// A shape and the first `count` levels of `data/levels/LIST.csv`.
    pub(crate) fn of_list(name: &str, list: &str, count: usize) -> Self {
        let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(format!("data/levels/{list}.csv"));
        let mut truth = read(&path).expect("a shipped list").values;
        truth.truncate(count);
        Self {
            name: name.to_owned(),
            prediction: prediction(name, &[], truth[truth.len() - 1]),
            truth,
        }
    }

    /// The same shape with another size: with these parameters its levels are those of the shape times `factor`.
    pub(crate) fn scaled(&self, settings: &[(&str, f64)], factor: f64) -> Self {
        let truth: Vec<f64> = self.truth.iter().map(|k| k * factor).collect();
        Self {
            name: self.name.clone(),
            prediction: prediction(&self.name, settings, truth[truth.len() - 1]),
            truth,
        }
    }

    /// The same with the smooth count alone.
    pub(crate) fn without_orbits(&self) -> Self {
        let prediction = Prediction {
            terms: Vec::new(),
            ..self.prediction.clone()
        };
        Self {
            prediction,
            ..self.clone()
        }
    }

    /// Local mean spacing.
    pub(crate) fn spacing(&self, k: f64) -> f64 {
        1.0 / self.prediction.weyl.density(k, 0.0)
    }
}

/// Smooth count and orbit sum of a shape with some parameters set, for a list that ends at this k.
fn prediction(name: &str, settings: &[(&str, f64)], end: f64) -> Prediction {
    let (file, class) = match name.strip_suffix("-odd") {
        Some(file) => (file, Some("odd")),
        None => (name, None),
    };
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(format!("billiards/{file}.toml"));
    let settings: Vec<(String, String)> = settings
        .iter()
        .map(|&(name, value)| (name.to_owned(), value.to_string()))
        .collect();
    let system = match load(&path, &settings) {
        Ok(system) => system,
        Err(error) => panic!("{}", error.render()),
    };
    let domain = &system.domain;
    let symmetry = detect(domain);
    let irrep = class.map(|class| symmetry.class(class).expect("a class"));
    let weyl = weyl(domain, &symmetry, irrep);
    let max_length = longest(domain, &symmetry, &weyl, end);
    let catalogue = Catalogue::find(domain, &symmetry, Limits::up_to(max_length, domain));
    let left_out = catalogue.omissions.iter().map(|omission| LeftOut {
        what: omission.kind.to_string(),
        count: omission.count,
        length: omission.length,
        amplitude: omission.amplitude,
        power: omission.power,
    });
    Prediction {
        terms: terms(&catalogue, &ClassWeights::new(&symmetry, irrep)),
        left_out: left_out.collect(),
        weyl,
        max_length,
    }
}

/// Longest orbits worth their cost, as the program chooses them.
fn longest(domain: &Domain, symmetry: &Symmetry, weyl: &Weyl, end: f64) -> f64 {
    let wanted = REACH * weyl.density(end, 0.0) / SPACINGS;
    if tori::recognise(domain).is_some() {
        return wanted;
    }
    if domain.walls.iter().all(|wall| wall.is_straight()) {
        return wanted.min(POLYGON_CHORDS * copy_chord(domain, symmetry));
    }
    Limits::up_to(wanted, domain)
        .affordable(domain, symmetry)
        .max_length
}

/// Mean chord of one symmetry copy of a domain, pi area/perimeter, with the pieces of axes that bound it.
fn copy_chord(domain: &Domain, symmetry: &Symmetry) -> f64 {
    let copy = weyl(domain, symmetry, Some(&symmetry.irreps[0]));
    let walls = copy.terms.iter().filter(|term| term.power == 1);
    let perimeter: f64 = walls.map(|term| term.coefficient.abs()).sum();
    PI * copy.coefficient(2) / perimeter
}
