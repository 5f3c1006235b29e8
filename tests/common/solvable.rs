//! Shapes with exactly known levels: zeros of Bessel functions, Mathieu functions and closed forms.
#![allow(dead_code)]

#[path = "exact.rs"]
mod exact;
#[path = "shipped.rs"]
mod shipped;
#[path = "tables.rs"]
mod tables;

use exact::{box_value, equilateral_value, levels as closed_form};
use orbitsum::billiard::{Domain, Irrep, Symmetry, detect};
pub(crate) use shipped::{shape, test_shape};
use std::f64::consts::PI;
#[allow(
    unused_imports,
    reason = "each file of checks uses its own part of what they share"
)]
pub(crate) use tables::table;
use tables::{levels, levels_of_class, levels_of_orders};

/// All levels below this k are known (of shapes of about unit size).
pub(crate) const LIST_END: f64 = 66.0;

/// A shape, or one class of it, with its levels.
pub(crate) struct Case {
    pub(crate) name: String,
    pub(crate) domain: Domain,
    pub(crate) symmetry: Symmetry,
    pub(crate) class: Option<Irrep>,
    /// Ascending, each as often as its multiplicity says, all below [`LIST_END`].
    pub(crate) levels: Vec<f64>,
    /// Are levels that agree to the last digits the same level of a higher multiplicity?
    pub(crate) degenerate: bool,
}

impl Case {
    fn new(name: impl Into<String>, domain: Domain, mut levels: Vec<f64>) -> Self {
        levels.retain(|&k| k < LIST_END);
        levels.sort_by(f64::total_cmp);
        Self {
            name: name.into(),
            symmetry: detect(&domain),
            domain,
            class: None,
            levels,
            degenerate: true,
        }
    }

    /// One class of the shape.
    fn class(&self, name: &str, levels: Vec<f64>) -> Self {
        let irrep = self
            .symmetry
            .class(name)
            .unwrap_or_else(|| panic!("{}: no class {name} in {}", self.name, self.symmetry.name));
        Self {
            symmetry: self.symmetry.clone(),
            class: Some(irrep.clone()),
            degenerate: self.degenerate,
            ..Self::new(
                format!("{}, class {name}", self.name),
                self.domain.clone(),
                levels,
            )
        }
    }

    /// The levels in a window, ends as the solver takes them.
    pub(crate) fn between(&self, from: f64, to: f64) -> &[f64] {
        assert!(to <= LIST_END);
        let index = |k: f64| self.levels.partition_point(|&level| level < k);
        &self.levels[index(from)..index(to)]
    }
}

// ---- circles -----------------------------------------------------------------------------------------------------------------

pub(crate) fn disks() -> Vec<Case> {
    vec![
        Case::new("disk D", shape("disk", &[]), levels("disk_d.csv")),
        Case::new("disk N", test_shape("disk-n", &[]), levels("disk_n.csv")),
    ]
}

pub(crate) fn annuli() -> Vec<Case> {
    let walls = ["dn", "nd", "nn"];
    let mut cases = vec![Case::new(
        "annulus dd",
        shape("annulus", &[]),
        levels("annulus_dd.csv"),
    )];
    cases.extend(walls.map(|walls| {
        Case::new(
            format!("annulus {walls}"),
            test_shape(&format!("annulus-{walls}"), &[]),
            levels(&format!("annulus_{walls}.csv")),
        )
    }));
    cases
}

/// Conditions of diameter and arc.
const HALF_DISKS: [&str; 4] = ["dd", "dn", "nd", "nn"];

/// A function is sin(m phi), m >= 1, over a Dirichlet diameter and cos(m phi), m >= 0, over a Neumann one.
fn half_disk(walls: &str) -> Case {
    let domain = match walls {
        "dd" => shape("half-disk", &[]),
        _ => test_shape(&format!("half-disk-{walls}"), &[]),
    };
    let list = half_disk_levels(walls, |_| true);
    Case::new(format!("half disk {walls}"), domain, list)
}

