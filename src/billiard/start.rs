//! Random rays that are spread over a billiard as its motion spreads them.

use super::{Domain, Origin, Ray, Wall, left, quadrature};

/// A small deterministic generator of uniform numbers (SplitMix64; Steele, Lea & Flood, OOPSLA 2014).
#[derive(Clone, Debug)]
pub(crate) struct Random(u64);

impl Random {
    pub(crate) fn new(seed: u64) -> Self {
        Self(seed)
    }

    /// Uniform in (0, 1), never an end.
    pub(crate) fn uniform(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^= z >> 31;
        ((z >> 12) as f64 + 0.5) / (1_u64 << 52) as f64
    }
}

/// Intervals into which a curve is cut for the inversion of its arc length.
const INTERVALS: usize = 256;
/// Newton steps for the arc length inside such an interval, where it is nearly linear: the error is squared by each.
const STEPS: usize = 4;

/// Starts on the walls of a domain, uniform in arc length and in the sine of the angle from the normal: the invariant
/// measure of the bounce map.
#[derive(Debug)]
pub(crate) struct Starts<'a> {
    domain: &'a Domain,
    /// Arc length up to the start of each wall.
    before: Vec<f64>,
    /// Arc length up to the knots of each curve (empty for lines and arcs).
    knots: Vec<Vec<f64>>,
}

impl<'a> Starts<'a> {
    pub(crate) fn new(domain: &'a Domain) -> Self {
        let mut sum = 0.0;
        let before = domain
            .lengths
            .iter()
            .map(|length| {
                sum += length;
                sum - length
            })
            .collect();
        Self {
            domain,
            before,
            knots: domain.walls.iter().map(knots).collect(),
        }
    }

    /// The next ray.
    pub(crate) fn draw(&self, random: &mut Random) -> Ray {
        let s = random.uniform() * self.domain.perimeter;
        let wall = self.before.partition_point(|&before| before <= s) - 1;
        let t = self.parameter(wall, s - self.before[wall]);
        let frame = self.domain.walls[wall].frame(t);
        let sine = 2.0 * random.uniform() - 1.0;
        let cosine = (1.0 - sine * sine).sqrt();
        Ray {
            point: frame.point,
            direction: left(frame.tangent) * cosine + frame.tangent * sine,
            origin: Origin::Wall { wall, t },
        }
    }

    /// Parameter of a wall at an arc length from its start.
    fn parameter(&self, wall: usize, s: f64) -> f64 {
        let knots = &self.knots[wall];
        let wall = &self.domain.walls[wall];
        if knots.is_empty() {
            return s.min(wall.extent());
        }
        let step = wall.extent() / INTERVALS as f64;
        let interval = knots.partition_point(|&knot| knot <= s).clamp(1, INTERVALS) - 1;
        let from = interval as f64 * step;
        let width = knots[interval + 1] - knots[interval];
        let mut t = from + step * ((s - knots[interval]) / width).clamp(0.0, 1.0);
        for _ in 0..STEPS {
            let excess = knots[interval] + length(wall, from, t) - s;
            t = (t - excess / wall.frame(t).speed.max(f64::MIN_POSITIVE)).clamp(from, from + step);
        }
        t
    }
}

fn length(wall: &Wall, from: f64, to: f64) -> f64 {
    quadrature::integrate(from, to, 1, |t| wall.frame(t).speed)
}

fn knots(wall: &Wall) -> Vec<f64> {
    if !matches!(wall.shape, super::Shape::Curve(_)) {
        return Vec::new();
    }
    let step = wall.extent() / INTERVALS as f64;
    let mut sum = 0.0;
    let mut knots = vec![0.0];
    for i in 0..INTERVALS {
        sum += length(wall, i as f64 * step, (i + 1) as f64 * step);
        knots.push(sum);
    }
    knots
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::billiard::{Curve, PlaneCurve, Role, Shape, Vec2, Wall};
    use std::f64::consts::PI;

    #[test]
    fn uniform_numbers_have_the_moments_of_the_uniform_distribution() {
        let mut random = Random::new(1);
        let count = 100_000;
        let (mut first, mut second) = (0.0, 0.0);
        for _ in 0..count {
            let x = random.uniform();
            first += x / f64::from(count);
            second += x * x / f64::from(count);
        }
        // Standard deviations of the means: 0.289/316 and 0.298/316.
        assert!((first - 0.5).abs() < 4e-3 && (second - 1.0 / 3.0).abs() < 4e-3);
    }

    /// A unit circle with a parameter that runs unevenly: angle u + 0.9 sin u.
    #[derive(Debug)]
    struct Uneven;

    impl PlaneCurve for Uneven {
        fn derivatives(&self, u: f64) -> [Vec2; 4] {
            let (angle, rate) = (u + 0.9 * u.sin(), 1.0 + 0.9 * u.cos());
            let (c, s) = (angle.cos(), angle.sin());
            let second = -0.9 * u.sin();
            // The third derivative is not used here.
            [
                Vec2::new(c, s),
                Vec2::new(-s, c) * rate,
                Vec2::new(-c, -s) * (rate * rate) + Vec2::new(-s, c) * second,
                Vec2::zeros(),
            ]
        }
    }

    #[test]
    fn arc_length_is_inverted_on_curves() {
        let curve = Curve {
            source: std::sync::Arc::new(Uneven),
            from: 0.0,
            to: 2.0 * PI,
        };
        let wall = Wall::new(Shape::Curve(curve), crate::billiard::Condition::Dirichlet);
        let domain = Domain::new(vec![(Role::Outer, vec![wall])]).expect("a circle");
        let starts = Starts::new(&domain);
        for i in 1..100 {
            let s = 2.0 * PI * f64::from(i) / 100.0;
            let u = starts.parameter(0, s);
            assert!((u + 0.9 * u.sin() - s).abs() < 1e-12, "{s}");
        }
    }
}
