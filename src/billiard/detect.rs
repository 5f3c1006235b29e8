//! Finds the symmetry group of a domain.
//!
//! Every isometry of the domain fixes its centre of area, so only the rotations and reflections about that point are asked
//! for. Rotations are tried one by one, from the largest order down. If the domain has n rotations and a reflection, then a moment
//! m_h = integral z^h |z|^(2 w) ds of its walls (z the complex position about the centre, h a multiple of n) changes
//! under the reflection with axis angle a into exp(2 i a h) conj(m_h), so that a = arg(m_h)/h modulo pi/h: the largest
//! moment leaves h/n candidates. A candidate is fitted to the walls, and then has to map the walls onto themselves, with
//! their conditions and the side on which the interior lies.

mod boundary;

use super::symmetry::{build, exact_cos_sin};
use super::{Condition, Domain, Mat2, Role, Shape, Symmetry, Vec2, Wall, left};
pub(crate) use boundary::Boundary;
use boundary::same_direction;
use num_complex::Complex64;
use std::f64::consts::PI;

/// How well the image of the walls has to agree with the walls.
#[derive(Clone, Copy)]
struct Agreement {
    /// Distance of points, as a fraction of the domain's size.
    distance: f64,
    /// Sine of the angle between tangents.
    sine: f64,
}

/// An isometry of the domain. Distance: coordinates are often written with ten digits, and centre, point and image carry
/// such an error each. Tangents only have to tell the faces of a thin wall and the walls at a corner apart, and a short
/// wall written with ten digits has no better tangent.
const EXACT: Agreement = Agreement {
    distance: 1e-9,
    sine: 1e-4,
};
/// Worth fitting: moments from the midpoint rule give axes far better than this.
const ROUGH: Agreement = Agreement {
    distance: 1e-2,
    sine: 0.1,
};
/// Largest number of rotations looked for.
const LARGEST_ORDER: usize = 64;
/// Largest harmonic of the moments from which axes are read off.
const LARGEST_HARMONIC: usize = 4 * LARGEST_ORDER;
/// Midpoints per size of the domain at which the integrand of a moment is taken (eight per period of the largest harmonic).
const POINTS_PER_SIZE: f64 = 1024.0;
/// Midpoints on one wall at most.
const LARGEST_POINTS: f64 = 4096.0;
/// Moments smaller than this fraction of the largest possible one are rounding.
const SMALLEST_MOMENT: f64 = 1e-12;
/// Walls that are circles about the centre to within this (squared) ratio say nothing about an axis.
const SMALLEST_LEVER: f64 = 1e-20;
/// Gauss-Newton steps for an axis: quadratic convergence from 1e-2 needs four.
const FITTING_STEPS: usize = 6;

/// A point inside a wall.
struct Sample {
    point: Vec2,
    tangent: Vec2,
    condition: Condition,
}

/// A vertex with an angle or a change of condition, which an isometry must map to another one like it.
struct Corner {
    point: Vec2,
    angle: f64,
    before: Condition,
    after: Condition,
}

/// Finds the group of all isometries of the domain: its walls with their conditions, holes and thin walls.
///
/// The disk and the annulus (each circle with one condition) have infinitely many; they are left with the identity, see
/// [`is_rotationally_invariant`]. Walls may miss their images by 1e-9 of the domain's size. Axes within that error of a
/// multiple of 15 degrees, and coordinates of the centre within 1e-10 of zero, are taken to be there exactly.
#[must_use]
pub fn detect(domain: &Domain) -> Symmetry {
    if is_rotationally_invariant(domain) {
        return Symmetry::trivial();
    }
    let search = Search::new(domain);
    let rotations = search.rotations();
    let axis = search.axis(rotations);
    build(search.center, rotations, axis)
}

/// Is the domain a disk or an annulus, each of its circles (or closed curves that are circles) with one condition?
#[must_use]
pub fn is_rotationally_invariant(domain: &Domain) -> bool {
    let center = centroid(domain);
    let tolerance = EXACT.distance * domain.size;
    domain.loops.iter().all(|chain| {
        let walls = &domain.walls[chain.walls.clone()];
        let radius = (walls[0].start() - center).norm();
        chain.role != Role::Slit
            && walls.iter().all(|wall| {
                wall.condition == walls[0].condition
                    && !wall.is_straight()
                    && samples_of(wall)
                        .iter()
                        .all(|sample| ((sample.point - center).norm() - radius).abs() < tolerance)
            })
    })
}

