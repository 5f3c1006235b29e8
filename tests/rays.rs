//! No ray escapes from a shape in billiards/ or tunnels through a wall: a million rays in each, and rays aimed at everything
//! that could go wrong. Hits are compared with a slow search along densely sampled walls, which shares no code with the bounce
//! map beyond the walls' own positions.

use orbitsum::billiard::{Domain, Event, Hit, Interior, Origin, Ray, Tracer, Vec2};
use orbitsum::system::parse;
use rayon::prelude::*;
use std::f64::consts::{PI, TAU};
use std::path::Path;

#[path = "common/shipped.rs"]
mod shipped;

use shipped::shape;

/// Rays per shape.
const RAYS: usize = 1_000_000;
/// Rays per chunk, and bounces after which a new random start is drawn.
const CHUNK: usize = 20_000;
const BOUNCES: usize = 40;
/// Adversarial starts per shape.
const ADVERSARIAL: usize = 40_000;
/// Every so many rays the slow checks are made.
const INSIDE: usize = 32;
const REVERSED: usize = 8;
const SEARCHED: usize = 256;
/// Distances (fractions of the domain's size) that hits may be off.
const ACCURACY: f64 = 1e-9;
/// Samples per wall in the slow search.
const SAMPLES: usize = 256;

struct Random(u64);

impl Random {
    fn uniform(&mut self) -> f64 {
        // Xorshift with a multiplier (Vigna, ACM Trans. Math. Softw. 42 (2016)).
        self.0 ^= self.0 >> 12;
        self.0 ^= self.0 << 25;
        self.0 ^= self.0 >> 27;
        (self.0.wrapping_mul(0x2545_f491_4f6c_dd1d) >> 11) as f64 / (1_u64 << 53) as f64
    }

    fn below(&mut self, count: usize) -> usize {
        ((self.uniform() * count as f64) as usize).min(count - 1)
    }

    fn direction(&mut self) -> Vec2 {
        unit(TAU * self.uniform())
    }

    /// 10^-a with a uniform in a range, of either sign.
    fn tiny(&mut self, least: f64, most: f64) -> f64 {
        let size = 10_f64.powf(-(least + (most - least) * self.uniform()));
        if self.uniform() < 0.5 { size } else { -size }
    }
}

fn unit(angle: f64) -> Vec2 {
    Vec2::new(angle.cos(), angle.sin())
}

fn cross(a: Vec2, b: Vec2) -> f64 {
    a.x * b.y - a.y * b.x
}

struct Bench<'a> {
    name: &'a str,
    domain: &'a Domain,
    tracer: Tracer,
    interior: Interior<'a>,
    low: Vec2,
    high: Vec2,
}

impl<'a> Bench<'a> {
    fn new(name: &'a str, domain: &'a Domain) -> Self {
        let points: Vec<Vec2> = domain
            .walls
            .iter()
            .flat_map(|wall| {
                (0..=SAMPLES).map(|i| wall.point(wall.extent() * i as f64 / SAMPLES as f64))
            })
            .collect();
        Self {
            name,
            domain,
            tracer: Tracer::new(domain),
            interior: Interior::new(domain),
            low: points.iter().fold(points[0], |low, point| low.inf(point)),
            high: points.iter().fold(points[0], |high, point| high.sup(point)),
        }
    }

    fn inside(&self, random: &mut Random) -> Ray {
        let span = self.high - self.low;
        loop {
            let point = self.low + Vec2::new(span.x * random.uniform(), span.y * random.uniform());
            if self.interior.contains(point) {
                return Ray {
                    point,
                    direction: random.direction(),
                    origin: Origin::Inside,
                };
            }
        }
    }

    fn on_wall(&self, wall: usize, t: f64, direction: impl Fn(Vec2, Vec2) -> Vec2) -> Ray {
        let frame = self.domain.walls[wall].frame(t);
        Ray {
            point: frame.point,
            direction: direction(frame.tangent, frame.normal()).normalize(),
            origin: Origin::Wall { wall, t },
        }
    }

