//! What the orbit sum leaves out or describes badly, with estimates of the size.

use super::periodic::{Closure, Orbit, OrbitKind};
use super::search::CurvedFamily;
use super::strip::{Strip, StripEdge};
use super::tori::{LeftOut, LeftOutKind};
use crate::billiard::{
    Domain, Event, Hit, Origin, Ray, Tracer, Vec2, VertexKind, cross, incidence, left,
};
use std::f64::consts::PI;
use std::fmt;

/// Why something is missing or poor.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum OmissionKind {
    /// Waves diffract at corners whose angle is not pi/n (cusps and free tips of thin walls among them).
    Corners,
    /// Edges of strips that end at a corner that diffracts.
    StripCorners,
    /// Edges of strips that graze a curved wall.
    StripGrazing,
    /// Families of orbits with curved bounces, all of one length.
    Families,
    /// Repetitions of orbits with three or more bounces at joints.
    Joints,
    /// Orbits next to a bifurcation, whose isolated terms are too large.
    Bifurcations,
    /// Orbits with more bounces than the search looked for.
    Bounces,
    /// Families of an integrable shape.
    Tori(LeftOutKind),
}

impl fmt::Display for OmissionKind {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Corners => "orbits that diffract at corners",
            Self::StripCorners => "diffraction at the edges of strips",
            Self::StripGrazing => "strips whose edge grazes a wall",
            Self::Families => "families of orbits between curved walls",
            Self::Joints => "repetitions of orbits through joints",
            Self::Bifurcations => "orbits near a bifurcation (their terms are too large)",
            Self::Bounces | Self::Tori(LeftOutKind::ManyBounces { .. }) => {
                "orbits with more bounces than the limit"
            }
            Self::Tori(LeftOutKind::Grazing) => "tori that graze the inner circle",
            Self::Tori(LeftOutKind::CenterNearTorus) => "tori that pass the corner closely",
            Self::Tori(LeftOutKind::NearBifurcation) => "axis orbits near a bifurcation",
        })
    }
}

impl OmissionKind {
    /// Does what shows at a length show at its multiples too? Repetitions of orbits are listed themselves.
    fn repeats(self) -> bool {
        matches!(
            self,
            Self::Corners | Self::StripCorners | Self::StripGrazing | Self::Families
        )
    }
}

/// An estimate of what the sum leaves out: amplitude x k^power levels at the given length.
#[derive(Clone, Debug, PartialEq)]
pub struct Omission {
    /// Reason.
    pub kind: OmissionKind,
    /// How many such contributions there are up to the limits (corners, edges, closures, families).
    pub count: usize,
    /// Length of the shortest of them, at which it would show in a length spectrum.
    pub length: f64,
    /// Lengths at which they would show, shortest first: of all of them, for corners of every way straight to a wall or a corner and
    /// back.
    pub lengths: Vec<f64>,
    /// Amplitude of the largest of them, in levels at k = 1.
    pub amplitude: f64,
    /// Power of k.
    pub power: f64,
}

impl Omission {
    /// Estimated amplitude in the staircase, in levels, at wave number k under Gaussian smoothing of standard deviation s
    /// in k. An order of magnitude.
    #[must_use]
    pub fn size_at(&self, k: f64, s: f64) -> f64 {
        self.amplitude * k.powf(self.power) * (-0.5 * (s * self.length).powi(2)).exp()
    }

    /// Would it show within `distance` of a length?
    #[must_use]
    pub fn shows_at(&self, length: f64, distance: f64) -> bool {
        self.lengths.iter().any(|own| {
            let times = if self.kind.repeats() {
                (length / own).round().max(1.0)
            } else {
                1.0
            };
            (times * own - length).abs() <= distance
        })
    }

