//! Statistics of the levels of shapes against what their orbits say, with no free parameter.
//!
//! Lists: data/levels/ (each names the call that made it). Diagonal sums and saturation: Berry, Proc. R. Soc. A 400 (1985) 229.

use orbitsum::baseline::weyl;
use orbitsum::billiard::{Irrep, detect};
use orbitsum::levels::read;
use orbitsum::levels::statistics::{
    LevelStatistics, MissingFraction, Orbits, Place, Reference, UnknownFraction, WindowPoint,
    level_statistics, unfold,
};
use orbitsum::orbit::{Catalogue, ClassWeights, Limits, terms};
use orbitsum::system::load;
use orbitsum::trace::{ClassDensity, Statistics, Term};
use std::path::Path;

#[path = "common/random_levels.rs"]
mod random_levels;
#[path = "../src/command/audit/statistics_picture.rs"]
mod statistics_picture;

use random_levels::{Random, thinned};

/// Places in a list over which curves are averaged.
const PLACES: usize = 9;

/// An unfolded list with all that is needed to judge it.
struct Subject {
    positions: Vec<f64>,
    expected: Reference,
    terms: Vec<Term>,
    max_length: f64,
    places: Vec<Place>,
}

impl Subject {
    /// A list of a shipped shape, of one class or all, with its orbits up to a length.
    fn new(shape: &str, class: Option<&str>, statistics: Statistics, max_length: f64) -> Self {
        let root = Path::new(env!("CARGO_MANIFEST_DIR"));
        let system = load(&root.join(format!("billiards/{shape}.toml")), &[]).expect("a shape");
        let file = match class {
            Some(class) => format!("data/levels/{shape}-{class}.csv"),
            None => format!("data/levels/{shape}.csv"),
        };
        let levels = read(&root.join(file)).expect("a list").values;
        let symmetry = detect(&system.domain);
        let irrep = class.map(|name| symmetry.class(name).expect("a class"));
        let smooth = weyl(&system.domain, &symmetry, irrep);
        let catalogue = Catalogue::find(
            &system.domain,
            &symmetry,
            Limits::up_to(max_length, &system.domain),
        );
        let place = |index: usize| {
            let k = levels[(2 * index + 1) * levels.len() / (2 * PLACES)];
            Place {
                k,
                density: smooth.density(k, 0.0),
            }
        };
        let places: Vec<Place> = (0..PLACES).map(place).collect();
        let present: Vec<&Irrep> = match irrep {
            Some(irrep) => vec![irrep],
            None => symmetry.irreps.iter().collect(),
        };
        let classes: Vec<ClassDensity> = present
            .iter()
            .map(|irrep| ClassDensity {
                density: weyl(&system.domain, &symmetry, Some(irrep))
                    .density(places[PLACES / 2].k, 0.0),
                dimension: irrep.dimension,
            })
            .collect();
        Self {
            positions: unfold(&levels, |k| smooth.count(k, 0.0)),
            expected: Reference::superposition(&classes, statistics).expect("classes"),
            terms: terms(&catalogue, &ClassWeights::new(&symmetry, irrep)),
            max_length,
            places,
        }
    }

    fn orbits(&self) -> Orbits<'_> {
        Orbits {
            shortest: self
                .terms
                .iter()
                .map(|term| term.length)
                .fold(f64::INFINITY, f64::min),
            terms: &self.terms,
            max_length: self.max_length,
            places: &self.places,
        }
    }

    fn measure(&self, positions: &[f64]) -> LevelStatistics {
        level_statistics(positions, &self.expected, Some(&self.orbits())).expect("statistics")
    }
}

/// Largest distance of measured points from a curve in standard errors, with a part of the curve's value allowed for its own error.
fn distance(points: &[WindowPoint], curve: impl Fn(&WindowPoint) -> f64) -> f64 {
    points
        .iter()
        .map(|point| {
            let value = curve(point);
            (point.value - value).abs() / point.error.hypot(0.03 * value)
        })
        .fold(0.0, f64::max)
}

fn of_orbits(point: &WindowPoint) -> f64 {
    point.orbits.expect("orbits were given")
}

/// Means of form factor and diagonal sum up to a time; every bin below it has both.
fn short_times(statistics: &LevelStatistics, to: f64) -> (f64, f64, f64) {
    let bins: Vec<_> = statistics
        .form_factor
        .iter()
        .filter(|bin| bin.to < to)
        .collect();
    let count = bins.len() as f64;
    assert!(count > 0.0);
    let value = bins.iter().map(|bin| bin.value).sum::<f64>() / count;
    let error = bins.iter().map(|bin| bin.error.powi(2)).sum::<f64>().sqrt() / count;
    let diagonal: f64 = bins
        .iter()
        .map(|bin| bin.diagonal.expect("orbits reach as far"))
        .sum();
    (value, error, diagonal / count)
}

/// Mean of the fractions found in lists from which levels were taken at random.
fn found_missing(subject: &Subject, missing: f64, lists: u64) -> [f64; 2] {
    let mut sums = [0.0; 2];
    for seed in 0..lists {
        let list = thinned(&subject.positions, 1.0 - missing, &mut Random::new(seed));
        let MissingFraction::Estimated(found) = subject.measure(&list).missing else {
            panic!("no estimate for seed {seed}");
        };
        sums[0] += found.number_variance.value / lists as f64;
        sums[1] += found.rigidity.value / lists as f64;
    }
    sums
}

