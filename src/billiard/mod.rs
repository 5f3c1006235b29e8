//! Walls, outline, symmetry group and bounce map of a flat domain.

mod bounce;
pub(crate) use detect::{Boundary, centroid};
pub(crate) use symmetry::build;
mod crossings;
mod curve_hit;
mod curve_piece;
mod detect;
mod domain;
mod dynamics;
mod isometry;
mod lanes;
mod obstacle;
pub(crate) mod quadrature;
mod start;
mod symmetry;
mod wall;

pub use bounce::{Event, Hit, Origin, Ray, Tracer, flight, incidence, reflection};
pub use crossings::Interior;
pub use detect::{detect, is_rotationally_invariant};
pub(crate) use domain::signed_area;
pub use domain::{Domain, GeometryError, Role, Vertex, VertexKind, WallLoop};
pub use dynamics::{Dynamics, KNOWN_TO, dynamics};
pub use isometry::Isometry;
pub use lanes::{Ending, Lanes, Rays};
pub use symmetry::{Element, Irrep, Symmetry, SymmetryError, check_declared};
pub use wall::{Arc, Condition, Curve, Frame, Line, PlaneCurve, Shape, Wall};

/// A point or a vector of the plane.
pub type Vec2 = nalgebra::Vector2<f64>;
/// A linear map of the plane.
pub type Mat2 = nalgebra::Matrix2<f64>;

/// z component of the cross product.
pub(crate) fn cross(a: Vec2, b: Vec2) -> f64 {
    a.x * b.y - a.y * b.x
}

/// Rotates a vector by a quarter turn to the left.
pub(crate) fn left(a: Vec2) -> Vec2 {
    Vec2::new(-a.y, a.x)
}
