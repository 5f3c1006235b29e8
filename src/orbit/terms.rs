//! From orbits and strips to terms of the sum, for the whole domain or one symmetry class.

use super::catalogue::Catalogue;
use super::periodic::{Closure, Fixing, Orbit};
use super::strip::{Strip, StripEdge};
use super::tori::{Integrable, TorusFamily};
use crate::billiard::{Condition, Irrep, Symmetry};
use crate::trace::{Amplitude, Term};
use num_complex::Complex64;
use std::f64::consts::PI;

/// Weights of the group elements in a class: dimension times character, or |G| times the delta at the identity for the
/// whole domain.
#[derive(Clone, Debug)]
pub struct ClassWeights<'a> {
    symmetry: &'a Symmetry,
    weights: Vec<f64>,
}

impl<'a> ClassWeights<'a> {
    /// Weights of one class, or of all levels.
    #[must_use]
    pub fn new(symmetry: &'a Symmetry, class: Option<&Irrep>) -> Self {
        let order = symmetry.order();
        let weights = class.map_or_else(
            || {
                (0..order)
                    .map(|g| if g == 0 { order as f64 } else { 0.0 })
                    .collect()
            },
            |irrep| irrep.weights.clone(),
        );
        Self { symmetry, weights }
    }

    fn is_class(&self) -> bool {
        self.symmetry.order() > 1 && self.weights[0] < self.symmetry.order() as f64
    }

    fn power(&self, element: usize, exponent: u32) -> usize {
        (0..exponent).fold(0, |product, _| self.symmetry.product[element][product])
    }

    /// Weight of g^r closed by h.
    fn closed(&self, element: usize, repetition: u32, fixing: Fixing) -> f64 {
        let power = self.power(element, repetition);
        match fixing {
            Fixing::Element(h) => self.weights[self.symmetry.product[h][power]],
            Fixing::Wall(sign) => sign * self.weights[power],
        }
    }

    fn repeated(&self, element: usize, repetition: u32) -> f64 {
        self.weights[self.power(element, repetition)]
    }
}

/// Where a term comes from.
#[derive(Clone, Copy, Debug)]
pub enum TermSource<'a> {
    /// An isolated orbit.
    Orbit(&'a Orbit),
    /// A strip of parallel orbits.
    Strip(&'a Strip),
    /// A family of an integrable shape.
    Torus(TorusFamily),
}

/// A term with what it comes from.
#[derive(Clone, Copy, Debug)]
pub struct SourcedTerm<'a> {
    /// The term.
    pub term: Term,
    /// What it belongs to.
    pub source: TermSource<'a>,
}

/// All terms of a catalogue.
#[must_use]
pub fn terms(catalogue: &Catalogue, weights: &ClassWeights) -> Vec<Term> {
    sourced_terms(catalogue, weights)
        .into_iter()
        .map(|sourced| sourced.term)
        .collect()
}

/// All terms of a catalogue, each with what it comes from.
#[must_use]
pub fn sourced_terms<'a>(catalogue: &'a Catalogue, weights: &ClassWeights) -> Vec<SourcedTerm<'a>> {
    let longest = catalogue.limits.max_length;
    let isolated = catalogue
        .orbits
        .iter()
        .flat_map(|orbit| sourced(TermSource::Orbit(orbit), orbit_terms(orbit, weights)));
    let strips = catalogue.strips.iter().flat_map(|strip| {
        sourced(
            TermSource::Strip(strip),
            strip_terms(strip, weights, longest),
        )
    });
    isolated
        .chain(strips)
        .chain(torus_terms(catalogue, weights))
        .filter(|sourced| sourced.term.coefficient.norm() > 0.0)
        .collect()
}

