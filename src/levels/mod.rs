//! Level lists and their smoothed staircase.
//!
//! * [`read`] reads a [`LevelList`] from csv or white-space text.
//! * [`staircase`] and [`density`] convolve levels with a Gaussian, [`mean_staircase`] averages their staircase.
//! * [`residual_rms`] measures what is left between levels and a prediction.
//! * [`lengths`] compares levels and terms by their length spectra.
//! * [`statistics`] measures how the levels of an unfolded list are spread.
//! * [`audit`] finds missing and false levels.

pub mod audit;
pub mod lengths;
mod list;
mod parse;
mod residual;
mod smooth;
pub mod statistics;

pub use list::{LevelList, ListColumn, ListError, ListNote};
pub use parse::read;
pub use residual::{Residual, ResidualWindow, residual_rms};
pub use smooth::{density, mean_staircase, staircase};
