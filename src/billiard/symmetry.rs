//! Finite symmetry group of a domain, its elements and irreducible representations.

mod groups;

use super::{Mat2, Vec2};
use thiserror::Error;

pub(crate) use groups::{build, exact_cos_sin};

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
    /// `product[a][b]` is the index of the element a after b.
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

    /// Reflections of the group: the element and the unit direction of its axis, which runs through the centre. The
    /// direction points to the right (upwards for a vertical axis).
    #[must_use]
    pub fn axes(&self) -> Vec<(usize, Vec2)> {
        self.elements
            .iter()
            .enumerate()
            .filter(|(_, element)| element.det() < 0.0)
            .map(|(index, element)| (index, axis_direction(&element.matrix)))
            .collect()
    }

    /// The class of a given name or alias; case and spaces do not matter (`odd, odd` is `odd,odd`, `a1` is `A1`).
    #[must_use]
    pub fn class(&self, name: &str) -> Option<&Irrep> {
        let wanted = plain(name);
        self.irreps.iter().find(|irrep| {
            plain(&irrep.name) == wanted || irrep.aliases.iter().any(|alias| plain(alias) == wanted)
        })
    }

    /// The subgroup with so many rotations, a divisor of those of the group, and as many reflections if the group has any.
    #[must_use]
    pub(crate) fn subgroup(&self, rotations: usize) -> Self {
        let axis = self
            .axes()
            .first()
            .map(|(_, direction)| turns_of(*direction));
        build(self.center, rotations, axis)
    }

    /// Number of rotations in the group, the identity included.
    #[must_use]
    pub fn rotations(&self) -> usize {
        self.elements
            .iter()
            .filter(|element| element.det() > 0.0)
            .count()
    }
}

/// Lower case, without white space.
fn plain(name: &str) -> String {
    name.chars()
        .filter(|letter| !letter.is_whitespace())
        .flat_map(char::to_lowercase)
        .collect()
}

/// Unit direction of the axis of a reflection ((cos 2a, sin 2a), (sin 2a, -cos 2a)).
fn axis_direction(matrix: &Mat2) -> Vec2 {
    let doubled = matrix[(1, 0)].atan2(matrix[(0, 0)]);
    let (cos, sin) = exact_cos_sin(doubled / (4.0 * std::f64::consts::PI));
    Vec2::new(cos, sin)
}

/// Why a declared symmetry group cannot be used.
#[derive(Clone, Debug, Error, PartialEq, Eq)]
pub enum SymmetryError {
    /// The word is not the name of a group.
    #[error(
        "`{declared}` is not a symmetry group; known are none, reflection, C2, C3, ..., rectangle, triangle, square, \
         5-gon, 6-gon, ..."
    )]
    Unknown {
        /// The word.
        declared: String,
    },
    /// The shape does not have this symmetry.
    #[error("the shape does not have the symmetry `{declared}`: its group is `{detected}`")]
    NotPresent {
        /// What was declared.
        declared: String,
        /// What the shape has.
        detected: String,
    },
}

/// Number of rotations, and whether there are reflections, of the group with a given name.
fn parse_group(word: &str) -> Option<(usize, bool)> {
    let word = plain(word);
    match word.as_str() {
        "none" => Some((1, false)),
        "reflection" => Some((1, true)),
        "rectangle" => Some((2, true)),
        "triangle" => Some((3, true)),
        "square" => Some((4, true)),
        _ => {
            let polygon = word.strip_suffix("-gon").and_then(|n| n.parse().ok());
            let cyclic = word.strip_prefix('c').and_then(|n| n.parse().ok());
            match (polygon, cyclic) {
                (Some(n), _) if n >= 3 => Some((n, true)),
                (_, Some(n)) if n >= 2 => Some((n, false)),
                _ => None,
            }
        }
    }
}

/// The declared group as a subgroup of the detected one.
///
/// Words are the names of groups: `none` (always allowed), `reflection`, `C2`, `C3`, ..., `rectangle`, `triangle`, `square`,
/// `5-gon`, ... Where the detected group holds several subgroups of that name, the one is taken that holds the axis
/// nearest to the x axis; a single reflection may also be named as the element is (`x->-x`, `y->-y`, `sigma(45)`).
///
/// # Errors
/// A word that names no group, or a group that the detected one does not contain.
pub fn check_declared(detected: &Symmetry, declared: &str) -> Result<Symmetry, SymmetryError> {
    let axes = detected.axes();
    let named = axes
        .iter()
        .find(|(element, _)| plain(&detected.elements[*element].name) == plain(declared));
    if let Some((_, direction)) = named {
        return Ok(build(detected.center, 1, Some(turns_of(*direction))));
    }
    let (rotations, reflections) = parse_group(declared).ok_or_else(|| SymmetryError::Unknown {
        declared: declared.trim().into(),
    })?;
    if rotations == 1 && !reflections {
        return Ok(Symmetry::trivial());
    }
    let first_axis = axes.first().map(|(_, direction)| turns_of(*direction));
    if !detected.rotations().is_multiple_of(rotations) || (reflections && first_axis.is_none()) {
        return Err(SymmetryError::NotPresent {
            declared: declared.trim().into(),
            detected: detected.name.clone(),
        });
    }
    let axis = first_axis.filter(|_| reflections);
    Ok(build(detected.center, rotations, axis))
}

/// Angle of a direction in whole turns.
fn turns_of(direction: Vec2) -> f64 {
    direction.y.atan2(direction.x) / (2.0 * std::f64::consts::PI)
}
