//! One wall: a straight piece, an arc of a circle, or a curve given by formulas.
//!
//! Every wall is walked through with the interior on its left. Its parameter t runs from 0 to [`Wall::extent`]: the arc
//! length on lines and arcs, the curve's own parameter (shifted, and reversed where the curve is walked backwards) on
//! curves.

use super::{Vec2, left};
use std::fmt;
use std::sync::Arc as Shared;

/// Boundary condition on a wall.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Condition {
    /// u = 0.
    Dirichlet,
    /// Normal derivative of u = 0.
    Neumann,
}

impl Condition {
    /// Reflection sign of the wave: -1 for Dirichlet, +1 for Neumann.
    #[must_use]
    pub fn sign(self) -> f64 {
        match self {
            Self::Dirichlet => -1.0,
            Self::Neumann => 1.0,
        }
    }
}

/// Ratio of first to second derivative below which a curve is at rest (a cusp).
const AT_REST: f64 = 1e-12;

/// A plane curve that knows its derivatives exactly.
pub trait PlaneCurve: Send + Sync + fmt::Debug {
    /// Position and its first three derivatives with respect to the parameter u.
    fn derivatives(&self, u: f64) -> [Vec2; 4];
}

/// Straight wall.
#[derive(Clone, Copy, Debug)]
pub struct Line {
    /// First point.
    pub start: Vec2,
    /// Last point.
    pub end: Vec2,
}

/// Arc of a circle.
#[derive(Clone, Copy, Debug)]
pub struct Arc {
    /// Centre of the circle.
    pub center: Vec2,
    /// Radius, positive.
    pub radius: f64,
    /// Angle of the first point seen from the centre, radians.
    pub from: f64,
    /// Signed angle walked through: positive counter-clockwise (focusing wall), at most 2 pi in size.
    pub sweep: f64,
}

/// A piece of a plane curve, walked from parameter `from` to `to` (backwards if `to < from`).
#[derive(Clone, Debug)]
pub struct Curve {
    /// The curve.
    pub source: Shared<dyn PlaneCurve>,
    /// Parameter of the first point.
    pub from: f64,
    /// Parameter of the last point.
    pub to: f64,
}

/// Geometric kind of a wall.
#[derive(Clone, Debug)]
pub enum Shape {
    /// Straight.
    Line(Line),
    /// Arc of a circle.
    Arc(Arc),
    /// Any other curve.
    Curve(Curve),
}

/// One wall with its boundary condition.
#[derive(Clone, Debug)]
pub struct Wall {
    /// Geometry.
    pub shape: Shape,
    /// Boundary condition.
    pub condition: Condition,
    /// The other face of a thin wall (index into the domain's walls), if this is one.
    pub twin: Option<usize>,
}

/// What a wall looks like at one of its points.
#[derive(Clone, Copy, Debug)]
pub struct Frame {
    /// Position.
    pub point: Vec2,
    /// Unit tangent, interior on the left.
    pub tangent: Vec2,
    /// Curvature, positive where the wall focuses (disk: +1/R).
    pub curvature: f64,
    /// Arc length per unit of the wall's parameter.
    pub speed: f64,
}

impl Frame {
    /// Unit normal that points into the domain.
    #[must_use]
    pub fn normal(&self) -> Vec2 {
        left(self.tangent)
    }
}

impl Wall {
    /// Wall of a given shape and condition that is not the face of a thin wall.
    #[must_use]
    pub fn new(shape: Shape, condition: Condition) -> Self {
        Self {
            shape,
            condition,
            twin: None,
        }
    }

    /// End of the wall's parameter range [0, extent].
    #[must_use]
    pub fn extent(&self) -> f64 {
        match &self.shape {
            Shape::Line(line) => (line.end - line.start).norm(),
            Shape::Arc(arc) => arc.radius * arc.sweep.abs(),
            Shape::Curve(curve) => (curve.to - curve.from).abs(),
        }
    }

    /// Position, tangent, curvature and speed at parameter t. Lines, arcs and closed curves continue beyond [0, extent].
    #[must_use]
    pub fn frame(&self, t: f64) -> Frame {
        match &self.shape {
            Shape::Line(line) => line.frame(t),
            Shape::Arc(arc) => arc.frame(t),
            Shape::Curve(curve) => curve.frame(t),
        }
    }

    /// Position at parameter t.
    #[must_use]
    pub fn point(&self, t: f64) -> Vec2 {
        self.frame(t).point
    }

    /// Is the wall straight?
    #[must_use]
    pub fn is_straight(&self) -> bool {
        matches!(self.shape, Shape::Line(_))
    }

    /// First point of the wall.
    #[must_use]
    pub fn start(&self) -> Vec2 {
        match &self.shape {
            Shape::Line(line) => line.start,
            _ => self.point(0.0),
        }
    }

    /// Last point of the wall.
    #[must_use]
    pub fn end(&self) -> Vec2 {
        match &self.shape {
            Shape::Line(line) => line.end,
            _ => self.point(self.extent()),
        }
    }

    /// The same wall walked the other way (the interior changes sides).
    #[must_use]
    pub fn reversed(&self) -> Self {
        let shape = match &self.shape {
            Shape::Line(line) => Shape::Line(Line {
                start: line.end,
                end: line.start,
            }),
            Shape::Arc(arc) => Shape::Arc(Arc {
                from: arc.from + arc.sweep,
                sweep: -arc.sweep,
                ..*arc
            }),
            Shape::Curve(curve) => Shape::Curve(Curve {
                source: curve.source.clone(),
                from: curve.to,
                to: curve.from,
            }),
        };
        Self {
            shape,
            ..self.clone()
        }
    }
}

impl Line {
    fn frame(&self, t: f64) -> Frame {
        let span = self.end - self.start;
        let tangent = span / span.norm();
        Frame {
            point: self.start + tangent * t,
            tangent,
            curvature: 0.0,
            speed: 1.0,
        }
    }
}

impl Arc {
    fn frame(&self, t: f64) -> Frame {
        let turn = self.sweep.signum();
        let angle = self.from + turn * t / self.radius;
        let radial = Vec2::new(angle.cos(), angle.sin());
        Frame {
            point: self.center + radial * self.radius,
            tangent: left(radial) * turn,
            curvature: turn / self.radius,
            speed: 1.0,
        }
    }
}

impl Curve {
    /// Position and its first three derivatives with respect to the wall's parameter t.
    #[must_use]
    pub fn derivatives(&self, t: f64) -> [Vec2; 4] {
        let turn = (self.to - self.from).signum();
        let [point, first, second, third] = self.source.derivatives(self.from + turn * t);
        [point, first * turn, second, third * turn]
    }

    fn frame(&self, t: f64) -> Frame {
        let [point, first, second, _] = self.derivatives(t);
        let speed = first.norm();
        let scale = second.norm();
        // At a cusp the curve comes to rest and its tangent is that of the second derivative, outgoing at the start of the
        // wall and incoming at its end.
        let tangent = if speed > AT_REST * scale {
            first / speed
        } else if t < 0.5 * (self.to - self.from).abs() {
            second / scale
        } else {
            -second / scale
        };
        Frame {
            point,
            tangent,
            curvature: super::cross(first, second) / (speed * speed * speed),
            speed,
        }
    }
}
