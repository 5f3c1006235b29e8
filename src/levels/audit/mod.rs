//! Audit of a level list: which levels are missing, which are false, where, and how sure that is.
//!
//! The record of a list is its smoothed staircase less smooth count and orbit sum. That of a complete list is small; a missing level
//! is a step of -1 in it, a false one a step of +1, both smeared by the same Gaussian. [`audit`] finds the steps, with the noise
//! that they stand in.

mod decode;
mod explain;
mod findings;
mod fit;
mod least_squares;
mod noise;
mod prediction;
mod record;
mod run;
mod scene;
mod search;
mod told;
mod trend;
mod turing;

pub use findings::{
    Corrected, Fault, FaultKind, Findings, Measured, Measures, Part, Trend, TrendKind, Verdict,
};
pub use fit::{Family, Fit, Fitted, fit};
pub use prediction::{LeftOut, Prediction};
pub use record::{Predicted, Span};
pub use run::{FEWEST, Listed, audit};
pub use told::FINDING;
