//! Several rays at a time, for domains of straight walls and arcs.
//!
//! The rays lie side by side in arrays, every wall is tried on all of them in one loop without branches, and the compiler
//! turns those loops into vector instructions. Parameters on the walls are not computed, so no angle is needed. Rays that
//! run into a corner are finished by the [`Tracer`].

use super::obstacle::{ArcWall, StraightWall};
use super::{Domain, Event, Origin, Ray, Shape, Tracer, Vec2, cross, incidence};

/// A tangent turn from which on two walls meet in a corner for sure, radians.
const CLEAR_CORNER: f64 = 1e-2;

/// Stands for no hit.
const FAR: f64 = f64::INFINITY;
/// Stands for no wall among the numbers of walls.
const NO_WALL: f64 = -1.0;

/// The bounce map of a domain of straight walls and arcs, for several rays at a time.
///
/// It agrees with [`Tracer`] to rounding except for rays that graze a joint, where a ray may be given to the wall before or
/// behind the joint.
#[derive(Clone, Debug)]
pub struct Lanes<'a> {
    tracer: &'a Tracer,
    straight: Vec<Straight>,
    arcs: Vec<ArcWall>,
    /// Constants of all walls by their index.
    walls: Vec<Constants>,
}

/// A straight wall; `bounded` is false where the whole domain lies on one side of its line and no ray can pass its ends.
#[derive(Clone, Copy, Debug)]
struct Straight {
    wall: StraightWall,
    bounded: bool,
}

/// What is needed once the wall is known.
#[derive(Clone, Copy, Debug)]
struct Constants {
    /// Normal of a straight wall, zero for arcs.
    normal: Vec2,
    /// Centre of an arc, zero for straight walls.
    center: Vec2,
    /// Signed curvature.
    curvature: f64,
    /// Corners at the ends; far away where there are none.
    corners: [Vec2; 2],
    /// The other face of a thin wall, if this is one.
    twin: f64,
}

/// Rays on walls, side by side, and what their last bounce was like.
#[derive(Clone, Copy, Debug)]
pub struct Rays<const N: usize> {
    /// Points.
    pub x: [f64; N],
    /// Points.
    pub y: [f64; N],
    /// Unit directions.
    pub direction_x: [f64; N],
    /// Unit directions.
    pub direction_y: [f64; N],
    /// Wall on which each ray starts (a whole number).
    pub wall: [f64; N],
    /// Length of the last flight.
    pub distance: [f64; N],
    /// Curvature of the wall at the last bounce.
    pub curvature: [f64; N],
    /// Cosine of the angle of incidence at the last bounce.
    pub cosine: [f64; N],
}

/// What became of the rays that did not simply bounce.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Ending {
    /// Into a corner that diffracts.
    Stopped,
    /// Through the walls.
    Escaped,
}

impl<const N: usize> Rays<N> {
    /// Rays that start on walls.
    ///
    /// # Errors
    /// The number of the first ray that does not start on a wall.
    pub fn new(rays: &[Ray; N]) -> Result<Self, usize> {
        let mut all = Self {
            x: rays.map(|ray| ray.point.x),
            y: rays.map(|ray| ray.point.y),
            direction_x: rays.map(|ray| ray.direction.x),
            direction_y: rays.map(|ray| ray.direction.y),
            wall: [0.0; N],
            distance: [0.0; N],
            curvature: [0.0; N],
            cosine: [1.0; N],
        };
        for (lane, ray) in rays.iter().enumerate() {
            let Origin::Wall { wall, .. } = ray.origin else {
                return Err(lane);
            };
            all.wall[lane] = wall as f64;
        }
        Ok(all)
    }

    /// Puts another ray, which starts on a wall, into a lane.
    pub fn replace(&mut self, lane: usize, ray: &Ray) {
        self.x[lane] = ray.point.x;
        self.y[lane] = ray.point.y;
        self.direction_x[lane] = ray.direction.x;
        self.direction_y[lane] = ray.direction.y;
        if let Origin::Wall { wall, .. } = ray.origin {
            self.wall[lane] = wall as f64;
        }
    }
}

