//! Curved edges: how far an edge bows out of its chord.

use crate::billiard::quadrature::integrate;
use crate::billiard::{Vec2, Wall};
use std::f64::consts::PI;

/// Points at which the bow is interpolated: an edge that turns by half a radian is a polynomial of degree 20 to rounding.
const NODES: usize = 24;
/// Largest distance from the wall, relative to the chord, of an edge that is resolved (rounding comes on top).
const RESOLVED: f64 = 1e-13;
/// Places at which the distance is looked at.
const CHECKS: usize = 13;

/// The displacement of a curved edge from its chord, divided by s (1 - s), as a Chebyshev series in s, 0 <= s <= 1.
///
/// Divided so, the displacement can be blended smoothly into a triangle (Gordon & Hall, Numer. Math. 21 (1973) 109).
#[derive(Clone, Debug)]
pub(in crate::solver) struct Bow {
    coefficients: Vec<Vec2>,
}

impl Bow {
    /// The bow of the part of a wall between two parameters. None if the series does not converge to the
    /// rounding of a domain of this size.
    pub(super) fn new(wall: &Wall, [from, to]: [f64; 2], size: f64) -> Option<Self> {
        let (start, end) = (wall.point(from), wall.point(to));
        let pace = Pace::new(wall, [from, to]);
        let samples: Vec<Vec2> = (0..NODES)
            .map(|i| {
                let s = 0.5 + 0.5 * node(i).cos();
                let chord = start * (1.0 - s) + end * s;
                (wall.point(from + (to - from) * pace.at(s)) - chord) / (s * (1.0 - s))
            })
            .collect();
        let coefficients: Vec<Vec2> = (0..NODES)
            .map(|n| {
                let sum: Vec2 = samples
                    .iter()
                    .enumerate()
                    .map(|(i, sample)| *sample * (n as f64 * node(i)).cos())
                    .sum();
                sum * (if n == 0 { 1.0 } else { 2.0 } / NODES as f64)
            })
            .collect();
        let bow = Self { coefficients };
        let error = (0..CHECKS)
            .map(|i| {
                let s = (i as f64 + 0.5) / CHECKS as f64;
                let point = start * (1.0 - s) + end * s + bow.at(s).0 * (s * (1.0 - s));
                (wall.point(from + (to - from) * pace.at(s)) - point).norm()
            })
            .fold(0.0, f64::max);
        let allowed = RESOLVED * (end - start).norm() + 8.0 * f64::EPSILON * size;
        (error < allowed).then_some(bow)
    }

    /// Value and derivative with respect to s (Clenshaw's recurrence).
    pub(in crate::solver) fn at(&self, s: f64) -> (Vec2, Vec2) {
        let z = 2.0 * s - 1.0;
        let (mut b1, mut b2) = (Vec2::zeros(), Vec2::zeros());
        let (mut d1, mut d2) = (Vec2::zeros(), Vec2::zeros());
        for &c in self.coefficients.iter().skip(1).rev() {
            let d = b1 * 2.0 + d1 * (2.0 * z) - d2;
            (d2, d1) = (d1, d);
            let b = c + b1 * (2.0 * z) - b2;
            (b2, b1) = (b1, b);
        }
        let value = self.coefficients[0] + b1 * z - b2;
        let slope = b1 + d1 * z - d2;
        (value, slope * 2.0)
    }
}

/// How the wall's parameter runs along the edge: a cubic that makes the speed at both ends that of an even walk, since curves
/// may be given with any parameter and an uneven one makes uneven elements.
struct Pace {
    ends: [f64; 2],
}

impl Pace {
    fn new(wall: &Wall, [from, to]: [f64; 2]) -> Self {
        let speed = |t: f64| wall.frame(t).speed;
        let length = integrate(from, to, 1, speed);
        let slope = |t: f64| length / ((to - from) * speed(t));
        Self {
            ends: [slope(from), slope(to)],
        }
    }

    fn at(&self, s: f64) -> f64 {
        let [a, b] = self.ends;
        s + s * (1.0 - s) * ((a - 1.0) * (1.0 - s) - (b - 1.0) * s)
    }
}

fn node(i: usize) -> f64 {
    PI * (i as f64 + 0.5) / NODES as f64
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::billiard::{Arc, Condition, Shape};

    #[test]
    fn the_bow_leads_back_to_the_arc() {
        let arc = Arc {
            center: Vec2::new(0.3, -0.2),
            radius: 1.5,
            from: 0.4,
            sweep: 2.0,
        };
        let wall = Wall::new(Shape::Arc(arc), Condition::Dirichlet);
        let range = [0.3, 1.1];
        let bow = Bow::new(&wall, range, 3.0).expect("an arc is smooth");
        let at = |s: f64| {
            wall.point(range[0]) * (1.0 - s)
                + wall.point(range[1]) * s
                + bow.at(s).0 * (s * (1.0 - s))
        };
        for i in 0..=20 {
            let s = f64::from(i) / 20.0;
            let exact = wall.point(range[0] + (range[1] - range[0]) * s);
            assert!((at(s) - exact).norm() < 1e-15);
            let step = 1e-5;
            let slope = (bow.at(s + step).0 - bow.at(s - step).0) / (2.0 * step);
            assert!((slope - bow.at(s).1).norm() < 1e-9);
        }
    }
}
