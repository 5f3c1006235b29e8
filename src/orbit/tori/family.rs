//! Records of families, and the sum that holds them with their terms.

use crate::trace::{Amplitude, Term};
use num_complex::Complex64;
use std::f64::consts::PI;
use std::fmt;

/// What kind of orbits a record stands for.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum FamilyKind {
    /// Chords of the outer circle.
    Chords,
    /// Chords of the outer circle that touch the inner one.
    TangentChords,
    /// Outer circle to inner circle and back.
    BetweenCircles,
    /// Edge of the families of a sector: the orbit along the radial walls.
    RadialEdge,
    /// Orbit from the arc to the centre of a sector, diffracted there.
    CenterDiffraction,
    /// Ellipse: around both foci, tangent to a confocal ellipse.
    Rotation,
    /// Ellipse: between the foci, tangent to a confocal hyperbola.
    Libration,
    /// Ellipse: the isolated orbit along the short axis (stable).
    ShortAxis,
    /// Ellipse: the isolated orbit along the long axis (unstable).
    LongAxis,
}

impl FamilyKind {
    /// Is it an isolated orbit (or one that stands for a single path), not a torus?
    #[must_use]
    pub fn is_isolated(self) -> bool {
        matches!(
            self,
            Self::RadialEdge | Self::CenterDiffraction | Self::ShortAxis | Self::LongAxis
        )
    }
}

impl fmt::Display for FamilyKind {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Chords => "torus of chords",
            Self::TangentChords => "torus of chords that touch the inner circle (half weight)",
            Self::BetweenCircles => "torus between the circles",
            Self::RadialEdge => "edge along the radial walls",
            Self::CenterDiffraction => "diffraction at the center",
            Self::Rotation => "torus around the foci",
            Self::Libration => "torus between the foci",
            Self::ShortAxis => "isolated orbit along the short axis",
            Self::LongAxis => "isolated orbit along the long axis",
        })
    }
}

/// One rational torus (or isolated orbit) with one repetition number.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TorusFamily {
    /// Kind.
    pub kind: FamilyKind,
    /// Winding number w: turns around the centre; w = theta v/opening in a sector, where theta is half the angle that a
    /// chord of the unfolded orbit subtends; oscillations across the short axis for librations of an ellipse.
    pub winding: u32,
    /// Bounces on the curved walls, repetitions included.
    pub bounces: u32,
    /// Those on the outer wall.
    pub outer_bounces: u32,
    /// Length, repetitions included.
    pub length: f64,
    /// 2 if the time-reversed orbits are another family, else 1. Both directions are inside the one term.
    pub directions: u32,
    /// Repetition number; divide winding, bounces and length by it to get the primitive orbit.
    pub repetition: u32,
}

/// Why something is not in the sum, or not well described by it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LeftOutKind {
    /// The tori with w turns and more bounces than allowed: the rest of an alternating series.
    ManyBounces {
        /// Winding number.
        winding: u32,
    },
    /// A torus next to grazing the inner circle, or touching it: its penumbra and the creeping waves are not described.
    Grazing,
    /// Sector: a torus of chords passes so near to the centre that its term and that of the centre's diffraction overlap.
    CenterNearTorus,
    /// An axis orbit so near to a bifurcation that its term and that of the neighbouring torus are only rough.
    NearBifurcation,
}

/// An estimate of what the sum leaves out.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LeftOut {
    /// Reason.
    pub kind: LeftOutKind,
    /// Length of the orbits concerned.
    pub length: f64,
    /// Amplitude: this times k to `power`, in levels.
    pub amplitude: f64,
    /// Power of k.
    pub power: f64,
}

impl LeftOut {
    /// Estimated amplitude in the staircase at wave number k under Gaussian smoothing of standard deviation s in k.
    #[must_use]
    pub fn size_at(&self, k: f64, s: f64) -> f64 {
        self.amplitude * k.powf(self.power) * (-0.5 * (s * self.length).powi(2)).exp()
    }
}

/// Families with their terms; `terms[i]` belongs to `families[i]`.
#[derive(Clone, Debug, Default)]
pub struct TorusSum {
    /// Records for listings.
    pub families: Vec<TorusFamily>,
    /// One term per record.
    pub terms: Vec<Term>,
    /// What is left out or poorly described.
    pub left_out: Vec<LeftOut>,
}

/// An oscillation amplitude x k^power x sin(k l - quarters x pi/2 + eighths x pi/4) with its k dependence.
pub(super) struct Wave {
    /// Amplitude in front of the sine, without the power of k.
    pub(super) amplitude: f64,
    /// Quarter turns that the phase loses.
    pub(super) quarters: u32,
    /// Eighths of a turn that the phase gains: +1, 0 or -1.
    pub(super) eighths: i32,
    /// k dependence.
    pub(super) law: Amplitude,
}

impl TorusSum {
    /// Adds a family and its term.
    pub(super) fn push(&mut self, family: TorusFamily, wave: &Wave) {
        // sin(x + phase) = Re[-i exp(i phase) exp(i x)]; whole turns are dropped before the phase is formed.
        let phase = 0.25 * PI * f64::from(wave.eighths) - 0.5 * PI * f64::from(wave.quarters % 4);
        self.terms.push(Term {
            length: family.length,
            coefficient: Complex64::from_polar(wave.amplitude, phase - 0.5 * PI),
            amplitude: wave.law,
            repetition: family.repetition,
        });
        self.families.push(family);
    }

    /// Sorts by length, ties by bounces and winding number, so that the order does not depend on how they were found.
    pub(super) fn sort(&mut self) {
        let mut order: Vec<usize> = (0..self.families.len()).collect();
        order.sort_by(|&a, &b| {
            let (a, b) = (&self.families[a], &self.families[b]);
            a.length
                .total_cmp(&b.length)
                .then(a.bounces.cmp(&b.bounces))
                .then(a.winding.cmp(&b.winding))
        });
        self.families = order.iter().map(|&i| self.families[i]).collect();
        self.terms = order.iter().map(|&i| self.terms[i]).collect();
        self.left_out.sort_by(|a, b| a.length.total_cmp(&b.length));
    }

    /// Estimated size, in levels, of what the limit of bounces leaves out at wave number k under Gaussian smoothing of
    /// standard deviation s in k: the sum of the sizes of all such tails.
    #[must_use]
    pub fn tail_at(&self, k: f64, s: f64) -> f64 {
        self.left_out
            .iter()
            .filter(|part| matches!(part.kind, LeftOutKind::ManyBounces { .. }))
            .map(|part| part.size_at(k, s))
            .sum()
    }
}

/// Greatest common divisor; gcd(v, 0) = v.
pub(super) fn gcd(a: u32, b: u32) -> u32 {
    if b == 0 { a } else { gcd(b, a % b) }
}
