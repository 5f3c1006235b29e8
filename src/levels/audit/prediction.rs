//! What an audit knows of the system that a list comes from.

use crate::baseline::Weyl;
use crate::trace::Term;

/// Smooth count and orbit sum of the levels that a list should hold.
///
/// An audit rests on these alone: it knows neither directly computed levels nor quantised tori.
#[derive(Clone, Debug)]
pub struct Prediction {
    /// The smooth count.
    pub weyl: Weyl,
    /// All terms of orbits up to `max_length`; none where the smooth count is to stand alone.
    pub terms: Vec<Term>,
    /// Length up to which the terms are complete.
    pub max_length: f64,
    /// What the terms leave out or describe badly.
    pub left_out: Vec<LeftOut>,
}

/// Waves that the terms leave out or describe badly: of this length or longer, each of about `amplitude` k^`power` levels.
#[derive(Clone, Debug, PartialEq)]
pub struct LeftOut {
    /// What it is, for people.
    pub what: String,
    /// Number of such contributions.
    pub count: usize,
    /// The shortest length.
    pub length: f64,
    /// Amplitude of the largest one in the staircase, in levels at k = 1.
    pub amplitude: f64,
    /// Power of k.
    pub power: f64,
}