fn half_disk_levels(walls: &str, keep: impl Fn(u32) -> bool) -> Vec<f64> {
    let (diameter, arc) = walls.split_at(1);
    let least = u32::from(diameter == "d");
    levels_of_orders(&format!("disk_{arc}.csv"), |m| m >= least && keep(m))
}

pub(crate) fn half_disks() -> Vec<Case> {
    HALF_DISKS.map(half_disk).into()
}

/// x -> -x is phi -> pi - phi: sin(m phi) is even for odd m, cos(m phi) for even m.
pub(crate) fn half_disk_classes() -> Vec<Case> {
    let of = |walls: &str| {
        let whole = half_disk(walls);
        let even_orders = u32::from(walls.starts_with('d'));
        ["even", "odd"].map(|name| {
            let remainder = (even_orders + u32::from(name == "odd")) % 2;
            whole.class(name, half_disk_levels(walls, |m| m % 2 == remainder))
        })
    };
    HALF_DISKS.into_iter().flat_map(of).collect()
}

// ---- sectors -----------------------------------------------------------------------------------------------------------------

/// Opening of a sector.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Opening {
    /// As the tables call it: degrees, or `two` radians.
    name: &'static str,
    /// As a formula of the system file.
    formula: &'static str,
}

const fn opening(name: &'static str, formula: &'static str) -> Opening {
    Opening { name, formula }
}

/// pi/3 and pi/2 do not diffract between like walls; the larger ones are reentrant from 3 pi/2 on, the last one nearly a slit.
pub(crate) const OPENINGS: [Opening; 6] = [
    opening("60", "pi/3"),
    opening("90", "pi/2"),
    opening("two", "2"),
    opening("120", "2*pi/3"),
    opening("270", "3*pi/2"),
    opening("342", "1.9*pi"),
];
/// The condition changes in the middle of a straight wall.
pub(crate) const STRAIGHT: Opening = opening("pi", "pi");

/// Sector with conditions `dd`, `dn` or `nn` of the straight walls and `d` or `n` of the arc.
pub(crate) fn sector(opening: Opening, walls: &str, arc: &str) -> Case {
    let name = format!("sector {} {walls}, arc {arc}", opening.name);
    let file = format!("sector-{walls}-{arc}");
    let domain = test_shape(&file, &[("beta", opening.formula)]);
    Case::new(name, domain, sector_levels(opening, walls, arc))
}

/// Orders m pi/beta, m >= 1 (dd) or m >= 0 (nn); (m - 1/2) pi/beta, m >= 1 (dn).
fn sector_levels(opening: Opening, walls: &str, arc: &str) -> Vec<f64> {
    let disk = format!("disk_{arc}.csv");
    let radial = || levels_of_orders(&disk, |m| m == 0);
    // Like walls at pi/n: the orders that are multiples of n.
    let multiples = |n: u32| levels_of_orders(&disk, |m| m > 0 && m.is_multiple_of(n));
    let table = |walls: &str| {
        let ending = if arc == "n" { "_arc_n" } else { "" };
        levels(&format!("sector_{}_{walls}{ending}.csv", opening.name))
    };
    match (opening.name, walls) {
        ("90", "dn") => levels_of_orders(&disk, |m| !m.is_multiple_of(2)),
        (_, "dn") => table("dn"),
        (_, "nn") => [sector_levels(opening, "dd", arc), radial()].concat(),
        ("60", _) => multiples(3),
        ("90", _) => multiples(2),
        _ => table("dd"),
    }
}

// ---- ellipse -----------------------------------------------------------------------------------------------------------------

const ELLIPSE: &str = "ellipse_6_mathieu.csv";

/// Whispering-gallery levels of different classes agree here to the last digits without being the same.
pub(crate) fn ellipse() -> Case {
    Case {
        degenerate: false,
        ..Case::new("ellipse", shape("ellipse", &[]), levels(ELLIPSE))
    }
}

pub(crate) fn ellipse_classes() -> Vec<Case> {
    let whole = ellipse();
    ["even,even", "odd,odd", "odd,even", "even,odd"]
        .map(|name| whole.class(name, levels_of_class(ELLIPSE, &name.replace(',', " "))))
        .into()
}

