//! The levels that a prediction is compared with, in k: from a list, or computed directly.

use super::direct::{self, Direct, Task};
use super::error::CommandError;
use super::limits::Plan;
use super::note::Note;
use super::options::Options;
use super::subject::{Subject, class_name};
use orbitsum::baseline::Weyl;
use orbitsum::levels::{ListColumn, read};
use orbitsum::solver::Window;
use orbitsum::system::{LevelUnit, Units};
use std::path::Path;

/// Relative accuracy of levels that are computed for a comparison: a millionth of a level at the thousandth one, far below the
/// error of any orbit sum.
const ACCURACY: f64 = 1e-8;
/// Standard deviations of the smoothing by which levels are computed beyond the window: the five that a comparison loses at
/// the end of its levels, and a little for rounding.
const BEYOND: f64 = 5.01;

/// Levels converted to k.
pub(super) struct GivenLevels {
    /// Levels in k, ascending.
    pub(super) k: Vec<f64>,
    /// The same levels in the unit of the system file.
    pub(super) values: Vec<f64>,
    /// Uncertainty of each level in k, where the list states it or they were computed.
    pub(super) errors: Option<Vec<f64>>,
    /// Width of each level in k (a resonance's), where the list states it.
    pub(super) widths: Option<Vec<f64>>,
    /// The unit that the numbers of the list were read in.
    pub(super) unit: Units,
    /// The k up to which nothing is missing.
    pub(super) end: f64,
    /// How they were found, where they were computed.
    pub(super) direct: Option<Direct>,
    /// How they were read or found.
    pub(super) notes: Vec<Note>,
}

/// Levels that may be missing at the beginning of a list before it is taken for one that begins in the middle: fluctuations
/// of the staircase stay well below.
const MISSING_AT_FIRST: f64 = 4.0;

impl GivenLevels {
    /// Reads and converts a list.
    pub(super) fn read(path: &Path, subject: &Subject) -> Result<Self, CommandError> {
        let list = read(path)?;
        let units = &subject.system.units;
        let own = units.column();
        let mut notes: Vec<Note> = list.notes.into_iter().map(Note::List).collect();
        let column = list.column.map_or(own, ListColumn::name);
        let unit = match list.column {
            None => *units,
            Some(column) if column.name() == own => *units,
            Some(ListColumn::WaveNumber) => Units::default(),
            // Files whose levels are wave numbers know no other energy than k^2.
            Some(ListColumn::Energy) if units.level == LevelUnit::Wavenumber => Units {
                level: LevelUnit::Energy,
                ..Units::default()
            },
            Some(column) => {
                return Err(CommandError::ListUnit {
                    path: path.to_owned(),
                    column: column.name(),
                    expected: own,
                });
            }
        };
        let k: Vec<f64> = list.values.iter().map(|&value| unit.k(value)).collect();
        let in_k = |spreads: &[f64]| spreads_in_k(&unit, &list.values, spreads);
        let errors = list.errors.as_deref().map(in_k);
        let widths = list.widths.as_deref().map(in_k);
        if column != own {
            notes.push(Note::Converted {
                from: column,
                to: own,
            });
        }
        if let Some(class) = &subject.class {
            notes.push(Note::ListOfClass {
                class: class_name(class),
            });
        }
        notes.extend(beginning(subject, &subject.weyl(), &k));
        Ok(Self {
            values: k.iter().map(|&k| units.value(k)).collect(),
            end: k.last().copied().unwrap_or(0.0),
            k,
            errors,
            widths,
            unit,
            direct: None,
            notes,
        })
    }

    /// Computes all levels that the window of a plan needs.
    pub(super) fn compute(
        subject: &Subject,
        plan: &Plan,
        options: &Options,
    ) -> Result<Self, CommandError> {
        let units = &subject.system.units;
        let task = Task {
            window: Window {
                from: 0.0,
                to: units.k(plan.window.to) + BEYOND * plan.width,
            },
            accuracy: ACCURACY,
            journal: None,
        };
        let solver = direct::solver(subject, task.accuracy)?;
        let computed = direct::compute(subject, &solver, &task, options)?;
        let k = computed.repeated();
        let errors = (computed.levels.levels.iter())
            .flat_map(|level| std::iter::repeat_n(level.error, level.multiplicity))
            .collect();
        let notes = (!computed.levels.complete).then(|| Note::NotComplete {
            found: computed.levels.found(),
            counted: computed.levels.counted,
        });
        Ok(Self {
            values: k.iter().map(|&k| units.value(k)).collect(),
            k,
            errors: Some(errors),
            widths: None,
            unit: *units,
            end: task.window.to,
            direct: Some(computed),
            notes: notes.into_iter().collect(),
        })
    }

    /// The last level in the file's unit.
    pub(super) fn last(&self) -> f64 {
        self.values.last().copied().unwrap_or(0.0)
    }
}

/// Errors or widths of levels, converted to k like the levels themselves: |dv| times dk/dv. At a level of 0 an energy has no
/// such slope; there it is the k of the spread itself.
fn spreads_in_k(unit: &Units, values: &[f64], spreads: &[f64]) -> Vec<f64> {
    values
        .iter()
        .zip(spreads)
        .map(|(&value, &spread)| {
            if value > 0.0 {
                spread * unit.derivative(value)
            } else {
                unit.k(spread)
            }
        })
        .collect()
}

/// A warning if levels are expected below the first one of the list.
fn beginning(subject: &Subject, weyl: &Weyl, k: &[f64]) -> Option<Note> {
    let first = *k.first()?;
    let below = weyl.count(first, 0.0) - 0.5;
    (first > 0.0 && below > MISSING_AT_FIRST).then(|| Note::ListBegins {
        first: subject.level(subject.system.units.value(first), 6),
        expected_below: below,
    })
}