/// Centre of area. A coordinate that is zero within the tolerance, or a short decimal fraction within rounding, is taken
/// to be that.
pub(crate) fn centroid(domain: &Domain) -> Vec2 {
    // Integrals of x and y over the area as integrals over the walls, about a point nearby to keep digits:
    // x: (1/2) integral x^2 dy, y: -(1/2) integral y^2 dx.
    let origin = domain.walls[0].start();
    let mut moment = Vec2::zeros();
    for wall in &domain.walls {
        let part = |value: fn(Vec2, Vec2) -> f64| {
            super::quadrature::along(wall, |frame| value(frame.point - origin, frame.tangent))
        };
        moment.x += part(|p, t| 0.5 * p.x * p.x * t.y);
        moment.y += part(|p, t| -0.5 * p.y * p.y * t.x);
    }
    let center = origin + moment / domain.area;
    center.map(|coordinate| snapped(coordinate, domain.size))
}

/// Decimal places (relative to the size) to which a centre is rounded if that changes it by rounding errors only.
const DECIMALS: i32 = 6;
/// Rounding error of a centre, as a fraction of the size.
const CENTER_ROUNDING: f64 = 1e-13;
/// A centre this close to zero, as a fraction of the size, is zero.
const CENTER_ZERO: f64 = 1e-10;

fn snapped(coordinate: f64, size: f64) -> f64 {
    if coordinate.abs() < CENTER_ZERO * size {
        return 0.0;
    }
    let unit = 10.0_f64.powi(DECIMALS - size.log10().round() as i32);
    let rounded = (coordinate * unit).round() / unit;
    if (rounded - coordinate).abs() < CENTER_ROUNDING * size {
        rounded
    } else {
        coordinate
    }
}

/// What the search for isometries needs to know about the domain.
struct Search<'a> {
    domain: &'a Domain,
    boundary: Boundary<'a>,
    samples: Vec<Sample>,
    corners: Vec<Corner>,
    center: Vec2,
}

impl<'a> Search<'a> {
    fn new(domain: &'a Domain) -> Self {
        Self {
            domain,
            boundary: Boundary::new(domain),
            samples: domain.walls.iter().flat_map(samples_of).collect(),
            corners: corners_of(domain),
            center: centroid(domain),
        }
    }

    /// Does the isometry x -> center + matrix (x - center) map the walls onto themselves within a distance?
    fn holds(&self, matrix: &Mat2, agreement: Agreement) -> bool {
        let tolerance = agreement.distance * self.domain.size;
        let turn = matrix.determinant().signum();
        let image = |point: Vec2| self.center + matrix * (point - self.center);
        let corners_agree = self.corners.iter().all(|corner| {
            self.nearest_corner(corner, image(corner.point), turn, agreement)
                .is_some()
        });
        corners_agree
            && self.samples.iter().all(|sample| {
                // A reflection brings the interior to the right: the image of the wall is walked the other way.
                let tangent = matrix * sample.tangent * turn;
                self.boundary
                    .nearest(image(sample.point), tolerance, |condition, frame| {
                        condition == sample.condition
                            && same_direction(tangent, frame.tangent, agreement.sine)
                    })
                    .is_some()
            })
    }

    /// The nearest corner to the image of a corner that agrees with it.
    fn nearest_corner(
        &self,
        corner: &Corner,
        image: Vec2,
        turn: f64,
        agreement: Agreement,
    ) -> Option<Vec2> {
        let reach = agreement.distance * self.domain.size;
        let like = |other: &&Corner| {
            let (before, after) = if turn > 0.0 {
                (other.before, other.after)
            } else {
                (other.after, other.before)
            };
            (before, after) == (corner.before, corner.after)
                && (other.angle - corner.angle).abs() < agreement.sine
                && (other.point - image).norm() < reach
        };
        let first = self
            .corners
            .partition_point(|other| other.point.x < image.x - reach);
        self.corners[first..]
            .iter()
            .take_while(|other| other.point.x <= image.x + reach)
            .filter(like)
            .map(|other| other.point)
            .min_by(|a, b| (a - image).norm().total_cmp(&(b - image).norm()))
    }

