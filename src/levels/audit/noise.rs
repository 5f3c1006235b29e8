//! What a record of a complete list would still hold: the error of the prediction and of the list, as a Gaussian process.
//!
//! The error of an orbit sum is a sum of waves in k, one for each length. Its spectrum over lengths is learned from the record
//! itself (expectation maximisation for the variances of a Gaussian series, Dempster, Laird & Rubin, J. R. Stat. Soc. B 39 (1977) 1),
//! starting from, and held by, what is known beforehand: longer orbits are as strong as random levels make them, shorter ones
//! leave a small part of themselves and whatever the sum is known to leave out. Lengths at which the sum is wrong are thereby
//! given little weight, and those at which it is right are used in full, instead of one width of smoothing for all.

use super::prediction::Prediction;
use super::record::Predicted;
use crate::dense::{Cholesky, Into, Matrix, dot, multiply};
use crate::trace::mean_square;
use std::f64::consts::{LN_2, PI};
use std::ops::Range;

/// Longest waves that the smoothing lets through, in longest orbits: exp(-(2.5 x 1.7)^2/2) = 1e-4.
const LONGEST_INSIDE: f64 = 1.7;
/// Longest waves that are felt at the ends of a list, where the Gaussian is cut off, in longest orbits.
const LONGEST_AT_ENDS: f64 = 8.0;
/// Points nearer to an end than this many smoothing widths feel the cut.
const END: f64 = 4.0;
/// Root mean square, in levels, of the error of an orbit sum that is as good as they come, short of exact ones.
const LEAST_ERROR: f64 = 5e-4;
/// Error of a single point that no wave explains: rounding of lists, cells of the integration.
const POINT_ERROR: f64 = 2e-4;
/// Part of a term that the next order in 1/k makes, typically.
const RELATIVE_ERROR: f64 = 0.02;
/// Weight of what is known beforehand, in observations of a wave (each has two: sine and cosine).
const PRIOR_WEIGHT: f64 = 2.0;
/// Waves on either side that are taken together to see what is typical of a range of lengths.
const NEAR: usize = 8;
/// Weight of what is expected beforehand against what is typical of a range of lengths, in squares.
const EXPECTED_WEIGHT: f64 = 2.0;
/// Knots of the gain: one for this many points, and never more than the second number.
const POINTS_PER_KNOT: usize = 20;
const MOST_KNOTS: usize = 20;
/// Standard deviation of single levels, in mean spacings, that is expected of a good list and a good prediction.
const LEVEL_ERROR: f64 = 0.001;
/// The most that is taken for an error of single levels before the record is seen: more would hide levels that are shifted.
const MOST_LEVEL_ERROR: f64 = 0.1;
/// While the noise is enlarged by a factor, the variance of single levels is by this factor more.
const LEVEL_HEAT: f64 = 9.0;
/// Weight of that expectation, in levels.
const LEVEL_WEIGHT: f64 = 10.0;
/// Weight of a constant gain, in points.
const GAIN_WEIGHT: f64 = 12.0;

/// Waves in the record of a span: what a wave of each length looks like at the points.
pub(super) struct Waves {
    lengths: Vec<f64>,
    spacing: f64,
    /// Cosine and sine of each length in turn, smoothed; a column each.
    columns: Matrix,
    /// Numbers of points at the beginning and at the end that feel the cut of the Gaussian, or have one of their own.
    at_ends: [usize; 2],
    /// Cosines and sines of lengths beyond the last of `lengths` at the points of each end.
    beyond: [Matrix; 2],
    beyond_lengths: Vec<f64>,
}

