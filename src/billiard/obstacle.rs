//! Straight walls and arcs as rays see them: constants prepared once.

use super::{Arc, Hit, Line, Ray, Vec2, cross, left};

/// A straight wall.
#[derive(Clone, Copy, Debug)]
pub(crate) struct StraightWall {
    pub(crate) wall: usize,
    pub(crate) start: Vec2,
    pub(crate) tangent: Vec2,
    pub(crate) length: f64,
    /// How far the height over the wall is blurred by rounding, at ends where it goes over smoothly into another wall (0 at
    /// others): a flat ray may seem to meet the wall beyond such an end where it meets it just before.
    blur: [f64; 2],
}

/// Rounding of a height over a wall, in units of the domain's size.
const ROUNDING: f64 = 8.0 * f64::EPSILON;
/// A chord of a circle shorter than this fraction of its radius grazes: its ends are blurred by rounding.
const GRAZING: f64 = 1e-6;
/// The blur of the ends of such a chord, as an angle seen from the centre: the square root of the rounding, with room.
const GRAZING_BLUR: f64 = 1e-7;

/// How far behind its start a ray may meet a wall, and by how much walls reach beyond their ends.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Slack {
    pub(crate) behind: f64,
    pub(crate) overlap: f64,
    /// The domain's size.
    pub(crate) size: f64,
}

/// A distance along a ray as a fraction, so that nothing is divided before the nearest wall is known.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Fraction {
    /// Numerator.
    pub(crate) height: f64,
    /// Denominator, positive.
    pub(crate) rate: f64,
}

impl StraightWall {
    pub(crate) fn new(wall: usize, line: &Line, smooth_ends: [bool; 2], slack: Slack) -> Self {
        let span = line.end - line.start;
        let length = span.norm();
        Self {
            wall,
            start: line.start,
            tangent: span / length,
            length,
            blur: smooth_ends.map(|smooth| if smooth { ROUNDING * slack.size } else { 0.0 }),
        }
    }

    /// Distance at which the ray meets the wall from its inner side, if that is before `best`.
    ///
    /// With the height h of the start over the wall and the rate v at which it falls along the ray, the distance is h/v;
    /// the place on the wall, multiplied by v, needs no division either.
    #[inline]
    pub(crate) fn meet(&self, ray: &Ray, best: Fraction, slack: Slack) -> Option<Fraction> {
        let rate = -cross(self.tangent, ray.direction);
        let away = ray.point - self.start;
        let height = cross(self.tangent, away);
        let nearer =
            rate > 0.0 && height * best.rate < best.height * rate && height > -slack.behind * rate;
        if !nearer {
            return None;
        }
        let along = self.tangent.dot(&away) * rate + self.tangent.dot(&ray.direction) * height;
        let over = slack.overlap * rate;
        let on_it =
            along >= -over - self.blur[0] && along <= self.length * rate + over + self.blur[1];
        on_it.then_some(Fraction { height, rate })
    }

    /// The hit at a distance along the ray.
    pub(crate) fn hit(&self, ray: &Ray, distance: f64) -> Hit {
        let along = ray.point - self.start + ray.direction * distance;
        let t = self.tangent.dot(&along).clamp(0.0, self.length);
        let point = self.start + self.tangent * t;
        Hit {
            wall: self.wall,
            point,
            tangent: self.tangent,
            curvature: 0.0,
            distance: ray.direction.dot(&(point - ray.point)).max(0.0),
            t,
        }
    }
}

/// An arc of a circle.
#[derive(Clone, Copy, Debug)]
pub(crate) struct ArcWall {
    pub(crate) wall: usize,
    pub(crate) center: Vec2,
    pub(crate) radius: f64,
    /// +1 focusing, -1 dispersing.
    pub(crate) turn: f64,
    /// Unit vector from the centre to the middle of the arc.
    pub(crate) middle: Vec2,
    pub(crate) half_sweep: f64,
    /// A point of the circle lies on the arc if its component along `middle` is at least this.
    pub(crate) reach: f64,
    /// The same for rays that graze the circle: where the arc goes over smoothly into its neighbours, it ends in a blur.
    grazing_reach: f64,
}

