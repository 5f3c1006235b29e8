//! Cyclic and dihedral groups: elements, multiplication table, irreducible representations.

use super::{Element, Irrep, Symmetry};
use crate::billiard::{Mat2, Vec2};
use std::f64::consts::PI;

/// An angle within this many turns of a multiple of 15 degrees is that multiple: rounding of an angle in turns stays below
/// this, and no two axes of a group of order up to 128 come this close without being the same.
const SAME_TURN: f64 = 1e-14;

/// Cosine and sine of an angle in whole turns, exact to rounding at the multiples of 15 degrees (so that a reflection
/// across a coordinate axis is exactly diag(+-1)).
pub(crate) fn exact_cos_sin(turns: f64) -> (f64, f64) {
    let steps = turns * 24.0;
    let nearest = steps.round();
    if (steps - nearest).abs() > 24.0 * SAME_TURN {
        let angle = 2.0 * PI * turns;
        return (angle.cos(), angle.sin());
    }
    let step = nearest.rem_euclid(24.0) as usize;
    (cos_of_step(step), cos_of_step((step + 18) % 24))
}

/// Cosine of a multiple of 15 degrees, 0 <= step < 24.
fn cos_of_step(step: usize) -> f64 {
    let root3 = 3.0_f64.sqrt();
    let first_quarter = [
        1.0,
        (6.0_f64.sqrt() + 2.0_f64.sqrt()) / 4.0,
        root3 / 2.0,
        std::f64::consts::FRAC_1_SQRT_2,
        0.5,
        (6.0_f64.sqrt() - 2.0_f64.sqrt()) / 4.0,
        0.0,
    ];
    match step {
        0..=6 => first_quarter[step],
        7..=12 => -first_quarter[12 - step],
        13..=18 => -first_quarter[step - 12],
        _ => first_quarter[24 - step],
    }
}

/// The group of `rotations` rotations about `center` and, if `axis` is given (the angle of one axis in whole turns), as many
/// reflections. Elements: the rotations by 0, 1/n, 2/n, ... turns, then the reflections, starting with the axis nearest to
/// the x axis and going on in steps of half of 1/n turn.
pub(crate) fn build(center: Vec2, rotations: usize, axis: Option<f64>) -> Symmetry {
    let first = axis.map(|turns| nearest_to_x(turns, rotations));
    let mut elements: Vec<Element> = (0..rotations).map(|j| rotation(j, rotations)).collect();
    if let Some(first) = first {
        elements
            .extend((0..rotations).map(|j| reflection(first + j as f64 / (2 * rotations) as f64)));
    }
    if elements.len() == 1 {
        return Symmetry::trivial();
    }
    Symmetry {
        name: group_name(rotations, first.is_some()),
        center,
        product: product_table(rotations, first.is_some()),
        irreps: if first.is_some() {
            dihedral_irreps(rotations)
        } else {
            cyclic_irreps(rotations)
        },
        elements,
    }
}

/// The axis (in turns) nearest to the x axis among those that stand 1/(2n) turns apart; +45 rather than -45 degrees.
fn nearest_to_x(axis: f64, rotations: usize) -> f64 {
    let step = 0.5 / rotations as f64;
    let folded = axis - (axis / step).round() * step;
    if folded <= -0.5 * step + SAME_TURN {
        folded + step
    } else {
        folded
    }
}

fn group_name(rotations: usize, reflections: bool) -> String {
    match (rotations, reflections) {
        (1, true) => "reflection".into(),
        (2, true) => "rectangle".into(),
        (3, true) => "triangle".into(),
        (4, true) => "square".into(),
        (n, true) => format!("{n}-gon"),
        (n, false) => format!("C{n}"),
    }
}

fn rotation(j: usize, rotations: usize) -> Element {
    let divisor = greatest_common_divisor(j, rotations);
    let (power, order) = (j / divisor, rotations / divisor);
    let name = match (power, order) {
        (0, _) => "e".into(),
        (1, order) => format!("C{order}"),
        (power, order) => format!("C{order}^{power}"),
    };
    let (cos, sin) = exact_cos_sin(j as f64 / rotations as f64);
    Element {
        name,
        matrix: Mat2::new(cos, -sin, sin, cos),
    }
}

