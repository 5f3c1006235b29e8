//! Smooth counts against exact levels: rectangle and equilateral triangle (closed form; Lame 1852), disk and half disk (zeros of
//! Bessel functions and their derivatives, bracketed and bisected here on `libm::jn`).
//!
//! The staircase is smoothed with a Gaussian so wide that the shortest orbits are gone; what is left is the expansion.

#[path = "common/shapes.rs"]
mod shapes;

use orbitsum::baseline::{Weyl, weyl};
use orbitsum::billiard::{Domain, Symmetry, detect};
use shapes::*;
use std::f64::consts::PI;

/// Largest level used; the windows end six smoothing widths below.
const LARGEST: f64 = 75.0;

/// Smoothed number of levels below k.
fn staircase(levels: &[f64], k: f64, smoothing: f64) -> f64 {
    levels
        .iter()
        .map(|level| 0.5 * libm::erfc((level - k) / (smoothing * 2f64.sqrt())))
        .sum()
}

/// Mean over 20 <= k <= 50 of a quantity.
fn mean(value: impl Fn(f64) -> f64) -> f64 {
    let count = 301;
    let sum: f64 = (0..count)
        .map(|i| value(20.0 + 30.0 * f64::from(i) / f64::from(count - 1)))
        .sum();
    sum / f64::from(count)
}

/// Mean difference of staircase and smooth count.
fn difference(levels: &[f64], count: &Weyl, smoothing: f64) -> f64 {
    mean(|k| staircase(levels, k, smoothing) - count.count(k, smoothing))
}

fn expansion(shape: &Domain) -> Weyl {
    weyl(shape, &Symmetry::trivial(), None)
}

/// Levels k = pi sqrt((m/a)^2 + (n/b)^2), m and n from the given first numbers in steps.
fn rectangle_levels(a: f64, b: f64, first: [f64; 2]) -> Vec<f64> {
    let largest = (LARGEST * a.max(b) / PI) as i32 + 1;
    let mut levels = Vec::new();
    for m in 0..=largest {
        for n in 0..=largest {
            let (m, n) = (f64::from(m) + first[0], f64::from(n) + first[1]);
            let k = PI * (m / a).hypot(n / b);
            if k < LARGEST {
                levels.push(k);
            }
        }
    }
    levels
}

#[test]
fn rectangle() {
    // (conditions bottom, right, top, left; first quantum numbers along x and y)
    let cases = [
        ([D, D, D, D], [1.0, 1.0]),
        ([N, N, N, N], [0.0, 0.0]),
        ([D, N, D, D], [0.5, 1.0]),
        ([D, N, N, D], [0.5, 0.5]),
        ([N, D, N, D], [1.0, 0.0]),
    ];
    for (conditions, first) in cases {
        let shape = shapes::rectangle(1.0, 1.3, conditions);
        let levels = rectangle_levels(1.0, 1.3, first);
        let left = difference(&levels, &expansion(&shape), 3.0);
        assert!(left.abs() < 1e-6, "{first:?}: {left}");
    }
}

#[test]
fn classes_of_the_rectangle() {
    let shape = domain(centered_rectangle_walls(1.0, 1.3, [D; 4]));
    let group = detect(&shape);
    // Level m, n of the rectangle is even under x -> -x for odd m.
    for (name, first) in [
        ("A1", [0.5, 0.5]),
        ("A2", [1.0, 1.0]),
        ("B1", [1.0, 0.5]),
        ("B2", [0.5, 1.0]),
    ] {
        let levels: Vec<f64> = rectangle_levels(0.5, 0.65, first);
        let count = weyl(&shape, &group, group.class(name));
        let left = difference(&levels, &count, 5.0);
        assert!(left.abs() < 1e-6, "{name}: {left}");
    }
}

#[test]
fn equilateral_triangle() {
    // Side 1: k = (4 pi/3) sqrt(m^2 + m n + n^2), m, n >= 1.
    let mut levels = Vec::new();
    for m in 1..=20 {
        for n in 1..=20 {
            let k = 4.0 * PI / 3.0 * f64::from(m * m + m * n + n * n).sqrt();
            if k < LARGEST {
                levels.push(k);
            }
        }
    }
    let shape = polygon(&[(0.0, 0.0), (1.0, 0.0), (0.5, 0.75f64.sqrt())], &[D]);
    let left = difference(&levels, &expansion(&shape), 3.5);
    assert!(left.abs() < 1e-6, "{left}");
}