impl<'a> Lanes<'a> {
    /// Prepares the map, if all walls are straight or arcs.
    #[must_use]
    pub fn new(domain: &Domain, tracer: &'a Tracer) -> Option<Self> {
        if domain
            .walls
            .iter()
            .any(|wall| matches!(wall.shape, Shape::Curve(_)))
        {
            return None;
        }
        let walls = (0..domain.walls.len())
            .map(|w| Constants::new(domain, tracer, w))
            .collect();
        let straight = tracer
            .straight
            .iter()
            .map(|&wall| Straight {
                wall,
                bounded: !is_support(domain, tracer, &wall),
            })
            .collect();
        Some(Self {
            tracer,
            straight,
            arcs: tracer.arcs.clone(),
            walls,
        })
    }

    /// One bounce of all rays. A lane whose ray ends is reported; it is put back to where it was before, and
    /// ends again unless it is replaced.
    pub fn bounce<const N: usize>(&self, rays: &mut Rays<N>) -> [Option<Ending>; N] {
        let mut best = [f64::INFINITY; N];
        let mut wall = [0.0; N];
        let twin: [f64; N] = std::array::from_fn(|l| self.walls[rays.wall[l] as usize].twin);
        for line in &self.straight {
            if line.bounded {
                self.try_line::<N, true>(&line.wall, rays, &twin, &mut best, &mut wall);
            } else {
                self.try_line::<N, false>(&line.wall, rays, &twin, &mut best, &mut wall);
            }
        }
        for arc in &self.arcs {
            self.try_arc(arc, rays, &twin, &mut best, &mut wall);
        }
        let mut endings = [None; N];
        let mut unusual = false;
        let before = *rays;
        for l in 0..N {
            let constants = &self.walls[wall[l] as usize];
            let x = rays.x[l] + rays.direction_x[l] * best[l];
            let y = rays.y[l] + rays.direction_y[l] * best[l];
            let (dx, dy) = (rays.direction_x[l], rays.direction_y[l]);
            let near = |corner: Vec2| {
                let (x, y) = (x - corner.x, y - corner.y);
                x * x + y * y < self.tracer.corner * self.tracer.corner
            };
            unusual |= near(constants.corners[0])
                | near(constants.corners[1])
                | (best[l] == f64::INFINITY);
            // Normal of a line, or (centre - point)/radius on a focusing arc and the opposite on a dispersing one.
            let nx = constants.normal.x - (x - constants.center.x) * constants.curvature;
            let ny = constants.normal.y - (y - constants.center.y) * constants.curvature;
            // The rounding of the normal's length is taken out to first order, and from the direction after the bounce.
            let length = 1.5 - 0.5 * (nx * nx + ny * ny);
            let (nx, ny) = (nx * length, ny * length);
            let normal = dx * nx + dy * ny;
            let (dx, dy) = (dx - 2.0 * normal * nx, dy - 2.0 * normal * ny);
            let length = 1.5 - 0.5 * (dx * dx + dy * dy);
            rays.x[l] = x;
            rays.y[l] = y;
            rays.direction_x[l] = dx * length;
            rays.direction_y[l] = dy * length;
            rays.wall[l] = wall[l];
            rays.distance[l] = best[l].max(0.0);
            rays.curvature[l] = constants.curvature;
            rays.cosine[l] = -normal;
        }
        if unusual {
            for (lane, ending) in endings.iter_mut().enumerate() {
                *ending = self.redo(lane, &before, rays);
            }
        }
        endings
    }

