//! Triangles with straight edges that fill the outline: a regular lattice inside, joined to the nodes of the boundary by a
//! constrained Delaunay triangulation, refined where angles are small.

use super::cell::Cell;
use super::outline::Outline;
use crate::billiard::{Vec2, cross};
use spade::{
    AngleLimit, ConstrainedDelaunayTriangulation, Point2, RefinementParameters, Triangulation,
};

/// Least distance of lattice points from the boundary, in lattice spacings.
const CLEARANCE: f64 = 0.6;
/// Smallest angle in degrees that the refinement asks for; Ruppert's method ends for sure below 20.7 degrees.
const SMALLEST_ANGLE: f64 = 20.0;
/// Largest area of a triangle in units of that of the lattice's triangles.
const LARGEST_AREA: f64 = 2.0;
/// Lattice points for every one that fits: a refinement that needs more has gone astray.
const MOST_ADDED: usize = 20;

/// Points (those of the outline first) and triangles, counter-clockwise.
#[derive(Clone, Debug)]
pub(super) struct Straight {
    pub(super) points: Vec<Vec2>,
    pub(super) triangles: Vec<[usize; 3]>,
}

/// Fills the outline with triangles of edges of about `length`; `extra` are further points that must be nodes. None where the
/// segments of the outline cannot all be edges.
pub(super) fn triangulate(
    outline: &Outline,
    cell: &Cell,
    length: f64,
    extra: &[Vec2],
) -> Option<Straight> {
    let inside = Inside::new(outline, cell);
    let lattice = lattice(outline, &inside, length, extra);
    let mut mesh = ConstrainedDelaunayTriangulation::<Point2<f64>>::new();
    let mut handles = Vec::with_capacity(outline.nodes.len());
    for point in outline.nodes.iter().chain(extra).chain(&lattice) {
        handles.push(mesh.insert(Point2::new(point.x, point.y)).ok()?);
    }
    if mesh.num_vertices() != handles.len() {
        return None;
    }
    for segment in &outline.segments {
        let [a, b] = segment.nodes.map(|node| handles[node]);
        if !mesh.can_add_constraint(a, b) {
            return None;
        }
        mesh.add_constraint(a, b);
    }
    let area = LARGEST_AREA * 0.25 * 3.0_f64.sqrt() * length * length;
    mesh.refine(
        RefinementParameters::new()
            .exclude_outer_faces(true)
            .keep_constraint_edges()
            .with_angle_limit(AngleLimit::from_deg(SMALLEST_ANGLE))
            .with_max_allowed_area(area)
            .with_max_additional_vertices(MOST_ADDED * (handles.len() + 10)),
    );
    let points: Vec<Vec2> = mesh
        .vertices()
        .map(|vertex| Vec2::new(vertex.position().x, vertex.position().y))
        .collect();
    let triangles = mesh
        .inner_faces()
        .map(|face| face.vertices().map(|vertex| vertex.fix().index()))
        .filter(|corners| {
            let [a, b, c] = corners.map(|corner| points[corner]);
            !is_flat([a, b, c]) && inside.contains((a + b + c) / 3.0)
        })
        .collect();
    Some(Straight { points, triangles })
}

/// Nodes along a straight wall lie on a line but for rounding: what the triangulation makes of them is no triangle.
fn is_flat([a, b, c]: [Vec2; 3]) -> bool {
    const FLAT: f64 = 1e-10;
    let longest = (b - a)
        .norm_squared()
        .max((c - b).norm_squared())
        .max((a - c).norm_squared());
    cross(b - a, c - a) < FLAT * longest
}

/// Tells which points lie inside the polygon of the outline's chords.
struct Inside {
    chords: Vec<[Vec2; 2]>,
}

impl Inside {
    fn new(outline: &Outline, cell: &Cell) -> Self {
        let chords = (0..outline.segments.len())
            .filter(|&segment| !cell.pieces[outline.segments[segment].piece].two_sided)
            .map(|segment| outline.chord(segment))
            .collect();
        Self { chords }
    }

    /// Even-odd rule.
    fn contains(&self, point: Vec2) -> bool {
        let crossed = self.chords.iter().filter(|[a, b]| {
            (a.y > point.y) != (b.y > point.y) && (cross(b - a, point - a) > 0.0) == (b.y > a.y)
        });
        crossed.count() % 2 == 1
    }
}

/// Points of a lattice of equilateral triangles inside the outline, at a distance from its segments.
fn lattice(outline: &Outline, inside: &Inside, length: f64, extra: &[Vec2]) -> Vec<Vec2> {
    let mut low = Vec2::repeat(f64::INFINITY);
    let mut high = Vec2::repeat(f64::NEG_INFINITY);
    for node in &outline.nodes {
        low = low.inf(node);
        high = high.sup(node);
    }
    let row_height = 0.5 * 3.0_f64.sqrt() * length;
    let rows = ((high.y - low.y) / row_height).ceil() as usize;
    let columns = ((high.x - low.x) / length).ceil() as usize + 1;
    let clearance = CLEARANCE * length;
    let mut points = Vec::new();
    for row in 0..=rows {
        let y = low.y + (row as f64 + 0.5) * row_height;
        let near: Vec<[Vec2; 2]> = (0..outline.segments.len())
            .map(|segment| outline.chord(segment))
            .filter(|[a, b]| a.y.min(b.y) < y + clearance && a.y.max(b.y) > y - clearance)
            .collect();
        let shift = if row % 2 == 0 { 0.25 } else { -0.25 };
        for column in 0..=columns {
            let point = Vec2::new(low.x + (column as f64 + shift) * length, y);
            let clear = near.iter().all(|chord| distance(point, chord) > clearance);
            let apart = extra.iter().all(|other| (other - point).norm() > clearance);
            if clear && apart && inside.contains(point) {
                points.push(point);
            }
        }
    }
    points
}

/// Distance of a point from a straight segment.
fn distance(point: Vec2, [a, b]: &[Vec2; 2]) -> f64 {
    let along = (point - a).dot(&(b - a)) / (b - a).norm_squared();
    (a + (b - a) * along.clamp(0.0, 1.0) - point).norm()
}