impl Waves {
    pub(super) fn new(predicted: &Predicted, max_length: f64) -> Self {
        let span = &predicted.span;
        let spacing = PI / (span.to - span.from);
        let nodes = |from: f64, to: f64| -> Vec<f64> {
            let (first, last) = ((from / spacing) as usize, (to / spacing) as usize);
            (first..last)
                .map(|node| (node as f64 + 0.5) * spacing)
                .collect()
        };
        let inside = LONGEST_INSIDE * max_length;
        let lengths = nodes(0.0, inside);
        let beyond_lengths = nodes(inside, LONGEST_AT_ENDS * max_length);
        let points = predicted.points.len();
        let near = |index: usize| {
            let k = predicted.points[index];
            let width = span.width(k);
            (k - span.from).min(span.to - k) < END * width || width > span.smoothing
        };
        let at_begin = (0..points).take_while(|&index| near(index)).count();
        let at_end = (at_begin..points)
            .rev()
            .take_while(|&index| near(index))
            .count();
        let middles = predicted.cells.middles();
        let wave = |length: f64, index: usize| -> (f64, f64) {
            if index >= at_begin && index + at_end < points {
                let phase = length * predicted.points[index];
                let damped = (-0.5 * (length * span.smoothing).powi(2)).exp();
                return (damped * phase.cos(), damped * phase.sin());
            }
            predicted.cells.weights[index].wave(length, &middles)
        };
        let fill = |lengths: &[f64], from: usize, count: usize| {
            let mut columns = Matrix::zeros(count, 2 * lengths.len());
            for (node, &length) in lengths.iter().enumerate() {
                for row in 0..count {
                    let (cosine, sine) = wave(length, from + row);
                    columns[(row, 2 * node)] = cosine;
                    columns[(row, 2 * node + 1)] = sine;
                }
            }
            columns
        };
        Self {
            columns: fill(&lengths, 0, points),
            beyond: [
                fill(&beyond_lengths, 0, at_begin),
                fill(&beyond_lengths, points - at_end, at_end),
            ],
            lengths,
            spacing,
            at_ends: [at_begin, at_end],
            beyond_lengths,
        }
    }
}

/// What is known beforehand about the variance of waves.
pub(super) struct Expected<'a> {
    pub(super) prediction: &'a Prediction,
    /// k in the middle of the span.
    pub(super) middle: f64,
}

impl Expected<'_> {
    /// Variance, in levels squared, of a wave of this length over a range of lengths of width `spacing`.
    fn variance(&self, length: f64, spacing: f64) -> f64 {
        let max_length = self.prediction.max_length;
        if length > max_length {
            // sigma^2 = (1/(2 pi^2)) integral of K(tau)/tau^2 dtau with tau = length/(2 pi density) and K = 1, an upper bound.
            let density = self
                .prediction
                .weyl
                .density(self.middle, 0.0)
                .max(f64::MIN_POSITIVE);
            let tau = length / (2.0 * PI * density);
            let form_factor = (2.0 * tau).min(1.0);
            return density * form_factor / (PI * length * length) * spacing;
        }
        let floor = LEAST_ERROR * LEAST_ERROR * spacing / max_length;
        let left_out: f64 = self
            .prediction
            .left_out
            .iter()
            .filter(|left_out| length >= left_out.length && left_out.length < max_length)
            .map(|left_out| {
                let amplitude = left_out.amplitude * self.middle.powf(left_out.power);
                let share = spacing / (max_length - left_out.length).max(spacing);
                0.5 * amplitude * amplitude * left_out.count as f64 * share
            })
            .sum();
        floor + left_out
    }

    fn variances(&self, lengths: &[f64], spacing: f64) -> Vec<f64> {
        let mut variances: Vec<f64> = lengths
            .iter()
            .map(|&length| self.variance(length, spacing))
            .collect();
        // Terms put part of themselves into the range that holds their length.
        let mut binned = vec![Vec::new(); lengths.len()];
        for term in &self.prediction.terms {
            if let Some(bin) = binned.get_mut((term.length / spacing) as usize) {
                bin.push(*term);
            }
        }
        for (variance, terms) in variances.iter_mut().zip(&binned) {
            *variance += RELATIVE_ERROR * RELATIVE_ERROR * mean_square(terms, self.middle);
        }
        variances
    }
}

/// A noise model of one span.
#[derive(Clone)]
pub(super) struct Noise<'a> {
    waves: &'a Waves,
    expected: Vec<f64>,
    expected_beyond: Vec<f64>,
    /// Variance of each wave.
    variances: Vec<f64>,
    /// Factor of the waves at each point.
    gain: Vec<f64>,
    knots: Vec<usize>,
    /// What comes from the list and from trends: fixed covariance.
    fixed: Matrix,
    /// What a shift of each listed level by its mean spacing does to the record, a column each, and the variance of such shifts.
    single: Matrix,
    single_variance: f64,
}