    #[inline(always)]
    fn try_line<const N: usize, const BOUNDED: bool>(
        &self,
        line: &StraightWall,
        rays: &Rays<N>,
        twin: &[f64; N],
        best: &mut [f64; N],
        wall: &mut [f64; N],
    ) {
        let slack = self.tracer.slack;
        let index = line.wall as f64;
        let (tx, ty) = (line.tangent.x, line.tangent.y);
        let (low, high) = (-slack.overlap, line.length + slack.overlap);
        for l in 0..N {
            let (dx, dy) = (rays.direction_x[l], rays.direction_y[l]);
            let (x, y) = (rays.x[l] - line.start.x, rays.y[l] - line.start.y);
            let rate = ty * dx - tx * dy;
            let mut distance = (tx * y - ty * x) / rate;
            let along = tx * (x + dx * distance) + ty * (y + dy * distance);
            // One plain selection after the other: the compiler makes them vector instructions.
            distance = if rate > 0.0 { distance } else { FAR };
            distance = if distance > -slack.behind {
                distance
            } else {
                FAR
            };
            distance = if rays.wall[l] != index { distance } else { FAR };
            distance = if twin[l] != index { distance } else { FAR };
            if BOUNDED {
                distance = if along >= low { distance } else { FAR };
                distance = if along <= high { distance } else { FAR };
            }
            wall[l] = if distance < best[l] { index } else { wall[l] };
            best[l] = if distance < best[l] {
                distance
            } else {
                best[l]
            };
        }
    }

    #[inline(always)]
    fn try_arc<const N: usize>(
        &self,
        arc: &ArcWall,
        rays: &Rays<N>,
        twin: &[f64; N],
        best: &mut [f64; N],
        wall: &mut [f64; N],
    ) {
        let slack = self.tracer.slack;
        let index = arc.wall as f64;
        // A focusing arc may be touched from outside by rounding. From itself it is met at -2 along; a dispersing arc is
        // never met again by a ray that leaves it (the factor makes the distance hugely negative, as along is positive).
        let focuses = arc.turn > 0.0;
        let least = if focuses { -slack.overlap } else { 0.0 };
        let own = if focuses { -2.0 } else { f64::NEG_INFINITY };
        for l in 0..N {
            let (dx, dy) = (rays.direction_x[l], rays.direction_y[l]);
            let (x, y) = (rays.x[l] - arc.center.x, rays.y[l] - arc.center.y);
            let along = dx * x + dy * y;
            let aside = (dx * y - dy * x).abs();
            let margin = arc.radius - aside;
            let root = (margin.max(0.0) * (arc.radius + aside)).sqrt();
            let mut distance = -along + arc.turn * root;
            distance = if margin >= least { distance } else { FAR };
            distance = if rays.wall[l] != index {
                distance
            } else {
                own * along
            };
            let reach = (x + dx * distance) * arc.middle.x + (y + dy * distance) * arc.middle.y;
            distance = if reach >= arc.reach { distance } else { FAR };
            distance = if distance > -slack.behind {
                distance
            } else {
                FAR
            };
            distance = if twin[l] != index { distance } else { FAR };
            wall[l] = if distance < best[l] { index } else { wall[l] };
            best[l] = if distance < best[l] {
                distance
            } else {
                best[l]
            };
        }
    }

    /// Puts a lane back to where it was, so that its numbers stay finite.
    fn turn_back<const N: usize>(&self, lane: usize, before: &Rays<N>, rays: &mut Rays<N>) {
        rays.x[lane] = before.x[lane];
        rays.y[lane] = before.y[lane];
        rays.direction_x[lane] = before.direction_x[lane];
        rays.direction_y[lane] = before.direction_y[lane];
        rays.wall[lane] = before.wall[lane];
        rays.distance[lane] = 0.0;
        rays.curvature[lane] = 0.0;
        rays.cosine[lane] = 1.0;
    }

