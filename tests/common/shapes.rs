//! Domains built by hand for the checks.
#![allow(dead_code)]

use orbitsum::billiard::{
    Arc, Condition, Curve, Domain, Line, PlaneCurve, Role, Shape, Vec2, Wall,
};
use std::f64::consts::PI;

/// Dirichlet.
pub(crate) const D: Condition = Condition::Dirichlet;
/// Neumann.
pub(crate) const N: Condition = Condition::Neumann;

pub(crate) fn point(x: f64, y: f64) -> Vec2 {
    Vec2::new(x, y)
}

pub(crate) fn line(start: Vec2, end: Vec2, condition: Condition) -> Wall {
    Wall::new(Shape::Line(Line { start, end }), condition)
}

/// Arc by angles in degrees.
pub(crate) fn arc(center: Vec2, radius: f64, from: f64, sweep: f64, condition: Condition) -> Wall {
    let shape = Arc {
        center,
        radius,
        from: from.to_radians(),
        sweep: sweep.to_radians(),
    };
    Wall::new(Shape::Arc(shape), condition)
}

pub(crate) fn circle(center: Vec2, radius: f64, condition: Condition) -> Wall {
    let shape = Arc {
        center,
        radius,
        from: 0.0,
        sweep: 2.0 * PI,
    };
    Wall::new(Shape::Arc(shape), condition)
}

pub(crate) fn polygon_walls(points: &[Vec2], conditions: &[Condition]) -> Vec<Wall> {
    (0..points.len())
        .map(|i| {
            line(
                points[i],
                points[(i + 1) % points.len()],
                conditions[i % conditions.len()],
            )
        })
        .collect()
}

pub(crate) fn domain(outline: Vec<Wall>) -> Domain {
    Domain::new(vec![(Role::Outer, outline)]).expect("a valid outline")
}

pub(crate) fn with_hole(outline: Vec<Wall>, hole: Vec<Wall>) -> Domain {
    Domain::new(vec![(Role::Outer, outline), (Role::Hole, hole)]).expect("a valid domain")
}

/// Outline with thin walls; each is given as its walls from one tip to the other.
pub(crate) fn with_slits(outline: Vec<Wall>, slits: Vec<Vec<Wall>>) -> Domain {
    let mut first = outline.len();
    let mut chains = vec![(Role::Outer, outline)];
    for slit in slits {
        let count = slit.len();
        let mut chain = slit.clone();
        chain.extend(slit.iter().rev().map(Wall::reversed));
        for (i, wall) in chain.iter_mut().enumerate() {
            wall.twin = Some(first + 2 * count - 1 - i);
        }
        first += 2 * count;
        chains.push((Role::Slit, chain));
    }
    Domain::new(chains).expect("a valid domain")
}

pub(crate) fn polygon(points: &[(f64, f64)], conditions: &[Condition]) -> Domain {
    let points: Vec<Vec2> = points.iter().map(|&(x, y)| point(x, y)).collect();
    domain(polygon_walls(&points, conditions))
}

/// Rectangle with a corner at the origin; conditions of the bottom, right, top and left wall.
pub(crate) fn rectangle(a: f64, b: f64, conditions: [Condition; 4]) -> Domain {
    polygon(&[(0.0, 0.0), (a, 0.0), (a, b), (0.0, b)], &conditions)
}

pub(crate) fn centered_rectangle_walls(a: f64, b: f64, conditions: [Condition; 4]) -> Vec<Wall> {
    let (x, y) = (0.5 * a, 0.5 * b);
    polygon_walls(
        &[point(-x, -y), point(x, -y), point(x, y), point(-x, y)],
        &conditions,
    )
}

/// Regular polygon with unit circumscribed circle, one corner at the angle `turned` (degrees).
pub(crate) fn regular_walls(n: usize, turned: f64, conditions: &[Condition]) -> Vec<Wall> {
    let points: Vec<Vec2> = (0..n)
        .map(|i| {
            let angle = turned.to_radians() + 2.0 * PI * i as f64 / n as f64;
            point(angle.cos(), angle.sin())
        })
        .collect();
    polygon_walls(&points, conditions)
}

/// Stadium about the origin: half straight length a, radius r.
pub(crate) fn stadium(a: f64, r: f64, condition: Condition) -> Domain {
    domain(vec![
        line(point(-a, -r), point(a, -r), condition),
        arc(point(a, 0.0), r, -90.0, 180.0, condition),
        line(point(a, r), point(-a, r), condition),
        arc(point(-a, 0.0), r, 90.0, 180.0, condition),
    ])
}