    /// One kind's omissions as one: the shortest length and the largest amplitude.
    fn of(kind: OmissionKind, power: f64, items: impl Iterator<Item = (f64, f64)>) -> Option<Self> {
        let mut joined: Option<Self> = None;
        for (length, amplitude) in items {
            let entry = joined.get_or_insert(Self {
                kind,
                count: 0,
                length,
                lengths: Vec::new(),
                amplitude,
                power,
            });
            entry.lengths.push(length);
            entry.count += 1;
            entry.length = entry.length.min(length);
            entry.amplitude = entry.amplitude.max(amplitude);
        }
        if let Some(entry) = &mut joined {
            entry.lengths.sort_by(f64::total_cmp);
        }
        joined
    }
}

impl From<&LeftOut> for Omission {
    fn from(left_out: &LeftOut) -> Self {
        Self {
            kind: OmissionKind::Tori(left_out.kind),
            count: 1,
            length: left_out.length,
            lengths: vec![left_out.length],
            amplitude: left_out.amplitude,
            power: left_out.power,
        }
    }
}

/// Chain coefficients of joints are about this large.
const LARGEST_CHAIN: f64 = 0.25;
/// A determinant below this makes a term larger than 0.6/r levels: the orbit is close to a bifurcation and leading order is
/// not to be trusted.
const NEAR_BIFURCATION: f64 = 0.25;
/// Orbits with at least this part of the allowed bounces stand for those with more.
const MANY_BOUNCES: f64 = 0.9;

/// What the search found.
pub(crate) struct Found<'a> {
    pub(crate) orbits: &'a [Orbit],
    pub(crate) strips: &'a [Strip],
    pub(crate) families: &'a [CurvedFamily],
    pub(crate) max_bounces: usize,
}

/// What the sum over these orbits and strips leaves out.
pub(crate) fn omissions(domain: &Domain, tracer: &Tracer, found: &Found) -> Vec<Omission> {
    let Found {
        orbits,
        strips,
        families,
        max_bounces,
    } = *found;
    let edges = |wanted: StripEdge| {
        strips
            .iter()
            .filter(move |strip| strip.edges.contains(&wanted))
            .map(|strip| strip.length)
    };
    [
        Omission::of(OmissionKind::Corners, -0.5, corners(domain, tracer)).map(|joined| Omission {
            lengths: ways_back(domain, tracer),
            ..joined
        }),
        // The edge of a shadow is blurred over a width of about sqrt(L/k), which is this much of a level of
        // (w/2 pi) k J1(k L).
        Omission::of(
            OmissionKind::StripCorners,
            0.0,
            edges(StripEdge::Corner).map(|length| (length, (2.0 / PI).sqrt() / (2.0 * PI))),
        ),
        // The penumbra of a wall of radius R is about R (k R)^(-2/3) wide; R is taken as the size of the domain.
        Omission::of(
            OmissionKind::StripGrazing,
            -1.0 / 6.0,
            edges(StripEdge::Grazing).map(|length| {
                (
                    length,
                    domain.size.cbrt() * (2.0 / (PI * length)).sqrt() / (2.0 * PI),
                )
            }),
        ),
        // A family of width Y with M = ((1, b), (0, 1)) has the amplitude (1/pi) sqrt(k/(2 pi b)) Y; b is about the length
        // and Y about a quarter of the domain's size.
        Omission::of(
            OmissionKind::Families,
            0.5,
            families.iter().map(|family| {
                (
                    family.length,
                    0.25 * domain.size / (PI * (2.0 * PI * family.length).sqrt()),
                )
            }),
        ),
        Omission::of(OmissionKind::Joints, 0.0, joints(orbits)),
        Omission::of(OmissionKind::Bifurcations, 0.0, bifurcations(orbits)),
        Omission::of(
            OmissionKind::Bounces,
            0.0,
            many_bounces(orbits, max_bounces),
        ),
    ]
    .into_iter()
    .flatten()
    .collect()
}

