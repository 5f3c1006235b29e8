//! Values of computed waves inside the domain and on its walls.

use super::discretisation::Discretisation;
use super::fields::Fields;
use super::mesh::{Mesh, Triangle};
use super::{Level, Solver, SolverError, Window, WindowLevels};
use crate::billiard::{Domain, Interior, Mat2, Symmetry, Vec2, cross};
use rayon::prelude::*;

/// Distance from the wall, in sizes of the domain, of the point that tells which triangle lies at a place on a wall.
const INWARD: f64 = 1e-7;
/// A point belongs to a triangle if its barycentric coordinates are not below minus this.
const TOLERANCE: f64 = 1e-6;
/// Newton steps to the reference triangle: curved triangles are nearly straight, three to five are needed.
const NEWTON_STEPS: usize = 30;
/// Size of the last step, in sizes of the reference triangle.
const SETTLED: f64 = 1e-11;

/// A rectangular grid of points.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Grid {
    /// Lower left point.
    pub origin: Vec2,
    /// Distance of neighbouring points in both directions.
    pub step: f64,
    /// Points in a row.
    pub columns: usize,
    /// Rows.
    pub rows: usize,
}

impl Grid {
    /// The grid over the bounding box of a domain with about `points` points along its longer side.
    #[must_use]
    pub fn over(domain: &Domain, points: usize) -> Self {
        const SAMPLES: usize = 64;
        let mut low = Vec2::repeat(f64::INFINITY);
        let mut high = Vec2::repeat(f64::NEG_INFINITY);
        for wall in &domain.walls {
            for i in 0..=SAMPLES {
                let point = wall.point(wall.extent() * i as f64 / SAMPLES as f64);
                low = low.inf(&point);
                high = high.sup(&point);
            }
        }
        let span = high - low;
        let step = span.x.max(span.y) / points.max(1) as f64;
        Self {
            // Half a step inside: no point lies on a straight outer wall.
            origin: low + Vec2::repeat(0.5 * step),
            step,
            columns: ((span.x / step).round() as usize).max(1),
            rows: ((span.y / step).round() as usize).max(1),
        }
    }

    /// The points, row by row from below.
    #[must_use]
    pub fn points(&self) -> Vec<Vec2> {
        (0..self.rows)
            .flat_map(|row| {
                (0..self.columns).map(move |column| {
                    self.origin + Vec2::new(column as f64, row as f64) * self.step
                })
            })
            .collect()
    }
}

/// A place on a wall.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WallPlace {
    /// Number of the wall.
    pub wall: usize,
    /// Its parameter.
    pub t: f64,
    /// Position.
    pub point: Vec2,
    /// Unit normal pointing inwards.
    pub inward: Vec2,
}

/// Places on all walls, `per_length` to the unit of length and at least eight on each wall, none at a corner.
#[must_use]
pub fn wall_places(domain: &Domain, per_length: f64) -> Vec<WallPlace> {
    const LEAST: usize = 8;
    let mut places = Vec::new();
    for (index, wall) in domain.walls.iter().enumerate() {
        let count = ((domain.lengths[index] * per_length).ceil() as usize).max(LEAST);
        for i in 0..count {
            let t = wall.extent() * (i as f64 + 0.5) / count as f64;
            let frame = wall.frame(t);
            places.push(WallPlace {
                wall: index,
                t,
                point: frame.point,
                inward: frame.normal(),
            });
        }
    }
    places
}

/// A wave, real and with the integral of its square over the domain equal to one.
#[derive(Clone, Debug, PartialEq)]
pub struct WaveValues {
    /// Which of the window's levels it belongs to; a level of multiplicity m has m waves, one after the other.
    pub level: usize,
    /// Values at the points of the grid, NaN outside the domain.
    pub grid: Vec<f64>,
    /// Values and derivatives along the outward normal at the places on the walls.
    pub walls: Vec<[f64; 2]>,
}

/// A point of the domain on the mesh of the cell.
#[derive(Clone, Copy, Debug)]
pub(super) struct Spot {
    pub(super) triangle: usize,
    /// Coordinates on the reference triangle.
    pub(super) at: [f64; 2],
    /// Element of the group that maps the point of the cell to the point of the domain.
    element: usize,
}

