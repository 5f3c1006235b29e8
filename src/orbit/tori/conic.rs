//! Recognition of circles and ellipses in closed curves.

use crate::billiard::{Vec2, Wall};
use nalgebra::{Matrix5, Vector5};

/// Points at which every wall is compared with the conic; a curve of this many free coefficients could pass through them
/// all without being one, but no formula that somebody writes does.
const SAMPLES: usize = 96;

/// Largest distance from the conic, in units of its size, of a curve that still is one. Formulas reach 1e-15; a shape that differs by
/// 1e-10 has levels that differ by less than 1e-8 of a spacing.
const RESIDUAL: f64 = 1e-10;

/// Half axes that differ by less than this (relative) are those of a circle.
const CIRCLE: f64 = 1e-9;

/// A conic fitted to a closed curve.
#[derive(Clone, Copy, Debug)]
pub(super) struct Conic {
    pub(super) center: Vec2,
    pub(super) long: f64,
    pub(super) short: f64,
}

impl Conic {
    pub(super) fn is_circle(&self) -> bool {
        self.long - self.short < CIRCLE * self.long
    }
}

/// The ellipse on which all points of the walls lie, if there is one.
///
/// Least-squares fit of A x^2 + B x y + C y^2 + D x + E y = 1 in coordinates moved to the mean of the points and scaled to
/// their size (then the constant term of an ellipse does not vanish), accepted if every sample lies on it.
pub(super) fn fit(walls: &[Wall]) -> Option<Conic> {
    let points: Vec<Vec2> = walls.iter().flat_map(samples).collect();
    let mean = points.iter().sum::<Vec2>() / points.len() as f64;
    let size = points
        .iter()
        .map(|point| (point - mean).norm())
        .fold(0.0, f64::max);
    let scaled: Vec<Vec2> = points.iter().map(|point| (point - mean) / size).collect();
    let mut coefficients = Vector5::zeros();
    // Normal equations square the condition number; one step of refinement on the residuals restores the digits.
    for _ in 0..2 {
        coefficients += correction(&scaled, &coefficients)?;
    }
    let [a, b, c, d, e] = [0, 1, 2, 3, 4].map(|i| coefficients[i]);
    let discriminant = 4.0 * a * c - b * b;
    if discriminant <= 0.0 || a <= 0.0 {
        return None;
    }
    let center = Vec2::new(b * e - 2.0 * c * d, b * d - 2.0 * a * e) / discriminant;
    let level = 1.0 - 0.5 * (d * center.x + e * center.y);
    let (middle, spread) = (0.5 * (a + c), 0.5 * (a - c).hypot(b));
    if middle - spread <= 0.0 || level <= 0.0 {
        return None;
    }
    // |Q - 1| over the length of its gradient is the distance to first order.
    let on_conic = scaled.iter().all(|p| {
        let value = row(p).dot(&coefficients) - 1.0;
        let gradient = Vec2::new(2.0 * a * p.x + b * p.y + d, b * p.x + 2.0 * c * p.y + e).norm();
        value.abs() <= RESIDUAL * gradient
    });
    on_conic.then(|| Conic {
        center: mean + center * size,
        long: size * (level / (middle - spread)).sqrt(),
        short: size * (level / (middle + spread)).sqrt(),
    })
}

fn row(p: &Vec2) -> Vector5<f64> {
    Vector5::new(p.x * p.x, p.x * p.y, p.y * p.y, p.x, p.y)
}

fn correction(points: &[Vec2], coefficients: &Vector5<f64>) -> Option<Vector5<f64>> {
    let mut matrix = Matrix5::zeros();
    let mut right = Vector5::zeros();
    for point in points {
        let row = row(point);
        matrix += row * row.transpose();
        right += row * (1.0 - row.dot(coefficients));
    }
    matrix.cholesky().map(|factor| factor.solve(&right))
}

fn samples(wall: &Wall) -> impl Iterator<Item = Vec2> {
    (0..SAMPLES).map(move |i| wall.point(wall.extent() * (i as f64 + 0.5) / SAMPLES as f64))
}