// ---- rectangles --------------------------------------------------------------------------------------------------------------

/// Is this a Dirichlet wall?
fn is_dirichlet(wall: u8) -> bool {
    wall == b'd'
}

/// Between two walls: half odd numbers of half waves for unlike ones; the smallest whole number.
fn between(first: u8, second: u8) -> (f64, i32) {
    let shift = if first == second { 0.0 } else { 0.5 };
    (
        shift,
        i32::from(is_dirichlet(first) && is_dirichlet(second)),
    )
}

/// Products of sines and cosines; conditions of the bottom, right, top and left wall.
fn rectangle_levels(a: f64, b: f64, walls: &str) -> Vec<f64> {
    let &[bottom, right, top, left] = walls.as_bytes() else {
        panic!("four walls, not {walls}");
    };
    let ((x, least_m), (y, least_n)) = (between(left, right), between(bottom, top));
    closed_form(LIST_END, box_value(a, b, x, y), |m, n| {
        m >= least_m && n >= least_n
    })
}

fn rectangle(walls: &str) -> Case {
    let domain = match walls {
        "dddd" => shape("rectangle", &[]),
        _ => test_shape(&format!("rectangle-{walls}"), &[]),
    };
    let list = rectangle_levels(1.0, 1.3, walls);
    Case::new(format!("rectangle {walls}"), domain, list)
}

pub(crate) fn rectangles() -> Vec<Case> {
    ["dddd", "nnnn", "dndd", "ndnd", "dnnd"]
        .map(rectangle)
        .into()
}

/// Is a function with that many half waves between two like walls even about the middle?
fn is_even(half_waves: i32, dirichlet: bool) -> bool {
    (half_waves % 2 == 0) != dirichlet
}

/// Classes of the rectangle: parities under x -> -x and y -> -y.
pub(crate) fn rectangle_classes() -> Vec<Case> {
    let mut cases = Vec::new();
    for (walls, dirichlet) in [("dddd", true), ("nnnn", false)] {
        let whole = rectangle(walls);
        for (name, x, y) in [
            ("even,even", true, true),
            ("odd,odd", false, false),
            ("odd,even", false, true),
            ("even,odd", true, false),
        ] {
            let least = i32::from(dirichlet);
            let list = closed_form(LIST_END, box_value(1.0, 1.3, 0.0, 0.0), |m, n| {
                m.min(n) >= least && is_even(m, dirichlet) == x && is_even(n, dirichlet) == y
            });
            cases.push(whole.class(name, list));
        }
    }
    cases
}

fn square_levels(keep: impl Fn(i32, i32) -> bool) -> Vec<f64> {
    closed_form(LIST_END, box_value(1.0, 1.0, 0.0, 0.0), keep)
}

pub(crate) fn square() -> Case {
    let list = square_levels(|m, n| m.min(n) >= 1);
    Case::new("square", shape("rectangle", &[("b", "1")]), list)
}

/// Of the products m, n and n, m the sum (m <= n here) is even under the diagonal, the difference (m > n) odd; an odd number of
/// half waves is even about the middle. One of each: both products together are a level of E.
pub(crate) fn square_classes() -> Vec<Case> {
    let whole = square();
    ["A1", "A2", "B1", "B2", "E"]
        .map(|name| {
            let list = square_levels(|m, n| {
                let class = match (m % 2 == 1, n % 2 == 1, m > n) {
                    (true, true, false) => "A1",
                    (true, true, true) => "B1",
                    (false, false, true) => "A2",
                    (false, false, false) => "B2",
                    _ => "E",
                };
                m.min(n) >= 1 && class == name
            });
            whole.class(name, list)
        })
        .into()
}

