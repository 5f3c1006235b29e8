//! The course of an audit: where the list begins, whether it follows a trend, its faults, what it says of the shape.

use super::explain::{Explained, Setting, explain, positive_density};
use super::findings::{Findings, Measured, Measures, Trend, TrendKind, Verdict};
use super::least_squares::fit;
use super::noise::Waves;
use super::prediction::Prediction;
use super::record::{Predicted, Span};
use super::scene::Step;
use super::told::{corrected, told};
use super::trend::{PowerLaw, coarse};
use super::turing::parts;
use crate::dense::Matrix;
use std::f64::consts::PI;

/// A list to be audited, all in k.
#[derive(Clone, Copy, Debug)]
pub struct Listed<'a> {
    /// Levels, ascending, each as often as it is listed.
    pub levels: &'a [f64],
    /// Standard deviations of the levels, where they are known.
    pub errors: Option<&'a [f64]>,
    /// Widths (full, at half height) of measured resonances, where they are known.
    pub widths: Option<&'a [f64]>,
    /// Last k up to which the list claims to be complete; its last level where nothing is claimed.
    pub to: Option<f64>,
}

/// Fewest levels that can be audited.
pub const FEWEST: usize = 10;
/// The record of a list that begins with the lowest level begins where the smooth count reaches this, times the factor: below, it
/// means nothing.
const FIRST_COUNT: f64 = 0.5;
const BEFORE_FIRST: f64 = 0.8;
/// A list whose first level should be at least this many levels up by the smooth count begins somewhere in the middle.
pub(super) const BEGINS_LATE: f64 = 4.5;
/// Part of a list that begins in the middle from which the number of levels below is taken.
const FIRST_PART: f64 = 0.2;
/// Standard deviation, in levels at the end of the list, with which area and perimeter may differ from those of the file without
/// remark.
const TOLERANCE: f64 = 0.03;
/// Standard deviation, in mean spacings at the end of the list, with which a trend that was found is left open.
const OPEN: f64 = 0.5;
/// The shift of a level that a solver does not resolve differs from that of its neighbours by this part of itself (common
/// practice: the constant of an error estimate depends on the wave).
const SCATTER: f64 = 0.15;
/// Rounds of improving a trend.
const TREND_ROUNDS: usize = 3;
/// A trend that simplifies the record by more than this, in natural units, needs no comparison with an explanation by faults alone.
const CLEAR_TREND: f64 = 100.0;
/// Evidence, in natural units, from which on a trend is told, and standard deviations.
const TREND_ODDS: f64 = 10.0;
const TREND_DEVIATIONS: f64 = 5.0;
/// A trend is noticed where it shifts levels by this many mean spacings.
const NOTICED: f64 = 0.1;
/// Root mean square of what is left, in levels, and faults per level, above which a list is not one of this shape.
const FOREIGN_REST: f64 = 0.8;
const FOREIGN_FAULTS: f64 = 0.25;
/// A missing level would not be seen where the place of one is uncertain by more mean spacings than this.
const UNSEEN: f64 = 0.5;

/// Audits a list. None if there are fewer than ten levels or no noise model (numbers that are not finite).
#[must_use]
pub fn audit(list: &Listed<'_>, prediction: &Prediction) -> Option<Findings> {
    if list.levels.len() < FEWEST {
        return None;
    }
    let start = Start::new(list, prediction);
    let (law, gained) = coarse(
        prediction,
        list.levels,
        &start.span(list, prediction),
        start.below,
    );
    let plain = || {
        Case::new(
            list,
            prediction,
            &start,
            PowerLaw::none(law.last),
            TOLERANCE,
        )
    };
    let case = if gained > 0.0 {
        let mut trended = Case::new(list, prediction, &start, law, TOLERANCE)?;
        for _ in 0..TREND_ROUNDS {
            let better = trended.improved_law(prediction)?;
            let next = Case::new(list, prediction, &start, better, TOLERANCE)?;
            if next.explained.evidence <= trended.explained.evidence {
                break;
            }
            trended = next;
        }
        if gained > CLEAR_TREND {
            trended.odds = gained;
            trended
        } else {
            let plain = plain()?;
            trended.odds = trended.explained.evidence - plain.explained.evidence;
            if trended.odds > TREND_ODDS {
                trended
            } else {
                plain
            }
        }
    } else {
        plain()?
    };
    Some(case.findings(list, prediction))
}

