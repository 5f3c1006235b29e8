//! Fraction of missing levels, from the statistics of those that are there.
//!
//! If each level is missing by itself with probability 1 - f, the rest, at density 1, have
//!
//! ```text
//! Sigma^2(L) = (1 - f) L + f^2 Sigma0^2(L/f),   Delta3(L) = (1 - f) L/15 + f^2 Delta0(L/f),
//! p(s) = sum over n of (1 - f)^n p0(n; s/f),    p0(n; s): density of spacings with n levels in between
//! ```
//!
//! where 0 marks the complete sequence (Bohigas & Pato, Phys. Lett. B 595 (2004) 171; Phys. Rev. E 74 (2006) 036212; the relations
//! for thinned point processes hold whatever the complete sequence is). The number of levels is not used: what is found this way is
//! independent of the smooth count. Where orbits are known, their contributions replace those of random levels in the complete sequence;
//! the expected density then says which times their lengths are.

use super::fit::{Fit, maximum, most_likely};
use super::orbits::Correlations;
use super::reference::Reference;
use super::spacings::{distance, log_likelihood, sorted_spacings};
use super::windows::{Block, centered_edges, number_variance, rigidity};
use serde::Serialize;
use std::fmt;

/// Fewest levels from which a fraction is estimated: with fewer the error exceeds a tenth.
const FEWEST: usize = 60;
/// Largest missing fraction that is looked for: beyond it what is left can hardly be told from uncorrelated levels.
const MOST_MISSING: f64 = 0.7;
/// A fraction this near to the largest one is at the end of the range.
const END: f64 = 1e-3;
/// Least-squares fits may go below zero, so that their errors are those of an unbiased estimate.
const LEAST_MISSING: f64 = -0.3;
/// Parts of the list that are left out in turn for the errors of least-squares fits.
const PARTS: usize = 10;
/// Windows of these fits are at most this fraction of a list: each part then holds two of them.
const LONGEST_SHARE: f64 = 0.05;
/// Longest window, mean spacings: longer ones add nothing but the uncertainty of the smooth count.
const LONGEST: f64 = 20.0;
/// Shortest window: shorter ones say what the spacings say.
const SHORTEST: f64 = 1.0;
/// Windows stay below this fraction of the length at which the statistics of random levels saturate.
const BELOW_SATURATION: f64 = 0.5;
/// Number of windows' lengths in a fit.
const LENGTHS: usize = 12;
/// Intervals of the grid on which models are tabulated: linear interpolation is then good to 2e-4.
const ROWS: usize = 40;
/// Kolmogorov's distance times the square root of the number beyond which a fitted curve is refused (1 in 100 for independent values,
/// Kolmogorov's distribution).
const REFUSED: f64 = 1.63;

/// What the statistics say about missing levels.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum MissingFraction {
    /// The fraction of levels that is missing, estimated in several ways.
    Estimated(MissingEstimates),
    /// Nothing, and why.
    Unknown(UnknownFraction),
}

/// Missing levels as a fraction of all, from different statistics of the same list: where the assumptions hold they agree within their
/// errors.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct MissingEstimates {
    /// From nearest-neighbour spacings, by maximum likelihood.
    pub spacings: Fit,
    /// From the number variance, by least squares; may come out below zero. The error is that of the jackknife.
    pub number_variance: Fit,
    /// From the rigidity, likewise.
    pub rigidity: Fit,
    /// Largest difference between two of them, in units of its error. Beyond 3 the list is not that of random levels of which some are
    /// missing at random, and none of the values is to be trusted.
    pub disagreement: f64,
    /// Longest window that was used, mean spacings.
    pub longest_window: f64,
    /// Kolmogorov's distance of the spacings from the curve that fits them best.
    pub distance: f64,
}

/// Why the fraction of missing levels cannot be told from the statistics.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum UnknownFraction {
    /// Levels that are uncorrelated stay so when some are missing.
    Uncorrelated,
    /// Some levels stand several times by symmetry, and it is not known how copies go missing.
    Multiple,
    /// The list is too short.
    TooFew {
        /// Its levels.
        levels: usize,
        /// Levels needed.
        needed: usize,
    },
    /// Some spacings are exactly zero, which chaotic levels of one class never are: the list is rounded, or holds more than it should.
    Repeated {
        /// Number of zero spacings.
        repeated: usize,
    },
    /// So many levels would have to be missing that what is left cannot be told from uncorrelated levels.
    TooMany {
        /// Largest fraction that is looked for.
        limit: f64,
    },
    /// The spacings are not those of such a list, whatever fraction is missing.
    NotOrthogonal {
        /// Kolmogorov's distance of the spacings from the curve that fits best.
        distance: f64,
        /// Largest distance that is accepted.
        limit: f64,
    },
}