    /// Number of rotations in the group.
    ///
    /// Besides the smallest rotation its powers 2, 4, 8, ... are tried: near a circle the small one alone moves the walls by less than the
    /// tolerance.
    fn rotations(&self) -> usize {
        (2..=LARGEST_ORDER)
            .rev()
            .find(|&order| {
                std::iter::successors(Some(1), |power| Some(2 * power))
                    .take_while(|&power| power < order)
                    .all(|power| {
                        let (cos, sin) = exact_cos_sin(power as f64 / order as f64);
                        self.holds(&Mat2::new(cos, -sin, sin, cos), EXACT)
                    })
            })
            .unwrap_or(1)
    }

    /// Angle of one axis, in turns, if there is one.
    fn axis(&self, rotations: usize) -> Option<f64> {
        self.largest_moment(rotations)
            .and_then(|(harmonic, moment)| {
                let first = moment.arg() / harmonic as f64;
                (0..harmonic / rotations)
                    .map(|j| first + j as f64 * PI / harmonic as f64)
                    .find_map(|angle| self.fitted(angle))
            })
            .or_else(|| self.axis_by_corners())
    }

    /// An axis of a shape whose moments vanish up to the largest harmonic (a regular polygon of very many corners): it lies half way
    /// between the first corner and its image.
    fn axis_by_corners(&self) -> Option<f64> {
        let arms = self.corners.iter().map(|corner| corner.point - self.center);
        let first = self.corners.first()?.point - self.center;
        arms.filter(|arm| (arm.norm() - first.norm()).abs() < EXACT.distance * self.domain.size)
            .find_map(|arm| self.fitted(0.5 * (first.y.atan2(first.x) + arm.y.atan2(arm.x))))
    }

    /// The largest moment and its harmonic h.
    fn largest_moment(&self, rotations: usize) -> Option<(usize, Complex64)> {
        let radius = self
            .samples
            .iter()
            .map(|sample| (sample.point - self.center).norm())
            .fold(0.0, f64::max);
        let harmonics: Vec<usize> = (1..=LARGEST_HARMONIC / rotations)
            .map(|multiple| multiple * rotations)
            .collect();
        let mut best: Option<(usize, Complex64)> = None;
        for condition in [Condition::Dirichlet, Condition::Neumann] {
            for moments in self.moments(&harmonics, condition, radius) {
                for (&harmonic, moment) in harmonics.iter().zip(moments) {
                    let large = moment.norm() > SMALLEST_MOMENT * self.domain.perimeter;
                    if large && best.is_none_or(|(_, other)| moment.norm() > other.norm()) {
                        best = Some((harmonic, moment));
                    }
                }
            }
        }
        best
    }

    /// integral (z/|z|)^h |z|^(2w) ds over the walls of one condition, for w = 1, 2 and all harmonics.
    ///
    /// The midpoint rule treats a wall and its mirror image alike, however the walls are cut up only to its own error; the fit
    /// that follows needs no more.
    fn moments(
        &self,
        harmonics: &[usize],
        condition: Condition,
        radius: f64,
    ) -> [Vec<Complex64>; 2] {
        let mut sums = [
            vec![Complex64::ZERO; harmonics.len()],
            vec![Complex64::ZERO; harmonics.len()],
        ];
        let [squares, fourths] = &mut sums;
        let walls = self.domain.walls.iter().zip(&self.domain.lengths);
        for (wall, length) in walls.filter(|(wall, _)| wall.condition == condition) {
            let points = POINTS_PER_SIZE * length / self.domain.size;
            let count = points.clamp(1.0, LARGEST_POINTS).ceil() as usize;
            let step = wall.extent() / count as f64;
            for i in 0..count {
                let frame = wall.frame((i as f64 + 0.5) * step);
                let position = (frame.point - self.center) / radius;
                let z = Complex64::new(position.x, position.y);
                let weight = frame.speed * step;
                let square = z.norm_sqr();
                let unit = if square > 0.0 { z / square.sqrt() } else { z };
                let turn = unit.powu(harmonics[0] as u32);
                let mut power = Complex64::ONE;
                for (second, fourth) in squares.iter_mut().zip(fourths.iter_mut()) {
                    power *= turn;
                    *second += power * (weight * square);
                    *fourth += power * (weight * square * square);
                }
            }
        }
        sums
    }

