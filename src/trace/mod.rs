//! Terms of the trace formula, their smoothing, and their sum.

mod term;

pub use term::{Amplitude, Term};