impl fmt::Display for UnknownFraction {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Uncorrelated => write!(
                formatter,
                "levels of regular motion are uncorrelated, and stay so when some are missing"
            ),
            Self::Multiple => write!(
                formatter,
                "levels that symmetry repeats do not go missing one by one: take one symmetry class"
            ),
            Self::TooFew { levels, needed } => {
                write!(
                    formatter,
                    "{levels} levels are too few: {needed} are needed"
                )
            }
            Self::Repeated { repeated } => write!(
                formatter,
                "{repeated} spacings are zero, which they never are in one class of a chaotic shape"
            ),
            Self::TooMany { limit } => write!(
                formatter,
                "the spacings are those of uncorrelated levels, or of a list with more than {limit} of its levels missing"
            ),
            Self::NotOrthogonal { distance, limit } => write!(
                formatter,
                "the spacings are not those of a chaotic shape, whatever is missing: the distance from the best \
                 curve is {distance:.3}, and {limit:.3} could be accepted"
            ),
        }
    }
}

/// The fraction that is missing from ascending positions of density 1, which would be as `expected` if complete. Where orbits are known,
/// `complete` says what number variance and rigidity of the complete list are, which short orbits make differ from those of random
/// levels long before they saturate.
pub(super) fn estimate(
    positions: &[f64],
    expected: &Reference,
    complete: Option<&Correlations<'_>>,
) -> MissingFraction {
    let sorted = sorted_spacings(positions);
    if let Some(reason) = reason_against(positions, &sorted, expected) {
        return MissingFraction::Unknown(reason);
    }
    let spacings = most_likely(0.0, MOST_MISSING, |missing| {
        log_likelihood(&sorted, &expected.thinned(1.0 - missing).spacings())
    });
    if spacings.value > MOST_MISSING - END {
        return MissingFraction::Unknown(UnknownFraction::TooMany {
            limit: MOST_MISSING,
        });
    }
    let best = expected.thinned(1.0 - spacings.value).spacings();
    let distance = distance(&sorted, |s| best.cumulative(s));
    let limit = REFUSED / (sorted.len() as f64).sqrt();
    if distance > limit {
        return MissingFraction::Unknown(UnknownFraction::NotOrthogonal { distance, limit });
    }
    let count = positions.len() as f64;
    let saturation = complete.map_or(f64::INFINITY, |orbits| orbits.saturation().length);
    let longest_window = (LONGEST_SHARE * count)
        .min(LONGEST)
        .min(BELOW_SATURATION * saturation)
        .max(2.0 * SHORTEST);
    let windows = |measure: Measure, model: &Model<'_>| {
        Windows::new(positions, longest_window, measure).fit(model)
    };
    // The mean density was taken from the list, see `windows::number_variance`.
    let number_variance = windows(number_variance, &|missing, length| {
        let own = length / (1.0 - missing);
        let whole = complete.map_or_else(
            || expected.number_variance(own),
            |orbits| orbits.number_variance(own),
        );
        missing * length * (1.0 - length / count) + (1.0 - missing).powi(2) * whole
    });
    let rigidity = windows(rigidity, &|missing, length| {
        let own = length / (1.0 - missing);
        let whole = complete.map_or_else(|| expected.rigidity(own), |orbits| orbits.rigidity(own));
        missing * length / 15.0 + (1.0 - missing).powi(2) * whole
    });
    MissingFraction::Estimated(MissingEstimates {
        disagreement: disagreement(&[spacings, number_variance, rigidity]),
        spacings,
        number_variance,
        rigidity,
        longest_window,
        distance,
    })
}

/// Largest difference between two values in units of its error, as if they were independent.
fn disagreement(fits: &[Fit]) -> f64 {
    let mut largest = 0.0_f64;
    for (index, one) in fits.iter().enumerate() {
        for other in &fits[..index] {
            if let (Some(a), Some(b)) = (one.error, other.error) {
                largest = largest.max((one.value - other.value).abs() / a.hypot(b));
            }
        }
    }
    largest
}