impl Solver {
    /// The levels of a window and the values of their waves on a grid and on the walls.
    ///
    /// # Errors
    /// As for [`Solver::levels`].
    pub fn waves(
        &self,
        window: Window,
        grid: &Grid,
        walls: &[WallPlace],
    ) -> Result<(WindowLevels, Vec<WaveValues>), SolverError> {
        let (mesh, found) = self.window_with_waves(window)?;
        let locator = Locator::new(mesh.mesh(), &self.group);
        let interior = Interior::new(&self.domain);
        let inside: Vec<Option<Spot>> = grid
            .points()
            .par_iter()
            .map(|&point| {
                interior
                    .contains(point)
                    .then(|| locator.find(point, point))?
            })
            .collect();
        let on_walls: Vec<Option<Spot>> = walls
            .par_iter()
            .map(|place| {
                let beside = place.point + place.inward * (INWARD * self.domain.size);
                locator.find(beside, place.point)
            })
            .collect();
        let mut waves: Vec<(Level, WaveValues)> = Vec::new();
        for (index, (sector, found)) in self.sectors.iter().zip(&found).enumerate() {
            let spots: Vec<Spot> = inside.iter().chain(&on_walls).flatten().copied().collect();
            let fields = mesh.values(index, &found.vectors, &spots);
            for (row, level) in super::join::levels_of(sector, found, self.constant)
                .into_iter()
                .enumerate()
            {
                for copy in 0..level.multiplicity {
                    let mut values = self.combine(&sector.fields, &spots, &fields, row, copy);
                    let mut next = |spot: &Option<Spot>| spot.and_then(|_| values.next());
                    let wave = WaveValues {
                        level: 0,
                        grid: inside
                            .iter()
                            .map(|spot| next(spot).map_or(f64::NAN, |(u, _)| u))
                            .collect(),
                        walls: on_walls
                            .iter()
                            .zip(walls)
                            .map(|(spot, place)| {
                                next(spot).map_or([f64::NAN; 2], |(u, gradient)| {
                                    [u, -gradient.dot(&place.inward)]
                                })
                            })
                            .collect(),
                    };
                    waves.push((level, wave));
                }
            }
        }
        waves.sort_by(|a, b| a.0.k.total_cmp(&b.0.k));
        let levels = super::join::window(window, &self.sectors, &found, self.constant);
        let mut waves = waves.into_iter().map(|(_, wave)| wave);
        let mut numbered = Vec::new();
        for (index, level) in levels.levels.iter().enumerate() {
            for wave in waves.by_ref().take(level.multiplicity) {
                numbered.push(WaveValues {
                    level: index,
                    ..wave
                });
            }
        }
        Ok((levels, numbered))
    }

    /// Values and gradients of one wave of the domain at the spots: with (u1, u2) the fields on the cell, component `copy` of
    /// D(g) (u1, u2).
    fn combine<'a>(
        &'a self,
        fields: &'a Fields,
        spots: &'a [Spot],
        values: &'a [Vec<[f64; 3]>],
        row: usize,
        copy: usize,
    ) -> impl Iterator<Item = (f64, Vec2)> + 'a {
        // The squares of the fields add up to one on the cell.
        let norm = (fields.count as f64 / self.group.order() as f64).sqrt();
        let count = spots.len();
        spots.iter().enumerate().map(move |(spot, place)| {
            let turned = self.group.elements[place.element].matrix;
            let representation = fields.representation(&self.group, place.element);
            let (mut u, mut gradient) = (0.0, Vec2::zeros());
            for (field, values) in values.iter().enumerate() {
                let [value, dx, dy] = values[row * count + spot];
                let weight = norm * representation[copy.min(fields.count - 1)][field];
                u += weight * value;
                gradient += turned * Vec2::new(dx, dy) * weight;
            }
            (u, gradient)
        })
    }

    fn window_with_waves(
        &self,
        window: Window,
    ) -> Result<(Discretisation, Vec<super::discretisation::Found>), SolverError> {
        self.windows(window.from, window.to)?;
        let mut attempt = 0;
        loop {
            let mesh = self.discretise(window.to, attempt)?;
            let found = self.found(&mesh, &[window], &mut None).remove(0);
            let levels = super::join::window(window, &self.sectors, &found, self.constant);
            if attempt + 1 == Discretisation::ATTEMPTS || !self.missed(&[levels]) {
                return Ok((mesh, found));
            }
            attempt += 1;
        }
    }
}

