//! Directly computed levels of polygons with corners other than pi/n against published values.
//!
//! L shape: T. Betcke & L. N. Trefethen, SIAM Rev. 47 (2005). Isospectral drums: T. A. Driscoll, SIAM Rev. 39 (1997). Regular polygons:
//! R. S. Jones (2017). Levels of these polygons that are those of the squares or triangles they are made of: closed form.

#[path = "common/direct.rs"]
mod direct;

use direct::{CONVEX, Found, REENTRANT, copies, deviation, shape, solve_below, tell, test_shape};
use orbitsum::billiard::Domain;
use std::f64::consts::PI;

/// Asserts the energy of a level of a published list of a relative accuracy, and that the level's stated error is no less than
/// the true one.
fn assert_energy(name: &str, row: &Found, energy: f64, accuracy: f64, claim: f64) {
    let exact = energy.sqrt();
    let off = deviation(row.k, exact);
    tell(&format!(
        "{name}: k = {}, off by {off:.1e}, stated {:.1e}",
        row.k,
        row.error / row.k
    ));
    assert!(
        off <= claim,
        "{name}: {} instead of {exact}, off by {off:.1e}",
        row.k
    );
    assert!(
        (row.k - exact).abs() <= row.error + accuracy * exact,
        "{name}: stated {:.1e}, off by {off:.1e}",
        row.error
    );
}

/// Asserts that every level of a subset with multiplicities is in the list.
fn assert_contains(name: &str, list: &[Found], subset: &[f64], claim: f64) {
    let all = copies(list);
    for &k in subset {
        let near = |list: &[f64]| list.iter().filter(|&&x| deviation(x, k) <= claim).count();
        let (there, wanted) = (near(&all), near(subset));
        assert!(there >= wanted, "{name}: k = {k}, {there} of {wanted}");
    }
}

/// pi/side sqrt(m^2 + n^2) below `end` for the pairs m, n >= 1 that are wanted.
fn products(side: f64, end: f64, wanted: impl Fn(u32, u32) -> bool) -> Vec<f64> {
    let largest = (end * side / PI) as u32;
    let pairs = (1..=largest).flat_map(|m| (1..=largest).map(move |n| (m, n)));
    pairs
        .filter(|&(m, n)| wanted(m, n))
        .map(|(m, n)| PI / side * f64::from(m).hypot(f64::from(n)))
        .filter(|&k| k < end)
        .collect()
}

/// Products of sines that vanish on all sides of three unit squares are levels of the L shape.
#[test]
fn l_shape() {
    const END: f64 = 30.0;
    let found = solve_below("L shape", &shape("l-shape", &[]), END);
    assert_energy(
        "L shape 1",
        &found[0],
        9.639_723_844_021_9,
        5e-15,
        REENTRANT,
    );
    assert_energy("L shape 3", &found[2], 2.0 * PI * PI, 1e-15, REENTRANT);
    let squares = products(1.0, END, |_, _| true);
    assert!(squares.len() > 60);
    assert_contains("L shape", &found, &squares, REENTRANT);
}

/// Twelve digits.
const DRUM: [f64; 10] = [
    2.537_943_999_80,
    3.655_509_713_52,
    5.175_559_356_22,
    6.537_557_443_76,
    7.248_077_862_56,
    9.209_294_998_40,
    10.596_985_691_3,
    11.541_395_395_6,
    12.337_005_501_4,
    13.053_654_055_7,
];

/// A level of one of the seven triangles (legs of length 2), reflected from triangle to triangle, is one of the drum.
#[test]
fn isospectral_drums() {
    const END: f64 = 9.0;
    let drums = ["drum-1", "drum-2"].map(|name| {
        let domain = test_shape(name, &[]);
        assert!((domain.area - 14.0).abs() < 1e-13);
        let found = solve_below(name, &domain, END);
        for (row, energy) in found.iter().zip(DRUM) {
            assert_energy(name, row, energy, 5e-12, REENTRANT);
        }
        let triangles = products(2.0, END, |m, n| m > n);
        assert_eq!(triangles.len(), 8);
        assert_contains(name, &found, &triangles, REENTRANT);
        copies(&found)
    });
    let [first, second] = &drums;
    assert_eq!(first.len(), second.len());
    // Weyl: (14 k^2 - (12 + 6 sqrt 2) k)/(4 pi) = 75.6 and a constant.
    assert!(first.len() > 70);
    for (a, b) in first.iter().zip(second) {
        assert!(deviation(*a, *b) <= REENTRANT, "{a} and {b}");
    }
}

fn assert_lowest(name: &str, domain: &Domain, energy: f64) {
    assert!((domain.area / PI - 1.0).abs() < 1e-14, "{}", domain.area);
    let found = solve_below(name, domain, 3.0);
    assert_energy(name, &found[0], energy, 1e-15, CONVEX);
}

#[test]
#[expect(
    clippy::excessive_precision,
    reason = "the digits as they are published"
)]
fn lowest_level_of_regular_polygons() {
    // Area 5 a^2/(4 tan(pi/5)) = pi.
    let pentagon = shape("pentagon", &[("a", "sqrt(4*pi*tan(pi/5)/5)")]);
    assert_lowest("pentagon", &pentagon, 6.022_137_932_042_633_878);
    for (name, energy) in [
        ("regular-6", 5.917_417_831_613_661_216),
        ("regular-8", 5.838_491_433_592_442_851),
        ("regular-10", 5.811_260_359_219_116_023),
        ("regular-20", 5.786_666_514_140_372_214),
    ] {
        assert_lowest(name, &test_shape(name, &[]), energy);
    }
}
