//! Statistics of unfolded lists against random matrices, Poisson sequences and even sequences.
//!
//! Exact curves of the orthogonal ensemble: data/reference/orthogonal_ensemble.csv (scipy 1.17.1, mpmath 1.4.1; the script is named in its
//! first line). Eigenvalues of random matrices: faer, unfolded by Wigner's semicircle. Values "from memory" are those of Mehta, Random
//! Matrices, and of Brody et al., Rev. Mod. Phys. 53 (1981) 385.

use orbitsum::levels::statistics::{
    LevelStatistics, MissingFraction, Reference, StatisticsError, UnknownFraction, WindowPoint,
    level_statistics,
};
use orbitsum::trace::{ClassDensity, Statistics};
use std::path::Path;

#[path = "common/random_levels.rs"]
mod random_levels;

use random_levels::{
    INNER, Random, SIZE, assert_mean, mean, measure, orthogonal, superposed, uncorrelated,
};

fn at(points: &[WindowPoint], length: f64) -> &WindowPoint {
    points
        .iter()
        .find(|point| point.length == length)
        .expect("the length is measured")
}

#[test]
fn curves_are_those_of_general_libraries() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("data/reference/orthogonal_ensemble.csv");
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_path(path)
        .expect("the table exists");
    let mut rows = 0;
    for row in reader.deserialize() {
        let (quantity, length, observed, value): (String, f64, f64, f64) = row.expect("a row");
        let reference = Reference::orthogonal().thinned(observed);
        let (found, tolerance) = match quantity.as_str() {
            // A gap of s among those that are seen is one of s/f among all.
            "gap" => (
                reference.spacings().gap_probability(observed * length),
                1e-8,
            ),
            "variance" => (reference.number_variance(length), 1e-6),
            "rigidity" => (reference.rigidity(length), 1e-6),
            other => panic!("{other}"),
        };
        assert!(
            (found - value).abs() < tolerance,
            "{quantity} {length} {observed}: {found} {value}"
        );
        rows += 1;
    }
    assert_eq!(rows, 31);
}

/// Variance of the spacing 0.286 (from memory), where Wigner's surmise has 4/pi - 1 = 0.273; Sigma^2(1) = 0.446 (from memory).
#[test]
fn the_exact_distribution_is_not_the_surmise() {
    let curve = Reference::orthogonal().spacings();
    let step = 1e-3;
    let moment = |power: i32| -> f64 {
        (0..8000)
            .map(|index| (f64::from(index) + 0.5) * step)
            .map(|s| step * s.powi(power) * curve.density(s))
            .sum()
    };
    assert!((moment(0) - 1.0).abs() < 1e-6 && (moment(1) - 1.0).abs() < 1e-6);
    assert!((moment(2) - 1.0 - 0.286).abs() < 5e-4, "{}", moment(2));
    assert!((Reference::orthogonal().number_variance(1.0) - 0.446).abs() < 5e-4);
}

#[test]
fn curves_of_thinned_and_mixed_lists_hang_together() {
    let classes =
        [(0.6, 1), (0.4, 1)].map(|(density, dimension)| ClassDensity { density, dimension });
    let two = Reference::superposition(&classes, Statistics::Orthogonal).expect("classes");
    for reference in [
        Reference::orthogonal(),
        Reference::orthogonal().thinned(0.8),
        two.clone(),
        two.thinned(0.7),
        Reference::berry_robnik(0.3),
    ] {
        let curve = reference.spacings();
        let step = 2e-3;
        let points = || (0..8000).map(|index| (f64::from(index) + 0.5) * step);
        let moment = |power: i32| -> f64 {
            points()
                .map(|s| step * s.powi(power) * curve.density(s))
                .sum()
        };
        assert!((moment(0) - 1.0).abs() < 1e-5, "{reference:?}");
        assert!((moment(1) - 1.0).abs() < 2e-5, "{reference:?}");
        // Delta3 = (2/L^4) integral of (L^3 - 2 L^2 r + r^3) Sigma^2(r) dr
        let length = 4.0;
        let integral: f64 = (0..2000)
            .map(|index| (f64::from(index) + 0.5) * length / 2000.0)
            .map(|r| {
                let kernel = length.powi(3) - 2.0 * length * length * r + r.powi(3);
                length / 2000.0 * kernel * reference.number_variance(r)
            })
            .sum();
        let expected = 2.0 * integral / length.powi(4);
        assert!((reference.rigidity(length) - expected).abs() < 1e-5);
        // Without the shortest times the rigidity of long windows is the saturation value; the number variance oscillates about twice it.
        let from = 0.04;
        let saturation = reference.saturation(from);
        assert!((reference.rigidity_beyond(2000.0, from) / saturation - 1.0).abs() < 5e-3);
        let mean: f64 = (0..400)
            .map(|index| reference.number_variance_beyond(300.0 + f64::from(index), from) / 400.0)
            .sum();
        assert!(
            (mean / (2.0 * saturation) - 1.0).abs() < 0.01,
            "{reference:?}"
        );
    }
}

