//! Parameters of the shape that fit a list best.
//!
//! Gauss-Newton iteration on the record: derivatives of the predicted staircase are differences of predictions at neighbouring values,
//! and the whole record is weighed with the noise that the audit finds in it, after its faults have been taken out. The smooth count
//! gives the values to start from; the lengths of orbits, as phases k L, then give most of the digits.

use super::least_squares;
use super::prediction::Prediction;
use super::record::{Predicted, Span};
use super::run::{BEGINS_LATE, Case, FEWEST, Listed, Start};
use super::trend::PowerLaw;
use crate::baseline::Weyl;
use crate::dense::{Cholesky, Matrix, dot};
use crate::levels::staircase;
use serde::Serialize;

/// Iterations on the smooth count, and with orbits.
const SMOOTH_STEPS: usize = 8;
const STEPS: usize = 8;
/// Steps for which derivatives are computed anew.
const DERIVED: usize = 2;
/// The iteration has ended where a step is below this part of the standard deviation.
const ENOUGH: f64 = 0.05;
/// Differences of parameters: with orbits such that the largest phase changes by this many radians at the end of the list.
const PHASE: f64 = 0.05;
/// Relative difference of parameters for the smooth count.
const SMOOTH_DIFFERENCE: f64 = 1e-4;
/// Mean spacings that the staircase is smoothed over in the fit of the smooth count, and the neighbouring points that say one thing.
const SPACINGS: f64 = 2.5;
const DEPENDENT: f64 = 3.0;
/// Largest step in a parameter, relative to its value.
const LARGEST_STEP: f64 = 0.05;

/// A parameter that was fitted.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Fitted {
    /// The value that it started from: that of the file.
    pub file: f64,
    /// The value that fits the list best.
    pub value: f64,
    /// Standard deviation of the value under the noise of the record.
    pub error: f64,
    /// The value that the smooth count alone gives.
    pub smooth: f64,
    /// Standard deviation of it, from the scatter of the record about the smooth count.
    pub smooth_error: f64,
}

/// Predictions for values of the parameters that are fitted.
pub trait Family {
    /// Why there is no prediction for some values.
    type Error;

    /// The smooth count.
    ///
    /// # Errors
    /// Where the values make no shape.
    fn smooth(&self, values: &[f64]) -> Result<Weyl, Self::Error>;

    /// Smooth count and orbits.
    ///
    /// # Errors
    /// Where the values make no shape.
    fn whole(&self, values: &[f64]) -> Result<Prediction, Self::Error>;
}

/// What a fit gives: the parameters, and the prediction at their values. None where the list does not determine them.
pub type Fit = Option<(Vec<Fitted>, Prediction)>;

/// Fits parameters of a shape, from their values in the file on, to a list that begins with the lowest level or anywhere else.
///
/// # Errors
/// Where values that the iteration comes to make no shape.
pub fn fit<F: Family>(list: &Listed<'_>, family: &F, file: &[f64]) -> Result<Fit, F::Error> {
    if list.levels.len() < FEWEST || file.is_empty() {
        return Ok(None);
    }
    let Some((smooth, smooth_errors)) = fit_smooth(list, family, file)? else {
        return Ok(None);
    };
    let mut values = smooth.clone();
    let mut errors = vec![f64::INFINITY; file.len()];
    let mut columns = Vec::new();
    for step in 0..STEPS {
        let prediction = family.whole(&values)?;
        let start = Start::new(list, &prediction);
        let last = PowerLaw::none(list.levels[list.levels.len() - 1]);
        let Some(case) = Case::new(list, &prediction, &start, last, 0.0) else {
            return Ok(None);
        };
        // Once the values are close, derivatives no longer change.
        let fits = columns
            .first()
            .is_some_and(|column: &Vec<f64>| column.len() == case.predicted.points.len());
        if step < DERIVED || !fits {
            columns = derivatives(family, &values, &case.predicted)?;
        }
        let none = vec![0.0; file.len()];
        let Some(estimate) = least_squares::fit(&case.explained, &columns, &none) else {
            return Ok(None);
        };
        let mut largest = 0.0_f64;
        for (index, value) in values.iter_mut().enumerate() {
            let limit = LARGEST_STEP * value.abs().max(f64::MIN_POSITIVE);
            // The record is list less prediction: what is left over is what the prediction should gain.
            *value += estimate.values[index].clamp(-limit, limit);
            errors[index] = estimate.errors[index];
            largest = largest.max((estimate.values[index] / estimate.errors[index]).abs());
        }
        if largest < ENOUGH {
            break;
        }
    }
    let fitted = (0..file.len())
        .map(|index| Fitted {
            file: file[index],
            value: values[index],
            error: errors[index],
            smooth: smooth[index],
            smooth_error: smooth_errors[index],
        })
        .collect();
    Ok(Some((fitted, family.whole(&values)?)))
}

