//! Terms convolved with a Gaussian, prepared once and evaluated anywhere.

use num_complex::Complex64;
use rayon::prelude::*;

use super::low_k;
use super::series::{Leading, PowerSeries};
use super::term::{Amplitude, Term};

/// Error of a smoothed term when it is evaluated at a point, relative to its unsmoothed amplitude.
const POINT_ACCURACY: f64 = 1e-14;

/// Largest size of the phase correction slope/k, as in [`Amplitude::Torus`].
pub(super) const MAX_PHASE: f64 = 0.5;

/// Staircase and density at one k.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Value {
    /// Contribution to N(k), in levels.
    pub staircase: f64,
    /// Contribution to dN/dk.
    pub density: f64,
}

/// Terms convolved with a Gaussian in k: what depends on the terms and the smoothing alone, computed once.
///
/// The convolution is exact: the error is below 1e-13 of a term's unsmoothed amplitude, for every k and every standard
/// deviation (plus the rounding of the phase k l, which is k l times 1e-16). A term a(k) exp(i k l) becomes
/// exp(-(s l)^2/2) exp(i k l) E[a(k + i s^2 l + s xi)], xi standard normal. Where the Gaussian reaches below k = 0, strips are
/// k J1(k l) there too, and square roots are continued through the upper half plane.
///
/// The phase corrections slope/k of [`Amplitude::Torus`] and [`Amplitude::CorrectedConstant`] vary slowly and are bounded by a
/// clamp; they are not smoothed but taken at k, and the density contains their derivative.
#[derive(Clone, Debug)]
pub struct SmoothedTerms {
    pub(super) terms: Vec<SmoothedTerm>,
    pub(super) smoothing: f64,
}

impl SmoothedTerms {
    /// Smooths `terms` with a Gaussian of standard deviation `smoothing` in k (0 leaves them as they are).
    pub fn new(terms: &[Term], smoothing: f64) -> Self {
        Self::with_accuracy(terms, smoothing, POINT_ACCURACY)
    }

    /// Standard deviation of the Gaussian in k.
    pub fn smoothing(&self) -> f64 {
        self.smoothing
    }

    /// Smooths `terms`, each with an error below `accuracy` of its unsmoothed amplitude.
    pub(super) fn with_accuracy(terms: &[Term], smoothing: f64, accuracy: f64) -> Self {
        let accuracy = accuracy.max(POINT_ACCURACY);
        let smoothed = |term: &Term| SmoothedTerm {
            term: *term,
            series: PowerSeries::new(term, smoothing, accuracy),
        };
        Self {
            terms: terms.par_iter().map(smoothed).collect(),
            smoothing,
        }
    }

    /// The sum of all terms at k, added in their order.
    pub fn at(&self, k: f64) -> Value {
        let mut sum = Value::default();
        for term in &self.terms {
            let value = term.at(k, self.smoothing);
            sum.staircase += value.staircase;
            sum.density += value.density;
        }
        sum
    }
}

/// One smoothed term.
#[derive(Clone, Debug)]
pub(super) struct SmoothedTerm {
    pub(super) term: Term,
    pub(super) series: PowerSeries,
}

impl SmoothedTerm {
    /// Coefficient of 1/k in the phase.
    pub(super) fn slope(&self) -> f64 {
        match self.term.amplitude {
            Amplitude::Torus { slope } | Amplitude::CorrectedConstant { slope } => slope,
            Amplitude::Constant | Amplitude::Strip => 0.0,
        }
    }

    /// Whether the amplitude does not depend on k.
    pub(super) fn is_plain_wave(&self) -> bool {
        self.series.leading == Leading::Constant && self.slope() == 0.0
    }

    /// Staircase and density at k.
    pub(super) fn at(&self, k: f64, smoothing: f64) -> Value {
        let length = self.term.length;
        let (amplitude, derivative) = if self.series.holds_at(k) {
            self.series.amplitude(k)
        } else if self.term.amplitude == Amplitude::Strip {
            let (value, slope) = low_k::strip(k, length, smoothing);
            let weight = self.term.coefficient.re;
            return Value {
                staircase: weight * value,
                density: weight * slope,
            };
        } else {
            let (mean, slope) = low_k::torus(k, length, smoothing);
            (self.term.coefficient * mean, self.term.coefficient * slope)
        };
        let (phase, phase_slope) = phase_correction(self.slope(), k);
        let wave = Complex64::cis(k * length + phase);
        // d/dk of A exp(i (k l + phi)) is (A' + i (l + phi') A) exp(i (k l + phi))
        let slope = derivative + Complex64::I * (length + phase_slope) * amplitude;
        Value {
            staircase: (amplitude * wave).re,
            density: (slope * wave).re,
        }
    }
}

/// phi(k) = clamp(slope/k, -0.5, 0.5) and its derivative.
fn phase_correction(slope: f64, k: f64) -> (f64, f64) {
    if slope == 0.0 {
        return (0.0, 0.0);
    }
    let phase = slope / k;
    if phase.abs() <= MAX_PHASE {
        (phase, -phase / k)
    } else {
        (MAX_PHASE.copysign(phase), 0.0)
    }
}