    /// A ray aimed at, or started beside, something difficult.
    fn adversarial(&self, random: &mut Random) -> Ray {
        let wall = random.below(self.domain.walls.len());
        let extent = self.domain.walls[wall].extent();
        let anywhere = extent * random.uniform();
        let end = if random.uniform() < 0.5 { 0.0 } else { extent };
        // Near an end of the wall.
        let beside = (end - random.tiny(1.0, 13.0) * extent).clamp(0.0, extent);
        match random.below(5) {
            // At a vertex, passing it closely.
            0 => {
                let from = self.inside(random);
                let to = self.domain.vertices[wall].point;
                let aim = (to - from.point).normalize();
                let miss = self.domain.size * random.tiny(3.0, 13.0);
                let target = to + Vec2::new(-aim.y, aim.x) * miss;
                Ray {
                    direction: (target - from.point).normalize(),
                    ..from
                }
            }
            // Nearly along the wall, from anywhere on it.
            1 => {
                let (slope, way) = (random.tiny(1.0, 15.0).abs(), random.tiny(0.0, 0.0));
                self.on_wall(wall, anywhere, |tangent, normal| {
                    tangent * way + normal * slope
                })
            }
            // The same beside an end.
            2 => {
                let (slope, way) = (random.tiny(1.0, 15.0).abs(), random.tiny(0.0, 0.0));
                self.on_wall(wall, beside, |tangent, normal| {
                    tangent * way + normal * slope
                })
            }
            // From beside an end into any direction.
            3 => {
                let angle = PI * random.uniform();
                self.on_wall(wall, beside, |tangent, normal| {
                    tangent * angle.cos() + normal * angle.sin()
                })
            }
            // At a point of a wall beside one of its ends or anywhere, nearly parallel to it, from inside.
            _ => {
                let t = if random.uniform() < 0.5 {
                    anywhere
                } else {
                    beside
                };
                let target = self.domain.walls[wall].frame(t).point;
                let from = self.inside(random);
                let aim = (target - from.point).normalize();
                Ray {
                    direction: (aim + Vec2::new(-aim.y, aim.x) * random.tiny(6.0, 16.0))
                        .normalize(),
                    ..from
                }
            }
        }
    }

    /// Traces one ray, checks everything about it, and gives the ray that goes on.
    fn step(&self, ray: &Ray, count: usize, random: &mut Random) -> Option<Ray> {
        let event = self.tracer.next(ray);
        let hit = match event {
            Event::Wall(hit) | Event::Corner { hit, .. } => hit,
            Event::Escaped => panic!("{}: {ray:?} escapes", self.name),
        };
        self.check_hit(ray, &hit);
        if count.is_multiple_of(INSIDE) {
            self.check_inside(ray, &hit, random.uniform());
        }
        if count.is_multiple_of(SEARCHED) {
            self.check_nearest(ray, &hit);
        }
        match event {
            Event::Wall(hit) => {
                if count.is_multiple_of(REVERSED) {
                    self.check_reversed(ray, &hit);
                }
                Some(self.reflected(ray, &hit))
            }
            Event::Corner { vertex, hit } => self
                .tracer
                .pass_corner(ray.direction, vertex, hit.point)
                .map(|(ray, _)| ray),
            Event::Escaped => None,
        }
    }

    fn check_hit(&self, ray: &Ray, hit: &Hit) {
        let tolerance = ACCURACY * self.domain.size;
        let wall = &self.domain.walls[hit.wall];
        let context = || format!("{}: {ray:?} hits {hit:?}", self.name);
        assert!(hit.distance >= 0.0, "{}", context());
        assert!(
            hit.t >= -ACCURACY * wall.extent() && hit.t <= (1.0 + ACCURACY) * wall.extent(),
            "{}: off the wall's ends",
            context()
        );
        let frame = wall.frame(hit.t);
        assert!(
            (frame.point - hit.point).norm() < tolerance,
            "{}: not on its wall",
            context()
        );
        let end = ray.point + ray.direction * hit.distance;
        assert!(
            (end - hit.point).norm() < tolerance,
            "{}: not on the ray",
            context()
        );
        // Near a cusp the tangent turns round within rounding, and rounding grows with the inverse square of the speed.
        if frame.speed > 1e-3 {
            assert!(
                (frame.tangent - hit.tangent).norm() < 1e-6,
                "{}: tangent",
                context()
            );
            assert!(
                (frame.curvature - hit.curvature).abs() < 1e-6 * (1.0 + frame.curvature.abs()),
                "{}: curvature",
                context()
            );
            assert!(
                cross(hit.tangent, ray.direction) < 1e-6,
                "{}: from behind",
                context()
            );
        }
    }

