//! Disk of radius 1 against zeros of Bessel functions (data/reference/disk_*.csv, from scipy 1.17.1 and mpmath 1.4.1).

#[allow(
    dead_code,
    reason = "each file of checks uses its own part of what they share"
)]
mod integrable;

use integrable::Smoothing::{Spacings, Width};
use integrable::{Case, WINDOWS, Weyl, bounds, levels, table};
use orbitsum::billiard::Condition::{self, Dirichlet, Neumann};
use orbitsum::orbit::tori::{Integrable, TorusLimits, terms};
use orbitsum::trace::sum_at;
use std::f64::consts::PI;

fn disk(condition: Condition) -> Case<'static> {
    // Weyl: perimeter 2 pi, curvature 2 pi/(12 pi) = 1/6, integral of curvature^2 over 256 pi = 1/128 (5 times that for N;
    // Stewartson & Waechter, Proc. Camb. Phil. Soc. 69, 1971).
    let (name, file, bend) = match condition {
        Dirichlet => ("disk D", "disk_d.csv", 1.0),
        Neumann => ("disk N", "disk_n.csv", 5.0),
    };
    Case {
        name,
        shape: Integrable::Disk {
            radius: 1.0,
            condition,
        },
        levels: levels(file),
        weyl: Weyl {
            area: PI,
            length: -condition.sign() * 2.0 * PI,
            constant: 1.0 / 6.0,
            inverse_k: bend / 128.0,
        },
    }
}

#[test]
fn tables_agree_with_the_handbook() {
    // Abramowitz & Stegun, Table 9.5 (from memory): first zeros of J_0, J_1, J_2, J_1', J_2', J_0'.
    let has = |name: &str, order: f64, k: f64| {
        let found = table(name)
            .iter()
            .any(|row| row.order == order && (row.k - k).abs() < 1e-5);
        assert!(found, "{name} {order} {k}");
    };
    for (order, k) in [(0.0, 2.404_825_557_7), (1.0, 3.831_71), (2.0, 5.135_62)] {
        has("disk_d.csv", order, k);
    }
    for (order, k) in [
        (1.0, 1.841_18),
        (2.0, 3.054_24),
        (0.0, 3.831_71),
        (0.0, 0.0),
    ] {
        has("disk_n.csv", order, k);
    }
}

#[test]
fn dirichlet_at_two_spacings() {
    // Measured: 0.1007/0.0105, 0.1273/0.0216, 0.2060/0.0425. What is left at next order are tori of many bounces.
    let case = disk(Dirichlet);
    case.check(&bounds(
        Spacings(2.0),
        [(0.11, 0.012), (0.14, 0.024), (0.21, 0.047)],
    ));
    for window in WINDOWS {
        // Next order must matter: leading order leaves a tenth of a level or more.
        assert!(case.residuals(window, Spacings(2.0)).0 > 0.1);
    }
}

#[test]
fn dirichlet_at_fixed_width() {
    let case = disk(Dirichlet);
    // Measured: 0.0539/0.0053, 0.0461/0.0063, 0.0596/0.0043.
    case.check(&bounds(
        Width(0.25),
        [(0.06, 0.006), (0.05, 0.007), (0.066, 0.005)],
    ));
    // Measured: 0.0034/0.00020, 0.0026/0.00022, 0.0027/0.00015.
    case.check(&bounds(
        Width(0.5),
        [(0.004, 2.3e-4), (0.003, 2.5e-4), (0.003, 1.8e-4)],
    ));
}

#[test]
fn neumann_is_limited_by_whispering_gallery_tori() {
    let case = disk(Neumann);
    // Measured: 0.473/0.318, 0.645/0.497, 0.684/0.628.
    case.check(&bounds(
        Spacings(2.0),
        [(0.52, 0.35), (0.71, 0.55), (0.75, 0.69)],
    ));
    // Measured: 0.0103/0.0050, 0.0089/0.0053, 0.0071/0.0055.
    case.check(&bounds(
        Width(0.5),
        [(0.0115, 0.0055), (0.01, 0.006), (0.008, 0.0061)],
    ));
}

#[test]
fn tail_estimate_bounds_what_the_limit_of_bounces_leaves_out() {
    let shape = Integrable::Disk {
        radius: 1.0,
        condition: Dirichlet,
    };
    let points: Vec<f64> = (0..200).map(|i| 20.0 + 0.05 * f64::from(i)).collect();
    let s = 0.16;
    let sum = |max_bounces| {
        terms(
            &shape,
            &TorusLimits {
                max_length: 30.0,
                max_bounces,
            },
        )
    };
    let full = sum_at(&sum(2000).terms, &points, s).staircase;
    for max_bounces in [16, 24, 48, 96, 240] {
        let cut = sum(max_bounces);
        let staircase = sum_at(&cut.terms, &points, s).staircase;
        let worst = full
            .iter()
            .zip(&staircase)
            .map(|(a, b)| (a - b).abs())
            .fold(0.0, f64::max);
        let estimate = cut.tail_at(25.0, s);
        // The estimate is the size at the middle of the window of tails in phase with each other.
        assert!(
            worst < 1.3 * estimate && worst > 0.2 * estimate,
            "{max_bounces}: {worst:e} {estimate:e}"
        );
    }
}

#[test]
fn default_limit_of_bounces_is_enough_at_three_over_the_length() {
    let shape = Integrable::Disk {
        radius: 1.0,
        condition: Neumann,
    };
    for (max_length, k) in [(9.0, 20.0), (15.0, 60.0), (30.0, 100.0)] {
        let tail = terms(&shape, &TorusLimits::up_to(max_length)).tail_at(k, 3.0 / max_length);
        assert!(tail < 1e-3, "{tail:e}");
    }
}

#[test]
fn lengths_scale_with_the_radius() {
    let sum = |radius: f64| {
        let shape = Integrable::Disk {
            radius,
            condition: Dirichlet,
        };
        terms(
            &shape,
            &TorusLimits {
                max_length: 10.0 * radius,
                max_bounces: 20,
            },
        )
    };
    let (unit, large) = (sum(1.0), sum(2.5));
    assert_eq!(unit.families.len(), large.families.len());
    let points = [20.0, 21.3, 22.7];
    let scaled: Vec<f64> = points.iter().map(|k| k / 2.5).collect();
    let (a, b) = (
        sum_at(&unit.terms, &points, 0.3),
        sum_at(&large.terms, &scaled, 0.3 / 2.5),
    );
    for i in 0..points.len() {
        assert!((a.staircase[i] - b.staircase[i]).abs() < 1e-10);
    }
}
