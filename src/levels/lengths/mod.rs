//! Windowed length spectrum of levels beside that of an orbit sum: which lengths the levels show, and which the terms.
//!
//! F(l) = 2/(i l W) integral of w(k) (d(k) - d_smooth(k)) exp(-i k l) dk, W the integral of the window function w ([`Taper`]).
//!
//! A term Re[c exp(i k l0)] of the staircase has the density Re[i l0 c exp(i k l0)]: its peak at l0 is c itself, so heights of
//! isolated orbits are their coefficients, in levels, and those of families their means over the window.
//!
//! Why the density divided by i l, and not the staircase: by parts the two agree at a peak, but the density needs no zero,
//! so that a list may begin anywhere and a level that is missing below the window does no harm; and the integral over the levels
//! is a finite sum, exact to rounding. Beside a peak its slopes are weighted by l0/l: short orbits leak less into long
//! lengths, long ones more into short lengths, where side lobes are small already.
//!
//! * [`LengthSpectrum`] holds the two transforms on a grid of lengths, both made in the same way.
//! * [`LengthSpectrum::compare`] finds the peaks of the levels and says by the complex difference which of them the terms
//!   explain, and what else differs, above a noise that is measured ([`Noise`]).

mod noise;
mod peaks;
mod spectrum;
mod taper;
mod transform;

pub use noise::Noise;
pub use peaks::{Agreement, LengthComparison, Misfit, Peak, Side};
pub use spectrum::{LengthInput, LengthSpectrum};
pub use taper::Taper;
