//! Finite symmetry group of a domain, its elements and irreducible representations.

use super::{Mat2, Vec2};

/// One element of the symmetry group: x -> center + matrix (x - center).
#[derive(Clone, Debug)]
pub struct Element {
    /// Name for people: `e`, `C2`, `C3`, `C3^2`, `x->-x`, `y->-y`, `sigma(45)` (a reflection, with the angle of its axis in
    /// degrees).
    pub name: String,
    /// Orthogonal linear part, row by row as exactly as the group allows.
    pub matrix: Mat2,
}

impl Element {
    /// +1 for a rotation, -1 for a reflection.
    #[must_use]
    pub fn det(&self) -> f64 {
        self.matrix.determinant().signum()
    }
}

/// An irreducible representation (one symmetry class of levels).
#[derive(Clone, Debug)]
pub struct Irrep {
    /// Name in the usual notation: A, B, A1, A2, B1, B2, E, E1, ..., A', A''.
    pub name: String,
    /// Other names that mean the same class, such as `odd,odd`.
    pub aliases: Vec<String>,
    /// Dimension (2 also for a pair of complex conjugate one-dimensional representations).
    pub dimension: usize,
    /// dimension x character of each group element, in the order of the elements (twice the real part for a complex pair),
    /// so that N_class = (1/|G|) sum over g of weight(g) N_g.
    pub weights: Vec<f64>,
}

/// Symmetry group of a domain.
#[derive(Clone, Debug)]
pub struct Symmetry {
    /// Name for people: `none`, `reflection`, `C2`, `rectangle`, `triangle`, `square`, `5-gon`, ...
    pub name: String,
    /// Fixed point of the group.
    pub center: Vec2,
    /// Elements, the identity first.
    pub elements: Vec<Element>,
    /// product[a][b] is the index of the element a after b.
    pub product: Vec<Vec<usize>>,
    /// Irreducible representations; the weights of all classes add to |G| on the identity and to 0 elsewhere.
    pub irreps: Vec<Irrep>,
}

impl Symmetry {
    /// The group with the identity alone.
    #[must_use]
    pub fn trivial() -> Self {
        Self {
            name: "none".into(),
            center: Vec2::zeros(),
            elements: vec![Element {
                name: "e".into(),
                matrix: Mat2::identity(),
            }],
            product: vec![vec![0]],
            irreps: vec![Irrep {
                name: "A".into(),
                aliases: Vec::new(),
                dimension: 1,
                weights: vec![1.0],
            }],
        }
    }

    /// Number of elements.
    #[must_use]
    pub fn order(&self) -> usize {
        self.elements.len()
    }

    /// Image of a point.
    #[must_use]
    pub fn apply(&self, element: usize, point: Vec2) -> Vec2 {
        self.center + self.elements[element].matrix * (point - self.center)
    }

    /// Image of a direction.
    #[must_use]
    pub fn turn(&self, element: usize, direction: Vec2) -> Vec2 {
        self.elements[element].matrix * direction
    }

    /// Index of the inverse of an element.
    #[must_use]
    pub fn inverse(&self, element: usize) -> usize {
        (0..self.order())
            .find(|&other| self.product[element][other] == 0)
            .unwrap_or(0)
    }
}
