//! The bounce map: from one wall to the next, with its linearisation.

use super::curve_hit::{self, Piece};
use super::{Curve, Domain, Mat2, Shape, Vec2, VertexKind, cross, left};

/// A hit this close to a corner (fraction of the domain's size) is a hit of the corner.
const CORNER: f64 = 1e-11;
/// A wall may be met this far behind the starting point (fraction of the size): at a smooth joint rounding can put the
/// start on the wrong side of the next wall. Walls seen from behind are never met, so nothing else changes.
const BEHIND: f64 = 1e-11;
/// Walls reach this much further than their ends (fraction of the size), so that no ray slips between two of them.
const OVERLAP: f64 = 1e-12;

/// Where a ray starts from.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Origin {
    /// Inside the domain.
    Inside,
    /// On a wall, at parameter t.
    Wall {
        /// Wall index.
        wall: usize,
        /// Parameter on the wall.
        t: f64,
    },
    /// At a vertex (index of the wall that begins there).
    Vertex(usize),
}

/// A ray.
#[derive(Clone, Copy, Debug)]
pub struct Ray {
    /// Starting point.
    pub point: Vec2,
    /// Unit direction.
    pub direction: Vec2,
    /// What the starting point lies on.
    pub origin: Origin,
}

/// Where a ray meets a wall.
#[derive(Clone, Copy, Debug)]
pub struct Hit {
    /// Wall index.
    pub wall: usize,
    /// Point on the wall.
    pub point: Vec2,
    /// Unit tangent of the wall there.
    pub tangent: Vec2,
    /// Curvature of the wall there, positive where it focuses.
    pub curvature: f64,
    /// Length of the flight.
    pub distance: f64,
    /// Parameter on the wall.
    pub t: f64,
}

/// What happens to a ray next.
#[derive(Clone, Copy, Debug)]
pub enum Event {
    /// It meets a wall.
    Wall(Hit),
    /// It runs into a vertex that is a corner.
    Corner {
        /// Index of the wall that begins at the vertex.
        vertex: usize,
        /// The hit of one of its walls.
        hit: Hit,
    },
    /// It meets nothing: the outline leaks (never seen; reported, not hidden).
    Escaped,
}

/// What a wall looks like to a ray: constants prepared once.
#[derive(Clone, Debug)]
enum Obstacle {
    Line {
        start: Vec2,
        tangent: Vec2,
        length: f64,
    },
    Arc {
        center: Vec2,
        radius: f64,
        turn: f64,
        /// Unit vector from the centre to the middle of the arc.
        middle: Vec2,
        half_sweep: f64,
        /// A point of the circle lies on the arc if its component along `middle` is at least this.
        reach: f64,
    },
    Curve {
        curve: Curve,
        extent: f64,
        pieces: Vec<Piece>,
    },
}

/// The bounce map of a domain. Immutable; share it between threads.
#[derive(Clone, Debug)]
pub struct Tracer {
    obstacles: Vec<Obstacle>,
    /// Start and end point of each wall if that vertex is a corner.
    corners: Vec<[Option<Vec2>; 2]>,
    twins: Vec<Option<usize>>,
    ends: Vec<(usize, usize)>,
    regular: Vec<Option<u32>>,
    bisectors: Vec<Vec2>,
    size: f64,
}

impl Tracer {
    /// Prepares the bounce map of a domain.
    #[must_use]
    pub fn new(domain: &Domain) -> Self {
        let walls = &domain.walls;
        let is_corner = |vertex: usize| {
            !matches!(
                domain.vertices[vertex].kind,
                VertexKind::Smooth | VertexKind::Joint
            )
        };
        let corner_point =
            |vertex: usize| is_corner(vertex).then_some(domain.vertices[vertex].point);
        Self {
            obstacles: walls
                .iter()
                .map(|wall| obstacle(&wall.shape, wall.extent(), domain.size))
                .collect(),
            corners: (0..walls.len())
                .map(|w| [corner_point(w), corner_point(domain.next(w))])
                .collect(),
            twins: walls.iter().map(|wall| wall.twin).collect(),
            ends: (0..walls.len())
                .map(|w| (domain.previous(w), domain.next(w)))
                .collect(),
            regular: domain
                .vertices
                .iter()
                .map(|vertex| match vertex.kind {
                    VertexKind::Regular { n } => Some(n),
                    _ => None,
                })
                .collect(),
            bisectors: (0..walls.len())
                .map(|w| {
                    let after = walls[w].frame(0.0).tangent;
                    let wall = &walls[domain.previous(w)];
                    let before = -wall.frame(wall.extent()).tangent;
                    let sum = after + before;
                    if sum.norm() > 1e-9 {
                        sum.normalize()
                    } else {
                        left(after)
                    }
                })
                .collect(),
            size: domain.size,
        }
    }

    /// Diagonal of the domain's box, the unit of tolerances.
    #[must_use]
    pub fn size(&self) -> f64 {
        self.size
    }

