//! The list of levels that a prediction is compared with, in k.

use crate::command::error::CommandError;
use crate::command::note::Note;
use crate::command::subject::{Subject, class_name};
use orbitsum::baseline::Weyl;
use orbitsum::levels::{ListColumn, read};
use orbitsum::system::LevelUnit;
use std::path::Path;

/// A list converted to k.
pub(super) struct GivenLevels {
    /// Levels in k, ascending.
    pub(super) k: Vec<f64>,
    /// The same levels in the unit of the system file.
    pub(super) values: Vec<f64>,
    /// How it was read.
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
        let k: Vec<f64> = match list.column {
            None => list.values.iter().map(|&value| units.k(value)).collect(),
            Some(column) if column.name() == own => {
                list.values.iter().map(|&value| units.k(value)).collect()
            }
            Some(ListColumn::WaveNumber) => list.values,
            // Files whose levels are wave numbers know no other energy than k^2.
            Some(ListColumn::Energy) if units.level == LevelUnit::Wavenumber => {
                list.values.iter().map(|value| value.sqrt()).collect()
            }
            Some(column) => {
                return Err(CommandError::ListUnit {
                    path: path.to_owned(),
                    column: column.name(),
                    expected: own,
                });
            }
        };
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
            k,
            notes,
        })
    }

    /// The last level in the file's unit.
    pub(super) fn last(&self) -> f64 {
        self.values.last().copied().unwrap_or(0.0)
    }
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