impl<'a> Noise<'a> {
    /// The model before the record is seen. `fixed` is a covariance that is not to be learned (errors of the list, trends).
    pub(super) fn new(
        waves: &'a Waves,
        predicted: &Predicted,
        expected: &Expected<'_>,
        fixed: Matrix,
        single: Matrix,
    ) -> Self {
        let variances = expected.variances(&waves.lengths, waves.spacing);
        let points = predicted.points.len();
        let knots = (points / POINTS_PER_KNOT).clamp(1, MOST_KNOTS);
        let knots = (0..points).map(|point| point * knots / points).collect();
        Self {
            expected: variances.clone(),
            expected_beyond: expected.variances(&waves.beyond_lengths, waves.spacing),
            variances,
            gain: vec![1.0; points],
            knots,
            waves,
            fixed,
            single,
            single_variance: LEVEL_ERROR * LEVEL_ERROR,
        }
    }

    /// Covariance of the record.
    fn covariance(&self) -> Matrix {
        let points = self.gain.len();
        let mut scaled = self.waves.columns.clone();
        for (node, variance) in self.variances.iter().enumerate() {
            let deviation = variance.sqrt();
            for column in [2 * node, 2 * node + 1] {
                for (value, gain) in scaled.col_as_slice_mut(column).iter_mut().zip(&self.gain) {
                    *value *= deviation * gain;
                }
            }
        }
        let mut covariance = self.fixed.clone();
        multiply(
            covariance.as_mut(),
            Into::Sum,
            scaled.as_ref(),
            scaled.transpose(),
            1.0,
        );
        multiply(
            covariance.as_mut(),
            Into::Sum,
            self.single.as_ref(),
            self.single.transpose(),
            self.single_variance,
        );
        self.add_beyond(&mut covariance);
        for point in 0..points {
            covariance[(point, point)] += POINT_ERROR * POINT_ERROR;
        }
        covariance
    }

    /// Adds what the ends feel of long waves.
    fn add_beyond(&self, covariance: &mut Matrix) {
        let points = self.gain.len();
        for (end, columns) in self.waves.beyond.iter().enumerate() {
            let count = self.waves.at_ends[end];
            let first = if end == 0 { 0 } else { points - count };
            for i in 0..count {
                for j in 0..count {
                    let sum: f64 = self
                        .expected_beyond
                        .iter()
                        .enumerate()
                        .map(|(node, variance)| {
                            let (a, b) = (2 * node, 2 * node + 1);
                            variance
                                * (columns[(i, a)] * columns[(j, a)]
                                    + columns[(i, b)] * columns[(j, b)])
                        })
                        .sum();
                    covariance[(first + i, first + j)] += sum;
                }
            }
        }
    }

    /// Factorises the covariance.
    pub(super) fn whitener(&self) -> Option<Cholesky> {
        Cholesky::new(self.covariance().as_ref())
    }

    /// Sets the waves of orbits that are in the sum, and the shifts of single levels, to what is expected beforehand times a factor.
    pub(super) fn heat(&mut self, factor: f64, max_length: f64) {
        self.single_variance = (LEVEL_HEAT * factor * LEVEL_ERROR * LEVEL_ERROR)
            .min(MOST_LEVEL_ERROR * MOST_LEVEL_ERROR);
        for ((variance, expected), length) in self
            .variances
            .iter_mut()
            .zip(&self.expected)
            .zip(&self.waves.lengths)
        {
            *variance = if *length <= max_length {
                factor * expected
            } else {
                *expected
            };
        }
    }

    /// One step of expectation maximisation on the rest of a record, and an update of the gain.
    pub(super) fn learn(&mut self, whitener: &Cholesky, rest: &[f64]) {
        let white = whitener.whitened_column(rest);
        let mut scaled = self.waves.columns.clone();
        for column in 0..scaled.ncols() {
            for (value, gain) in scaled.col_as_slice_mut(column).iter_mut().zip(&self.gain) {
                *value *= gain;
            }
        }
        let columns = whitener.whitened(scaled.as_ref());
        let seen_waves: Vec<(f64, f64)> = self
            .variances
            .iter()
            .enumerate()
            .map(|(node, &variance)| seen(&columns, 2 * node..2 * node + 2, &white, variance))
            .collect();
        for (node, variance) in self.variances.iter_mut().enumerate() {
            let (power, freedom) = seen_waves[node];
            let expected = typical(&seen_waves, node, self.expected[node]).max(self.expected[node]);
            *variance = (PRIOR_WEIGHT * expected + power) / (PRIOR_WEIGHT + freedom);
        }
        let single = whitener.whitened(self.single.as_ref());
        let (power, freedom) = seen(&single, 0..single.ncols(), &white, self.single_variance);
        self.single_variance =
            (LEVEL_WEIGHT * LEVEL_ERROR * LEVEL_ERROR + power) / (LEVEL_WEIGHT + freedom);
        self.learn_gain(&white);
    }

