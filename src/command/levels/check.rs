//! The second check of completeness: the mean of the staircase against the smooth count.

use crate::command::direct::Direct;
use crate::command::fluctuation::Fluctuation;
use crate::command::note::Note;
use crate::command::options::Options;
use crate::command::subject::Subject;
use crate::command::text::significant;
use orbitsum::levels::mean_staircase;

/// A missing or false level in the middle of a window moves the mean by this much; below the window by twice as much.
const HALF_A_LEVEL: f64 = 0.5;
/// Expected deviations that are no reason for a warning: beyond two there are a few per cent.
const DEVIATIONS: f64 = 2.0;
/// Digits of a mean.
const DIGITS: usize = 2;

/// Mean over the window of the staircase (with the levels below the window) less the smooth count.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct SecondCheck {
    /// k from which the mean is taken: below the first level the smooth count means nothing.
    pub(super) from: f64,
    /// In levels.
    pub(super) mean: f64,
    /// Its expected root mean square, where there is an estimate.
    pub(super) expected: Option<f64>,
}

impl SecondCheck {
    /// Takes the mean; nothing where the window lies below the first level.
    pub(super) fn new(subject: &Subject, computed: &Direct, options: &Options) -> Option<Self> {
        let levels = &computed.levels;
        let weyl = subject.weyl();
        // Where the first level is expected, and not below where its leading term alone counts one.
        let lowest = weyl.k_at_count(1.0).max(weyl.coefficient(2).powf(-0.5));
        let (from, to) = (levels.from.max(lowest), levels.to);
        if from >= to {
            return None;
        }
        let below = levels.first.saturating_sub(1) as f64;
        Some(Self {
            from,
            mean: below + mean_staircase(&computed.repeated(), from, to)
                - weyl.mean_count(from, to),
            expected: Fluctuation::new(subject, options).of_mean(from, to),
        })
    }

    /// For people.
    pub(super) fn words(&self, subject: &Subject) -> String {
        let from = subject.system.units.value(self.from);
        let mean = significant(self.mean, DIGITS);
        let place = subject.level(from, 4);
        match self.expected {
            Some(expected) => format!(
                "{mean} level in the mean from {place} on (rms expected: {})",
                significant(expected, DIGITS)
            ),
            None => format!(
                "{mean} level in the mean from {place} on (what to expect is not estimated for this class)"
            ),
        }
    }

    /// A warning if it is off.
    pub(super) fn note(&self) -> Option<Note> {
        let expected = self.expected?;
        (self.mean.abs() > HALF_A_LEVEL + DEVIATIONS * expected).then_some(Note::OffSmoothCount {
            mean: self.mean,
            expected,
        })
    }
}