/// Zeros below `LARGEST` of a function whose zeros are more than 0.5 apart, beginning at `from`.
fn zeros(value: impl Fn(f64) -> f64, from: f64) -> Vec<f64> {
    let step = 0.25;
    let mut found = Vec::new();
    let mut low = from;
    while low < LARGEST {
        let high = low + step;
        if value(low) * value(high) < 0.0 {
            let (mut a, mut b) = (low, high);
            for _ in 0..60 {
                let middle = 0.5 * (a + b);
                if value(a) * value(middle) <= 0.0 {
                    b = middle;
                } else {
                    a = middle;
                }
            }
            found.push(0.5 * (a + b));
        }
        low = high;
    }
    found.retain(|&k| k < LARGEST);
    found
}

/// Levels of the unit disk with angular momentum m.
fn radial_levels(m: i32, neumann: bool) -> Vec<f64> {
    // J_m and its derivative have no positive zero below m (DLMF 10.21(i)), except that of J_0'.
    let from = f64::from(m).max(0.1);
    if !neumann {
        return zeros(|k| libm::jn(m, k), from);
    }
    if m == 0 {
        let mut levels = zeros(libm::j1, from);
        levels.insert(0, 0.0);
        return levels;
    }
    zeros(|k| libm::jn(m - 1, k) - libm::jn(m + 1, k), from)
}

fn disk_levels(neumann: bool, copies: impl Fn(i32) -> usize) -> Vec<f64> {
    (0..LARGEST as i32)
        .flat_map(|m| {
            let levels = radial_levels(m, neumann);
            std::iter::repeat_n(levels, copies(m)).flatten()
        })
        .collect()
}

#[test]
fn the_zeros_are_those_of_the_tables() {
    // Abramowitz & Stegun, Tables 9.5 (j01, j11, j21) and 9.5 (j'11 = 1.84118, j'01 = 3.83171 after the zero at 0).
    let first = |m, neumann| radial_levels(m, neumann)[0];
    assert!((first(0, false) - 2.404_825_557_695_773).abs() < 1e-13);
    assert!((first(1, false) - 3.831_705_970_207_512).abs() < 1e-13);
    assert!((first(2, false) - 5.135_622_301_840_683).abs() < 1e-13);
    assert!((first(1, true) - 1.841_18).abs() < 5e-6);
    assert!((radial_levels(0, true)[1] - 3.831_71).abs() < 5e-6);
}

#[test]
fn disk_and_its_next_order() {
    for (condition, neumann) in [(D, false), (N, true)] {
        let levels = disk_levels(neumann, |m| if m == 0 { 1 } else { 2 });
        let count = expansion(&domain(vec![circle(point(0.0, 0.0), 1.0, condition)]));
        let left = difference(&levels, &count, 3.0);
        assert!(left.abs() < 1e-4, "{condition:?}: {left}");
        assert_next_order(&levels, &count, 3.0);
    }
}

/// The coefficient c of 1/k read off the levels: the smoothing turns c/k into c/k + c s^2/k^3 (a relative change of 0.9 to
/// 1.2 % here, which the count leaves out); with it the two agree to 0.2 %, what the next powers of 1/k may add.
fn assert_next_order(levels: &[f64], count: &Weyl, smoothing: f64) {
    let inverse = count.coefficient(-1);
    let excess = mean(|k| {
        let smoothed = inverse * (1.0 / k + smoothing * smoothing / k.powi(3));
        let others = count.count(k, smoothing) - inverse / k;
        (staircase(levels, k, smoothing) - others - smoothed) * k
    });
    assert!(
        excess.abs() < 0.002 * inverse.abs(),
        "measured {}, expected {inverse}",
        inverse + excess
    );
}

#[test]
fn half_disk_and_its_corners() {
    // Diameter D: sin(m phi), m >= 1; diameter N: cos(m phi), m >= 0.
    for (arc_condition, neumann) in [(D, false), (N, true)] {
        for (diameter, first) in [(D, 1), (N, 0)] {
            let levels = disk_levels(neumann, |m| usize::from(m >= first));
            let count = expansion(&half_disk(1.0, diameter, arc_condition));
            let left = difference(&levels, &count, 3.5);
            assert!(left.abs() < 1e-4, "{diameter:?} {arc_condition:?}: {left}");
            assert_next_order(&levels, &count, 3.5);
        }
    }
}