/// Unit square with a thin wall of half its length on the axis y = 0. What vanishes on that axis (Dirichlet wall, odd classes) or
/// has no normal derivative there (Neumann wall, even classes) does not feel the thin wall: these are levels of the half square,
/// whose wall on the axis is that of the thin wall.
pub(crate) fn slit_squares() -> Vec<Case> {
    let mut cases = Vec::new();
    for (name, domain, parity, half) in [
        ("slit square", shape("slit-square", &[]), "odd", b'd'),
        (
            "Neumann slit square",
            test_shape("slit-square-n", &[]),
            "even",
            b'n',
        ),
    ] {
        let whole = Case::new(name, domain, Vec::new());
        let (y, least) = between(half, b'd');
        for (x_parity, even_x) in [("even", true), ("odd", false)] {
            let list = closed_form(LIST_END, box_value(1.0, 0.5, 0.0, y), |m, n| {
                m >= 1 && n >= least && is_even(m, true) == even_x
            });
            cases.push(whole.class(&format!("{x_parity},{parity}"), list));
        }
    }
    cases
}

// ---- triangles ---------------------------------------------------------------------------------------------------------------

/// Conditions of the leg along x, the hypotenuse and the leg along y. The reflection across the hypotenuse makes a square of the
/// triangle and turns a product with numbers m, n into plus or minus the one with n, m.
pub(crate) fn right_isosceles() -> Vec<Case> {
    ["ddd", "dnd", "ndd", "ndn"]
        .map(|walls| {
            let domain = match walls {
                "ddd" => shape("right-isosceles", &[]),
                _ => test_shape(&format!("right-isosceles-{walls}"), &[]),
            };
            let sides = walls.as_bytes();
            let (shift, least) = between(sides[0], sides[2]);
            let even = !is_dirichlet(sides[1]);
            let list = closed_form(LIST_END, box_value(1.0, 1.0, shift, shift), |m, n| {
                n >= least && (m > n || (m == n && even))
            });
            Case::new(format!("right isosceles {walls}"), domain, list)
        })
        .into()
}

/// Every pair m, n is a level (Lame 1852): m, n >= 1 with Dirichlet, >= 0 with Neumann walls.
fn equilateral(wall: &str) -> (Case, i32) {
    let (domain, least) = match wall {
        "d" => (shape("equilateral", &[]), 1),
        _ => (test_shape("equilateral-n", &[]), 0),
    };
    let list = closed_form(LIST_END, equilateral_value, |m, n| m.min(n) >= least);
    let name = format!("equilateral {wall}");
    (Case::new(name, domain, list), least)
}

pub(crate) fn equilaterals() -> Vec<Case> {
    ["d", "n"].map(|wall| equilateral(wall).0).into()
}

/// A pair with m = n mod 3 keeps its sign under the rotation by a third (McCartin, SIAM Rev. 45 (2003) 267).
pub(crate) fn equilateral_classes() -> Vec<Case> {
    let mut cases = Vec::new();
    for wall in ["d", "n"] {
        let (whole, least) = equilateral(wall);
        for name in ["A1", "A2", "E"] {
            let list = closed_form(LIST_END, equilateral_value, |m, n| {
                let class = match ((m - n) % 3, m > n) {
                    (0, false) => "A1",
                    (0, true) => "A2",
                    _ => "E",
                };
                m.min(n) >= least && class == name
            });
            cases.push(whole.class(name, list));
        }
    }
    cases
}

/// Levels of the regular hexagon (area pi) that vanish on its three diagonals are those of the six equilateral triangles: a level
/// m, n of the triangle is odd (m > n) or even (m <= n) about its altitude, which is the other kind of axis.
pub(crate) fn hexagon_classes() -> Vec<Case> {
    let whole = Case::new("hexagon", test_shape("regular-6", &[]), Vec::new());
    // Area pi = 6 triangles of side s: s^2 = pi/(6 sqrt(3)/4).
    let side = (2.0 * PI / (3.0 * 3f64.sqrt())).sqrt();
    [("A2", true), ("B2", false)]
        .map(|(name, odd)| {
            let value = |m: f64, n: f64| equilateral_value(m, n) / side;
            let list = closed_form(LIST_END, value, |m, n| m.min(n) >= 1 && (m > n) == odd);
            whole.class(name, list)
        })
        .into()
}