    /// Innovations larger than one in some part of the record raise the gain there.
    fn learn_gain(&mut self, white: &[f64]) {
        let knots = self.knots.iter().max().map_or(1, |last| last + 1);
        if knots < 2 {
            return;
        }
        let mut sums = vec![(0.0, 0.0); knots];
        for (&knot, value) in self.knots.iter().zip(white) {
            sums[knot].0 += 1.0;
            sums[knot].1 += value * value;
        }
        let logs: Vec<f64> = sums
            .iter()
            .map(|(count, sum)| 0.5 * ((GAIN_WEIGHT + sum) / (GAIN_WEIGHT + count)).ln())
            .collect();
        let mean = logs.iter().sum::<f64>() / knots as f64;
        // Middles of the blocks, to interpolate between.
        let middle = |knot: usize| {
            let first = self.knots.partition_point(|&of| of < knot);
            let last = self.knots.partition_point(|&of| of <= knot);
            0.5 * (first + last) as f64
        };
        let middles: Vec<f64> = (0..knots).map(middle).collect();
        for (index, gain) in self.gain.iter_mut().enumerate() {
            let place = index as f64 + 0.5;
            let right = middles
                .partition_point(|&at| at < place)
                .clamp(1, knots - 1);
            let (a, b) = (middles[right - 1], middles[right]);
            let t = ((place - a) / (b - a)).clamp(0.0, 1.0);
            let log = logs[right - 1] * (1.0 - t) + logs[right] * t - mean;
            *gain *= log.exp();
        }
    }

    /// The same model with all variances of waves times a factor.
    pub(super) fn scaled(&self, factor: f64) -> Self {
        let mut scaled = self.clone();
        scaled
            .variances
            .iter_mut()
            .for_each(|variance| *variance *= factor);
        scaled
    }

    /// Standard deviation of single levels, in mean spacings.
    pub(super) fn level_error(&self) -> f64 {
        self.single_variance.sqrt()
    }

    /// Standard deviation of the record's noise at each point.
    pub(super) fn deviations(&self) -> Vec<f64> {
        let covariance = self.covariance();
        (0..covariance.nrows())
            .map(|point| covariance[(point, point)].sqrt())
            .collect()
    }
}

/// Typical variance among waves of nearly the same length, from their powers and numbers of determined amplitudes: a single wave
/// that happens to be weak in this record says nothing, and one that is strong says nothing about its neighbours.
fn typical(seen: &[(f64, f64)], node: usize, expected: f64) -> f64 {
    let near = &seen[node.saturating_sub(NEAR)..(node + NEAR + 1).min(seen.len())];
    let mut ratios: Vec<(f64, f64)> = near
        .iter()
        .filter(|(_, freedom)| *freedom > 0.0)
        .map(|(power, freedom)| (power / freedom, *freedom))
        .collect();
    ratios.sort_by(|a, b| a.0.total_cmp(&b.0));
    let all: f64 = ratios.iter().map(|(_, freedom)| freedom).sum();
    let mut sum = 0.0;
    let middle = ratios.iter().find(|(_, freedom)| {
        sum += freedom;
        sum >= 0.5 * all
    });
    // The median of the mean of two squares is ln 2 of their variance.
    let median = middle.map_or(0.0, |(ratio, _)| ratio / LN_2);
    (all * median + EXPECTED_WEIGHT * expected) / (all + EXPECTED_WEIGHT)
}

/// Sum of the squared amplitudes that a whitened record shows of some components of equal variance, and the number of amplitudes
/// that the record determines (MacKay, Neural Computation 4 (1992) 415).
fn seen(columns: &Matrix, range: Range<usize>, white: &[f64], variance: f64) -> (f64, f64) {
    let (mut power, mut freedom) = (0.0, 0.0);
    for column in range {
        let component = columns.col_as_slice(column);
        power += (variance * dot(component, white)).powi(2);
        freedom += (variance * dot(component, component)).min(1.0);
    }
    (power, freedom)
}