    /// A point of the chord lies in the domain.
    fn check_inside(&self, ray: &Ray, hit: &Hit, part: f64) {
        let point = ray.point + ray.direction * (hit.distance * (0.01 + 0.98 * part));
        if !self.interior.contains(point) {
            let clearance = self.clearance(point);
            assert!(
                clearance < ACCURACY * self.domain.size,
                "{}: {ray:?} runs outside at {point:?}, {clearance:e} from the walls, to {hit:?}",
                self.name
            );
        }
    }

    /// Distance of a point from the walls, by sampling and refinement of the nearest samples.
    fn clearance(&self, point: Vec2) -> f64 {
        self.domain
            .walls
            .iter()
            .map(|wall| {
                let step = wall.extent() / SAMPLES as f64;
                let at = |t: f64| (wall.point(t) - point).norm();
                let samples: Vec<f64> = (0..=SAMPLES).map(|i| at(i as f64 * step)).collect();
                let lowest = |i: usize| {
                    samples[i] <= samples[i.saturating_sub(1)]
                        && samples[i] <= samples[(i + 1).min(SAMPLES)]
                };
                (0..=SAMPLES)
                    .filter(|&i| lowest(i))
                    .map(|i| {
                        let mut low = (i as f64 - 1.0).max(0.0) * step;
                        let mut high = ((i as f64 + 1.0) * step).min(wall.extent());
                        for _ in 0..100 {
                            let (a, b) = (low + 0.4 * (high - low), low + 0.6 * (high - low));
                            if at(a) < at(b) { high = b } else { low = a }
                        }
                        at(0.5 * (low + high))
                    })
                    .fold(f64::INFINITY, f64::min)
            })
            .fold(f64::INFINITY, f64::min)
    }

    /// No wall is crossed before the hit.
    fn check_nearest(&self, ray: &Ray, hit: &Hit) {
        let margin = 1e-7 * self.domain.size;
        for (index, wall) in self.domain.walls.iter().enumerate() {
            let off = |t: f64| cross(ray.direction, wall.point(t) - ray.point);
            let step = wall.extent() / SAMPLES as f64;
            let mut a = off(0.0);
            for i in 1..=SAMPLES {
                let t = i as f64 * step;
                let b = off(t);
                if (a < 0.0) != (b < 0.0) {
                    let (mut low, mut high) = (t - step, t);
                    for _ in 0..60 {
                        let middle = 0.5 * (low + high);
                        if (off(middle) < 0.0) == (a < 0.0) {
                            low = middle
                        } else {
                            high = middle
                        }
                    }
                    let frame = wall.frame(low);
                    let distance = ray.direction.dot(&(frame.point - ray.point));
                    // A ray that crosses a wall so flatly never gets away from it further than hits may be off.
                    if cross(ray.direction, frame.tangent).abs() < ACCURACY {
                        a = b;
                        continue;
                    }
                    assert!(
                        distance < margin || distance > hit.distance - margin,
                        "{}: {ray:?} crosses wall {index} at {distance}, before {hit:?}",
                        self.name
                    );
                }
                a = b;
            }
        }
    }

    /// The way back leads to the start, unless it grazes.
    fn check_reversed(&self, ray: &Ray, hit: &Hit) {
        let Origin::Wall { wall, t } = ray.origin else {
            return;
        };
        let start = self.domain.walls[wall].frame(t);
        let slope = ray
            .direction
            .dot(&start.normal())
            .min(-ray.direction.dot(&Vec2::new(-hit.tangent.y, hit.tangent.x)));
        let end = self.domain.walls[hit.wall].frame(hit.t);
        // Nor near a cusp or a tip, where both branches are one within rounding.
        let short = hit.distance < 1e-7 * self.domain.size;
        if slope < 1e-3 || short || start.speed.min(end.speed) < 1e-3 {
            return;
        }
        let back = Ray {
            point: hit.point,
            direction: -ray.direction,
            origin: Origin::Wall {
                wall: hit.wall,
                t: hit.t,
            },
        };
        let found = match self.tracer.next(&back) {
            Event::Wall(found) => found,
            // A corner that the way there has just missed.
            Event::Corner { .. } => return,
            Event::Escaped => panic!("{}: the way back of {ray:?} escapes", self.name),
        };
        // A wall that the way back all but follows may stop it earlier.
        if cross(ray.direction, found.tangent).abs() < 1e-3 {
            return;
        }
        assert!(
            (found.point - ray.point).norm() < ACCURACY * self.domain.size,
            "{}: {ray:?} hits {hit:?}, but the way back hits {found:?}",
            self.name
        );
    }