    /// Fits the axis near an angle to the walls; the result in turns if the reflection across it maps the walls onto
    /// themselves.
    fn fitted(&self, guess: f64) -> Option<f64> {
        if !self.holds(&reflection(exact_cos_sin(guess / PI)), ROUGH) {
            return None;
        }
        let mut angle = guess;
        for _ in 0..FITTING_STEPS {
            angle += self.correction(angle);
        }
        let turns = angle / (2.0 * PI);
        let nice = (turns * 24.0).round() / 24.0;
        let close = (turns - nice).abs() * 2.0 * PI < EXACT.distance;
        let candidates = [close.then_some(nice), Some(turns)];
        candidates.into_iter().flatten().find(|&turns| {
            let matrix = reflection(exact_cos_sin(2.0 * turns));
            self.holds(&matrix, EXACT)
        })
    }

    /// Least-squares correction of an axis: the images of all points move by 2 (angle) x (distance from the centre).
    fn correction(&self, angle: f64) -> f64 {
        let matrix = reflection(exact_cos_sin(angle / PI));
        let reach = ROUGH.distance * self.domain.size;
        let (mut product, mut square, mut largest) = (0.0, 0.0, 0.0);
        for sample in &self.samples {
            let tangent = -(matrix * sample.tangent);
            let arm = matrix * (sample.point - self.center);
            let image = self.center + arm;
            let Some(foot) = self.boundary.nearest(image, reach, |condition, frame| {
                condition == sample.condition && same_direction(tangent, frame.tangent, ROUGH.sine)
            }) else {
                continue;
            };
            let normal = foot.normal();
            let moves = 2.0 * left(arm).dot(&normal);
            product += (foot.point - image).dot(&normal) * moves;
            square += moves * moves;
            largest += arm.norm_squared();
        }
        for corner in &self.corners {
            let arm = matrix * (corner.point - self.center);
            let image = self.center + arm;
            let Some(other) = self.nearest_corner(corner, image, -1.0, ROUGH) else {
                continue;
            };
            product += (other - image).dot(&(2.0 * left(arm)));
            square += 4.0 * arm.norm_squared();
        }
        if square > SMALLEST_LEVER * largest {
            product / square
        } else {
            0.0
        }
    }
}

/// Number of places at which a wall of each kind is tested: an image that agrees with a straight wall or an arc
/// at three places lies on it; curves are taken to be resolved by as many points as there are pieces in their quadrature.
fn places(wall: &Wall) -> usize {
    match wall.shape {
        Shape::Line(_) => 3,
        Shape::Arc(_) => 9,
        Shape::Curve(_) => 96,
    }
}

fn samples_of(wall: &Wall) -> Vec<Sample> {
    let count = places(wall);
    (0..count)
        .map(|i| {
            let frame = wall.frame(wall.extent() * (i as f64 + 0.5) / count as f64);
            Sample {
                point: frame.point,
                tangent: frame.tangent,
                condition: wall.condition,
            }
        })
        .collect()
}

/// Corners, sorted along x.
fn corners_of(domain: &Domain) -> Vec<Corner> {
    let mut corners: Vec<Corner> = domain
        .vertices
        .iter()
        .map(|vertex| Corner {
            point: vertex.point,
            angle: vertex.angle,
            before: domain.walls[vertex.before].condition,
            after: domain.walls[vertex.after].condition,
        })
        .filter(|corner| corner.before != corner.after || (corner.angle - PI).abs() > EXACT.sine)
        .collect();
    corners.sort_by(|a, b| a.point.x.total_cmp(&b.point.x));
    corners
}

/// Reflection across an axis, from cosine and sine of twice the axis' angle.
fn reflection((cos, sin): (f64, f64)) -> Mat2 {
    Mat2::new(cos, sin, sin, -cos)
}
