//! The bounce map: from one wall to the next, with its linearisation.

use super::curve_hit::{CurvedWall, Meeting};
use super::obstacle::{ArcWall, Fraction, Slack, StraightWall};
use super::{Domain, Mat2, Shape, Vec2, VertexKind, Wall, cross, left};

/// A hit this close to a corner (fraction of the domain's size) is a hit of the corner.
const CORNER: f64 = 1e-11;
/// A wall may be met this far behind the starting point (fraction of the size): at a smooth joint rounding can put the
/// start on the wrong side of the next wall. Walls seen from behind are never met, so nothing else changes.
const BEHIND: f64 = 1e-11;
/// Walls reach this much further than their ends (fraction of the size), so that no ray slips between two of them.
const OVERLAP: f64 = 1e-12;

/// A flight shorter than this multiple of a corner's reach starts in the corner: a longer one comes in from the corner's
/// opening, to within the inverse of this number in angle.
const IN_CORNER: f64 = 1e3;
/// A flight that ends further outside a wall than this multiple of a corner's reach, from a start in the corner, missed it.
const OUTSIDE: f64 = 4.0;
/// A start this close to a smooth end of its wall (fraction of the wall) lies on the next wall too: rounding blurs on which
/// side that wall passes a ray that grazes it.
const SAME_POINT: f64 = 1e-7;

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

/// The bounce map of a domain. Immutable; share it between threads.
///
/// What is decided at the edges of the map:
/// * A ray that meets a wall within 1e-11 of the domain's size (or within the gap that the outline has) of a corner runs into
///   the corner: [`Event::Corner`]. At smooth vertices and joints it is reflected by one of the walls, whose tangents agree
///   there. A ray that starts in a corner is reflected by its walls in the ordinary way.
/// * A ray that touches a dispersing wall without crossing it goes on. One that crosses it, however little, is reflected.
/// * A ray that starts along a straight wall goes on along it to its end.
/// * A ray that starts tangent to a focusing wall, or comes along a straight wall that goes over into one, has no next
///   bounce: nearby rays creep along the wall by ever more bounces. It gets hits of distance zero.
/// * A wall is met from its inner side only; the two faces of a thin wall are two walls.
#[derive(Clone, Debug)]
pub struct Tracer {
    pub(super) straight: Vec<StraightWall>,
    pub(super) arcs: Vec<ArcWall>,
    curved: Vec<CurvedWall>,
    /// Start and end point of each wall if that vertex is a corner.
    pub(super) corners: Vec<[Option<Vec2>; 2]>,
    /// Vertices next to a curved wall, which, unlike lines and arcs, cannot reach beyond its end.
    caps: Vec<Cap>,
    pub(super) twins: Vec<Option<usize>>,
    ends: Vec<(usize, usize)>,
    regular: Vec<Option<u32>>,
    bisectors: Vec<Vec2>,
    /// Tangents of the walls before and after each vertex.
    tangents: Vec<[Vec2; 2]>,
    extents: Vec<f64>,
    pub(super) slack: Slack,
    /// A hit this close to a corner is a hit of the corner.
    pub(super) corner: f64,
    size: f64,
}