/// Length and size of a closure's term; where the amplitude is not known, that of one side of the joint, but no more than
/// chain coefficients are.
fn size(orbit: &Orbit, closure: &Closure) -> (f64, f64) {
    let r = f64::from(closure.repetition);
    let share = f64::from(orbit.partner) / (PI * r * orbit.fixed_by.len() as f64);
    let amplitude = closure.amplitude.map_or_else(
        || (0.5 / closure.determinant.sqrt()).min(LARGEST_CHAIN),
        |known| known.norm(),
    );
    (r * orbit.length, share * amplitude)
}

fn bifurcations(orbits: &[Orbit]) -> impl Iterator<Item = (f64, f64)> {
    orbits
        .iter()
        .filter(|orbit| orbit.kind != OrbitKind::Joint)
        .flat_map(|orbit| orbit.closures.iter().map(move |closure| (orbit, closure)))
        .filter(|(_, closure)| closure.determinant < NEAR_BIFURCATION)
        .map(|(orbit, closure)| size(orbit, closure))
}

/// Repetitions of orbits through joints whose amplitude is not known.
fn joints(orbits: &[Orbit]) -> impl Iterator<Item = (f64, f64)> {
    orbits
        .iter()
        .flat_map(|orbit| orbit.closures.iter().map(move |closure| (orbit, closure)))
        .filter(|(_, closure)| closure.amplitude.is_none())
        .map(|(orbit, closure)| size(orbit, closure))
}

/// The largest term among the orbits with nearly as many bounces as allowed: their series goes on with terms that are
/// smaller still and alternate in phase.
fn many_bounces(orbits: &[Orbit], max_bounces: usize) -> impl Iterator<Item = (f64, f64)> {
    orbits
        .iter()
        .filter(move |orbit| orbit.bounces() as f64 >= MANY_BOUNCES * max_bounces as f64)
        .filter_map(|orbit| Some(size(orbit, orbit.closures.first()?)))
}

/// Directions into the wedge of a corner in which a way back is looked for.
const DIRECTIONS: usize = 64;

/// Length and amplitude at k = 1 of the shortest wave that leaves each diffracting corner and comes back to it.
///
/// An orbit that diffracts once adds about |D|/(pi sqrt(8 pi k l)) levels, l its length and D Keller's coefficient of the
/// wedge (Keller, J. Opt. Soc. Am. 52, 1962; Vattay, Wirzba & Rosenqvist, Phys. Rev. Lett. 73, 1994, from memory), here
/// along the bisector, where |D| = (4/N)/|sin(pi/N)| with N = angle/pi.
fn corners<'a>(domain: &'a Domain, tracer: &'a Tracer) -> impl Iterator<Item = (f64, f64)> + 'a {
    domain
        .vertices
        .iter()
        .enumerate()
        .filter(|(_, vertex)| vertex.kind == VertexKind::Corner)
        .map(|(index, vertex)| {
            let length = way_back(domain, tracer, index);
            let n = vertex.angle / PI;
            let strength = (4.0 / n) / (PI / n).sin().abs().max(LEAST_SINE);
            (length, strength / (PI * (8.0 * PI * length).sqrt()))
        })
}

/// Keller's coefficient diverges towards angles pi/n, where the geometric reflection takes over: it is cut off here.
const LEAST_SINE: f64 = 0.3;

/// Twice the shortest distance at which a ray from the corner meets a wall nearly at a right angle, or the mean distance if
/// none does.
fn way_back(domain: &Domain, tracer: &Tracer, index: usize) -> f64 {
    let hits = hits(domain, tracer, index);
    let nearest = returning(&hits)
        .map(|hit| hit.distance)
        .fold(f64::INFINITY, f64::min);
    let mean = if hits.is_empty() {
        domain.size
    } else {
        hits.iter().map(|(_, hit)| hit.distance).sum::<f64>() / hits.len() as f64
    };
    2.0 * if nearest.is_finite() { nearest } else { mean }
}

