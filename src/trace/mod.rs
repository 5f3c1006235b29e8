//! Terms of the trace formula, their smoothing, and their sum.
//!
//! * [`Term`] is one oscillating contribution to the staircase; its amplitude depends on k in one of a few ways.
//! * [`SmoothedTerms`] holds terms convolved with a Gaussian in k, ready to be evaluated at any k.
//! * [`sum_on_grid`] sums them over a uniform grid, by a nonuniform fast Fourier transform where that is cheaper;
//!   [`sum_at`] sums them directly at arbitrary points.

mod direct;
mod fast;
mod fluctuation;
mod low_k;
mod nufft;
mod plan;
mod series;
mod smoothed;
mod sum;
mod term;

pub use fluctuation::{
    ClassDensity, Statistics, Wave, expected_fluctuation, mean_fluctuation, mean_square, waves,
};
pub use smoothed::{SmoothedTerms, Value};
pub use sum::{DEFAULT_ACCURACY, OrbitSum, UniformGrid, sum_at, sum_on_grid};
pub use term::{Amplitude, Term};
