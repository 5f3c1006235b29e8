//! Statistics of an unfolded list: spacings, number variance, rigidity, form factor, and the fraction of missing levels.
//!
//! Positions are unfolded levels, x = smooth count at the level, so that their mean spacing is 1; [`unfold`] makes them from any smooth
//! count. [`level_statistics`] measures them and puts the curves of random levels beside what it measures: uncorrelated levels, the
//! Gaussian orthogonal ensemble, what is expected of this list (a [`Reference`]), and, where [`Orbits`] are given, what the orbits of
//! the shape say. All lengths are in mean spacings of the list itself.

mod fit;
mod form_factor;
mod gap;
mod missing;
mod orbits;
mod orthogonal;
mod reference;
mod spacings;
mod windows;

pub use fit::Fit;
pub use form_factor::FormFactorBin;
pub use missing::{MissingEstimates, MissingFraction, UnknownFraction};
pub use orbits::{Orbits, Place, Saturation};
pub use reference::{Reference, Sequence, SpacingCurve};
pub use spacings::{SpacingBin, SpacingCurves, SpacingPoint, Spacings};

use crate::billiard::quadrature;
use form_factor::Periodogram;
use orbits::Correlations;
use serde::Serialize;
use windows::{Block, even_edges, lengths, mean_and_error};

/// Fewest levels that are measured: with fewer the error of every number here is as large as what it could tell apart.
pub const FEWEST_LEVELS: usize = 20;

/// Most levels that are measured; of a longer list the middle part. All errors are about a percent by then, and the time below a second.
const MOST_LEVELS: usize = 30_000;

/// Unfolded positions of levels: the smooth count at each of them.
pub fn unfold(levels: &[f64], smooth_count: impl Fn(f64) -> f64) -> Vec<f64> {
    levels.iter().map(|level| smooth_count(*level)).collect()
}

/// Statistics of an unfolded list.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct LevelStatistics {
    /// Number of levels in the list.
    pub levels: usize,
    /// Number of levels that were measured: of a list of more than 30 000, those in the middle.
    pub used: usize,
    /// Mean spacing of the unfolded positions before they were brought to density 1. Above 1 where levels are missing.
    pub mean_spacing: f64,
    /// What is expected of the list.
    pub expected: Reference,
    /// Nearest-neighbour spacings.
    pub spacings: Spacings,
    /// Variance of the number of levels in a window, by its length.
    pub number_variance: Vec<WindowPoint>,
    /// Mean square distance of the staircase from the best straight line over a window, by its length (Dyson & Mehta, J. Math. Phys. 4
    /// (1963) 701).
    pub rigidity: Vec<WindowPoint>,
    /// Where number variance and rigidity saturate, if orbits were given.
    pub saturation: Option<Saturation>,
    /// Form factor, by time.
    pub form_factor: Vec<FormFactorBin>,
    /// Fraction of missing levels, without use of their number.
    pub missing: MissingFraction,
}

/// Number variance or rigidity for one length of windows.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct WindowPoint {
    /// Length of the windows, mean spacings.
    pub length: f64,
    /// Measured, averaged over overlapping windows.
    pub value: f64,
    /// Its standard error, from the scatter between parts of the list.
    pub error: f64,
    /// Uncorrelated levels.
    pub uncorrelated: f64,
    /// Gaussian orthogonal ensemble.
    pub orthogonal: f64,
    /// What is expected of the list, without saturation.
    pub expected: f64,
    /// The same with the orbits: short ones by themselves, longer ones as random levels. None if no orbits were given.
    pub orbits: Option<f64>,
}

/// Why a list has no statistics.
#[derive(Clone, Copy, Debug, PartialEq, thiserror::Error)]
pub enum StatisticsError {
    /// The list is too short.
    #[error("{levels} levels are too few for statistics: {FEWEST_LEVELS} are needed")]
    TooFew {
        /// Its levels.
        levels: usize,
    },
    /// A position is infinite or not a number.
    #[error("unfolded level {} is {value}: positions must be finite", index + 1)]
    NotFinite {
        /// Which one, from 0.
        index: usize,
        /// Its value.
        value: f64,
    },
    /// A position is below the one before it.
    #[error("unfolded level {} is below the one before it: positions must ascend", index + 1)]
    NotAscending {
        /// Which one, from 0.
        index: usize,
    },
    /// All positions are equal.
    #[error("all unfolded levels are equal: there are no spacings")]
    NoSpan,
}