/// A vertex that rays must not slip through.
#[derive(Clone, Copy, Debug)]
struct Cap {
    /// Index of the wall that begins there.
    vertex: usize,
    point: Vec2,
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
        let gap = (0..walls.len())
            .map(|w| (walls[w].start() - walls[domain.previous(w)].end()).norm())
            .fold(0.0, f64::max);
        let slack = Slack {
            behind: BEHIND * domain.size,
            overlap: (OVERLAP * domain.size).max(2.0 * gap),
            size: domain.size,
        };
        let mut tracer = Self {
            straight: Vec::new(),
            arcs: Vec::new(),
            curved: Vec::new(),
            corners: (0..walls.len())
                .map(|w| [corner_point(w), corner_point(domain.next(w))])
                .collect(),
            caps: (0..walls.len())
                .filter_map(|w| Cap::new(domain, w))
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
            bisectors: (0..walls.len()).map(|w| bisector(domain, w)).collect(),
            tangents: (0..walls.len()).map(|w| tangents(domain, w)).collect(),
            extents: walls.iter().map(Wall::extent).collect(),
            slack,
            corner: (CORNER * domain.size).max(2.0 * gap),
            size: domain.size,
        };
        for (w, wall) in walls.iter().enumerate() {
            let smooth = [!is_corner(w), !is_corner(domain.next(w))];
            match &wall.shape {
                Shape::Line(line) => {
                    let straight = StraightWall::new(w, line, smooth, slack);
                    tracer.straight.push(straight);
                }
                Shape::Arc(arc) => tracer.arcs.push(ArcWall::new(w, arc, smooth, slack)),
                Shape::Curve(curve) => {
                    let curved = CurvedWall::new(w, curve, wall.extent(), smooth);
                    tracer.curved.push(curved);
                }
            }
        }
        tracer
    }

    /// Diagonal of the domain's box, the unit of tolerances.
    #[must_use]
    pub fn size(&self) -> f64 {
        self.size
    }

    /// What the ray meets first.
    #[must_use]
    pub fn next(&self, ray: &Ray) -> Event {
        let mut best = Fraction {
            height: f64::INFINITY,
            rate: 1.0,
        };
        let mut nearest = Nearest::Nothing;
        for wall in &self.straight {
            if let Some(found) = wall.meet(ray, best, self.slack)
                && !self.starts_on(ray.origin, wall.wall)
            {
                best = found;
                nearest = Nearest::Straight(wall);
            }
        }
        let mut distance = best.height / best.rate;
        for arc in &self.arcs {
            let own = matches!(ray.origin, Origin::Wall { wall, .. } if wall == arc.wall);
            if let Some(found) = arc.meet(ray, own, distance, self.slack)
                && !self.starts_on_twin(ray.origin, arc.wall)
            {
                distance = found;
                nearest = Nearest::Arc(arc);
            }
        }
        for wall in &self.curved {
            let own = self.own_parameter(ray, wall);
            if let Some(meeting) = wall.meet(ray, own, self.slack.behind, distance) {
                distance = meeting.distance;
                nearest = Nearest::Curved(wall, meeting);
            }
        }
        for cap in &self.caps {
            if let Some(found) = self.meet_cap(cap, ray, distance) {
                return found;
            }
        }
        if let Some(found) = self.meet_in_corner(ray, distance) {
            return found;
        }
        let hit = match nearest {
            Nearest::Nothing => return Event::Escaped,
            Nearest::Straight(wall) => wall.hit(ray, distance),
            Nearest::Arc(arc) => arc.hit(ray, distance),
            Nearest::Curved(wall, meeting) => wall.hit(&meeting),
        };
        self.event(hit)
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

    /// The other face of an arc that the ray starts on is never met next.
    fn starts_on_twin(&self, origin: Origin, wall: usize) -> bool {
        matches!(origin, Origin::Wall { wall: own, .. } if self.twins[own] == Some(wall))
    }

    /// Parameter of the ray's starting point on a curved wall, if it lies on it (also as the common end of two walls, or
    /// on the other face).
    fn own_parameter(&self, ray: &Ray, wall: &CurvedWall) -> [Option<f64>; 2] {
        match ray.origin {
            Origin::Inside => [None, None],
            Origin::Wall { wall: own, t } => {
                let own_extent = self.extents[own];
                let slack = SAME_POINT * own_extent;
                let direct = if own == wall.wall {
                    Some(t)
                } else if self.twins[own] == Some(wall.wall) {
                    Some(wall.extent - t)
                } else {
                    None
                };
                let smooth = |end: usize| self.corners[own][end].is_none();
                let across = if t > own_extent - slack && self.ends[own].1 == wall.wall && smooth(1)
                {
                    Some(0.0)
                } else if t < slack && self.ends[own].0 == wall.wall && smooth(0) {
                    Some(wall.extent)
                } else {
                    None
                };
                [direct, across]
            }
            Origin::Vertex(after) => [
                (after == wall.wall).then_some(0.0),
                (self.ends[after].0 == wall.wall).then_some(wall.extent),
            ],
        }
    }

    /// The hit of a vertex that the ray would slip through, if its nearest wall (at `distance`) lies beyond.
    fn meet_cap(&self, cap: &Cap, ray: &Ray, distance: f64) -> Option<Event> {
        let to = cap.point - ray.point;
        let along = ray.direction.dot(&to);
        let passes = cross(ray.direction, to).abs() <= self.slack.overlap
            && along > self.corner
            && along < distance - self.corner;
        if !passes {
            return None;
        }
        let faces = self.tangents[cap.vertex].map(|tangent| cross(tangent, ray.direction) < 0.0);
        let (before, after) = (self.ends[cap.vertex].0, cap.vertex);
        let (wall, t) = match faces {
            [_, true] => (after, 0.0),
            [true, false] => (before, self.extents[before]),
            [false, false] => return None,
        };
        Some(self.event(self.end_hit(ray, wall, t, along)?))
    }

    /// The hit of a wall at its end, t, after a flight of length `along`.
    fn end_hit(&self, ray: &Ray, wall: usize, t: f64, along: f64) -> Option<Hit> {
        let straight = self.straight.iter().find(|straight| straight.wall == wall);
        let arc = self.arcs.iter().find(|arc| arc.wall == wall);
        let curved = self.curved.iter().find(|curved| curved.wall == wall);
        straight
            .map(|straight| straight.hit(ray, along))
            .or_else(|| arc.map(|arc| arc.hit(ray, along)))
            .or_else(|| curved.map(|curved| curved.hit(&curved.at(ray, t))))
    }

    /// The hit of the other wall of the corner that the ray starts in, if it points out of the domain through that wall and
    /// rounding made it miss it: what was found instead, at `distance`, lies outside.
    fn meet_in_corner(&self, ray: &Ray, distance: f64) -> Option<Event> {
        let Origin::Wall { wall: own, t } = ray.origin else {
            return None;
        };
        let extent = self.extents[own];
        let beside = SAME_POINT * extent;
        let end = if t <= beside {
            0
        } else if t >= extent - beside {
            1
        } else {
            return None;
        };
        let corner = self.corners[own][end]?;
        if (corner - ray.point).norm_squared() >= self.corner * self.corner {
            return None;
        }
        let (before, next) = self.ends[own];
        let (other, t, vertex) = if end == 0 {
            (before, self.extents[before], own)
        } else {
            (next, 0.0, next)
        };
        let tangents = self.tangents[vertex];
        let out = -cross(tangents[end], ray.direction) * distance > OUTSIDE * self.corner;
        let convex = cross(tangents[0], tangents[1]) > 0.0;
        (out && convex)
            .then(|| self.end_hit(ray, other, t, 0.0).map(Event::Wall))
            .flatten()
    }

    #[inline]
    fn event(&self, hit: Hit) -> Event {
        // A ray that starts in the corner does not run into it: its reflections there are ordinary ones.
        if hit.distance <= IN_CORNER * self.corner {
            return Event::Wall(hit);
        }
        for (end, corner) in self.corners[hit.wall].iter().enumerate() {
            if corner.is_some_and(|corner| {
                (corner - hit.point).norm_squared() < self.corner * self.corner
            }) {
                let vertex = if end == 0 {
                    hit.wall
                } else {
                    self.ends[hit.wall].1
                };
                return Event::Corner { vertex, hit };
            }
        }
        Event::Wall(hit)
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
    /// reflections: the group of the corner turns the direction round for even n and mirrors it in the corner's bisector
    /// for odd n. A ray that comes in along one of the walls, so flat that its last reflection would lie far outside the
    /// corner, is spared that reflection.
    #[must_use]
    pub fn pass_corner(&self, direction: Vec2, vertex: usize, point: Vec2) -> Option<(Ray, u32)> {
        let n = self.regular[vertex]?;
        let bisector = self.bisectors[vertex];
        let mut direction = if n % 2 == 0 {
            -direction
        } else {
            direction - bisector * (2.0 * direction.dot(&bisector))
        };
        let mut reflections = n;
        for tangent in self.tangents[vertex] {
            let normal = left(tangent);
            let outward = -direction.dot(&normal);
            if outward > 0.0 {
                direction += normal * (2.0 * outward);
                reflections = n - 1;
            }
        }
        let ray = Ray {
            point,
            direction,
            origin: Origin::Vertex(vertex),
        };
        Some((ray, reflections))
    }
}

/// What the ray meets first so far.
enum Nearest<'a> {
    Nothing,
    Straight(&'a StraightWall),
    Arc(&'a ArcWall),
    Curved(&'a CurvedWall, Meeting),
}

impl Cap {
    fn new(domain: &Domain, vertex: usize) -> Option<Self> {
        let before = &domain.walls[domain.previous(vertex)];
        let after = &domain.walls[vertex];
        let is_curve = |wall: &Wall| matches!(wall.shape, Shape::Curve(_));
        (is_curve(before) || is_curve(after)).then(|| Self {
            vertex,
            point: domain.vertices[vertex].point,
        })
    }
}

/// Unit vector along the bisector of the corner at the start of a wall, into the domain.
fn bisector(domain: &Domain, vertex: usize) -> Vec2 {
    let [before, after] = tangents(domain, vertex);
    let sum = after - before;
    if sum.norm() > 1e-9 {
        sum.normalize()
    } else {
        left(after)
    }
}

/// Tangents of the walls before and after a vertex.
fn tangents(domain: &Domain, vertex: usize) -> [Vec2; 2] {
    let before = &domain.walls[domain.previous(vertex)];
    [
        before.frame(before.extent()).tangent,
        domain.walls[vertex].frame(0.0).tangent,
    ]
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