/// The odd levels of the cardioid are more even than those of the ensemble, at all lengths: the orbits say so.
#[test]
fn the_cardioid_is_as_its_orbits_say() {
    let subject = Subject::new("cardioid", Some("odd"), Statistics::Orthogonal, 17.0);
    let statistics = subject.measure(&subject.positions);
    let spacings = &statistics.spacings;
    assert!(spacings.regular_fraction.value < 0.05);
    assert!(spacings.brody.value > 0.8);
    assert!(spacings.distance.orthogonal < 0.5 * spacings.distance.uncorrelated);
    let variance = distance(&statistics.number_variance, of_orbits);
    let rigidity = distance(&statistics.rigidity, of_orbits);
    assert!(variance < 2.5 && rigidity < 2.5, "{variance} {rigidity}");
    let random = distance(&statistics.number_variance, |point| point.orthogonal);
    assert!(random > 5.0, "{random}");
    let (value, error, diagonal) = short_times(&statistics, 0.17);
    assert!((value - diagonal).abs() < 3.0 * error);
    let saturation = statistics.saturation.expect("orbits were given");
    assert!(saturation.from_terms);
    // From a third of the length of saturation on, the number variance oscillates about its value.
    for point in statistics
        .number_variance
        .iter()
        .filter(|point| point.length >= 8.0)
    {
        assert!(
            (point.value / saturation.number_variance - 1.0).abs() < 0.15,
            "{point:?}"
        );
    }
    for missing in [0.05, 0.1] {
        let found = found_missing(&subject, missing, 20);
        assert!(
            found.iter().all(|value| (value - missing).abs() < 0.025),
            "{found:?}"
        );
    }
}

#[test]
fn the_quarter_stadium_is_as_its_orbits_say() {
    let subject = Subject::new("quarter-stadium", None, Statistics::Orthogonal, 12.0);
    let statistics = subject.measure(&subject.positions);
    assert!(statistics.spacings.regular_fraction.value < 0.1);
    assert!((statistics.spacings.brody.value - 0.953).abs() < 0.25);
    let variance = distance(&statistics.number_variance, of_orbits);
    let rigidity = distance(&statistics.rigidity, of_orbits);
    assert!(variance < 2.5 && rigidity < 2.5, "{variance} {rigidity}");
    let (value, error, diagonal) = short_times(&statistics, 0.11);
    assert!((value - diagonal).abs() < 3.0 * error);
    let MissingFraction::Estimated(found) = &statistics.missing else {
        panic!("{:?}", statistics.missing);
    };
    assert!(found.disagreement < 3.0);
    for fit in [found.spacings, found.number_variance, found.rigidity] {
        assert!(
            fit.value.abs() < 2.0 * fit.error.expect("an error"),
            "{found:?}"
        );
    }
    // The complete list has an error of its own, 0.04 for the rigidity, which all thinned ones share.
    let found = found_missing(&subject, 0.1, 20);
    assert!(
        found.iter().all(|value| (value - 0.1).abs() < 0.05),
        "{found:?}"
    );
    let picture = statistics_picture::picture("quarter stadium", &statistics, &[]);
    assert!(picture.contains("from the orbits") && !picture.contains("NaN"));
    if let Some(folder) = std::env::var_os("PICTURES") {
        let path = Path::new(&folder).join("statistics-quarter-stadium.svg");
        std::fs::write(path, picture).expect("written");
    }
}

/// An integrable shape: uncorrelated at small distances, saturated from the shortest orbit on.
#[test]
fn the_rectangle_saturates() {
    let subject = Subject::new("rectangle", None, Statistics::Uncorrelated, 12.0);
    let statistics = subject.measure(&subject.positions);
    let spacings = &statistics.spacings;
    assert!(spacings.distance.uncorrelated < 0.5 * spacings.distance.orthogonal);
    assert!(spacings.brody.value < 0.4);
    let variance = distance(&statistics.number_variance, of_orbits);
    let rigidity = distance(&statistics.rigidity, of_orbits);
    assert!(variance < 2.5 && rigidity < 2.5, "{variance} {rigidity}");
    let last = statistics.number_variance.last().expect("points");
    assert!(last.value < 0.25 * last.uncorrelated, "{last:?}");
    let (value, error, diagonal) = short_times(&statistics, 0.15);
    assert!((value - diagonal).abs() < 3.0 * error);
    assert_eq!(
        statistics.missing,
        MissingFraction::Unknown(UnknownFraction::Uncorrelated)
    );
    // Of the shortest orbit alone the value is that of random levels without it: right to a fifth here.
    let alone = Orbits {
        terms: &[],
        ..subject.orbits()
    };
    let bare = level_statistics(&subject.positions, &subject.expected, Some(&alone))
        .expect("statistics")
        .saturation
        .expect("a shortest orbit");
    let full = statistics.saturation.expect("orbits were given");
    assert!(!bare.from_terms && bare.length == full.length);
    assert!(
        (bare.rigidity / full.rigidity - 1.0).abs() < 0.2,
        "{bare:?} {full:?}"
    );
}

/// Both classes of the cardioid in one list.
#[test]
fn two_classes_in_one_list_are_a_superposition() {
    let subject = Subject::new("cardioid", None, Statistics::Orthogonal, 13.7);
    assert_eq!(subject.expected.sequences.len(), 2);
    let statistics = subject.measure(&subject.positions);
    let distances = statistics.spacings.distance;
    assert!(distances.expected < distances.orthogonal);
    assert!(distances.expected < distances.uncorrelated);
    let variance = distance(&statistics.number_variance, of_orbits);
    assert!(variance < 3.0, "{variance}");
}