    /// What the ray meets first.
    #[must_use]
    pub fn next(&self, ray: &Ray) -> Event {
        let mut best = Nearest {
            distance: f64::INFINITY,
            wall: usize::MAX,
            t: f64::NAN,
        };
        for (wall, obstacle) in self.obstacles.iter().enumerate() {
            match obstacle {
                Obstacle::Line {
                    start,
                    tangent,
                    length,
                } => {
                    if self.starts_on(ray.origin, wall) {
                        continue;
                    }
                    let facing = cross(*tangent, ray.direction);
                    if facing >= 0.0 {
                        continue;
                    }
                    let away = start - ray.point;
                    let distance = cross(*tangent, away) / facing;
                    if distance < best.distance && distance > -BEHIND * self.size {
                        let along = tangent.dot(&(ray.direction * distance - away));
                        if along >= -OVERLAP * self.size && along <= length + OVERLAP * self.size {
                            best = Nearest {
                                distance,
                                wall,
                                t: along,
                            };
                        }
                    }
                }
                Obstacle::Arc {
                    center,
                    radius,
                    turn,
                    middle,
                    reach,
                    ..
                } => {
                    let from_center = ray.point - center;
                    let along = ray.direction.dot(&from_center);
                    let own = matches!(ray.origin, Origin::Wall { wall: own, .. } if own == wall);
                    let distance = if own {
                        // The other root is known exactly; a dispersing arc is never met again by a ray that leaves it.
                        if *turn < 0.0 {
                            continue;
                        }
                        -2.0 * along
                    } else {
                        let excess = from_center.norm_squared() - radius * radius;
                        let square = along * along - excess;
                        if square < 0.0 {
                            continue;
                        }
                        -along + turn * square.sqrt()
                    };
                    if distance < best.distance && distance > -BEHIND * self.size {
                        let at = from_center + ray.direction * distance;
                        if at.dot(middle) >= *reach {
                            best = Nearest {
                                distance,
                                wall,
                                t: f64::NAN,
                            };
                        }
                    }
                }
                Obstacle::Curve {
                    curve,
                    extent,
                    pieces,
                } => {
                    self.nearest_on_curve(ray, wall, curve, *extent, pieces, &mut best);
                }
            }
        }
        self.event(ray, &best)
    }

    fn starts_on(&self, origin: Origin, wall: usize) -> bool {
        match origin {
            Origin::Inside => false,
            Origin::Wall { wall: own, .. } => own == wall || self.twins[own] == Some(wall),
            Origin::Vertex(after) => {
                after == wall || self.ends[after].0 == wall || {
                    let twin = self.twins[wall];
                    twin == Some(after) || twin == Some(self.ends[after].0)
                }
            }
        }
    }

    /// Parameter of the ray's starting point on a curved wall, if it lies on it (also as the common end of two walls).
    fn own_parameter(&self, ray: &Ray, wall: usize, extent: f64) -> [Option<f64>; 2] {
        match ray.origin {
            Origin::Inside => [None, None],
            Origin::Wall { wall: own, t } => {
                let own_extent = self.extent(own);
                let slack = 1e-9 * own_extent;
                let direct = (own == wall).then_some(t);
                let across = if t > own_extent - slack && self.ends[own].1 == wall {
                    Some(0.0)
                } else if t < slack && self.ends[own].0 == wall {
                    Some(extent)
                } else {
                    None
                };
                [direct, across]
            }
            Origin::Vertex(after) => [
                (after == wall).then_some(0.0),
                (self.ends[after].0 == wall).then_some(extent),
            ],
        }
    }

    fn extent(&self, wall: usize) -> f64 {
        match &self.obstacles[wall] {
            Obstacle::Line { length, .. } => *length,
            Obstacle::Arc {
                radius, half_sweep, ..
            } => 2.0 * radius * half_sweep,
            Obstacle::Curve { extent, .. } => *extent,
        }
    }

    fn nearest_on_curve(
        &self,
        ray: &Ray,
        wall: usize,
        curve: &Curve,
        extent: f64,
        pieces: &[Piece],
        best: &mut Nearest,
    ) {
        let own = self.own_parameter(ray, wall, extent);
        for piece in pieces {
            let here = own
                .into_iter()
                .flatten()
                .find(|&t| t >= piece.from - 1e-9 * extent && t <= piece.to + 1e-9 * extent);
            for t in curve_hit::roots(curve, piece, ray.point, ray.direction, here)
                .into_iter()
                .flatten()
            {
                let [point, first, _, _] = curve.derivatives(t);
                let distance = ray.direction.dot(&(point - ray.point));
                let faces = cross(first, ray.direction) < 0.0;
                if faces && distance < best.distance && distance > -BEHIND * self.size {
                    *best = Nearest { distance, wall, t };
                }
            }
        }
    }

