//! The judge of level lists finds what is wrong with a list: each check of the direct solver rests on it.

#[path = "common/judge.rs"]
mod judge;

use judge::{Expected, Found, judge};

const CLAIM: f64 = 1e-10;

/// Invented levels, every third one double.
fn exact() -> Vec<f64> {
    let mut levels = Vec::new();
    for n in 0..300 {
        let k = 2.0 + 0.2 * f64::from(n) + 0.05 * f64::from(n * n % 7);
        levels.extend(vec![k; if n % 3 == 0 { 2 } else { 1 }]);
    }
    levels.sort_by(f64::total_cmp);
    levels
}

/// The same as rows, each off by 1e-12 and stating ten times that.
fn rows(levels: &[f64]) -> Vec<Found> {
    levels
        .chunk_by(|a, b| a == b)
        .enumerate()
        .map(|(n, group)| Found {
            k: group[0] * (1.0 + if n % 2 == 0 { 1e-12 } else { -1e-12 }),
            error: 1e-11 * group[0],
            multiplicity: group.len(),
        })
        .collect()
}

fn verdict(found: &[Found]) -> Result<judge::Verdict, String> {
    let levels = exact();
    let expected = Expected {
        levels: &levels,
        degenerate: true,
        claim: CLAIM,
    };
    judge(found, &expected)
}

/// A changed list is refused with a complaint that holds some words.
fn refused(change: impl Fn(&mut Vec<Found>), words: &str) {
    let mut found = rows(&exact());
    change(&mut found);
    let complaint = verdict(&found).expect_err(words);
    assert!(complaint.contains(words), "{complaint}");
}

#[test]
fn a_good_list() {
    let verdict = verdict(&rows(&exact())).expect("a good list");
    assert_eq!(verdict.count, 400);
    assert_eq!(verdict.broken, 0);
    assert!(verdict.worst > 0.9e-12 && verdict.worst < 1.1e-12);
    assert!((verdict.median - 10.0).abs() < 0.1, "{}", verdict.median);
}

/// The first row from `from` on with a given multiplicity.
fn place(found: &[Found], from: usize, multiplicity: usize) -> usize {
    let with = |row: &Found| row.multiplicity == multiplicity;
    from + found[from..].iter().position(with).expect("such a row")
}

#[test]
fn missing_and_false_levels() {
    refused(
        |found| {
            found.remove(place(found, 150, 1));
        },
        "399 levels instead of 400",
    );
    refused(
        |found| found.push(found[place(found, 299, 1)]),
        "401 levels instead of 400",
    );
    // One too many and one too few.
    refused(
        |found| {
            found.remove(place(found, 100, 1));
            let double = place(found, 10, 1);
            found.insert(double, found[double]);
        },
        "off by",
    );
}

#[test]
fn wrong_places() {
    refused(|found| found[70].k += 1e-8, "off by");
    refused(|found| found[70].k = f64::NAN, "off by");
    refused(|found| found.swap(3, 4), "stands before");
}

#[test]
fn wrong_multiplicities() {
    // A double level written as two rows, and two of different k as one of multiplicity 2.
    refused(
        |found| {
            let double = place(found, 0, 2);
            found[double].multiplicity = 1;
            found.insert(double, found[double]);
        },
        "multiplicity",
    );
    refused(
        |found| {
            let single = place(found, 0, 1);
            found[single].multiplicity = 2;
            found.remove(place(found, single + 1, 1));
        },
        "off by",
    );
}

#[test]
fn wrong_errors() {
    // Four of three hundred rows are more than one in a hundred; three are not.
    assert_eq!([1, 100, 101, 300].map(judge::may_break), [1, 1, 2, 3]);
    let too_small = |count: usize| {
        move |found: &mut Vec<Found>| {
            for row in &mut found[40..40 + count] {
                row.error = 1e-14;
            }
        }
    };
    refused(too_small(4), "stated errors are smaller");
    let mut found = rows(&exact());
    too_small(3)(&mut found);
    assert_eq!(verdict(&found).expect("few broken").broken, 3);
    refused(
        |found| {
            for row in found.iter_mut() {
                row.error *= 11.0;
            }
        },
        "times the true ones in the median",
    );
    refused(|found| found[0].error = f64::NAN, "has the error");
    refused(|found| found[0].error = f64::INFINITY, "has the error");
    refused(|found| found[0].error = -1.0, "has the error");
}

#[test]
fn the_level_zero_is_judged_by_its_energy() {
    let expected = Expected {
        levels: &[0.0],
        degenerate: true,
        claim: CLAIM,
    };
    let list = |k: f64, error: f64| {
        let row = Found {
            k,
            error,
            multiplicity: 1,
        };
        judge(&[row], &expected)
    };
    assert!(list(1e-6, 2e-6).is_ok());
    assert!(list(0.0, 0.0).is_ok());
    assert!(list(1e-4, 2e-4).is_err());
}
