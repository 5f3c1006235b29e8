//! The fraction of missing levels from random matrices of which levels were taken at random.
//!
//! Formulas: Bohigas & Pato, Phys. Lett. B 595 (2004) 171, Phys. Rev. E 74 (2006) 036212. Eigenvalues: faer, unfolded by Wigner's
//! semicircle.

use orbitsum::levels::statistics::{
    Fit, LevelStatistics, MissingEstimates, MissingFraction, Reference,
};
use orbitsum::trace::{ClassDensity, Statistics};

#[path = "common/random_levels.rs"]
mod random_levels;

use random_levels::{INNER, Random, SIZE, assert_mean, measure, orthogonal, superposed, thinned};

/// Names, values and errors of the three estimates over many lists.
fn estimates(all: &[LevelStatistics]) -> [(&'static str, Vec<Fit>); 3] {
    let found = |pick: fn(&MissingEstimates) -> Fit| -> Vec<Fit> {
        all.iter()
            .filter_map(|one| match &one.missing {
                MissingFraction::Estimated(found) => Some(pick(found)),
                MissingFraction::Unknown(_) => None,
            })
            .collect()
    };
    [
        ("spacings", found(|found| found.spacings)),
        ("number variance", found(|found| found.number_variance)),
        ("rigidity", found(|found| found.rigidity)),
    ]
}

/// The mean over the lists is the truth, and the errors cover it as often as errors should (68 in 100; here 48 to 85 are accepted).
fn assert_estimates(all: &[LevelStatistics], missing: f64) {
    for (name, fits) in estimates(all) {
        // A list in a hundred is refused by the distance of its spacings.
        assert!(100 * fits.len() >= 97 * all.len(), "{name}: {}", fits.len());
        assert_mean(fits.iter().map(|fit| fit.value), missing, name);
        let covered = fits
            .iter()
            .filter(|fit| (fit.value - missing).abs() < fit.error.unwrap_or(0.0))
            .count();
        let share = covered as f64 / fits.len() as f64;
        assert!((0.48..=0.85).contains(&share), "{name}: {share}");
    }
}

#[test]
fn missing_levels_of_random_matrices_are_counted() {
    for (missing, first) in [(0.1, 0), (0.2, 1000)] {
        let all: Vec<LevelStatistics> = (first..first + 100)
            .map(|seed| {
                let mut random = Random::new(seed);
                let list = orthogonal(SIZE, INNER, &mut random);
                measure(
                    &thinned(&list, 1.0 - missing, &mut random),
                    &Reference::orthogonal(),
                )
            })
            .collect();
        assert_estimates(&all, missing);
    }
}

/// Complete lists: the spacings cannot come out below zero, the others can.
#[test]
fn nothing_is_missing_in_complete_lists() {
    let all: Vec<LevelStatistics> = (0..100)
        .map(|seed| {
            measure(
                &orthogonal(SIZE, INNER, &mut Random::new(seed)),
                &Reference::orthogonal(),
            )
        })
        .collect();
    let [(_, spacings), (_, variance), (_, rigidity)] = estimates(&all);
    let covered = |fits: &[Fit]| {
        fits.iter()
            .filter(|fit| fit.value - 2.0 * fit.error.unwrap_or(0.0) < 0.0)
            .count()
    };
    assert!(covered(&spacings) >= 93, "{}", covered(&spacings));
    assert!(covered(&variance) >= 85 && covered(&rigidity) >= 85);
    assert_mean(variance.iter().map(|fit| fit.value), 0.0, "number variance");
    assert_mean(rigidity.iter().map(|fit| fit.value), 0.0, "rigidity");
}

/// Two classes of unequal density in one list: the relations for thinned lists hold for any complete list.
#[test]
fn missing_levels_of_superpositions_are_counted() {
    let shares = [0.6, 0.4];
    let classes = shares.map(|density| ClassDensity {
        density,
        dimension: 1,
    });
    let expected = Reference::superposition(&classes, Statistics::Orthogonal).expect("classes");
    let missing = 0.1;
    let all: Vec<LevelStatistics> = (0..60)
        .map(|seed| {
            let mut random = Random::new(seed);
            let sequences = [300, 200].map(|size| orthogonal(size, INNER, &mut random));
            let list = superposed(&sequences, &shares);
            measure(&thinned(&list, 1.0 - missing, &mut random), &expected)
        })
        .collect();
    for (name, fits) in estimates(&all) {
        assert_mean(fits.iter().map(|fit| fit.value), missing, name);
    }
}
