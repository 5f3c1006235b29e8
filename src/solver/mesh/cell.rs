//! The region that is cut into elements: the whole domain, or for a symmetry class one fundamental cell of its group.
//!
//! The cell is the part of the domain in a wedge about the centre: between two neighbouring axes of a group with
//! reflections, or over one angle of rotation of a group without. Walls are cut where they meet the edges of the wedge, and
//! the edges, where they run inside the domain, become sides of the cell.

use crate::billiard::{Domain, Interior, Shape, Symmetry, Vec2, VertexKind, Wall, cross};
use std::f64::consts::PI;

/// Points closer than this many sizes of the domain are one point.
pub(super) const SAME_POINT: f64 = 1e-9;
/// Samples along a curved wall in which its crossings with a straight line are looked for: closer pairs of crossings would
/// need a wall that touches the edge of the wedge, which no symmetric shape has.
const SAMPLES: usize = 512;

/// What a side of the cell is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(in crate::solver) enum Side {
    /// Part of a wall, by its number.
    Wall(usize),
    /// Part of the first (0) or second (1) axis that bounds the wedge.
    Mirror(usize),
    /// Part of the first (0) edge of the wedge, or of its image under the rotation (1).
    Cut(usize),
}

/// A side of the cell, or a piece of one.
#[derive(Clone, Debug)]
pub(in crate::solver) struct Piece {
    pub(in crate::solver) side: Side,
    /// The wall, or the straight line along the edge of the wedge.
    pub(in crate::solver) wall: Wall,
    /// Range of the wall's parameter.
    pub(in crate::solver) from: f64,
    pub(in crate::solver) to: f64,
    /// Part of a thin wall: the cell lies on both sides of it.
    pub(in crate::solver) two_sided: bool,
}

impl Piece {
    pub(in crate::solver) fn is_straight(&self) -> bool {
        self.wall.is_straight()
    }
}

/// A point of the boundary at which the waves are singular.
#[derive(Clone, Copy, Debug)]
pub(in crate::solver) struct Singularity {
    pub(in crate::solver) point: Vec2,
    /// The waves contain r^exponent (perhaps with a logarithm), r the distance from the point.
    pub(in crate::solver) exponent: f64,
}

/// The region that is cut into elements.
#[derive(Clone, Debug)]
pub(in crate::solver) struct Cell {
    pub(in crate::solver) pieces: Vec<Piece>,
    pub(in crate::solver) singularities: Vec<Singularity>,
    pub(in crate::solver) center: Vec2,
    pub(in crate::solver) size: f64,
    /// Area of the cell.
    pub(in crate::solver) area: f64,
}

/// Between two half lines from a centre.
#[derive(Clone, Copy, Debug)]
struct Wedge {
    center: Vec2,
    rays: [Vec2; 2],
    reflections: bool,
    tolerance: f64,
}

impl Wedge {
    fn of(domain: &Domain, symmetry: &Symmetry) -> Self {
        let axes = symmetry.axes();
        let rotations = symmetry.rotations() as f64;
        let (first, opening) = match axes.first() {
            Some((_, direction)) => (*direction, PI / rotations),
            None => (steepest_ray(domain, symmetry), 2.0 * PI / rotations),
        };
        let (sin, cos) = opening.sin_cos();
        let second = if axes.is_empty() {
            symmetry.elements[1].matrix * first
        } else if axes.len() > 1 {
            // The next axis, pointing into the half plane on the left of the first.
            let direction = axes[1].1;
            direction * cross(first, direction).signum()
        } else {
            Vec2::new(cos * first.x - sin * first.y, sin * first.x + cos * first.y)
        };
        Self {
            center: symmetry.center,
            rays: [first, second],
            reflections: !axes.is_empty(),
            tolerance: SAME_POINT * domain.size,
        }
    }

    fn contains(&self, point: Vec2) -> bool {
        let v = point - self.center;
        let half_plane = cross(self.rays[0], self.rays[1]).abs() < 1e-9;
        cross(self.rays[0], v) > -self.tolerance
            && (half_plane || cross(v, self.rays[1]) > -self.tolerance)
    }

    /// Does the point lie on a ray?
    fn on_ray(&self, ray: usize, point: Vec2) -> bool {
        let v = point - self.center;
        cross(self.rays[ray], v).abs() < self.tolerance && v.dot(&self.rays[ray]) > -self.tolerance
    }

    fn side(&self, ray: usize) -> Side {
        if self.reflections {
            Side::Mirror(ray)
        } else {
            Side::Cut(ray)
        }
    }
}

