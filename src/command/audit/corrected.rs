//! The corrected list in the file's unit.

use super::Audited;
use crate::command::subject::Subject;
use crate::command::table::{Cell, Table};
use crate::command::text::to_error;
use orbitsum::levels::audit::Corrected;

/// Significant digits of a listed level: all that survive the way to k and back.
const LISTED_DIGITS: i32 = 14;

/// Every level with its error, and whether it is an estimate. What lies outside the audited window is as in the list.
pub(super) fn table(audited: &Audited<'_>) -> Table {
    let (subject, given, part) = (audited.subject, audited.given, audited.part);
    let column = subject.system.units.column();
    let mut table = Table::new(&[column, "error", "estimated"]);
    let listed = |range: std::ops::Range<usize>| {
        range.map(|index| Corrected {
            k: given.k[index],
            error: given.errors.as_ref().map(|errors| errors[index]),
            estimated: false,
        })
    };
    let after = part.before + part.levels.len();
    let levels = listed(0..part.before)
        .chain(audited.findings.corrected.iter().copied())
        .chain(listed(after..given.k.len()));
    for level in levels {
        table.push(row(subject, &level));
    }
    // Only what is in it: a list without errors and without estimates has no column of them.
    if table.rows.iter().all(|row| row[1] == Cell::Empty) {
        table.columns.remove(1);
        for row in &mut table.rows {
            row.remove(1);
        }
    } else {
        // A level without an error among others with one is taken as exact.
        for row in &mut table.rows {
            if row[1] == Cell::Empty {
                row[1] = Cell::Number(0.0);
            }
        }
    }
    table
}

fn row(subject: &Subject, level: &Corrected) -> Vec<Cell> {
    let value = subject.system.units.value(level.k);
    let error = level.error.map(|error| spread(subject, level.k, error));
    let digits = |number: f64| match error {
        Some(error) if level.estimated => to_error(number, error),
        _ => rounded(number),
    };
    vec![
        digits(value).into(),
        error.map(digits).into(),
        usize::from(level.estimated).into(),
    ]
}

/// A standard deviation in the file's unit from one in k: that over dk/d(value).
pub(super) fn spread(subject: &Subject, k: f64, error: f64) -> f64 {
    let units = &subject.system.units;
    if k > 0.0 {
        error / units.derivative(units.value(k))
    } else {
        units.error(0.0, error)
    }
}

/// Without the rounding of the last digits.
fn rounded(value: f64) -> f64 {
    format!("{value:.*e}", (LISTED_DIGITS - 1) as usize)
        .parse()
        .unwrap_or(value)
}