/// Derivatives of the predicted staircase at the points of a record.
fn derivatives<F: Family>(
    family: &F,
    values: &[f64],
    predicted: &Predicted,
) -> Result<Vec<Vec<f64>>, F::Error> {
    let span = predicted.span;
    (0..values.len())
        .map(|index| {
            // A length changes by no more than about itself when a parameter does.
            let difference =
                PHASE / (span.to * longest(span)) * values[index].abs().max(f64::MIN_POSITIVE);
            let at = |sign: f64| -> Result<Vec<f64>, F::Error> {
                let mut moved = values.to_vec();
                moved[index] += sign * difference;
                Ok(Predicted::new(&family.whole(&moved)?, span).staircase)
            };
            let (up, down) = (at(1.0)?, at(-1.0)?);
            Ok(up
                .iter()
                .zip(&down)
                .map(|(up, down)| (up - down) / (2.0 * difference))
                .collect())
        })
        .collect()
}

/// Longest orbits that matter in a record.
fn longest(span: Span) -> f64 {
    2.0 / span.smoothing
}

/// Values and standard deviations from the smooth count alone.
#[allow(clippy::type_complexity)] // two plain lists, used once
fn fit_smooth<F: Family>(
    list: &Listed<'_>,
    family: &F,
    file: &[f64],
) -> Result<Option<(Vec<f64>, Vec<f64>)>, F::Error> {
    let levels = list.levels;
    let (first, last) = (levels[0], levels[levels.len() - 1]);
    let mut values = file.to_vec();
    let mut errors = vec![f64::INFINITY; file.len()];
    for _ in 0..SMOOTH_STEPS {
        let weyl = family.smooth(&values)?;
        let smoothing = SPACINGS / weyl.density(last, 0.0).max(f64::MIN_POSITIVE);
        let (from, to) = (first + 3.0 * smoothing, last - 3.0 * smoothing);
        if to <= from {
            return Ok(None);
        }
        let count = ((to - from) / (0.8 * smoothing)).ceil() as usize + 1;
        let points: Vec<f64> = (0..count)
            .map(|point| from + (to - from) * (point as f64 + 0.5) / count as f64)
            .collect();
        let stairs = staircase(levels, &points, smoothing);
        let mut rest: Vec<f64> = points
            .iter()
            .zip(&stairs)
            .map(|(&k, levels)| levels - weyl.count(k, smoothing))
            .collect();
        // A list that begins in the middle lacks a whole number of levels.
        let below = -rest.iter().sum::<f64>() / rest.len() as f64;
        if weyl.count(first, 0.0) > BEGINS_LATE {
            rest.iter_mut().for_each(|value| *value += below.round());
        }
        let mut columns = Vec::new();
        for index in 0..values.len() {
            let difference = SMOOTH_DIFFERENCE * values[index].abs().max(f64::MIN_POSITIVE);
            let at = |sign: f64| -> Result<Weyl, F::Error> {
                let mut moved = values.clone();
                moved[index] += sign * difference;
                family.smooth(&moved)
            };
            let (up, down) = (at(1.0)?, at(-1.0)?);
            columns.push(
                points
                    .iter()
                    .map(|&k| {
                        (up.count(k, smoothing) - down.count(k, smoothing)) / (2.0 * difference)
                    })
                    .collect::<Vec<f64>>(),
            );
        }
        let size = columns.len();
        let mut normal = Matrix::zeros(size, size);
        let mut right = Matrix::zeros(size, 1);
        for i in 0..size {
            right[(i, 0)] = dot(&columns[i], &rest);
            for j in 0..size {
                normal[(i, j)] = dot(&columns[i], &columns[j]);
            }
        }
        let Some(factor) = Cholesky::new(normal.as_ref()) else {
            return Ok(None);
        };
        let change = factor.solved(&right);
        let inverse = factor.solved(&Matrix::identity(size, size));
        let mut left = rest;
        for (index, column) in columns.iter().enumerate() {
            for (value, slope) in left.iter_mut().zip(column) {
                *value -= change[(index, 0)] * slope;
            }
        }
        let variance = dot(&left, &left) / left.len() as f64 * DEPENDENT;
        for (index, value) in values.iter_mut().enumerate() {
            *value += change[(index, 0)];
            errors[index] = (variance * inverse[(index, index)]).sqrt();
        }
    }
    Ok(Some((values, errors)))
}