    fn event(&self, ray: &Ray, best: &Nearest) -> Event {
        if best.wall == usize::MAX {
            return Event::Escaped;
        }
        let hit = self.complete(ray, best);
        let near = CORNER * self.size;
        for (end, corner) in self.corners[best.wall].iter().enumerate() {
            if corner.is_some_and(|corner| (corner - hit.point).norm_squared() < near * near) {
                let vertex = if end == 0 {
                    best.wall
                } else {
                    self.ends[best.wall].1
                };
                return Event::Corner { vertex, hit };
            }
        }
        Event::Wall(hit)
    }

    fn complete(&self, ray: &Ray, best: &Nearest) -> Hit {
        let distance = best.distance.max(0.0);
        match &self.obstacles[best.wall] {
            Obstacle::Line { start, tangent, .. } => Hit {
                wall: best.wall,
                point: start + tangent * best.t,
                tangent: *tangent,
                curvature: 0.0,
                distance,
                t: best.t,
            },
            Obstacle::Arc {
                center,
                radius,
                turn,
                middle,
                half_sweep,
                ..
            } => {
                let radial = (ray.point + ray.direction * best.distance - center).normalize();
                let angle = cross(*middle, radial).atan2(middle.dot(&radial));
                Hit {
                    wall: best.wall,
                    point: center + radial * *radius,
                    tangent: left(radial) * *turn,
                    curvature: turn / radius,
                    distance,
                    t: radius * (half_sweep + turn * angle),
                }
            }
            Obstacle::Curve { curve, .. } => {
                let [point, first, second, _] = curve.derivatives(best.t);
                let speed = first.norm();
                Hit {
                    wall: best.wall,
                    point,
                    tangent: first / speed,
                    curvature: cross(first, second) / (speed * speed * speed),
                    distance,
                    t: best.t,
                }
            }
        }
    }

    /// The ray after specular reflection at a hit.
    #[must_use]
    pub fn reflect(direction: Vec2, hit: &Hit) -> Ray {
        let normal = left(hit.tangent);
        Ray {
            point: hit.point,
            direction: direction - normal * (2.0 * direction.dot(&normal)),
            origin: Origin::Wall {
                wall: hit.wall,
                t: hit.t,
            },
        }
    }

    /// The ray that goes on after a corner, if the corner is one of angle pi/n that does not diffract, with the number of
    /// reflections n: the group of the corner turns the direction round for even n and mirrors it in the corner's bisector
    /// for odd n.
    #[must_use]
    pub fn pass_corner(&self, direction: Vec2, vertex: usize, point: Vec2) -> Option<(Ray, u32)> {
        let n = self.regular[vertex]?;
        let bisector = self.bisectors[vertex];
        let direction = if n % 2 == 0 {
            -direction
        } else {
            direction - bisector * (2.0 * direction.dot(&bisector))
        };
        Some((
            Ray {
                point,
                direction,
                origin: Origin::Vertex(vertex),
            },
            n,
        ))
    }
}

/// Best hit so far.
#[derive(Clone, Copy)]
struct Nearest {
    distance: f64,
    wall: usize,
    /// Parameter on the wall; not known yet (NaN) for arcs.
    t: f64,
}

fn obstacle(shape: &Shape, extent: f64, size: f64) -> Obstacle {
    match shape {
        Shape::Line(line) => Obstacle::Line {
            start: line.start,
            tangent: (line.end - line.start).normalize(),
            length: extent,
        },
        Shape::Arc(arc) => {
            let half_sweep = 0.5 * arc.sweep.abs();
            let middle = arc.from + 0.5 * arc.sweep;
            let slack = OVERLAP * size / arc.radius;
            let reach = if half_sweep + slack >= std::f64::consts::PI {
                -2.0 * arc.radius
            } else {
                arc.radius * (half_sweep + slack).cos()
            };
            Obstacle::Arc {
                center: arc.center,
                radius: arc.radius,
                turn: arc.sweep.signum(),
                middle: Vec2::new(middle.cos(), middle.sin()),
                half_sweep,
                reach,
            }
        }
        Shape::Curve(curve) => Obstacle::Curve {
            curve: curve.clone(),
            extent,
            pieces: curve_hit::cut(curve, extent),
        },
    }
}

/// Linearised free flight in (transverse displacement, transverse angle).
#[must_use]
pub fn flight(length: f64) -> Mat2 {
    Mat2::new(1.0, length, 0.0, 1.0)
}

/// Linearised reflection: `curvature` of the wall (positive focusing) and cosine of the angle of incidence.
#[must_use]
pub fn reflection(curvature: f64, cosine: f64) -> Mat2 {
    Mat2::new(-1.0, 0.0, 2.0 * curvature / cosine, -1.0)
}

/// Cosine of the angle of incidence of a ray on a hit.
#[must_use]
pub fn incidence(direction: Vec2, hit: &Hit) -> f64 {
    -direction.dot(&left(hit.tangent))
}
