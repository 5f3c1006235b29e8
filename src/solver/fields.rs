//! Boundary conditions and symmetry classes as the values that a wave may take on the sides of the cell.
//!
//! A class of dimension one is a single field on the fundamental cell. The two partners of a two-dimensional class are two fields
//! (u1, u2) that change into each other under the group: (u1, u2)(g x) = D(g) (u1, u2)(x), with the rotation by an angle a
//! represented by the rotation by m a. On an axis this leaves one direction of (u1, u2) free.

use super::mesh::Side;
use crate::billiard::{Condition, Domain, Irrep, Symmetry};
use std::f64::consts::PI;

/// A direction in the space of the fields; the second entry is 0 where there is one field.
pub(super) type Direction = [f64; 2];

/// What the fields may do on the sides of the cell.
#[derive(Clone, Debug)]
pub(super) struct Fields {
    /// Number of fields: 1 or 2.
    pub(super) count: usize,
    /// How many levels of the domain each level of the fields stands for.
    pub(super) copies: usize,
    /// How many levels of the fields always lie at one place.
    pub(super) forced: usize,
    /// The direction that is free on the two axes; none where the field vanishes.
    mirrors: [Option<Direction>; 2],
    /// What the fields are multiplied by under the rotation of a group without reflections, row by row.
    pub(super) rotation: [Direction; 2],
    conditions: Vec<Condition>,
    /// What a single field is multiplied by under the elements of the group.
    pub(super) characters: Vec<f64>,
    /// The m of a pair of fields.
    pub(super) winding: usize,
}

impl Fields {
    /// One field without symmetry.
    pub(super) fn plain(domain: &Domain) -> Self {
        Self {
            count: 1,
            copies: 1,
            forced: 1,
            mirrors: [None; 2],
            rotation: [[1.0, 0.0], [0.0, 1.0]],
            conditions: domain.walls.iter().map(|wall| wall.condition).collect(),
            characters: vec![1.0],
            winding: 0,
        }
    }

    /// The fields of one symmetry class.
    pub(super) fn of_class(domain: &Domain, symmetry: &Symmetry, class: &Irrep) -> Self {
        let plain = Self::plain(domain);
        let rotations = symmetry.rotations();
        let axes = symmetry.axes();
        if class.dimension == 1 {
            let free = |element: usize| (class.weights[element] > 0.0).then_some([1.0, 0.0]);
            let mirrors = match axes.as_slice() {
                [] => [None; 2],
                [(only, _)] => [free(*only); 2],
                [(first, _), (second, _), ..] => [free(*first), free(*second)],
            };
            let sign = if rotations > 1 { class.weights[1] } else { 1.0 };
            return Self {
                mirrors,
                rotation: [[sign, 0.0], [0.0, sign]],
                characters: class.weights.clone(),
                ..plain
            };
        }
        let winding = winding(rotations, class);
        let angle = 2.0 * PI * winding as f64 / rotations as f64;
        let (sin, cos) = angle.sin_cos();
        let (half_sin, half_cos) = (0.5 * angle).sin_cos();
        Self {
            count: 2,
            copies: if axes.is_empty() { 1 } else { 2 },
            forced: if axes.is_empty() { 2 } else { 1 },
            mirrors: [Some([1.0, 0.0]), Some([half_cos, half_sin])],
            rotation: [[cos, -sin], [sin, cos]],
            winding,
            ..plain
        }
    }

    /// The directions that are free at a place that lies on all the given sides.
    pub(super) fn free(&self, sides: &[Side], at_center: bool) -> Vec<Direction> {
        let mut free: Vec<Direction> = [[1.0, 0.0], [0.0, 1.0]][..self.count].to_vec();
        for side in sides {
            match *side {
                Side::Wall(wall) if self.conditions[wall] == Condition::Dirichlet => free.clear(),
                Side::Mirror(mirror) => free = common(&free, self.mirrors[mirror]),
                Side::Wall(_) | Side::Cut(_) => {}
            }
        }
        if at_center
            && sides.iter().any(|side| matches!(side, Side::Cut(_)))
            && !self.is_invariant()
        {
            free.clear();
        }
        free
    }

    /// Does the rotation leave the fields as they are?
    fn is_invariant(&self) -> bool {
        self.count == 1 && self.rotation[0][0] > 0.0
    }

    /// Image of a direction under the rotation.
    pub(super) fn rotated(&self, direction: Direction) -> Direction {
        self.rotation
            .map(|row| row[0] * direction[0] + row[1] * direction[1])
    }
}

/// Those of the free directions that also fit an axis.
fn common(free: &[Direction], axis: Option<Direction>) -> Vec<Direction> {
    let Some(axis) = axis else {
        return Vec::new();
    };
    match free {
        [] => Vec::new(),
        [one] => {
            let apart = one[0] * axis[1] - one[1] * axis[0];
            // Axes of different elements are at least a fraction of a degree apart.
            if apart.abs() < 1e-6 {
                vec![*one]
            } else {
                Vec::new()
            }
        }
        _ => vec![axis],
    }
}

/// The m of a two-dimensional class whose rotation by 1/n turn has a character proportional to cos(2 pi m/n).
fn winding(rotations: usize, class: &Irrep) -> usize {
    let ratio = class.weights[1] / class.weights[0];
    let mismatch = |m: usize| ((2.0 * PI * m as f64 / rotations as f64).cos() - ratio).abs();
    (1..=(rotations - 1) / 2)
        .min_by(|&a, &b| mismatch(a).total_cmp(&mismatch(b)))
        .unwrap_or(1)
}