fn reflection(axis: f64) -> Element {
    let (cos, sin) = exact_cos_sin(2.0 * axis);
    let name = if (cos, sin) == (1.0, 0.0) {
        "y->-y".into()
    } else if (cos, sin) == (-1.0, 0.0) {
        "x->-x".into()
    } else {
        let degrees = 360.0 * axis;
        let rounded = (degrees * 1e6).round() / 1e6;
        format!("sigma({rounded})")
    };
    Element {
        name,
        matrix: Mat2::new(cos, sin, sin, -cos),
    }
}

fn greatest_common_divisor(a: usize, b: usize) -> usize {
    if b == 0 {
        a
    } else {
        greatest_common_divisor(b, a % b)
    }
}

/// With r the rotation by 1/n turn and s_j = r^j s_0 the reflections:
/// r^a r^b = r^(a+b), r^a s_b = s_(a+b), s_a r^b = s_(a-b), s_a s_b = r^(a-b).
fn product_table(n: usize, reflections: bool) -> Vec<Vec<usize>> {
    let order = if reflections { 2 * n } else { n };
    (0..order)
        .map(|a| {
            (0..order)
                .map(|b| {
                    let (i, j) = (a % n, b % n);
                    let power = if a < n { (i + j) % n } else { (i + n - j) % n };
                    let reflects = (a < n) != (b < n);
                    power + if reflects { n } else { 0 }
                })
                .collect()
        })
        .collect()
}

/// Names of the `count` two-dimensional classes.
fn pair_name(m: usize, count: usize) -> String {
    if count == 1 {
        "E".into()
    } else {
        format!("E{m}")
    }
}

/// Cosine of 2 pi m j/n.
fn character(m: usize, j: usize, n: usize) -> f64 {
    exact_cos_sin(((m * j) % n) as f64 / n as f64).0
}

fn irrep(name: &str, aliases: &[&str], weights: Vec<f64>) -> Irrep {
    Irrep {
        name: name.into(),
        aliases: aliases.iter().map(|&alias| alias.into()).collect(),
        dimension: 1,
        weights,
    }
}

fn alternating(j: usize) -> f64 {
    if j.is_multiple_of(2) { 1.0 } else { -1.0 }
}

/// A; B (n even); pairs of complex conjugate representations exp(+-2 pi i m j/n), joined.
fn cyclic_irreps(n: usize) -> Vec<Irrep> {
    let mut irreps = vec![irrep("A", &[], vec![1.0; n])];
    if n.is_multiple_of(2) {
        irreps.push(irrep("B", &[], (0..n).map(alternating).collect()));
    }
    let pairs = (n - 1) / 2;
    irreps.extend((1..=pairs).map(|m| Irrep {
        name: pair_name(m, pairs),
        aliases: Vec::new(),
        dimension: 2,
        weights: (0..n).map(|j| 2.0 * character(m, j, n)).collect(),
    }));
    irreps
}

/// A1, A2 (odd under every reflection); for n even B1 (even under the reflection across the x axis of the group) and B2;
/// two-dimensional E_m with character 2 cos(2 pi m j/n) on rotations and 0 on reflections.
fn dihedral_irreps(n: usize) -> Vec<Irrep> {
    if n == 1 {
        return vec![
            irrep("A'", &["even"], vec![1.0, 1.0]),
            irrep("A''", &["odd", "A\""], vec![1.0, -1.0]),
        ];
    }
    let weights = |rotation: fn(usize) -> f64, sign: f64| -> Vec<f64> {
        let on_rotations = (0..n).map(rotation);
        let on_reflections = (0..n).map(|j| sign * rotation(j));
        on_rotations.chain(on_reflections).collect()
    };
    // Parities single out one class only in the group of the rectangle.
    let alias = |parities: &'static str| if n == 2 { vec![parities] } else { Vec::new() };
    let mut irreps = vec![
        irrep("A1", &alias("even,even"), weights(|_| 1.0, 1.0)),
        irrep("A2", &alias("odd,odd"), weights(|_| 1.0, -1.0)),
    ];
    if n.is_multiple_of(2) {
        irreps.push(irrep("B1", &alias("odd,even"), weights(alternating, 1.0)));
        irreps.push(irrep("B2", &alias("even,odd"), weights(alternating, -1.0)));
    }
    let pairs = (n - 1) / 2;
    irreps.extend((1..=pairs).map(|m| {
        let rotations = (0..n).map(|j| 4.0 * character(m, j, n));
        Irrep {
            name: pair_name(m, pairs),
            aliases: Vec::new(),
            dimension: 2,
            weights: rotations.chain(std::iter::repeat_n(0.0, n)).collect(),
        }
    }));
    irreps
}

