//! One oscillating contribution to the staircase.

use num_complex::Complex64;
use std::f64::consts::PI;

/// One oscillating contribution to the staircase N(k), before any smoothing.
///
/// What stands beside it (orbit or family, repetition) is kept so that a sum can be printed apart; the sum itself
/// needs only `length`, `coefficient` and `amplitude`. Class weights and the group average are already inside
/// `coefficient`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Term {
    /// Full length r L of the repeated orbit, in the user's length unit; never negative.
    pub length: f64,
    /// Complex weight c of the formula in [`Amplitude`].
    pub coefficient: Complex64,
    /// How the amplitude depends on k.
    pub amplitude: Amplitude,
    /// Repetition number r (1 for the primitive orbit).
    pub repetition: u32,
}

impl Term {
    /// A with term = Re[A exp(i k l)] near k, to leading order in 1/k and without the slope of the phase.
    #[must_use]
    pub fn amplitude_at(&self, k: f64) -> Complex64 {
        match self.amplitude {
            Amplitude::Constant | Amplitude::CorrectedConstant { .. } => self.coefficient,
            Amplitude::Torus { .. } => self.coefficient * k.sqrt(),
            // k J1(k l) -> sqrt(2 k/(pi l)) cos(k l - 3 pi/4)
            Amplitude::Strip => {
                let size = (2.0 * k / (PI * self.length)).sqrt();
                Complex64::from_polar(size, -0.75 * PI) * self.coefficient.re
            }
        }
    }
}

/// How the amplitude of a [`Term`] depends on k; l is the term's length and c its coefficient.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Amplitude {
    /// Isolated orbits, strip edges, joints: N(k) = Re[c exp(i k l)].
    Constant,
    /// Tori: N(k) = Re[c sqrt(k) exp(i (k l + phi(k)))] with phi(k) = clamp(slope / k, -0.5, 0.5); `slope` is the phase
    /// correction of next order (0 where it is not known). The clamp is there because the correction diverges for
    /// grazing and whispering-gallery tori.
    Torus {
        /// Coefficient of 1/k in the phase.
        slope: f64,
    },
    /// Like [`Amplitude::Constant`] with the phase correction of [`Amplitude::Torus`].
    CorrectedConstant {
        /// Coefficient of 1/k in the phase.
        slope: f64,
    },
    /// Flat strips: N(k) = Re(c) k J1(k l).
    Strip,
}