impl ArcWall {
    pub(crate) fn new(wall: usize, arc: &Arc, smooth_ends: [bool; 2], slack: Slack) -> Self {
        let half_sweep = 0.5 * arc.sweep.abs();
        let middle = arc.from + 0.5 * arc.sweep;
        let reach = |margin: f64| {
            if half_sweep + margin >= std::f64::consts::PI {
                -2.0 * arc.radius
            } else {
                arc.radius * (half_sweep + margin).cos()
            }
        };
        let overlap = slack.overlap / arc.radius;
        // Both ends or none, so that one comparison is enough: where only one end is smooth, the other is a corner, whose
        // second wall hides the longer arc.
        let smooth = arc.sweep > 0.0 && (smooth_ends[0] || smooth_ends[1]);
        Self {
            wall,
            center: arc.center,
            radius: arc.radius,
            turn: arc.sweep.signum(),
            middle: Vec2::new(middle.cos(), middle.sin()),
            half_sweep,
            reach: reach(overlap),
            grazing_reach: reach(if smooth {
                overlap + GRAZING_BLUR
            } else {
                overlap
            }),
        }
    }

    /// Distance at which the ray meets the arc from its inner side, if it does before `best`; `own` says that it starts on
    /// the arc.
    ///
    /// A ray that touches a focusing arc from outside the circle by rounding only (along a straight wall that goes over
    /// into the arc) touches it; a dispersing arc is touched only by rays that cross its circle.
    #[inline]
    pub(crate) fn meet(&self, ray: &Ray, own: bool, best: f64, slack: Slack) -> Option<f64> {
        let from_center = ray.point - self.center;
        let along = ray.direction.dot(&from_center);
        let (distance, reach) = if own {
            // The other root is known exactly; a dispersing arc is never met again by a ray that leaves it.
            if self.turn < 0.0 {
                return None;
            }
            (-2.0 * along, self.reach)
        } else {
            let aside = cross(ray.direction, from_center).abs();
            let margin = self.radius - aside;
            if margin < 0.0 && (self.turn < 0.0 || margin < -slack.overlap) {
                return None;
            }
            let half_chord = (margin.max(0.0) * (self.radius + aside)).sqrt();
            // Only on the way into the arc: on the way out, the neighbour's own blur covers the joint.
            let into = half_chord <= GRAZING * self.radius && ray.direction.dot(&self.middle) > 0.0;
            let reach = if into { self.grazing_reach } else { self.reach };
            (-along + self.turn * half_chord, reach)
        };
        if !(distance < best && distance > -slack.behind) {
            return None;
        }
        let at = from_center + ray.direction * distance;
        (at.dot(&self.middle) >= reach).then_some(distance)
    }

    /// The hit at a distance along the ray.
    pub(crate) fn hit(&self, ray: &Ray, distance: f64) -> Hit {
        let radial = (ray.point + ray.direction * distance - self.center).normalize();
        let angle = cross(self.middle, radial).atan2(self.middle.dot(&radial));
        // Beyond its end (by the overlap, or the blur of a grazing ray) the arc is met at its end.
        let inside = angle.clamp(-self.half_sweep, self.half_sweep);
        let radial = if inside == angle {
            radial
        } else {
            let (sin, cos) = inside.sin_cos();
            self.middle * cos + left(self.middle) * sin
        };
        let point = self.center + radial * self.radius;
        Hit {
            wall: self.wall,
            point,
            tangent: left(radial) * self.turn,
            curvature: self.turn / self.radius,
            distance: ray.direction.dot(&(point - ray.point)).max(0.0),
            t: self.radius * (self.half_sweep + self.turn * inside),
        }
    }
}