/// Where a list begins.
pub(super) struct Start {
    from: f64,
    /// Levels below.
    below: f64,
}

impl Start {
    pub(super) fn new(list: &Listed<'_>, prediction: &Prediction) -> Self {
        let weyl = &prediction.weyl;
        let first = list.levels[0];
        if first <= 0.0 || weyl.count(first, 0.0) < BEGINS_LATE {
            let begin = BEFORE_FIRST * weyl.k_at_count(FIRST_COUNT);
            let positive = list.levels.iter().copied().find(|&level| level > 0.0);
            return Self {
                from: begin.min(positive.unwrap_or(begin)),
                below: 0.0,
            };
        }
        // The first level is the first thing that is known of a list that begins in the middle.
        let last = list.levels[list.levels.len() - 1];
        let span = Span::new(first, last, prediction);
        let predicted = Predicted::new(prediction, span);
        let upto = first + FIRST_PART * (last - first);
        let stairs = predicted.of_levels(list.levels, 0.0);
        let residuals: Vec<f64> = predicted
            .points
            .iter()
            .zip(stairs.iter().zip(&predicted.staircase))
            .filter(|(k, _)| **k <= upto)
            .map(|(_, (levels, predicted))| predicted - levels)
            .collect();
        let mean = residuals.iter().sum::<f64>() / residuals.len().max(1) as f64;
        Self {
            from: first,
            below: mean.round().max(0.0),
        }
    }

    fn span(&self, list: &Listed<'_>, prediction: &Prediction) -> Span {
        let last = list.levels[list.levels.len() - 1];
        let to = list.to.unwrap_or(last).max(last);
        Span::new(self.from, to, prediction)
    }
}

/// A list that has been explained, with a trend taken out.
pub(super) struct Case {
    law: PowerLaw,
    odds: f64,
    below: f64,
    /// The levels without the trend.
    levels: Vec<f64>,
    pub(super) predicted: Predicted,
    pub(super) explained: Explained,
    /// Columns of area, perimeter and trend, and the variances with which they are part of the noise.
    columns: Vec<Vec<f64>>,
    allowed: Vec<f64>,
}

impl Case {
    pub(super) fn new(
        list: &Listed<'_>,
        prediction: &Prediction,
        start: &Start,
        law: PowerLaw,
        tolerance: f64,
    ) -> Option<Self> {
        let levels: Vec<f64> = list.levels.iter().map(|&level| law.truth(level)).collect();
        let span = start.span(list, prediction);
        let span = Span {
            from: law.truth(span.from),
            to: law.truth(span.to),
            ..span
        };
        let predicted = Predicted::new(prediction, span);
        let waves = Waves::new(&predicted, prediction.max_length);
        let record: Vec<f64> = predicted
            .of_levels(&levels, start.below)
            .iter()
            .zip(&predicted.staircase)
            .map(|(levels, predicted)| levels - predicted)
            .collect();
        let (columns, allowed) = trends(&predicted, prediction, &law, tolerance);
        let errors = errors(list, &levels, &law);
        let fixed = fixed(&predicted, &levels, &errors, &columns, &allowed);
        let setting = Setting {
            prediction,
            predicted: &predicted,
            waves: &waves,
            fixed,
        };
        let explained = explain(&setting, &levels, &record)?;
        Some(Self {
            law,
            odds: 0.0,
            below: start.below,
            levels,
            explained,
            columns,
            allowed,
            predicted,
        })
    }

    /// The power law with the factor that fits what is left of the record.
    fn improved_law(&self, prediction: &Prediction) -> Option<PowerLaw> {
        let estimate = fit(&self.explained, &self.columns[2..], &self.allowed[2..])?;
        let density = prediction.weyl.density(self.law.last, 0.0);
        // The column is the change of the record by a shift of one mean spacing at the end: a level that is too high lowers it.
        Some(PowerLaw {
            factor: self.law.factor - estimate.values[0] / (density * self.law.last),
            ..self.law
        })
    }

