//! The periodic orbit, as everything after the search knows it.

use crate::billiard::{Mat2, Vec2};
use num_complex::Complex64;

/// What sort of orbit it is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum OrbitKind {
    /// Off the symmetry axes, not in a family.
    Isolated,
    /// Runs along a reflection axis, or along a straight wall.
    Axis,
    /// Has a bounce at a joint.
    Joint,
    /// A symmetric orbit inside a strip: the strip counts it, and only what the reflections that fix it add is its own.
    InStrip,
}

impl OrbitKind {
    /// The word of the column `kind`.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Isolated => "isolated",
            Self::Axis => "axis",
            Self::Joint => "joint",
            Self::InStrip => "family",
        }
    }
}

/// |det(M - 1)| below which an orbit belongs to a family: well above rounding, and so small that the term of an isolated
/// orbit would be a hundred levels.
const MARGINAL: f64 = 1e-5;

/// One bounce of an orbit.
#[derive(Clone, Copy, Debug)]
pub struct OrbitPoint {
    /// Wall index.
    pub wall: usize,
    /// Parameter on the wall.
    pub t: f64,
    /// Position.
    pub point: Vec2,
    /// Direction after the bounce.
    pub direction: Vec2,
}

/// What closes a repetition of the orbit beside its own group element: an element of the subgroup that fixes the orbit
/// point by point.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Fixing {
    /// Group element (0 is the identity).
    Element(usize),
    /// Reflection across the straight walls that the orbit runs along, with the sign of those walls.
    Wall(f64),
}

/// One way in which a repetition of the orbit closes.
#[derive(Clone, Copy, Debug)]
pub struct Closure {
    /// Repetition number r.
    pub repetition: u32,
    /// The h of h g^r.
    pub fixing: Fixing,
    /// |det(h g^r M^r - 1)|, for a joint with the curvature of the wall that the orbit is listed with.
    pub determinant: f64,
    /// Negative eigenvalues of the length Hessian of the path closed by h g^r.
    pub negative: usize,
    /// Amplitude with the phase of the Hessian, |det|^(-1/2) exp(-i (pi/2) negative) for an isolated orbit; `None` where it
    /// is not known (some repetitions of orbits through joints).
    pub amplitude: Option<Complex64>,
}

/// A periodic orbit of a billiard: a primitive relative orbit, closed by the group element `symmetry`.
#[derive(Clone, Debug)]
pub struct Orbit {
    /// Wall numbers (from 1) in the order of the bounces.
    pub word: String,
    /// Bounces, in order; the last chord leads to the image of the first.
    pub points: Vec<OrbitPoint>,
    /// Length of the reduced orbit.
    pub length: f64,
    /// Linearised map closed by `symmetry`: det(g) M.
    pub monodromy: Mat2,
    /// Its determinant, which must be 1, from entries in twice the working precision.
    pub determinant: f64,
    /// Group element g that takes the first point to the end of the reduced orbit.
    pub symmetry: usize,
    /// Order of g up to elements that fix the orbit: reduced orbits in the full one.
    pub copies: usize,
    /// 2 if the time-reversed orbit is another one (up to symmetry), else 1.
    pub partner: u8,
    /// Kind.
    pub kind: OrbitKind,
    /// Largest component of the gradient of the length.
    pub residual: f64,
    /// Dirichlet bounces of the reduced orbit.
    pub dirichlet: usize,
    /// The elements that fix the orbit point by point, the identity first.
    pub fixed_by: Vec<Fixing>,
    /// Closures of all repetitions up to the length limit; those with a vanishing determinant (which belong to a family)
    /// are left out, except where chain coefficients take their place.
    pub closures: Vec<Closure>,
    /// For an orbit that is the edge of a strip and hits one joint per period: the parameter c = D kappa / cos(theta) of
    /// its chain coefficients.
    pub chain: Option<f64>,
}

impl Orbit {
    /// Bounces of the reduced orbit.
    #[must_use]
    pub fn bounces(&self) -> usize {
        self.points.len()
    }

    /// Trace of the closed linearised map.
    #[must_use]
    pub fn trace(&self) -> f64 {
        self.monodromy.trace()
    }

    /// Length of the full orbit.
    #[must_use]
    pub fn full_length(&self) -> f64 {
        self.length * self.copies as f64
    }

    /// Bounces of the full orbit.
    #[must_use]
    pub fn full_bounces(&self) -> usize {
        self.bounces() * self.copies
    }

    /// Does the orbit belong to a family of orbits of the same length? Then det(M - 1) = 0 for the primitive orbit. A chain
    /// of joint hits is never marginal, since one side of the joint is curved.
    pub(crate) fn is_marginal(&self) -> bool {
        (2.0 - self.monodromy.trace()).abs() < MARGINAL
    }

    /// Maslov index of the primitive orbit: negative eigenvalues plus two per Dirichlet bounce.
    #[must_use]
    pub fn index(&self) -> Option<usize> {
        self.closures
            .iter()
            .find(|closure| closure.repetition == 1)
            .map(|closure| closure.negative + 2 * self.dirichlet)
    }
}