/// Finds the triangle that a point lies in.
struct Locator<'a> {
    mesh: &'a Mesh,
    group: &'a Symmetry,
    /// Lower left and upper right corners of boxes around the triangles.
    boxes: Vec<[Vec2; 2]>,
}

impl<'a> Locator<'a> {
    fn new(mesh: &'a Mesh, group: &'a Symmetry) -> Self {
        let boxes = mesh
            .triangles
            .iter()
            .map(|triangle| {
                let [a, b, c] = triangle.points.map(|point| triangle.anchor + point);
                let (low, high) = (a.inf(&b).inf(&c), a.sup(&b).sup(&c));
                // Edges bow by less than half of their length.
                let margin = if mesh.is_straight(triangle) {
                    1e-6
                } else {
                    0.5
                };
                let wide = (high - low).norm() * margin;
                [low - Vec2::repeat(wide), high + Vec2::repeat(wide)]
            })
            .collect();
        Self { mesh, group, boxes }
    }

    /// The triangle that `inside` lies in, up to the symmetry, and the coordinates of `point` on it.
    fn find(&self, inside: Vec2, point: Vec2) -> Option<Spot> {
        let mut best: Option<(f64, Spot)> = None;
        for element in 0..self.group.order() {
            let back = self.group.inverse(element);
            let (beside, exact) = (
                self.group.apply(back, inside),
                self.group.apply(back, point),
            );
            for (index, [low, high]) in self.boxes.iter().enumerate() {
                let outside = (0..2).any(|d| beside[d] < low[d] || beside[d] > high[d]);
                if outside {
                    continue;
                }
                let triangle = &self.mesh.triangles[index];
                let Some(at) = invert(self.mesh, triangle, beside) else {
                    continue;
                };
                let depth = at[0].min(at[1]).min(1.0 - at[0] - at[1]);
                if depth > best.as_ref().map_or(-TOLERANCE, |(depth, _)| *depth) {
                    let at = invert(self.mesh, triangle, exact).unwrap_or(at);
                    let spot = Spot {
                        triangle: index,
                        at,
                        element,
                    };
                    best = Some((depth, spot));
                }
            }
        }
        best.map(|(_, spot)| spot)
    }
}

/// Coordinates on the reference triangle of a point of the plane, by Newton's method.
fn invert(mesh: &Mesh, triangle: &Triangle, point: Vec2) -> Option<[f64; 2]> {
    let mut at = [1.0 / 3.0, 1.0 / 3.0];
    for _ in 0..NEWTON_STEPS {
        let [place, dx, dy] = mesh.map(triangle, at);
        let (miss, jacobian) = (point - place, cross(dx, dy));
        let step = [cross(miss, dy) / jacobian, cross(dx, miss) / jacobian];
        at = [at[0] + step[0], at[1] + step[1]];
        // Far outside the bows mean nothing.
        if !at.iter().all(|x| x.abs() < 3.0) {
            return None;
        }
        if step[0].abs() + step[1].abs() < SETTLED {
            return Some(at);
        }
    }
    None
}

impl Fields {
    /// The matrix D(g) by which the fields change under an element of the group: (u1, u2)(g x) = D(g) (u1, u2)(x).
    fn representation(&self, group: &Symmetry, element: usize) -> [[f64; 2]; 2] {
        if self.count == 1 {
            return [[self.characters[element], 0.0], [0.0, 0.0]];
        }
        let matrix: Mat2 = group.elements[element].matrix;
        let m = self.winding as f64;
        if matrix.determinant() > 0.0 {
            let (sin, cos) = (m * matrix[(1, 0)].atan2(matrix[(0, 0)])).sin_cos();
            return [[cos, -sin], [sin, cos]];
        }
        // Twice the angle of the axis, from the first axis on.
        let doubled = matrix[(1, 0)].atan2(matrix[(0, 0)]);
        let first = group.axes().first().map_or(0.0, |(first, _)| {
            let matrix = group.elements[*first].matrix;
            matrix[(1, 0)].atan2(matrix[(0, 0)])
        });
        let (sin, cos) = (m * (doubled - first)).sin_cos();
        [[cos, sin], [sin, -cos]]
    }
}
