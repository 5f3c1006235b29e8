//! Annulus with radii 1 and 0.5 against zeros of cross products of Bessel functions (data/reference/annulus_*.csv, from
//! scipy 1.17.1 and mpmath 1.4.1).

#[allow(
    dead_code,
    reason = "each file of checks uses its own part of what they share"
)]
mod integrable;

use integrable::Smoothing::{Spacings, Width};
use integrable::{Case, Weyl, bounds, levels, table};
use orbitsum::billiard::Condition::{self, Dirichlet, Neumann};
use orbitsum::orbit::tori::{FamilyKind, Integrable, LeftOutKind, TorusLimits, terms};
use std::f64::consts::PI;

fn annulus(name: &'static str, outer: Condition, inner: Condition, file: &str) -> Case<'static> {
    // Weyl: the curvatures of both circles cancel in the constant; curvature^2 integrates to 2 pi (outer) and 4 pi (inner).
    let bend = |condition| if condition == Dirichlet { 1.0 } else { 5.0 };
    Case {
        name,
        shape: Integrable::Annulus {
            outer_radius: 1.0,
            inner_radius: 0.5,
            outer,
            inner,
        },
        levels: levels(file),
        weyl: Weyl {
            area: 0.75 * PI,
            length: -(outer.sign() * 2.0 * PI + inner.sign() * PI),
            constant: 0.0,
            inverse_k: (bend(outer) + 2.0 * bend(inner)) / 128.0,
        },
    }
}

#[test]
fn table_agrees_with_the_handbook() {
    // Abramowitz & Stegun, Table 9.7 (from memory): first zero x of J_0(x) Y_0(2 x) - J_0(2 x) Y_0(x) is 3.1230; here k = 2 x.
    let first = table("annulus_dd.csv")[0];
    assert!(
        (first.k - 2.0 * 3.1230).abs() < 2e-4 && first.order == 0.0,
        "{first:?}"
    );
}

#[test]
fn dirichlet_walls() {
    let case = annulus("annulus DD", Dirichlet, Dirichlet, "annulus_dd.csv");
    // Measured: 0.269/0.244, 0.432/0.354, 0.680/0.499: grazing and whispering-gallery tori.
    case.check(&bounds(
        Spacings(2.0),
        [(0.30, 0.27), (0.475, 0.39), (0.75, 0.55)],
    ));
    // Measured: 0.0444/0.0071, 0.0391/0.0049, 0.0312/0.0040.
    case.check(&bounds(
        Width(0.6),
        [(0.049, 0.0078), (0.043, 0.0055), (0.035, 0.0045)],
    ));
    // Measured: 0.0326/0.0056, 0.0271/0.0033, 0.0225/0.0019.
    case.check(&bounds(
        Width(1.0),
        [(0.036, 0.0062), (0.030, 0.0037), (0.025, 0.0022)],
    ));
}

#[test]
fn unlike_walls() {
    let case = annulus("annulus DN", Dirichlet, Neumann, "annulus_dn.csv");
    // Measured: 0.107/0.0132, 0.0759/0.0087, 0.0708/0.0080.
    case.check(&bounds(
        Width(0.6),
        [(0.118, 0.0145), (0.084, 0.0096), (0.078, 0.0088)],
    ));
    // Measured: 0.0668/0.0097, 0.0504/0.0054, 0.0448/0.0033.
    case.check(&bounds(
        Width(1.0),
        [(0.074, 0.0107), (0.056, 0.006), (0.05, 0.0037)],
    ));
}

#[test]
fn neumann_walls() {
    let case = annulus("annulus NN", Neumann, Neumann, "annulus_nn.csv");
    // Measured: 0.0241/0.0098, 0.0256/0.0081, 0.0191/0.0074.
    case.check(&bounds(
        Width(0.6),
        [(0.027, 0.011), (0.0285, 0.009), (0.021, 0.0082)],
    ));
    // Measured: 0.0146/0.0058, 0.0132/0.0036, 0.0104/0.0021.
    case.check(&bounds(
        Width(1.0),
        [(0.0165, 0.0064), (0.0147, 0.004), (0.0116, 0.0023)],
    ));
}

#[test]
fn tangent_triangle_is_a_family_of_its_own() {
    let shape = annulus("annulus DD", Dirichlet, Dirichlet, "annulus_dd.csv").shape;
    let sum = terms(&shape, &TorusLimits::up_to(12.0));
    let tangent: Vec<_> = sum
        .families
        .iter()
        .filter(|family| family.kind == FamilyKind::TangentChords)
        .collect();
    // Triangle and its first repetition: lengths 3 sqrt(3) and 6 sqrt(3).
    assert_eq!(tangent.len(), 2, "{tangent:?}");
    assert!((tangent[0].length - 27.0_f64.sqrt()).abs() < 1e-12 && tangent[1].repetition == 2);
    assert!(
        sum.left_out
            .iter()
            .any(|part| part.kind == LeftOutKind::Grazing)
    );
    // Nothing passes through the inner circle.
    assert!(
        sum.families
            .iter()
            .all(|family| family.kind == FamilyKind::BetweenCircles || family.bounces >= 3)
    );
}
