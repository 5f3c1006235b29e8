//! Straight walls and arcs as rays see them: constants prepared once.

use super::{Arc, Hit, Line, Ray, Vec2, cross, left};

/// A straight wall.
#[derive(Clone, Copy, Debug)]
pub(crate) struct StraightWall {
    pub(crate) wall: usize,
    pub(crate) start: Vec2,
    pub(crate) tangent: Vec2,
    pub(crate) length: f64,
}

/// How far behind its start a ray may meet a wall, and by how much walls reach beyond their ends.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Slack {
    pub(crate) behind: f64,
    pub(crate) overlap: f64,
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
    pub(crate) fn new(wall: usize, line: &Line) -> Self {
        let span = line.end - line.start;
        let length = span.norm();
        Self {
            wall,
            start: line.start,
            tangent: span / length,
            length,
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
        let on_it = along >= -slack.overlap * rate && along <= (self.length + slack.overlap) * rate;
        on_it.then_some(Fraction { height, rate })
    }

    /// The hit at a distance along the ray.
    pub(crate) fn hit(&self, ray: &Ray, distance: f64) -> Hit {
        let along = ray.point - self.start + ray.direction * distance;
        let t = self.tangent.dot(&along);
        Hit {
            wall: self.wall,
            point: self.start + self.tangent * t,
            tangent: self.tangent,
            curvature: 0.0,
            distance: distance.max(0.0),
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
}

impl ArcWall {
    pub(crate) fn new(wall: usize, arc: &Arc, overlap: f64) -> Self {
        let half_sweep = 0.5 * arc.sweep.abs();
        let middle = arc.from + 0.5 * arc.sweep;
        let slack = overlap / arc.radius;
        let reach = if half_sweep + slack >= std::f64::consts::PI {
            -2.0 * arc.radius
        } else {
            arc.radius * (half_sweep + slack).cos()
        };
        Self {
            wall,
            center: arc.center,
            radius: arc.radius,
            turn: arc.sweep.signum(),
            middle: Vec2::new(middle.cos(), middle.sin()),
            half_sweep,
            reach,
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
        let distance = if own {
            // The other root is known exactly; a dispersing arc is never met again by a ray that leaves it.
            if self.turn < 0.0 {
                return None;
            }
            -2.0 * along
        } else {
            let aside = cross(ray.direction, from_center).abs();
            let margin = self.radius - aside;
            if margin < 0.0 && (self.turn < 0.0 || margin < -slack.overlap) {
                return None;
            }
            let half_chord = (margin.max(0.0) * (self.radius + aside)).sqrt();
            -along + self.turn * half_chord
        };
        if !(distance < best && distance > -slack.behind) {
            return None;
        }
        let at = from_center + ray.direction * distance;
        (at.dot(&self.middle) >= self.reach).then_some(distance)
    }

    /// The hit at a distance along the ray.
    pub(crate) fn hit(&self, ray: &Ray, distance: f64) -> Hit {
        let radial = (ray.point + ray.direction * distance - self.center).normalize();
        let angle = cross(self.middle, radial).atan2(self.middle.dot(&radial));
        Hit {
            wall: self.wall,
            point: self.center + radial * self.radius,
            tangent: left(radial) * self.turn,
            curvature: self.turn / self.radius,
            distance: distance.max(0.0),
            t: self.radius * (self.half_sweep + self.turn * angle),
        }
    }
}
