//! Domains and a checker of documents for the tests of pictures.

use crate::billiard::{
    Arc, Condition, Curve, Domain, Element, Line, Mat2, PlaneCurve, Role, Shape, Symmetry, Vec2,
    Wall,
};
use std::f64::consts::{PI, TAU};
use std::sync::Arc as Shared;

/// A straight wall.
pub(super) fn line(from: [f64; 2], to: [f64; 2], condition: Condition) -> Wall {
    let shape = Shape::Line(Line {
        start: from.into(),
        end: to.into(),
    });
    Wall::new(shape, condition)
}

/// Straight walls through points, closed.
pub(super) fn polygon(points: &[[f64; 2]], conditions: &[Condition]) -> Vec<Wall> {
    (0..points.len())
        .map(|index| {
            let condition = conditions[index % conditions.len()];
            line(points[index], points[(index + 1) % points.len()], condition)
        })
        .collect()
}

fn arc(center: [f64; 2], radius: f64, from: f64, sweep: f64) -> Wall {
    let shape = Shape::Arc(Arc {
        center: center.into(),
        radius,
        from,
        sweep,
    });
    Wall::new(shape, Condition::Dirichlet)
}

fn domain(chains: Vec<(Role, Vec<Wall>)>) -> Domain {
    Domain::new(chains).expect("the test's domain is a domain")
}

/// Stadium of radius 1 and half straight 1.
pub(super) fn stadium() -> Domain {
    let straight = |from, to| line(from, to, Condition::Dirichlet);
    domain(vec![(
        Role::Outer,
        vec![
            straight([-1.0, -1.0], [1.0, -1.0]),
            arc([1.0, 0.0], 1.0, -PI / 2.0, PI),
            straight([1.0, 1.0], [-1.0, 1.0]),
            arc([-1.0, 0.0], 1.0, PI / 2.0, PI),
        ],
    )])
}

/// Ring between the radii 0.4 (off centre) and 1.
pub(super) fn ring() -> Domain {
    domain(vec![
        (Role::Outer, vec![arc([0.0, 0.0], 1.0, 0.0, TAU)]),
        (Role::Hole, vec![arc([0.25, 0.0], 0.4, 0.0, -TAU)]),
    ])
}

/// Unit square with a slit of two pieces, the second one with unlike faces.
pub(super) fn slit_square() -> Domain {
    let mut slit = vec![
        line([0.5, 0.0 + 0.2], [0.5, 0.5], Condition::Dirichlet),
        line([0.5, 0.5], [0.7, 0.8], Condition::Dirichlet),
        line([0.7, 0.8], [0.5, 0.5], Condition::Neumann),
        line([0.5, 0.5], [0.5, 0.2], Condition::Dirichlet),
    ];
    for (index, twin) in [7, 6, 5, 4].into_iter().enumerate() {
        slit[index].twin = Some(twin);
    }
    let corners = [[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]];
    domain(vec![
        (Role::Outer, polygon(&corners, &[Condition::Dirichlet])),
        (Role::Slit, slit),
    ])
}

/// Polygon with two walls of either condition, corners of both kinds and a hole.
pub(super) fn mixed_polygon() -> Domain {
    use Condition::{Dirichlet, Neumann};
    let outer = [
        [0.0, 0.0],
        [300.0, 0.0],
        [300.0, 120.0],
        [180.0, 240.0],
        [0.0, 200.0],
    ];
    let hole = [[100.0, 80.0], [160.0, 90.0], [120.0, 140.0]];
    domain(vec![
        (
            Role::Outer,
            polygon(&outer, &[Dirichlet, Neumann, Neumann, Dirichlet, Dirichlet]),
        ),
        (Role::Hole, polygon(&hole, &[Dirichlet, Neumann])),
    ])
}

#[derive(Debug)]
struct CardioidCurve;