#[test]
fn random_matrices_have_their_statistics() {
    let expected = Reference::orthogonal();
    let lists: Vec<Vec<f64>> = (0..60)
        .map(|seed| orthogonal(SIZE, INNER, &mut Random::new(seed)))
        .collect();
    let all: Vec<LevelStatistics> = lists.iter().map(|list| measure(list, &expected)).collect();
    // The parameter of Brody's distribution nearest to that of the ensemble is 0.953 (from memory).
    assert_mean(
        all.iter().map(|one| one.spacings.brody.value),
        0.953,
        "Brody",
    );
    let covered = all
        .iter()
        .filter(|one| {
            let brody = one.spacings.brody;
            (brody.value - 0.953).abs() < brody.error.expect("an error")
        })
        .count();
    assert!((30..=52).contains(&covered), "{covered} of 60");
    for (index, point) in all[0].number_variance.iter().enumerate() {
        let length = point.length;
        let variance = |one: &LevelStatistics| one.number_variance[index].value;
        let rigidity = |one: &LevelStatistics| one.rigidity[index].value;
        assert_mean(
            all.iter().map(variance),
            expected.number_variance(length),
            "Sigma^2",
        );
        assert_mean(
            all.iter().map(rigidity),
            expected.rigidity(length),
            "Delta3",
        );
        for pick in [
            |one: &LevelStatistics| one.number_variance.clone(),
            |one: &LevelStatistics| one.rigidity.clone(),
        ] {
            let pull: f64 = all
                .iter()
                .map(|one| {
                    let point = pick(one)[index];
                    ((point.value - point.expected) / point.error).powi(2) / all.len() as f64
                })
                .sum();
            assert!(pull.sqrt() < 1.6, "{length}: {}", pull.sqrt());
        }
    }
    assert_mean(
        all.iter().map(|one| at(&one.number_variance, 1.0).value),
        0.446,
        "Sigma^2(1)",
    );
    for (index, bin) in all[0].form_factor.iter().enumerate() {
        let (value, error) = mean(all.iter().map(|one| one.form_factor[index].value));
        // A section cut out of the list mixes a little of all times into each: a few thousandths where the form factor is small.
        assert!(
            (value - bin.orthogonal).abs() < 3.5 * error + 0.003,
            "{bin:?}: {value} +- {error}"
        );
    }
    // All 17 940 spacings together; the largest distance of Wigner's surmise from the exact distribution is 0.0066.
    let mut spacings: Vec<f64> = lists
        .iter()
        .flat_map(|list| {
            let mean = (list[list.len() - 1] - list[0]) / (list.len() - 1) as f64;
            list.windows(2).map(move |pair| (pair[1] - pair[0]) / mean)
        })
        .collect();
    spacings.sort_by(f64::total_cmp);
    let distance = |cumulative: &dyn Fn(f64) -> f64| {
        spacings
            .iter()
            .enumerate()
            .map(|(index, s)| (cumulative(*s) - (index as f64 + 0.5) / spacings.len() as f64).abs())
            .fold(0.0, f64::max)
    };
    let curve = expected.spacings();
    let exact = distance(&|s| curve.cumulative(s));
    let limit = 1.36 / (spacings.len() as f64).sqrt();
    assert!(exact < limit, "{exact} {limit}");
}