#[cfg(test)]
mod tests {
    use super::*;

    fn groups() -> Vec<Symmetry> {
        let mut all = Vec::new();
        for n in 1..=12 {
            all.push(build(Vec2::zeros(), n, None));
            all.push(build(Vec2::zeros(), n, Some(0.0)));
            all.push(build(Vec2::zeros(), n, Some(0.0731)));
        }
        all
    }

    #[test]
    fn the_product_table_is_that_of_the_matrices() {
        for group in groups() {
            for a in 0..group.order() {
                for b in 0..group.order() {
                    let product = group.elements[a].matrix * group.elements[b].matrix;
                    let listed = group.elements[group.product[a][b]].matrix;
                    assert!((product - listed).norm() < 1e-14, "{} {a} {b}", group.name);
                }
            }
        }
    }

    #[test]
    fn the_product_is_associative_and_has_inverses() {
        for group in groups() {
            let p = &group.product;
            for a in 0..group.order() {
                assert_eq!(p[a][group.inverse(a)], 0);
                for b in 0..group.order() {
                    for c in 0..group.order() {
                        assert_eq!(p[p[a][b]][c], p[a][p[b][c]]);
                    }
                }
            }
        }
    }

    #[test]
    fn weights_add_to_the_order_on_the_identity_and_to_zero_elsewhere() {
        for group in groups() {
            for g in 0..group.order() {
                let sum: f64 = group.irreps.iter().map(|irrep| irrep.weights[g]).sum();
                let expected = if g == 0 { group.order() as f64 } else { 0.0 };
                assert!((sum - expected).abs() < 1e-12, "{} {g}: {sum}", group.name);
            }
        }
    }

    #[test]
    fn characters_of_different_classes_are_orthogonal() {
        for group in groups() {
            for (i, a) in group.irreps.iter().enumerate() {
                for b in &group.irreps[..i] {
                    let product: f64 = a.weights.iter().zip(&b.weights).map(|(x, y)| x * y).sum();
                    assert!(
                        product.abs() < 1e-12,
                        "{}: {} {}",
                        group.name,
                        a.name,
                        b.name
                    );
                }
            }
        }
    }

    #[test]
    fn characters_do_not_change_under_conjugation() {
        for group in groups() {
            for a in 0..group.order() {
                for b in 0..group.order() {
                    let conjugate = group.product[group.product[b][a]][group.inverse(b)];
                    for irrep in &group.irreps {
                        let difference = irrep.weights[a] - irrep.weights[conjugate];
                        assert!(difference.abs() < 1e-13, "{} {}", group.name, irrep.name);
                    }
                }
            }
        }
    }

    #[test]
    fn multiples_of_fifteen_degrees_are_exact_to_rounding() {
        for step in -24..=48 {
            let (cos, sin) = exact_cos_sin(f64::from(step) / 24.0);
            let angle = f64::from(step) * PI / 12.0;
            assert!((cos - angle.cos()).abs() < 1e-14 && (sin - angle.sin()).abs() < 1e-14);
            assert!((cos * cos + sin * sin - 1.0).abs() < 4e-16);
        }
        assert_eq!(exact_cos_sin(0.25), (0.0, 1.0));
        assert_eq!(exact_cos_sin(1.0 / 6.0).0, 0.5);
    }

    #[test]
    fn the_first_axis_is_the_one_nearest_to_the_x_axis() {
        let degrees = |turns: f64, n: usize| 360.0 * nearest_to_x(turns / 360.0, n);
        assert!((degrees(90.0, 2) - 0.0).abs() < 1e-12);
        assert!((degrees(-45.0, 2) - 45.0).abs() < 1e-12);
        assert!((degrees(135.0, 2) - 45.0).abs() < 1e-12);
        assert!((degrees(60.0, 2) + 30.0).abs() < 1e-12);
        assert!((degrees(90.0, 1) - 90.0).abs() < 1e-12);
        assert!((degrees(-90.0, 1) - 90.0).abs() < 1e-12);
        assert!((degrees(90.0, 5) - 18.0).abs() < 1e-12);
    }
}