/// Lengths of all ways from a corner that diffracts straight to a wall, at a right angle, or into a corner, and back; shortest first.
fn ways_back(domain: &Domain, tracer: &Tracer) -> Vec<f64> {
    let mut lengths = Vec::new();
    let diffracting = (0..domain.vertices.len())
        .filter(|&index| domain.vertices[index].kind == VertexKind::Corner);
    for index in diffracting {
        lengths.push(way_back(domain, tracer, index));
        let hits = hits(domain, tracer, index);
        for wall in 0..domain.walls.len() {
            let nearest = returning(&hits)
                .filter(|hit| hit.wall == wall)
                .map(|hit| hit.distance)
                .min_by(f64::total_cmp);
            lengths.extend(nearest.map(|distance| 2.0 * distance));
        }
        lengths.extend(seen_corners(domain, tracer, index).map(|distance| 2.0 * distance));
    }
    lengths.sort_by(f64::total_cmp);
    lengths.dedup_by(|a, b| (*a - *b).abs() < SAME_WAY * domain.size);
    lengths
}

/// Lengths that differ by less than this part of the domain's size are one: rays are sampled, and no spectrum tells them apart.
const SAME_WAY: f64 = 1e-3;

/// Hits of rays into the wedge of a corner, with their directions.
fn hits(domain: &Domain, tracer: &Tracer, index: usize) -> Vec<(Vec2, Hit)> {
    let vertex = domain.vertices[index];
    let first = domain.walls[vertex.after].frame(0.0).tangent;
    (0..DIRECTIONS)
        .map(|i| vertex.angle * (i as f64 + 0.5) / DIRECTIONS as f64)
        .map(|angle| first * angle.cos() + left(first) * angle.sin())
        .filter_map(|direction| {
            let ray = Ray {
                point: vertex.point,
                direction,
                origin: Origin::Vertex(index),
            };
            match tracer.next(&ray) {
                Event::Wall(hit) => Some((direction, hit)),
                _ => None,
            }
        })
        .collect()
}

/// The hits nearly at a right angle.
fn returning(hits: &[(Vec2, Hit)]) -> impl Iterator<Item = &Hit> {
    hits.iter()
        .filter(|(direction, hit)| incidence(*direction, hit) > NEARLY_NORMAL)
        .map(|(_, hit)| hit)
}

/// Distances of the corners that a ray from a corner runs into, those along its own walls left out.
fn seen_corners<'a>(
    domain: &'a Domain,
    tracer: &'a Tracer,
    index: usize,
) -> impl Iterator<Item = f64> + 'a {
    let from = domain.vertices[index];
    let first = domain.walls[from.after].frame(0.0).tangent;
    domain
        .vertices
        .iter()
        .enumerate()
        .filter(move |(other, vertex)| *other != index && sends_back(vertex.kind))
        .filter_map(move |(_, vertex)| {
            let way = vertex.point - from.point;
            let turned = cross(first, way)
                .atan2(first.dot(&way))
                .rem_euclid(2.0 * PI);
            let inside = turned > ALONG && turned < from.angle - ALONG;
            let ray = Ray {
                point: from.point,
                direction: way.normalize(),
                origin: Origin::Vertex(index),
            };
            let met = inside.then(|| tracer.next(&ray));
            let hit = match met? {
                Event::Corner { hit, .. } | Event::Wall(hit) => hit,
                Event::Escaped => return None,
            };
            ((hit.point - vertex.point).norm() < SAME_WAY * domain.size).then(|| way.norm())
        })
}

/// Does a wave that runs into a vertex come back along the same way? From a regular corner after an even number of reflections.
fn sends_back(kind: VertexKind) -> bool {
    match kind {
        VertexKind::Corner => true,
        VertexKind::Regular { n } => n % 2 == 0,
        VertexKind::Smooth | VertexKind::Joint => false,
    }
}

/// Angle (radians) from a wall within which a ray runs along it.
const ALONG: f64 = 1e-6;

/// Cosine of incidence above which a ray counts as coming back.
const NEARLY_NORMAL: f64 = 0.99;