#[test]
fn poisson_sequences_have_theirs() {
    let expected = Reference::uncorrelated();
    let all: Vec<LevelStatistics> = (0..60)
        .map(|seed| measure(&uncorrelated(2000, &mut Random::new(seed)), &expected))
        .collect();
    assert_mean(all.iter().map(|one| one.spacings.brody.value), 0.0, "Brody");
    // The likelihood is flat near 1: half of the lists are at the end, none is far from it.
    let regular = |one: &LevelStatistics| one.spacings.regular_fraction.value;
    let at_end = all.iter().filter(|one| regular(one) > 0.999).count();
    assert!((18..=42).contains(&at_end), "{at_end} of 60");
    assert!(all.iter().all(|one| regular(one) > 0.6));
    for length in [1.0, 5.0, 20.0] {
        // The mean density is that of the list.
        let pinned = length * (1.0 - length / 2000.0);
        assert_mean(
            all.iter().map(|one| at(&one.number_variance, length).value),
            pinned,
            "Sigma^2",
        );
        assert_mean(
            all.iter().map(|one| at(&one.rigidity, length).value),
            length / 15.0,
            "Delta3",
        );
    }
    for index in 0..all[0].form_factor.len() {
        assert_mean(
            all.iter().map(|one| one.form_factor[index].value),
            1.0,
            "form factor",
        );
    }
    // Kolmogorov's distance of independent values is larger in one case of a thousand (Kolmogorov's distribution, from memory).
    let noise = 1.95 / 2000_f64.sqrt();
    let curve = Reference::orthogonal().spacings();
    let apart = (1..400)
        .map(|index| 0.01 * f64::from(index))
        .map(|s| (1.0 - (-s).exp() - curve.cumulative(s)).abs())
        .fold(0.0, f64::max);
    for one in &all {
        assert_eq!(
            one.missing,
            MissingFraction::Unknown(UnknownFraction::Uncorrelated)
        );
        assert!(one.spacings.distance.orthogonal > apart - noise);
        assert!(one.spacings.distance.uncorrelated < noise);
    }
    // As a list of chaotic levels it would have to lack nearly all of them.
    for seed in 0..20 {
        let list = uncorrelated(300, &mut Random::new(seed));
        let missing = measure(&list, &Reference::orthogonal()).missing;
        match missing {
            MissingFraction::Unknown(
                UnknownFraction::TooMany { .. } | UnknownFraction::NotOrthogonal { .. },
            ) => {}
            MissingFraction::Estimated(found) => {
                assert!(found.spacings.value > 0.4, "{found:?}");
            }
            MissingFraction::Unknown(other) => panic!("{other}"),
        }
    }
}

/// Sigma^2 = r (1 - r), r the fractional part of L. Over a whole number L of periods the sawtooth about its mean line has variance 1/12, of
/// which the best line takes 12 <f z>^2/L^2 away, on the average over phases 1/(60 L^2) (sum of 1/n^4).
#[test]
fn even_sequences_have_the_sawtooth() {
    let positions: Vec<f64> = (0..400).map(f64::from).collect();
    let statistics = measure(&positions, &Reference::orthogonal());
    for (variance, rigidity) in statistics.number_variance.iter().zip(&statistics.rigidity) {
        let length = variance.length;
        let fraction = length.fract();
        assert!((variance.value - fraction * (1.0 - fraction)).abs() < 1e-3);
        if fraction == 0.0 {
            let expected = 1.0 / 12.0 - 1.0 / (60.0 * length * length);
            assert!((rigidity.value - expected).abs() < 1e-5, "{length}");
        }
        assert!(variance.error < 2e-3 && rigidity.error < 1e-3);
    }
    assert!(matches!(
        statistics.missing,
        MissingFraction::Unknown(UnknownFraction::NotOrthogonal { .. })
    ));
    assert_eq!(statistics.spacings.regular_fraction.value, 0.0);
}

/// Two classes of unequal density in one list.
#[test]
fn superpositions_have_the_statistics_of_their_parts() {
    let shares = [0.6, 0.4];
    let classes = shares.map(|density| ClassDensity {
        density,
        dimension: 1,
    });
    let expected = Reference::superposition(&classes, Statistics::Orthogonal).expect("classes");
    let lists: Vec<Vec<f64>> = (0..60)
        .map(|seed| {
            let mut random = Random::new(seed);
            let sequences = [300, 200].map(|size| orthogonal(size, INNER, &mut random));
            superposed(&sequences, &shares)
        })
        .collect();
    let all: Vec<LevelStatistics> = lists.iter().map(|list| measure(list, &expected)).collect();
    for length in [1.0, 4.0, 10.0] {
        assert_mean(
            all.iter().map(|one| at(&one.number_variance, length).value),
            expected.number_variance(length),
            "Sigma^2",
        );
        assert_mean(
            all.iter().map(|one| at(&one.rigidity, length).value),
            expected.rigidity(length),
            "Delta3",
        );
    }
    for one in &all {
        let distance = one.spacings.distance;
        assert!(distance.expected < 1.95 / (one.spacings.count as f64).sqrt());
    }
}

