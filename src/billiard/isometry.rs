//! Isometries of the plane, by which straight walls are unfolded.

use super::{Line, Mat2, Symmetry, Vec2};

/// x -> linear x + shift.
#[derive(Clone, Copy, Debug)]
pub struct Isometry {
    /// Orthogonal part.
    pub linear: Mat2,
    /// Image of the origin.
    pub shift: Vec2,
}

impl Isometry {
    /// The identity.
    #[must_use]
    pub fn identity() -> Self {
        Self {
            linear: Mat2::identity(),
            shift: Vec2::zeros(),
        }
    }

    /// Reflection across the line through a straight wall.
    #[must_use]
    pub fn reflection(line: &Line) -> Self {
        let u = (line.end - line.start).normalize();
        let linear = Mat2::new(
            u.x * u.x - u.y * u.y,
            2.0 * u.x * u.y,
            2.0 * u.x * u.y,
            u.y * u.y - u.x * u.x,
        );
        Self {
            linear,
            shift: line.start - linear * line.start,
        }
    }

    /// An element of the symmetry group as an isometry of the plane.
    #[must_use]
    pub fn of_element(symmetry: &Symmetry, element: usize) -> Self {
        let linear = symmetry.elements[element].matrix;
        Self {
            linear,
            shift: symmetry.center - linear * symmetry.center,
        }
    }

    /// `self` after `first`.
    #[must_use]
    pub fn after(&self, first: &Self) -> Self {
        Self {
            linear: self.linear * first.linear,
            shift: self.linear * first.shift + self.shift,
        }
    }

    /// Image of a point.
    #[must_use]
    pub fn apply(&self, point: Vec2) -> Vec2 {
        self.linear * point + self.shift
    }

    /// The inverse map.
    #[must_use]
    pub fn inverse(&self) -> Self {
        let linear = self.linear.transpose();
        Self {
            linear,
            shift: -(linear * self.shift),
        }
    }
}