fn sourced(source: TermSource<'_>, terms: Vec<Term>) -> impl Iterator<Item = SourcedTerm<'_>> {
    terms
        .into_iter()
        .map(move |term| SourcedTerm { term, source })
}

/// Terms of the tori of an integrable shape. The odd and even class of a sector under reflection in its bisector are sectors
/// of half the opening with a Dirichlet or Neumann wall there; for other classes see [`torus_classes_known`].
fn torus_terms<'a>(catalogue: &Catalogue, weights: &ClassWeights) -> Vec<SourcedTerm<'a>> {
    let sum = match catalogue.integrable {
        Some(Integrable::Sector {
            radius,
            opening,
            arc,
            radial,
        }) if weights.is_class() => {
            let axis = if weights.weights[1] < 0.0 {
                Condition::Dirichlet
            } else {
                Condition::Neumann
            };
            let half = Integrable::Sector {
                radius,
                opening: 0.5 * opening,
                arc,
                radial: [radial[0], axis],
            };
            &super::tori::terms(&half, &catalogue.limits.for_tori())
        }
        _ => &catalogue.tori,
    };
    let pairs = sum.families.iter().zip(&sum.terms);
    pairs
        .map(|(family, term)| SourcedTerm {
            term: *term,
            source: TermSource::Torus(*family),
        })
        .collect()
}

/// Are the terms of single symmetry classes known for this shape? For an ellipse and a ring with classes they are not.
#[must_use]
pub fn torus_classes_known(shape: &Integrable) -> bool {
    matches!(shape, Integrable::Sector { .. })
}

/// Terms of one orbit, all repetitions.
#[must_use]
pub fn orbit_terms(orbit: &Orbit, weights: &ClassWeights) -> Vec<Term> {
    orbit
        .closures
        .iter()
        .filter_map(|closure| closure_term(orbit, closure, weights))
        .collect()
}

/// N(k) = (1/(pi r |K|)) w(h g^r) Im[A exp(i r k L)] times the wall signs, for each of the `partner` directions, with
/// A = |det(h g^r M^r - 1)|^(-1/2) exp(-i (pi/2) nu) (Gutzwiller 1971; with symmetry Robbins 1989, Lauritzen 1991).
fn closure_term(orbit: &Orbit, closure: &Closure, weights: &ClassWeights) -> Option<Term> {
    let r = closure.repetition;
    let share = f64::from(orbit.partner) * weights.closed(orbit.symmetry, r, closure.fixing)
        / (PI * f64::from(r) * orbit.fixed_by.len() as f64);
    let walls = if (orbit.dirichlet * r as usize).is_multiple_of(2) {
        1.0
    } else {
        -1.0
    };
    Some(Term {
        length: orbit.length * f64::from(r),
        // Im z = Re[-i z]
        coefficient: closure.amplitude? * share * walls * Complex64::new(0.0, -1.0),
        amplitude: Amplitude::Constant,
        repetition: r,
    })
}

/// Terms of one strip, all repetitions up to a length: N(k) = sigma^r w(g^r) (width / (2 pi r)) k J1(r k L) per direction,
/// and for an edge along a wall of sign eps: eps sigma^r w(g^r) sin(r k L)/(4 pi r).
#[must_use]
pub fn strip_terms(strip: &Strip, weights: &ClassWeights, max_length: f64) -> Vec<Term> {
    let repetitions = (max_length / strip.length * (1.0 + 1e-12)).floor() as u32;
    let walls: f64 = strip
        .edges
        .iter()
        .map(|edge| match edge {
            StripEdge::Wall(sign) => *sign,
            _ => 0.0,
        })
        .sum();
    (1..=repetitions)
        .flat_map(|r| {
            let times = f64::from(r);
            let share = f64::from(strip.partner)
                * weights.repeated(strip.symmetry, r)
                * strip.sign.powi(r as i32);
            let term = |coefficient, amplitude| Term {
                length: strip.length * times,
                coefficient,
                amplitude,
                repetition: r,
            };
            [
                term(
                    Complex64::from(share * strip.width / (2.0 * PI * times)),
                    Amplitude::Strip,
                ),
                term(
                    Complex64::new(0.0, -share * walls / (4.0 * PI * times)),
                    Amplitude::Constant,
                ),
            ]
        })
        .collect()
}