fn reason_against(
    positions: &[f64],
    sorted: &[f64],
    expected: &Reference,
) -> Option<UnknownFraction> {
    if !expected.is_orthogonal() {
        return Some(UnknownFraction::Uncorrelated);
    }
    if !expected.is_simple() {
        return Some(UnknownFraction::Multiple);
    }
    if positions.len() < FEWEST {
        return Some(UnknownFraction::TooFew {
            levels: positions.len(),
            needed: FEWEST,
        });
    }
    let repeated = sorted.partition_point(|spacing| *spacing <= 0.0);
    (repeated > 0).then_some(UnknownFraction::Repeated { repeated })
}

type Measure = fn(&[f64], f64, &[f64]) -> Vec<Block>;
type Model<'a> = dyn Fn(f64, f64) -> f64 + 'a;

/// A measure of windows of several lengths, by parts of the list.
struct Windows {
    span: f64,
    lengths: Vec<f64>,
    parts: Vec<Vec<Block>>,
}

impl Windows {
    fn new(positions: &[f64], longest: f64, measure: Measure) -> Self {
        let span = positions[positions.len() - 1] - positions[0];
        let ratio = (longest / SHORTEST).powf(1.0 / (LENGTHS - 1) as f64);
        let lengths: Vec<f64> = (0..LENGTHS)
            .map(|index| SHORTEST * ratio.powi(index as i32))
            .collect();
        let parts = lengths
            .iter()
            .map(|&length| measure(positions, length, &centered_edges(span, length, PARTS)))
            .collect();
        Self {
            span,
            lengths,
            parts,
        }
    }

    /// Least squares of the measured values relative to those of the model, and the jackknife over parts.
    fn fit(&self, model: &Model<'_>) -> Fit {
        let table = Table::new(&self.lengths, model);
        let without: Vec<f64> = (0..PARTS)
            .map(|part| table.best(&self.measured(Some(part))))
            .collect();
        let mean = without.iter().sum::<f64>() / PARTS as f64;
        let scatter: f64 = without.iter().map(|value| (value - mean).powi(2)).sum();
        // Windows that overlap two parts, see `windows::mean_and_error`; all as if they were of the longest kind.
        let missed = 1.0 - self.lengths[LENGTHS - 1] * PARTS as f64 / (3.0 * self.span);
        Fit {
            value: table.best(&self.measured(None)),
            error: Some((scatter * (PARTS - 1) as f64 / PARTS as f64 / missed).sqrt()),
        }
    }

    /// Means over the list, or over what is left without one of its parts.
    fn measured(&self, without: Option<usize>) -> Vec<f64> {
        let mean = |blocks: &Vec<Block>| {
            let used = || (0..PARTS).filter(|part| Some(*part) != without);
            used().map(|part| blocks[part].sum).sum::<f64>()
                / used().map(|part| blocks[part].weight).sum::<f64>()
        };
        self.parts.iter().map(mean).collect()
    }
}

/// The model for all lengths over an even grid of missing fractions, linear in between.
struct Table {
    rows: Vec<Vec<f64>>,
}

impl Table {
    fn new(lengths: &[f64], model: &Model<'_>) -> Self {
        let missing =
            |row: usize| LEAST_MISSING + (MOST_MISSING - LEAST_MISSING) * row as f64 / ROWS as f64;
        let row = |row: usize| {
            lengths
                .iter()
                .map(|&length| model(missing(row), length))
                .collect()
        };
        Self {
            rows: (0..=ROWS).map(row).collect(),
        }
    }

    /// The missing fraction that fits best.
    fn best(&self, measured: &[f64]) -> f64 {
        maximum(LEAST_MISSING, MOST_MISSING, &|missing| {
            let place = (missing - LEAST_MISSING) / (MOST_MISSING - LEAST_MISSING) * ROWS as f64;
            let row = (place as usize).min(ROWS - 1);
            let share = place - row as f64;
            let misfit: f64 = measured
                .iter()
                .zip(self.rows[row].iter().zip(&self.rows[row + 1]))
                .map(|(value, (low, high))| (value / (low + share * (high - low)) - 1.0).powi(2))
                .sum();
            -misfit
        })
    }
}