/// The direction from the centre, among a few dozen, along which the walls are crossed most steeply: an edge of a wedge that
/// runs along a wall would make bad elements.
fn steepest_ray(domain: &Domain, symmetry: &Symmetry) -> Vec2 {
    const TRIED: usize = 48;
    let steepness = |direction: Vec2| {
        let mut least = f64::INFINITY;
        for wall in &domain.walls {
            for t in crossings(wall, symmetry.center, direction) {
                let tangent = wall.frame(t).tangent;
                least = least.min(cross(direction, tangent).abs());
            }
        }
        for vertex in &domain.vertices {
            let v = vertex.point - symmetry.center;
            least = least.min(4.0 * cross(direction, v).abs() / domain.size);
        }
        least
    };
    let directions = (0..TRIED).map(|i| {
        let (sin, cos) = (2.0 * PI * (i as f64 + 0.37) / TRIED as f64).sin_cos();
        Vec2::new(cos, sin)
    });
    directions
        .map(|direction| (steepness(direction), direction))
        .fold((f64::NEG_INFINITY, Vec2::x()), |best, next| {
            if next.0 > best.0 { next } else { best }
        })
        .1
}

/// Parameters at which a wall crosses a half line (its ends are not looked at).
fn crossings(wall: &Wall, center: Vec2, direction: Vec2) -> Vec<f64> {
    let extent = wall.extent();
    let height = |t: f64| cross(direction, wall.point(t) - center);
    let samples = if wall.is_straight() { 1 } else { SAMPLES };
    let at = |i: usize| extent * i as f64 / samples as f64;
    let mut found = Vec::new();
    for i in 0..samples {
        let (mut low, mut high) = (at(i), at(i + 1));
        let (first, last) = (height(low), height(high));
        if (first >= 0.0) == (last >= 0.0) {
            continue;
        }
        // Bisection down to the last digit.
        loop {
            let middle = 0.5 * (low + high);
            if middle <= low || middle >= high {
                break;
            }
            if (height(middle) >= 0.0) == (first >= 0.0) {
                low = middle;
            } else {
                high = middle;
            }
        }
        // The centre itself counts: a thin wall may run through it.
        if (wall.point(low) - center).dot(&direction) > -SAME_POINT * extent {
            found.push(low);
        }
    }
    found
}

impl Cell {
    /// The whole domain.
    pub(in crate::solver) fn whole(domain: &Domain) -> Self {
        let pieces = walls_once(domain)
            .map(|wall| piece(domain, wall, 0.0, domain.walls[wall].extent()))
            .collect();
        Self {
            pieces,
            singularities: singularities(domain, |_| true),
            center: Vec2::zeros(),
            size: domain.size,
            area: domain.area,
        }
    }

    /// A fundamental cell of the symmetry group.
    pub(in crate::solver) fn fundamental(domain: &Domain, symmetry: &Symmetry) -> Self {
        if symmetry.order() == 1 {
            return Self::whole(domain);
        }
        let wedge = Wedge::of(domain, symmetry);
        let mut pieces = Vec::new();
        for wall in walls_once(domain) {
            pieces.extend(inside_wedge(domain, wall, &wedge));
        }
        let interior = Interior::new(domain);
        for ray in 0..2 {
            let sides = along_ray(domain, &interior, &wedge, ray);
            pieces.extend(sides);
        }
        Self {
            pieces,
            singularities: singularities(domain, |point| wedge.contains(point)),
            center: symmetry.center,
            size: domain.size,
            area: domain.area / symmetry.order() as f64,
        }
    }
}

/// Numbers of all walls, one of the two faces of every thin wall.
fn walls_once(domain: &Domain) -> impl Iterator<Item = usize> {
    (0..domain.walls.len()).filter(|&wall| domain.walls[wall].twin.is_none_or(|twin| wall < twin))
}

fn piece(domain: &Domain, wall: usize, from: f64, to: f64) -> Piece {
    Piece {
        side: Side::Wall(wall),
        two_sided: domain.walls[wall].twin.is_some(),
        wall: domain.walls[wall].clone(),
        from,
        to,
    }
}

