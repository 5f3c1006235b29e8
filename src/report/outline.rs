//! Walls as chains of points, and the view that puts them on the sheet.

use super::canvas::{number, polyline};
use super::thinning::straightened;
use crate::billiard::{Domain, Shape, Vec2, Wall, WallLoop};

/// Largest angle, radians, by which a drawn piece of a curved wall turns (2 degrees: on an arc that fills the sheet the
/// chord then leaves the arc by less than 0.04 points).
const LARGEST_TURN: f64 = 0.035;
/// Halvings that every curve gets before its turning is trusted: a curve may turn there and back in between.
const FEWEST_HALVINGS: u32 = 3;
/// Halvings after which a curve is drawn as it is, be its turning finite or not.
const MOST_HALVINGS: u32 = 10;
/// Part of the sheet's extent that a domain without extent in that direction is taken to have.
const FLAT: f64 = 1e-3;

/// The wall as a chain of finite points.
pub(super) fn sampled(wall: &Wall) -> Vec<Vec2> {
    let extent = wall.extent();
    let mut points = match &wall.shape {
        Shape::Line(line) => vec![line.start, line.end],
        Shape::Arc(arc) => {
            let pieces = (arc.sweep.abs() / LARGEST_TURN).ceil().max(1.0) as usize;
            (0..=pieces)
                .map(|index| wall.point(extent * index as f64 / pieces as f64))
                .collect()
        }
        Shape::Curve(_) => {
            let mut points = vec![wall.point(0.0)];
            halve(wall, 0.0, extent, 0, &mut points);
            points
        }
    };
    points.retain(|point| point.x.is_finite() && point.y.is_finite());
    points
}

/// Adds the points of a curve in (from, to].
fn halve(wall: &Wall, from: f64, to: f64, depth: u32, points: &mut Vec<Vec2>) {
    let middle = 0.5 * (from + to);
    let turn = |a: f64, b: f64| wall.frame(a).tangent.angle(&wall.frame(b).tangent);
    let bent = || turn(from, middle) > 0.5 * LARGEST_TURN || turn(middle, to) > 0.5 * LARGEST_TURN;
    if depth < FEWEST_HALVINGS || (depth < MOST_HALVINGS && bent()) {
        halve(wall, from, middle, depth + 1, points);
        halve(wall, middle, to, depth + 1, points);
    } else {
        points.push(wall.point(to));
    }
}

/// Lower left and upper right corner of the box around the domain.
pub(super) fn bounds(domain: &Domain) -> (Vec2, Vec2) {
    let mut low = Vec2::repeat(f64::INFINITY);
    let mut high = Vec2::repeat(f64::NEG_INFINITY);
    for point in domain.walls.iter().flat_map(sampled) {
        low = low.inf(&point);
        high = high.sup(&point);
    }
    if low.x > high.x {
        return (Vec2::zeros(), Vec2::repeat(1.0));
    }
    // A box without height or width gets some, so that the view has a scale.
    let margin = FLAT * (high - low).max().max(f64::MIN_POSITIVE * 1e12);
    for axis in 0..2 {
        if high[axis] - low[axis] < margin {
            low[axis] -= margin;
            high[axis] += margin;
        }
    }
    (low, high)
}

/// A map from the plane to the sheet, the same scale in both directions, y upwards.
#[derive(Clone, Copy, Debug)]
pub(super) struct View {
    /// Points of the sheet per unit of length.
    pub(super) scale: f64,
    /// Where the origin of the plane lies on the sheet.
    origin: Vec2,
}

impl View {
    /// The view in which the box between `low` and `high` fills a width and height as far as its form allows.
    pub(super) fn scale_for((low, high): (Vec2, Vec2), width: f64, height: f64) -> f64 {
        let size = high - low;
        (width / size.x).min(height / size.y)
    }

    /// The view of that scale which puts the middle of the box at `center` on the sheet.
    pub(super) fn centered((low, high): (Vec2, Vec2), scale: f64, center: Vec2) -> Self {
        let middle = 0.5 * (low + high);
        Self {
            scale,
            origin: center - Vec2::new(middle.x, -middle.y) * scale,
        }
    }

    /// Where a point lies on the sheet.
    pub(super) fn place(&self, point: Vec2) -> Vec2 {
        self.origin + self.turn(point) * self.scale
    }

    /// A direction of the plane on the sheet.
    pub(super) fn turn(&self, direction: Vec2) -> Vec2 {
        Vec2::new(direction.x, -direction.y)
    }

    /// Path data of one wall.
    pub(super) fn wall_path(&self, wall: &Wall) -> String {
        polyline(&self.chain(&sampled(wall)))
    }

    /// Path data of a closed chain of walls.
    pub(super) fn loop_path(&self, domain: &Domain, chain: &WallLoop) -> String {
        let mut points = Vec::new();
        for wall in &domain.walls[chain.walls.clone()] {
            points.extend(sampled(wall));
        }
        closed(&self.chain(&points))
    }

    /// Points on the sheet, without those that a straight line can do without.
    pub(super) fn chain(&self, points: &[Vec2]) -> Vec<Vec2> {
        let placed: Vec<Vec2> = points.iter().map(|point| self.place(*point)).collect();
        straightened(&placed)
    }
}

/// Path data of a closed chain of points on the sheet.
pub(super) fn closed(points: &[Vec2]) -> String {
    let mut path = polyline(points);
    if points.len() > 1 {
        path.push('Z');
    }
    path
}

/// Path data of a straight stroke through `center` along a unit vector, `reach` to either side.
pub(super) fn stroke_through(center: Vec2, direction: Vec2, reach: f64) -> String {
    let (a, b) = (center - direction * reach, center + direction * reach);
    format!(
        "M{} {}L{} {}",
        number(a.x),
        number(a.y),
        number(b.x),
        number(b.y)
    )
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::super::testing::{cardioid, stadium};
    use super::*;
    use crate::billiard::cross;

    #[test]
    fn sampled_walls_hold_the_area_of_the_domain() {
        for domain in [stadium(), cardioid()] {
            let points: Vec<Vec2> = domain.walls.iter().flat_map(sampled).collect();
            let area: f64 = (0..points.len())
                .map(|index| 0.5 * cross(points[index], points[(index + 1) % points.len()]))
                .sum();
            // A polygon with turns of 2 degrees lacks about turn^2/6 of the area under its arcs.
            let lack = 1.0 - area / domain.area;
            assert!(
                (0.0..LARGEST_TURN * LARGEST_TURN / 4.0).contains(&lack),
                "{lack}"
            );
        }
    }

    #[test]
    fn curves_do_not_get_more_points_than_they_need() {
        let count: usize = cardioid()
            .walls
            .iter()
            .map(|wall| sampled(wall).len())
            .sum();
        assert!((100..600).contains(&count), "{count}");
    }

    #[test]
    fn the_view_keeps_the_form_and_turns_y_upwards() {
        let frame = (Vec2::new(-2.0, -1.0), Vec2::new(2.0, 1.0));
        let scale = View::scale_for(frame, 400.0, 400.0);
        assert_eq!(scale, 100.0);
        let view = View::centered(frame, scale, Vec2::new(300.0, 200.0));
        assert_eq!(view.place(Vec2::new(2.0, 1.0)), Vec2::new(500.0, 100.0));
        assert_eq!(view.place(Vec2::zeros()), Vec2::new(300.0, 200.0));
    }
}
