//! Audit of a level list: which levels are missing, which are false, where, and how sure that is.
//!
//! The record of a list is its smoothed staircase less smooth count and orbit sum. That of a complete list is small; a missing level
//! is a step of -1 in it, a false one a step of +1, both smeared by the same Gaussian. [`audit`] finds the steps, with the noise
//! that they stand in.

mod decode;
mod explain;
mod findings;
mod noise;
mod prediction;
mod record;
mod search;
mod summary;

pub use findings::{
    Corrected, Fault, FaultKind, Findings, Measured, Measures, Part, Trend, TrendKind, Verdict,
};
pub use prediction::{LeftOut, Prediction};
pub use record::{Predicted, Span};
pub use summary::{FINDING, Listed, audit};