/// Every level twice, as in a class of dimension two.
#[test]
fn repeated_levels_are_expected_or_reported() {
    let single = orthogonal(SIZE, INNER, &mut Random::new(7));
    let double: Vec<f64> = single.iter().flat_map(|x| [2.0 * x, 2.0 * x]).collect();
    let class = ClassDensity {
        density: 1.0,
        dimension: 2,
    };
    let expected = Reference::superposition(&[class], Statistics::Orthogonal).expect("a class");
    let statistics = measure(&double, &expected);
    assert_eq!(statistics.spacings.repeated, single.len());
    assert!(statistics.spacings.distance.expected < 0.05);
    assert!(statistics.spacings.distance.orthogonal > 0.4);
    // The fits are those of the distinct levels.
    let of_single = measure(&single, &Reference::orthogonal());
    let difference = statistics.spacings.brody.value - of_single.spacings.brody.value;
    assert!(difference.abs() < 1e-5, "{difference}");
    assert!(statistics.spacings.distance.brody < 0.05);
    for (point, half) in [(2.0, 1.0), (10.0, 5.0), (20.0, 10.0)] {
        let double = at(&statistics.number_variance, point).value;
        let single = at(&of_single.number_variance, half).value;
        // The mean spacing of the doubled list is a little off: two levels of a pair are no spacing apart.
        assert!(
            (double / (4.0 * single) - 1.0).abs() < 0.02,
            "{double} {single}"
        );
    }
    assert_eq!(
        statistics.missing,
        MissingFraction::Unknown(UnknownFraction::Multiple)
    );
    let missing = measure(&double, &Reference::orthogonal()).missing;
    assert_eq!(
        missing,
        MissingFraction::Unknown(UnknownFraction::Repeated {
            repeated: single.len()
        })
    );
}

#[test]
fn unusable_lists_are_refused() {
    let refused = |positions: &[f64]| {
        level_statistics(positions, &Reference::orthogonal(), None).expect_err("refused")
    };
    let even: Vec<f64> = (0..30).map(f64::from).collect();
    assert_eq!(refused(&[]), StatisticsError::TooFew { levels: 0 });
    assert_eq!(refused(&even[..19]), StatisticsError::TooFew { levels: 19 });
    assert_eq!(refused(&[2.0; 25]), StatisticsError::NoSpan);
    let mut broken = even.clone();
    broken[4] = f64::INFINITY;
    assert!(matches!(
        refused(&broken),
        StatisticsError::NotFinite { index: 4, .. }
    ));
    broken[4] = 9.0;
    assert_eq!(refused(&broken), StatisticsError::NotAscending { index: 5 });
    let mut wide = vec![f64::MAX; 25];
    wide[0] = -f64::MAX;
    assert_eq!(refused(&wide), StatisticsError::NoSpan);
    assert!(refused(&even[..3]).to_string().contains("20 are needed"));
}

/// Whatever ascends has finite statistics.
#[test]
fn strange_lists_have_statistics() {
    let mut gap: Vec<f64> = (0..40).map(|n| 1e-9 * f64::from(n)).collect();
    gap.push(1e9);
    let steps: Vec<f64> = (0..60).map(|n| f64::from(n / 20)).collect();
    let short: Vec<f64> = (0..20).map(|n| f64::from(n * n)).collect();
    for list in [gap, steps, short] {
        for expected in [
            Reference::orthogonal(),
            Reference::uncorrelated(),
            Reference::berry_robnik(0.5),
        ] {
            let statistics = measure(&list, &expected);
            let text = serde_json::to_string(&statistics).expect("serialised");
            // JSON has no number for what is not finite.
            let nulls = text.matches("null").count();
            let none = text.matches("\"orbits\":null").count()
                + text.matches("\"diagonal\":null").count()
                + text.matches("\"saturation\":null").count()
                + text.matches("\"error\":null").count();
            assert_eq!(nulls, none, "{text}");
        }
    }
}

/// Of a very long list the middle is measured.
#[test]
fn long_lists_are_cut() {
    let mut list: Vec<f64> = (0..10_000).map(|n| 0.001 * f64::from(n)).collect();
    let middle = uncorrelated(30_000, &mut Random::new(11));
    list.extend(middle.iter().map(|x| 10.0 + x));
    let last = list[list.len() - 1];
    list.extend((0..10_000).map(|n| last + 0.001 * f64::from(n)));
    let statistics = measure(&list, &Reference::uncorrelated());
    assert_eq!((statistics.levels, statistics.used), (50_000, 30_000));
    let of_middle = measure(&middle, &Reference::uncorrelated());
    let difference = statistics.spacings.brody.value - of_middle.spacings.brody.value;
    assert!(difference.abs() < 1e-6, "{difference}");
}

#[test]
fn results_do_not_depend_on_the_number_of_threads() {
    let list = orthogonal(1500, 0.9, &mut Random::new(3));
    let run = |threads: usize| {
        rayon::ThreadPoolBuilder::new()
            .num_threads(threads)
            .build()
            .expect("a pool")
            .install(|| measure(&list, &Reference::orthogonal()))
    };
    assert_eq!(run(1), run(4));
}