    fn findings(self, list: &Listed<'_>, prediction: &Prediction) -> Findings {
        let span = self.predicted.span;
        let density =
            |k: f64| positive_density(prediction.weyl.density(k, 0.0), span.to - span.from);
        let told = told(&self.explained.found, list, &self.law, &density);
        let at_start = |fault: &super::findings::Fault| {
            // What seems to be missing right where a list begins in the middle belongs to the levels below it.
            self.below > 0.0
                && fault.kind == super::findings::FaultKind::Missing
                && (fault.k - span.from) * density(fault.k) < 1.0
        };
        let before = told
            .faults
            .iter()
            .filter(|fault| at_start(fault))
            .map(|fault| fault.count)
            .sum::<usize>();
        let faults: Vec<_> = told
            .faults
            .iter()
            .filter(|fault| !at_start(fault))
            .cloned()
            .collect();
        let verdict = self.verdict(&density, faults.len() + told.doubts.len());
        let measures = self.measures(prediction);
        let real: Vec<f64> = {
            let wrong: Vec<usize> = self
                .explained
                .found
                .iter()
                .filter_map(|found| match found.step {
                    Step::False(index) => Some(index),
                    Step::Missing(_) => None,
                })
                .collect();
            self.levels
                .iter()
                .enumerate()
                .filter(|(index, _)| !wrong.contains(index))
                .map(|(_, &level)| level)
                .collect()
        };
        let residual: Vec<f64> = self
            .predicted
            .of_levels(&real, self.below)
            .iter()
            .zip(&self.predicted.staircase)
            .map(|(levels, predicted)| levels - predicted)
            .collect();
        Findings {
            span: [span.from, span.to],
            smoothing: span.smoothing,
            below: self.below as usize + before,
            verdict,
            trend: self.trend(prediction, measures.as_ref()),
            measures,
            level_error: self.explained.level_error,
            parts: parts(&self.predicted, &self.explained, &residual, &real),
            points: self.predicted.points.clone(),
            before: self
                .predicted
                .of_levels(list.levels, self.below)
                .iter()
                .zip(&self.predicted.staircase)
                .map(|(levels, predicted)| levels - predicted)
                .collect(),
            after: self.explained.rest.clone(),
            noise: self.explained.noise.clone(),
            corrected: corrected(list, &faults),
            faults,
            doubts: told.doubts,
        }
    }

    fn verdict(&self, density: &dyn Fn(f64) -> f64, faults: usize) -> Verdict {
        let rest = &self.explained.rest;
        let square: f64 = rest.iter().map(|value| value * value).sum();
        let rms = (square / rest.len().max(1) as f64).sqrt();
        if rms > FOREIGN_REST || faults as f64 > FOREIGN_FAULTS * self.levels.len() as f64 {
            return Verdict::Foreign;
        }
        let mut ranges: Vec<[f64; 2]> = Vec::new();
        let mut open = false;
        for (&k, &error) in self
            .predicted
            .points
            .iter()
            .zip(&self.explained.place_errors)
        {
            let unseen = error * density(k) > UNSEEN;
            match ranges.last_mut() {
                Some(range) if unseen && open => range[1] = k,
                _ if unseen => ranges.push([k, k]),
                _ => {}
            }
            open = unseen;
        }
        // The last few spacings of every list cannot be judged.
        let end = self.predicted.span.to;
        ranges.retain(|range| (end - range[0]) * density(end) > 5.0 && range[1] > range[0]);
        if ranges.is_empty() {
            Verdict::Audited
        } else {
            Verdict::Unresolved { ranges }
        }
    }

    fn trend(&self, prediction: &Prediction, measures: Option<&Measures>) -> Trend {
        let last = self.law.last;
        let density = prediction.weyl.density(last, 0.0);
        let error = fit(&self.explained, &self.columns[2..], &self.allowed[2..])
            .map_or(f64::NAN, |estimate| estimate.errors[0] / (density * last));
        let is_off = |measured: &Measured| {
            (measured.list - measured.file).abs() > TREND_DEVIATIONS * measured.error
        };
        let kind = if self.law.factor == 0.0 {
            match measures {
                Some(measures) if is_off(&measures.area) => TrendKind::Geometry,
                _ => TrendKind::None,
            }
        } else if self.law.power == 0.0 {
            TrendKind::Geometry
        } else {
            TrendKind::Drift
        };
        let shift = |k: f64| self.law.spacings(k, prediction.weyl.density(k, 0.0));
        let listed_last = self.law.listed(self.predicted.span.to);
        let noticed_from = (0..200)
            .map(|step| f64::from(step) / 199.0 * listed_last)
            .find(|&k| k > 0.0 && shift(k).abs() > NOTICED);
        Trend {
            kind,
            odds: self.odds,
            factor: self.law.factor,
            factor_error: error,
            power: self.law.power,
            noticed_from: noticed_from.filter(|_| self.law.factor != 0.0),
            at_end: shift(listed_last),
        }
    }