    /// Traces the ray of one lane again, through a corner if it may, until it is on a wall.
    fn redo<const N: usize>(
        &self,
        lane: usize,
        before: &Rays<N>,
        rays: &mut Rays<N>,
    ) -> Option<Ending> {
        let mut ray = Ray {
            point: Vec2::new(before.x[lane], before.y[lane]),
            direction: Vec2::new(before.direction_x[lane], before.direction_y[lane]),
            origin: Origin::Wall {
                wall: before.wall[lane] as usize,
                // Only curves and the ends of walls are asked for it.
                t: f64::NAN,
            },
        };
        let mut distance = 0.0;
        loop {
            match self.tracer.next(&ray) {
                Event::Wall(hit) => {
                    rays.cosine[lane] = incidence(ray.direction, &hit);
                    rays.curvature[lane] = hit.curvature;
                    rays.distance[lane] = distance + hit.distance;
                    rays.replace(lane, &Tracer::reflect(ray.direction, &hit));
                    return None;
                }
                Event::Corner { vertex, hit } => {
                    distance += hit.distance;
                    match self.tracer.pass_corner(ray.direction, vertex, hit.point) {
                        Some((next, _)) => ray = next,
                        None => {
                            self.turn_back(lane, before, rays);
                            return Some(Ending::Stopped);
                        }
                    }
                }
                Event::Escaped => {
                    self.turn_back(lane, before, rays);
                    return Some(Ending::Escaped);
                }
            }
        }
    }
}

impl Constants {
    fn new(domain: &Domain, tracer: &Tracer, w: usize) -> Self {
        let far = Vec2::repeat(f64::MAX.sqrt());
        let corners = tracer.corners[w].map(|corner| corner.unwrap_or(far));
        let twin = domain.walls[w].twin.map_or(NO_WALL, |twin| twin as f64);
        let constants = |normal: Vec2, center: Vec2, curvature: f64| Self {
            normal,
            center,
            curvature,
            corners,
            twin,
        };
        match &domain.walls[w].shape {
            Shape::Arc(arc) => {
                constants(Vec2::zeros(), arc.center, arc.sweep.signum() / arc.radius)
            }
            _ => constants(domain.walls[w].frame(0.0).normal(), Vec2::zeros(), 0.0),
        }
    }
}

/// Does the whole domain lie on the inner side of the wall's line, and does it end in corners? Then the ray meets another
/// wall before it passes the line beyond the wall's ends, and these need no check.
fn is_support(domain: &Domain, tracer: &Tracer, line: &StraightWall) -> bool {
    let next = domain.next(line.wall);
    let clear = [line.wall, next]
        .iter()
        .all(|&vertex| domain.vertices[vertex].angle < std::f64::consts::PI - CLEAR_CORNER);
    let normal = super::left(line.tangent);
    let height = |point: Vec2| cross(line.tangent, point - line.start);
    let slack = tracer.slack.overlap;
    clear
        && domain
            .walls
            .iter()
            .all(|wall| height(wall.start()) >= -slack)
        && tracer.arcs.iter().all(|arc| {
            // The lowest point of the circle counts if it lies on the arc.
            arc.middle.dot(&-normal) * arc.radius < arc.reach
                || height(arc.center) - arc.radius >= -slack
        })
}

#[cfg(test)]
mod tests {
    use super::super::start::{Random, Starts};
    use super::super::{Arc, Condition, Line, Role, Wall};
    use super::*;
    use std::f64::consts::PI;

    fn line(a: [f64; 2], b: [f64; 2]) -> Wall {
        let shape = Line {
            start: Vec2::new(a[0], a[1]),
            end: Vec2::new(b[0], b[1]),
        };
        Wall::new(Shape::Line(shape), Condition::Dirichlet)
    }

    fn arc(center: [f64; 2], radius: f64, from: f64, sweep: f64) -> Wall {
        let shape = Arc {
            center: Vec2::new(center[0], center[1]),
            radius,
            from,
            sweep,
        };
        Wall::new(Shape::Arc(shape), Condition::Dirichlet)
    }

    fn square() -> Vec<Wall> {
        let corners = [[-1.0, -1.0], [1.0, -1.0], [1.0, 1.0], [-1.0, 1.0]];
        (0..4)
            .map(|i| line(corners[i], corners[(i + 1) % 4]))
            .collect()
    }