/// Quarter of the stadium: conditions of the bottom, arc, top and left wall.
pub(crate) fn quarter_stadium(a: f64, r: f64, conditions: [Condition; 4]) -> Domain {
    domain(vec![
        line(point(0.0, 0.0), point(a + r, 0.0), conditions[0]),
        arc(point(a, 0.0), r, 0.0, 90.0, conditions[1]),
        line(point(a, r), point(0.0, r), conditions[2]),
        line(point(0.0, r), point(0.0, 0.0), conditions[3]),
    ])
}

/// Half disk above the x axis: conditions of diameter and arc.
pub(crate) fn half_disk(r: f64, diameter: Condition, arc_condition: Condition) -> Domain {
    domain(vec![
        line(point(-r, 0.0), point(r, 0.0), diameter),
        arc(point(0.0, 0.0), r, 0.0, 180.0, arc_condition),
    ])
}

/// Intersection of two unit disks whose centres are `distance` apart on the x axis.
pub(crate) fn lemon(distance: f64, condition: Condition) -> Domain {
    let half = (0.5 * distance).acos().to_degrees();
    domain(vec![
        arc(
            point(-0.5 * distance, 0.0),
            1.0,
            -half,
            2.0 * half,
            condition,
        ),
        arc(
            point(0.5 * distance, 0.0),
            1.0,
            180.0 - half,
            2.0 * half,
            condition,
        ),
    ])
}

/// Ellipse about the origin, turned, starting at any parameter.
#[derive(Debug)]
pub(crate) struct Ellipse {
    pub(crate) a: f64,
    pub(crate) b: f64,
    /// Angle of the half axis a, radians.
    pub(crate) turned: f64,
}

impl PlaneCurve for Ellipse {
    fn derivatives(&self, u: f64) -> [Vec2; 4] {
        let (c, s) = (self.turned.cos(), self.turned.sin());
        [0.0, 1.0, 2.0, 3.0].map(|order| {
            // The n-th derivative of cos u is cos(u + n pi/2).
            let phase = u + order * 0.5 * PI;
            let (x, y) = (self.a * phase.cos(), self.b * phase.sin());
            point(c * x - s * y, s * x + c * y)
        })
    }
}

/// The curve r(u) = 1 + sum of e_m cos(m (u - u_m)) in polar coordinates, as a sum of harmonics exp(i n u).
#[derive(Debug)]
pub(crate) struct Harmonics {
    /// (n, real part, imaginary part) of the coefficient of exp(i n u) in x + i y.
    pub(crate) terms: Vec<(f64, f64, f64)>,
}

impl Harmonics {
    /// r(u) = 1 + sum of size cos(m (u - shift)).
    pub(crate) fn polar(waves: &[(u32, f64, f64)]) -> Self {
        let mut terms = vec![(1.0, 1.0, 0.0)];
        for &(m, size, shift) in waves {
            let m = f64::from(m);
            // e^(iu) cos(m (u - shift)) = (e^(i(1+m)u - i m shift) + e^(i(1-m)u + i m shift))/2
            let (c, s) = ((m * shift).cos(), (m * shift).sin());
            terms.push((1.0 + m, 0.5 * size * c, -0.5 * size * s));
            terms.push((1.0 - m, 0.5 * size * c, 0.5 * size * s));
        }
        Self { terms }
    }
}

impl PlaneCurve for Harmonics {
    fn derivatives(&self, u: f64) -> [Vec2; 4] {
        let mut result = [Vec2::zeros(); 4];
        for &(n, re, im) in &self.terms {
            for (order, value) in result.iter_mut().enumerate() {
                let phase = n * u + order as f64 * 0.5 * PI;
                let size = n.powi(order as i32);
                let (c, s) = (phase.cos() * size, phase.sin() * size);
                *value += point(re * c - im * s, re * s + im * c);
            }
        }
        result
    }
}

pub(crate) fn curve(
    source: impl PlaneCurve + 'static,
    from: f64,
    to: f64,
    condition: Condition,
) -> Wall {
    let shape = Curve {
        source: std::sync::Arc::new(source),
        from,
        to,
    };
    Wall::new(Shape::Curve(shape), condition)
}

pub(crate) fn ellipse(a: f64, b: f64, condition: Condition) -> Domain {
    let source = Ellipse { a, b, turned: 0.0 };
    domain(vec![curve(source, 0.0, 2.0 * PI, condition)])
}

/// r = 1 + cos u, from cusp to cusp.
pub(crate) fn cardioid(condition: Condition) -> Domain {
    let source = Harmonics::polar(&[(1, 1.0, 0.0)]);
    domain(vec![curve(source, -PI, PI, condition)])
}
