//! Layers of ever smaller triangles around the points at which waves are singular.
//!
//! With layers that shrink by a constant factor and a degree that falls towards the point, the error falls exponentially with
//! the number of unknowns for every power of the distance (Guo & Babuska, Comput. Mech. 1 (1986) 21).

use super::{BoundaryEdge, Draft, STRAIGHT};
use crate::billiard::Vec2;

/// Ratio of the sizes of neighbouring layers (Gui & Babuska, Numer. Math. 49 (1986) 577, find 0.15 for powers of the distance).
pub(super) const RATIO: f64 = 0.2;
/// Error of a level that may be left in the innermost triangles, relative.
const INNERMOST: f64 = 1e-13;

/// Number of layers for waves with r^exponent: the innermost triangles hold a part of about ratio^(2 exponent layers) of the
/// singular energy.
fn layers(exponent: f64) -> usize {
    (INNERMOST.ln() / (2.0 * exponent * RATIO.ln())).ceil() as usize
}

/// Cuts all triangles at the point `center` into layers.
pub(super) fn grade(draft: &mut Draft, center: usize, exponent: f64) {
    let count = layers(exponent);
    let mut rims: Vec<(usize, Vec<usize>)> = Vec::new();
    let (inner, outer): (Vec<_>, Vec<_>) = std::mem::take(&mut draft.triangles)
        .into_iter()
        .partition(|(corners, _)| corners.contains(&center));
    draft.triangles = outer;
    for (corners, _) in inner {
        let first = corners
            .iter()
            .position(|&corner| corner == center)
            .unwrap_or(0);
        let (a, b) = (corners[(first + 1) % 3], corners[(first + 2) % 3]);
        let left = rim(draft, &mut rims, center, a, count);
        let right = rim(draft, &mut rims, center, b, count);
        for layer in 0..count {
            let quality = (count - layer) as f64 / count as f64;
            let (p, q) = (left[layer], right[layer]);
            let (r, s) = (right[layer + 1], left[layer + 1]);
            // The quadrilateral s p q r, cut along its shorter diagonal.
            let length = |i: usize, j: usize| (draft.points[i] - draft.points[j]).norm();
            let halves = if length(s, q) <= length(p, r) {
                [[s, p, q], [s, q, r]]
            } else {
                [[s, p, r], [p, q, r]]
            };
            draft.triangles.extend(halves.map(|half| (half, quality)));
        }
        draft
            .triangles
            .push(([center, left[count], right[count]], 0.0));
    }
}

/// The points at which the layers cut the edge from `center` to `outer`, from outside inwards.
fn rim(
    draft: &mut Draft,
    rims: &mut Vec<(usize, Vec<usize>)>,
    center: usize,
    outer: usize,
    count: usize,
) -> Vec<usize> {
    if let Some((_, points)) = rims.iter().find(|(known, _)| *known == outer) {
        return points.clone();
    }
    let wall = draft.take_edge(center, outer);
    let mut points = vec![outer];
    let mut offset = draft.points[outer] - draft.points[center];
    let mut t = wall.map_or(0.0, |edge| edge.t_at(outer));
    for _ in 0..count {
        let before = t;
        (offset, t) = match &wall {
            Some(edge) => along_wall(draft, edge, center, offset, t),
            None => (offset * RATIO, 0.0),
        };
        let new = draft.add_near(center, offset);
        let nodes = [points[points.len() - 1], new];
        draft.put_part(wall.as_ref(), center, nodes, [before, t]);
        points.push(new);
    }
    let end = wall.map_or(0.0, |edge| edge.t_at(center));
    draft.put_part(wall.as_ref(), center, [points[count], center], [t, end]);
    rims.push((outer, points.clone()));
    points
}

/// The point of the wall at [`RATIO`] times the distance from the centre that `offset` has, and the wall's parameter there.
fn along_wall(
    draft: &Draft,
    edge: &BoundaryEdge,
    center: usize,
    offset: Vec2,
    t: f64,
) -> (Vec2, f64) {
    let origin: Vec2 = draft.points[center];
    let (mut near, mut far) = (edge.t_at(center), t);
    let wall = &draft.cell.pieces[edge.piece].wall;
    if wall.is_straight() {
        return (offset * RATIO, near + (far - near) * RATIO);
    }
    let wanted = RATIO * offset.norm();
    if wanted < STRAIGHT * draft.cell.size {
        return (offset * RATIO, near);
    }
    // Bisection down to the last digit.
    loop {
        let middle = 0.5 * (near + far);
        if middle == near || middle == far {
            return (wall.point(far) - origin, far);
        }
        if (wall.point(middle) - origin).norm() < wanted {
            near = middle;
        } else {
            far = middle;
        }
    }
}