    fn domains() -> Vec<Domain> {
        let stadium = vec![
            line([-1.0, -1.0], [1.0, -1.0]),
            arc([1.0, 0.0], 1.0, -0.5 * PI, PI),
            line([1.0, 1.0], [-1.0, 1.0]),
            arc([-1.0, 0.0], 1.0, 0.5 * PI, PI),
        ];
        let quarter = vec![
            line([0.0, 0.0], [2.0, 0.0]),
            arc([1.0, 0.0], 1.0, 0.0, 0.5 * PI),
            line([1.0, 1.0], [0.0, 1.0]),
            line([0.0, 1.0], [0.0, 0.0]),
        ];
        let mut slit = line([-0.5, 0.1], [0.5, 0.1]);
        let mut back = slit.reversed();
        (slit.twin, back.twin) = (Some(5), Some(4));
        vec![
            vec![(Role::Outer, square())],
            vec![(Role::Outer, stadium)],
            vec![(Role::Outer, quarter)],
            vec![
                (Role::Outer, square()),
                (Role::Hole, vec![arc([0.1, 0.0], 0.5, 0.0, -2.0 * PI)]),
            ],
            vec![(Role::Outer, square()), (Role::Slit, vec![slit, back])],
        ]
        .into_iter()
        .map(|chains| Domain::new(chains).expect("a domain"))
        .collect()
    }

    /// Every bounce, started from the same rays, is that of the single-ray map to rounding.
    #[test]
    fn lanes_agree_with_the_single_ray_map() {
        for domain in domains() {
            let tracer = Tracer::new(&domain);
            let lanes = Lanes::new(&domain, &tracer).expect("lines and arcs only");
            let starts = Starts::new(&domain);
            let mut random = Random::new(5);
            for _ in 0..2000 {
                let rays: [Ray; 8] = std::array::from_fn(|_| starts.draw(&mut random));
                let mut all = Rays::new(&rays).expect("rays on walls");
                assert_eq!(lanes.bounce(&mut all), [None; 8]);
                for (l, ray) in rays.iter().enumerate() {
                    let Event::Wall(hit) = tracer.next(ray) else {
                        panic!("{ray:?} does not bounce");
                    };
                    let next = Tracer::reflect(ray.direction, &hit);
                    assert_eq!(
                        all.wall[l] as usize,
                        hit.wall,
                        "{ray:?} {hit:?} {:?}",
                        (all.x[l], all.y[l], all.distance[l])
                    );
                    let point = Vec2::new(all.x[l], all.y[l]);
                    let direction = Vec2::new(all.direction_x[l], all.direction_y[l]);
                    // Hits of a dispersing arc are as ill-conditioned as they are flat.
                    let tolerance = 1e-13 / incidence(ray.direction, &hit);
                    assert!((point - hit.point).norm() < tolerance);
                    assert!((direction - next.direction).norm() < tolerance);
                    assert!((all.distance[l] - hit.distance).abs() < tolerance);
                    assert!((all.cosine[l] - incidence(ray.direction, &hit)).abs() < tolerance);
                    assert_eq!(all.curvature[l], hit.curvature);
                }
            }
        }
    }

    #[test]
    fn corners_are_passed_or_reported() {
        let domain = Domain::new(vec![(Role::Outer, square())]).expect("a square");
        let tracer = Tracer::new(&domain);
        let lanes = Lanes::new(&domain, &tracer).expect("straight walls only");
        let ray = Ray {
            point: Vec2::new(0.0, -1.0),
            direction: Vec2::new(1.0, 2.0).normalize(),
            origin: Origin::Wall { wall: 0, t: 1.0 },
        };
        let mut rays = Rays::new(&[ray]).expect("a ray on a wall");
        assert_eq!(lanes.bounce(&mut rays), [None]);
        // There and back.
        assert!((rays.distance[0] - 2.0 * 5_f64.sqrt()).abs() < 1e-12);
        assert!((rays.x[0]).abs() < 1e-12 && (rays.y[0] + 1.0).abs() < 1e-12);
    }
}