    /// Area, perimeter and scale: those of the file plus what the rest of the record adds, times the scale of a trend.
    fn measures(&self, prediction: &Prediction) -> Option<Measures> {
        let weyl = &prediction.weyl;
        let area = 4.0 * PI * weyl.coefficient(2);
        let perimeter = -4.0 * PI * weyl.coefficient(1);
        let last = self.predicted.span.to;
        let estimate = fit(&self.explained, &self.columns[..2], &self.allowed[..2])?;
        // Levels that are too high by a factor come from a shape that is too small by it.
        let scale = if self.law.power == 0.0 {
            1.0 / (1.0 + self.law.factor)
        } else {
            1.0
        };
        let per_area = 4.0 * PI / (last * last);
        let per_perimeter = -4.0 * PI / last;
        let scaled = vec![self.scale_column(weyl)];
        let scaling = fit(&self.explained, &scaled, &[0.0])?;
        Some(Measures {
            area: Measured {
                file: area,
                list: scale * scale * (area + per_area * estimate.values[0]),
                error: per_area * estimate.errors[0],
            },
            perimeter: Measured {
                file: perimeter,
                list: scale * (perimeter + per_perimeter * estimate.values[1]),
                error: per_perimeter.abs() * estimate.errors[1],
            },
            scale: Measured {
                file: 1.0,
                list: scale * (1.0 + scaling.values[0]),
                error: scaling.errors[0],
            },
        })
    }

    /// Change of the record by a relative change of the size: N(k) becomes N(k (1 + e)).
    fn scale_column(&self, weyl: &crate::baseline::Weyl) -> Vec<f64> {
        self.predicted.cells.smoothed(|k| k * weyl.density(k, 0.0))
    }
}

/// Columns of area, perimeter and a power law in the record (each one level, or one mean spacing, at the end), and the variances
/// with which they are part of the noise.
fn trends(
    predicted: &Predicted,
    prediction: &Prediction,
    law: &PowerLaw,
    tolerance: f64,
) -> (Vec<Vec<f64>>, Vec<f64>) {
    let last = predicted.span.to;
    let weyl = &prediction.weyl;
    let end = weyl.density(last, 0.0);
    let column = |function: &dyn Fn(f64) -> f64| predicted.cells.smoothed(function);
    let columns = vec![
        column(&|k| (k / last).powi(2)),
        column(&|k| k / last),
        column(&|k| weyl.density(k, 0.0).max(0.0) / end * (k / last).powf(1.0 + law.power)),
    ];
    let open = if law.factor == 0.0 { 0.0 } else { OPEN * OPEN };
    (
        columns,
        vec![tolerance * tolerance, tolerance * tolerance, open],
    )
}

/// Standard deviations of the levels: those stated, and the scatter of a drift about its power law.
fn errors(list: &Listed<'_>, levels: &[f64], law: &PowerLaw) -> Vec<f64> {
    levels
        .iter()
        .enumerate()
        .map(|(index, level)| {
            let stated = list.errors.map_or(0.0, |errors| errors[index]);
            let shift = if law.power > 0.0 {
                list.levels[index] - level
            } else {
                0.0
            };
            stated.hypot(SCATTER * shift)
        })
        .collect()
}

/// Covariance of the record that is known beforehand: trends and stated errors of levels.
fn fixed(
    predicted: &Predicted,
    levels: &[f64],
    errors: &[f64],
    columns: &[Vec<f64>],
    allowed: &[f64],
) -> Matrix {
    let points = predicted.points.len();
    let mut covariance = Matrix::zeros(points, points);
    for (column, variance) in columns.iter().zip(allowed) {
        for i in 0..points {
            for j in 0..points {
                covariance[(i, j)] += variance * column[i] * column[j];
            }
        }
    }
    for (&level, &error) in levels.iter().zip(errors) {
        if error == 0.0 {
            continue;
        }
        let reach = 8.0 * predicted.span.width(level);
        let first = predicted.points.partition_point(|&k| k < level - reach);
        let last = predicted.points.partition_point(|&k| k <= level + reach);
        let slopes: Vec<f64> = predicted.points[first..last]
            .iter()
            .map(|&k| error * predicted.span.step_slope(level, k))
            .collect();
        for (i, a) in slopes.iter().enumerate() {
            for (j, b) in slopes.iter().enumerate() {
                covariance[(first + i, first + j)] += a * b;
            }
        }
    }
    covariance
}