/// The parts of a wall inside the wedge.
fn inside_wedge(domain: &Domain, index: usize, wedge: &Wedge) -> Vec<Piece> {
    let wall = &domain.walls[index];
    let extent = wall.extent();
    let mut breaks = vec![0.0, extent];
    let ends = [wall.start(), wall.end()];
    for ray in wedge.rays {
        // A wall that ends on the ray may cross it there by rounding.
        breaks.extend(crossings(wall, wedge.center, ray).into_iter().filter(|&t| {
            let point = wall.point(t);
            ends.iter()
                .all(|end| (end - point).norm() > wedge.tolerance)
        }));
    }
    breaks.sort_by(f64::total_cmp);
    let mut parts: Vec<Piece> = Vec::new();
    for pair in breaks.windows(2) {
        let (from, to) = (pair[0], pair[1]);
        let length = (wall.point(from) - wall.point(to)).norm()
            + (wall.point(from) - wall.point(0.5 * (from + to))).norm();
        if length > wedge.tolerance && wedge.contains(wall.point(0.5 * (from + to))) {
            let on_edge = (0..2).any(|ray| wedge.on_ray(ray, wall.point(0.5 * (from + to))));
            let mut part = piece(domain, index, from, to);
            part.two_sided &= !on_edge;
            parts.push(part);
        }
    }
    parts
}

/// The parts of an edge of the wedge that run inside the domain.
fn along_ray(domain: &Domain, interior: &Interior<'_>, wedge: &Wedge, ray: usize) -> Vec<Piece> {
    let direction = wedge.rays[ray];
    let radius = |point: Vec2| (point - wedge.center).dot(&direction);
    let mut radii = vec![0.0];
    let mut covered: Vec<[f64; 2]> = Vec::new();
    for wall in &domain.walls {
        let ends = [wall.start(), wall.end()];
        let touching = ends.map(|end| wedge.on_ray(ray, end));
        radii.extend(
            ends.iter()
                .zip(touching)
                .filter(|(_, touches)| *touches)
                .map(|(end, _)| radius(*end)),
        );
        radii.extend(
            crossings(wall, wedge.center, direction)
                .into_iter()
                .map(|t| radius(wall.point(t))),
        );
        let middle = wall.point(0.5 * wall.extent());
        if wall.is_straight() && cross(direction, middle - wedge.center).abs() < wedge.tolerance {
            let reach = ends.map(radius);
            covered.push([reach[0].min(reach[1]), reach[0].max(reach[1])]);
        }
    }
    radii.sort_by(f64::total_cmp);
    radii.dedup_by(|a, b| (*a - *b).abs() < wedge.tolerance);
    radii
        .windows(2)
        .filter(|pair| {
            let middle = 0.5 * (pair[0] + pair[1]);
            interior.contains(wedge.center + direction * middle)
                && !covered.iter().any(|c| c[0] < middle && middle < c[1])
        })
        .map(|pair| {
            let (start, end) = (
                wedge.center + direction * pair[0],
                wedge.center + direction * pair[1],
            );
            let wall = Wall::new(
                Shape::Line(crate::billiard::Line { start, end }),
                crate::billiard::Condition::Neumann,
            );
            Piece {
                side: wedge.side(ray),
                from: 0.0,
                to: wall.extent(),
                wall,
                two_sided: false,
            }
        })
        .collect()
}

/// Vertices of the domain at which waves are singular.
fn singularities(domain: &Domain, inside: impl Fn(Vec2) -> bool) -> Vec<Singularity> {
    let mut found: Vec<Singularity> = Vec::new();
    for vertex in &domain.vertices {
        let Some(exponent) = exponent(domain, vertex) else {
            continue;
        };
        if !inside(vertex.point) {
            continue;
        }
        let same = found
            .iter_mut()
            .find(|other| (other.point - vertex.point).norm() < SAME_POINT * domain.size);
        match same {
            Some(other) => other.exponent = other.exponent.min(exponent),
            None => found.push(Singularity {
                point: vertex.point,
                exponent,
            }),
        }
    }
    found
}

/// The lowest power of the distance from a vertex that is not smooth there.
///
/// Waves behave like r^(m pi/angle) between like walls and like r^((m - 1/2) pi/angle) between unlike ones (Kellogg, Applicable
/// Anal. 4 (1974) 101). Where the first of these powers is a whole number, only the curvature of the walls makes them singular,
/// one power higher.
fn exponent(domain: &Domain, vertex: &crate::billiard::Vertex) -> Option<f64> {
    let like = domain.walls[vertex.before].condition == domain.walls[vertex.after].condition;
    match vertex.kind {
        VertexKind::Smooth | VertexKind::Regular { .. } => None,
        VertexKind::Joint => Some(2.0),
        VertexKind::Corner => {
            let power = if like { PI } else { 0.5 * PI } / vertex.angle;
            let whole = (power - power.round()).abs() < 1e-6 && power.round() >= 1.0;
            Some(if whole { power.round() + 1.0 } else { power })
        }
    }
}