impl PlaneCurve for CardioidCurve {
    fn derivatives(&self, u: f64) -> [Vec2; 4] {
        // z = e^iu + e^2iu/2 + 1/2, up to a shift.
        let wave = |n: f64, turn: f64| {
            let angle = n * u + turn * PI / 2.0;
            Vec2::new(angle.cos(), angle.sin())
        };
        [0.0, 1.0, 2.0, 3.0]
            .map(|order: f64| wave(1.0, order) + wave(2.0, order) * 2f64.powf(order - 1.0))
    }
}

/// Cardioid, one curve with a cusp.
pub(super) fn cardioid() -> Domain {
    let curve = Curve {
        source: Shared::new(CardioidCurve),
        from: -PI,
        to: PI,
    };
    domain(vec![(
        Role::Outer,
        vec![Wall::new(Shape::Curve(curve), Condition::Dirichlet)],
    )])
}

/// Group of the rectangle about the origin (elements only: pictures ask for nothing else).
pub(super) fn rectangle_group() -> Symmetry {
    let element = |name: &str, a: f64, d: f64| Element {
        name: name.into(),
        matrix: Mat2::new(a, 0.0, 0.0, d),
    };
    Symmetry {
        name: "rectangle".into(),
        elements: vec![
            element("e", 1.0, 1.0),
            element("C2", -1.0, -1.0),
            element("x->-x", -1.0, 1.0),
            element("y->-y", 1.0, -1.0),
        ],
        ..Symmetry::trivial()
    }
}

/// Texts of a document, after checking that it is well formed as far as pictures use XML: one root, tags nested, attributes
/// quoted and named once, no bare markup characters, known entities.
pub(super) fn checked(document: &str) -> Vec<String> {
    let mut rest = document
        .strip_prefix("<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n")
        .expect("starts with a declaration");
    let mut open: Vec<String> = Vec::new();
    let mut texts = Vec::new();
    let mut roots = 0;
    while let Some(start) = rest.find('<') {
        let (text, tag) = rest.split_at(start);
        check_characters(text);
        if !text.trim().is_empty() {
            assert!(!open.is_empty(), "text outside of the root: {text}");
            texts.push(text.trim().to_owned());
        }
        let end = tag.find('>').expect("tag ends");
        let inside = &tag[1..end];
        rest = &tag[end + 1..];
        if let Some(name) = inside.strip_prefix('/') {
            assert_eq!(open.pop().as_deref(), Some(name));
            continue;
        }
        let (inside, empty) = inside
            .strip_suffix('/')
            .map_or((inside, false), |inside| (inside, true));
        let name = inside.split_whitespace().next().expect("tag has a name");
        check_attributes(&inside[name.len()..]);
        if open.is_empty() {
            roots += 1;
            assert_eq!(name, "svg");
        }
        if !empty {
            open.push(name.to_owned());
        }
    }
    assert!(rest.trim().is_empty() && open.is_empty() && roots == 1);
    assert!(document.contains("<title>") && document.contains("<desc>"));
    assert!(!document.contains("NaN") && !document.contains("inf "));
    texts
}

fn check_attributes(mut rest: &str) {
    let mut names = Vec::new();
    while !rest.trim().is_empty() {
        let (name, value) = rest
            .split_once("=\"")
            .expect("attribute has a quoted value");
        assert!(
            name.starts_with(' ') && !names.contains(&name.trim()),
            "{name}"
        );
        names.push(name.trim());
        let (value, after) = value.split_once('"').expect("quote ends");
        check_characters(value);
        rest = after;
    }
}

fn check_characters(text: &str) {
    assert!(!text.contains('>'), "{text}");
    assert!(
        text.chars()
            .all(|letter| letter == '\n' || u32::from(letter) >= 0x20)
    );
    for entity in text.split('&').skip(1) {
        let name = entity.split(';').next().expect("split gives one part");
        assert!(
            ["amp", "lt", "gt", "quot", "apos"].contains(&name),
            "{text}"
        );
    }
}

/// Writes a picture for people to look at, where the environment variable PICTURES names a folder.
pub(super) fn keep(name: &str, picture: &str) {
    if let Some(folder) = std::env::var_os("PICTURES") {
        let path = std::path::Path::new(&folder)
            .join(name)
            .with_extension("svg");
        std::fs::write(path, picture).expect("picture is written");
    }
}
