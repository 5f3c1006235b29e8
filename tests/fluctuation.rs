//! Expected fluctuation of the staircase against the levels of a quarter stadium.

use orbitsum::baseline::weyl;
use orbitsum::billiard::Symmetry;
use orbitsum::levels::read;
use orbitsum::orbit::{Catalogue, ClassWeights, Limits, terms};
use orbitsum::system::load;
use orbitsum::trace::{ClassDensity, Statistics, expected_fluctuation};
use std::path::Path;

/// Root mean square of the unsmoothed staircase of the list about the smooth count.
fn counted(levels: &[f64], from: f64, to: f64, smooth: impl Fn(f64) -> f64) -> f64 {
    let points = 20_000;
    let square: f64 = (0..points)
        .map(|i| {
            let k = from + (to - from) * (f64::from(i) + 0.5) / f64::from(points);
            let below = levels.partition_point(|level| *level < k) as f64;
            (below - smooth(k)).powi(2)
        })
        .sum();
    (square / f64::from(points)).sqrt()
}

/// The list is that of data/quarter-stadium.csv (its first line is the call that made it). A window holds some 60 independent spacings, so
/// its rms is known to about a tenth; the estimate has no free parameter, and must not depend on how many orbits are known.
#[test]
fn the_quarter_stadium_fluctuates_as_expected() {
    let system = load(Path::new("billiards/quarter-stadium.toml"), &[]).expect("a shipped file");
    let levels = read(Path::new("data/quarter-stadium.csv")).expect("a shipped list");
    let symmetry = Symmetry::trivial();
    let expansion = weyl(&system.domain, &symmetry, None);
    for max_length in [3.0, 6.0] {
        let limits = Limits::up_to(max_length, &system.domain);
        let catalogue = Catalogue::find(&system.domain, &symmetry, limits);
        let terms = terms(&catalogue, &ClassWeights::new(&symmetry, None));
        for (from, to) in [(8.0, 16.0), (16.0, 26.0), (26.0, 36.0), (36.0, 45.0)] {
            let middle = 0.5 * (from + to);
            let class = ClassDensity {
                density: expansion.density(middle, 0.0),
                dimension: 1,
            };
            let expected =
                expected_fluctuation(&terms, middle, max_length, &[class], Statistics::Orthogonal);
            let counted = counted(&levels.values, from, to, |k| expansion.count(k, 0.0));
            assert!(
                (expected / counted - 1.0).abs() < 0.1,
                "k from {from} to {to}, orbits up to {max_length}: {expected} against {counted}"
            );
        }
    }
}