/// Measures the statistics of unfolded positions, which ascend and have a mean spacing near 1, beside what is `expected` of them.
///
/// The smooth count enters through the unfolding only; the mean density is taken from the list, so that a list with missing levels is
/// measured at density 1 like any other. Repeated levels count as often as they stand.
///
/// # Errors
///
/// The positions must be finite, ascending, not all equal, and at least [`FEWEST_LEVELS`].
pub fn level_statistics(
    positions: &[f64],
    expected: &Reference,
    orbits: Option<&Orbits<'_>>,
) -> Result<LevelStatistics, StatisticsError> {
    check(positions)?;
    let levels = positions.len();
    let left_out = levels.saturating_sub(MOST_LEVELS) / 2;
    let positions = &positions[left_out..levels.min(left_out + MOST_LEVELS)];
    check(positions)?;
    let first = positions[0];
    let mean_spacing = (positions[positions.len() - 1] - first) / (positions.len() - 1) as f64;
    let positions: Vec<f64> = positions
        .iter()
        .map(|position| (position - first) / mean_spacing)
        .collect();
    let correlations = orbits.and_then(|orbits| Correlations::new(orbits, mean_spacing, expected));
    let correlations = correlations.as_ref();
    let complete = orbits.and_then(|orbits| Correlations::new(orbits, 1.0, expected));
    let saturation = correlations.map(Correlations::saturation);
    let periodogram = Periodogram::new(&positions);
    let (number_variance, rigidity) = window_points(&positions, expected, correlations);
    Ok(LevelStatistics {
        levels,
        used: positions.len(),
        mean_spacing,
        spacings: spacings::measure(&positions, expected),
        number_variance,
        rigidity,
        form_factor: form_factor_bins(&periodogram, expected, correlations),
        missing: missing::estimate(&positions, expected, complete.as_ref()),
        saturation,
        expected: expected.clone(),
    })
}

fn check(positions: &[f64]) -> Result<(), StatisticsError> {
    if positions.len() < FEWEST_LEVELS {
        return Err(StatisticsError::TooFew {
            levels: positions.len(),
        });
    }
    if let Some(index) = positions.iter().position(|position| !position.is_finite()) {
        return Err(StatisticsError::NotFinite {
            index,
            value: positions[index],
        });
    }
    if let Some(index) = positions.windows(2).position(|pair| pair[1] < pair[0]) {
        return Err(StatisticsError::NotAscending { index: index + 1 });
    }
    let span = positions[positions.len() - 1] - positions[0];
    if span > 0.0 && span.is_finite() {
        Ok(())
    } else {
        Err(StatisticsError::NoSpan)
    }
}

fn window_points(
    positions: &[f64],
    expected: &Reference,
    correlations: Option<&Correlations<'_>>,
) -> (Vec<WindowPoint>, Vec<WindowPoint>) {
    let span = positions[positions.len() - 1] - positions[0];
    let (uncorrelated, orthogonal) = (Reference::uncorrelated(), Reference::orthogonal());
    lengths(span)
        .map(|length| {
            let edges = even_edges(span, length);
            let mean = |blocks: &[Block]| mean_and_error(blocks, length, &edges);
            let counted = mean(&windows::number_variance(positions, length, &edges));
            let fitted = mean(&windows::rigidity(positions, length, &edges));
            let variance = WindowPoint {
                length,
                value: counted.0,
                error: counted.1,
                uncorrelated: uncorrelated.number_variance(length),
                orthogonal: orthogonal.number_variance(length),
                expected: expected.number_variance(length),
                orbits: correlations.map(|orbits| orbits.number_variance(length)),
            };
            let rigidity = WindowPoint {
                length,
                value: fitted.0,
                error: fitted.1,
                uncorrelated: uncorrelated.rigidity(length),
                orthogonal: orthogonal.rigidity(length),
                expected: expected.rigidity(length),
                orbits: correlations.map(|orbits| orbits.rigidity(length)),
            };
            (variance, rigidity)
        })
        .unzip()
}

fn form_factor_bins(
    periodogram: &Periodogram,
    expected: &Reference,
    correlations: Option<&Correlations<'_>>,
) -> Vec<FormFactorBin> {
    let orthogonal = Reference::orthogonal();
    periodogram
        .bins()
        .into_iter()
        .map(|bin| {
            let mean = |reference: &Reference| {
                let integral =
                    quadrature::integrate(bin.from, bin.to, 1, |tau| reference.form_factor(tau));
                integral / (bin.to - bin.from)
            };
            FormFactorBin {
                expected: mean(expected),
                orthogonal: mean(&orthogonal),
                diagonal: correlations.and_then(|orbits| orbits.form_factor(bin.from, bin.to)),
                ..bin
            }
        })
        .collect()
}