    fn reflected(&self, ray: &Ray, hit: &Hit) -> Ray {
        let next = Tracer::reflect(ray.direction, hit);
        let tangent = hit.tangent;
        assert!((next.direction.norm() - 1.0).abs() < 1e-12);
        assert!((next.direction - ray.direction).dot(&tangent).abs() < 1e-12);
        assert!(cross(tangent, next.direction + ray.direction).abs() < 1e-12);
        // Lengths of directions are not renormalised by the map itself.
        Ray {
            direction: next.direction.normalize(),
            ..next
        }
    }
}

fn check(name: &str, domain: &Domain) {
    let bench = Bench::new(name, domain);
    (0..RAYS / CHUNK).into_par_iter().for_each(|chunk| {
        let mut random = Random(0x9e37_79b9_7f4a_7c15 ^ (chunk as u64 + 1));
        let mut ray = bench.inside(&mut random);
        for count in 0..CHUNK {
            ray = match bench.step(&ray, count, &mut random) {
                Some(next) if count % BOUNCES != 0 => next,
                _ => bench.inside(&mut random),
            };
        }
    });
    (0..ADVERSARIAL / 1000).into_par_iter().for_each(|chunk| {
        let mut random = Random(0x1234_5678_9abc_def1 ^ (chunk as u64 + 1));
        for start in 0..1000 {
            let mut ray = bench.adversarial(&mut random);
            for bounce in 0..4 {
                let count = if bounce == 0 { start * 32 } else { start };
                match bench.step(&ray, count, &mut random) {
                    Some(next) => ray = next,
                    None => break,
                }
            }
        }
    });
}

fn check_shape(name: &str, settings: &[(&str, &str)]) {
    check(&format!("{name} {settings:?}"), &shape(name, settings));
}

#[test]
fn polygons() {
    for name in [
        "rectangle",
        "right-isosceles",
        "equilateral",
        "l-shape",
        "pentagon",
        "slit-square",
    ] {
        check_shape(name, &[]);
    }
    check_shape("slit-square", &[("slit", "0.999")]);
}

#[test]
fn lines_and_arcs() {
    for name in [
        "disk",
        "half-disk",
        "annulus",
        "stadium",
        "quarter-stadium",
        "lemon",
        "sinai",
        "sinai-eighth",
        "mushroom",
    ] {
        check_shape(name, &[]);
    }
    check_shape("annulus", &[("r", "0.9")]);
    check_shape("stadium", &[("a", "0.001")]);
    check_shape("lemon", &[("d", "0.01")]);
    check_shape("lemon", &[("d", "1.95")]);
    check_shape("mushroom", &[("foot_width", "0.05")]);
    check_shape("sinai", &[("r", "0.499")]);
}

#[test]
fn curves() {
    for name in ["ellipse", "limacon", "cardioid", "oval"] {
        check_shape(name, &[]);
    }
    check_shape("limacon", &[("e", "1")]);
    check_shape("limacon", &[("e", "0.9")]);
    check_shape("ellipse", &[("b", "0.05")]);
    check_shape("oval", &[("c2", "0.5"), ("c3", "0.1"), ("c4", "0.05")]);
}

/// Thin walls that are curved, and a spline.
#[test]
fn curved_slits_and_splines() {
    let drawn = [
        (
            "disk with a curved slit",
            "[outline]\nwall = [{ circle = 1, center = [0, 0] }]\n\
             [[slit]]\nstart = [0.5, 0]\nwall = [{ arc = [-0.5, 0], center = [0, 0] }]\n",
        ),
        (
            "square with a wavy slit",
            "[outline]\nstart = [-1, -1]\nwall = [{ line = [1, -1] }, { line = [1, 1] }, { line = [-1, 1] }, { line = [-1, -1] }]\n\
             [[slit]]\nstart = [-0.5, 0]\nwall = [{ curve = { x = \"t\", y = \"0.2*cos(pi*t)\", from = -0.5, to = 0.5 } }]\n",
        ),
        (
            "spline",
            "[outline]\nwall = [{ spline = [[0, 0], [1, 0.2], [1.4, 1], [0.3, 1.1], [-0.5, 0.4]] }]\n",
        ),
    ];
    for (name, text) in drawn {
        match parse(text, Path::new("drawn.toml"), &[]) {
            Ok(system) => check(name, &system.domain),
            Err(error) => panic!("{}", error.render()),
        }
    }
}
