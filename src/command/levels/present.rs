//! Table, summary and picture of computed levels.

use super::Findings;
use crate::command::answer::Answer;
use crate::command::note::Note;
use crate::command::table::{Cell, Table};
use crate::command::text::{listed, significant, with_unit};
use orbitsum::billiard::is_rotationally_invariant;
use orbitsum::levels::staircase;
use orbitsum::report::{LevelCurves, levels_picture};
use orbitsum::solver::Level;
use orbitsum::system::LevelUnit;
use serde_json::{Map, Value, json};

/// Rows of the table for people.
const SHOWN_ROWS: usize = 40;
/// Digits of a level in the table for people: as many as its error leaves it, within these.
const FEWEST_DIGITS: f64 = 4.0;
const MOST_DIGITS: f64 = 15.0;
/// Standard deviation of the Gaussian of the picture, in mean spacings at the middle of the window.
const SMOOTHING: f64 = 2.0;
/// Distance in standard deviations at which a Gaussian has ended.
const REACH: f64 = 5.0;
/// Points of the smoothed curve of the picture: three per point of print.
const POINTS: usize = 1500;

/// Everything that `levels` has to say.
pub(super) fn answer(findings: &Findings<'_>) -> Answer {
    let (table, shown) = tables(findings);
    Answer {
        name: "levels",
        summary: summary(findings),
        notes: notes(findings, shown.rows.len()),
        metadata: metadata(findings),
        pictures: vec![("levels.svg".into(), picture(findings))],
        more_tables: Vec::new(),
        obsolete: findings.task.journal.clone(),
        failure: findings.computed.failure(findings.subject),
        shown,
        table,
    }
}

/// All rows in full, and the first ones for people.
fn tables(findings: &Findings<'_>) -> (Table, Table) {
    let units = &findings.subject.system.units;
    // Energies in units of their own are k^2 only for files whose levels are wave numbers.
    let with_energy = units.level == LevelUnit::Wavenumber;
    let mut columns = vec!["n", units.column()];
    if with_energy {
        columns.push("energy");
    }
    columns.extend(["error", "multiplicity"]);
    let (mut table, mut shown) = (Table::new(&columns), Table::new(&columns));
    let mut number = findings.computed.levels.first;
    for level in &findings.computed.levels.levels {
        let (value, error) = (units.value(level.k), units.error(level.k, level.error));
        let row = |cell: &dyn Fn(f64) -> Cell, error: Cell| {
            let mut row = vec![number.into(), cell(value)];
            if with_energy {
                row.push(cell(level.k * level.k));
            }
            row.extend([error, level.multiplicity.into()]);
            row
        };
        table.push(row(&|value| value.into(), error.into()));
        if shown.rows.len() < SHOWN_ROWS {
            let digits = digits(level);
            shown.push(row(
                &|value| significant(value, digits).into(),
                significant(error, 2).into(),
            ));
        }
        number += level.multiplicity;
    }
    (table, shown)
}

/// Digits that the error of a level leaves it.
fn digits(level: &Level) -> usize {
    let digits = (level.k / level.error).log10().ceil();
    // A level without error, such as k = 0, has all of them.
    if digits.is_nan() {
        MOST_DIGITS as usize
    } else {
        digits.clamp(FEWEST_DIGITS, MOST_DIGITS) as usize
    }
}

/// The largest error, in the file's unit.
fn largest_error(findings: &Findings<'_>) -> f64 {
    let units = &findings.subject.system.units;
    let levels = &findings.computed.levels.levels;
    levels
        .iter()
        .map(|level| units.error(level.k, level.error))
        .fold(0.0, f64::max)
}

fn summary(findings: &Findings<'_>) -> String {
    let subject = findings.subject;
    let levels = &findings.computed.levels;
    let mut lines = vec![
        ("window".to_owned(), findings.asked.words(subject)),
        ("levels".into(), findings.computed.completeness()),
        (
            "first level".into(),
            format!("number {} (by inertia)", levels.first),
        ),
        (
            "largest error".into(),
            format!(
                "{} (accuracy aimed at: {} of k)",
                with_unit(
                    largest_error(findings),
                    2,
                    &subject.system.units.level_label()
                ),
                significant(findings.task.accuracy, 2)
            ),
        ),
    ];
    if let Some(check) = &findings.check {
        lines.push(("less smooth count".into(), check.words(subject)));
    }
    if let (Some(first), Some(last)) = (findings.waves.first(), findings.waves.last()) {
        lines.push(("waves".into(), format!("{first} to {last}")));
    }
    format!("{}{}", subject.heading(), listed(&lines))
}

fn notes(findings: &Findings<'_>, shown: usize) -> Vec<Note> {
    let subject = findings.subject;
    let levels = &findings.computed.levels;
    let mut notes = Vec::new();
    if levels.unresolved > 0 {
        notes.push(Note::Unresolved {
            pairs: levels.unresolved,
        });
    }
    // Rotations by any angle force pairs, which no finite group that the solver works with knows of.
    let turned = if is_rotationally_invariant(&subject.system.domain) {
        2
    } else {
        1
    };
    let degenerate: Vec<&Level> = levels
        .levels
        .iter()
        .filter(|level| level.multiplicity > level.forced.max(turned))
        .collect();
    if let Some(first) = degenerate.first() {
        let units = &subject.system.units;
        let error = degenerate
            .iter()
            .map(|level| units.error(level.k, level.error))
            .fold(0.0, f64::max);
        notes.push(Note::Degenerate {
            levels: degenerate.len(),
            first: format!(
                "at {} = {}",
                units.column(),
                subject.level(units.value(first.k), 8)
            ),
            error: subject.level(error, 2),
        });
    }
    notes.extend(findings.check.as_ref().and_then(super::SecondCheck::note));
    notes.extend(
        subject
            .system
            .units
            .warning(findings.asked.to)
            .map(Note::NotFlat),
    );
    if shown < levels.levels.len() {
        notes.push(Note::MoreRows {
            which: "lowest rows",
            shown,
            all: levels.levels.len(),
        });
    }
    notes
}

fn metadata(findings: &Findings<'_>) -> Map<String, Value> {
    let (subject, levels) = (findings.subject, &findings.computed.levels);
    let mut map = subject.metadata("levels");
    map.insert(
        "window".into(),
        json!({ "from": findings.asked.from, "to": findings.asked.to }),
    );
    map.insert("accuracy".into(), findings.task.accuracy.into());
    map.insert(
        "completeness".into(),
        json!({
            "first": levels.first,
            "found": levels.found(),
            "counted": levels.counted,
            "complete": levels.complete,
            "windows": findings.computed.windows.len(),
            "unresolved_pairs": levels.unresolved,
        }),
    );
    if let Some(check) = &findings.check {
        map.insert(
            "less_smooth_count".into(),
            json!({
                "mean": check.mean,
                "expected_rms": check.expected,
                "from": subject.system.units.value(check.from),
            }),
        );
    }
    map
}

/// The staircase less the smooth count, as it is and smoothed.
fn picture(findings: &Findings<'_>) -> String {
    let subject = findings.subject;
    let units = &subject.system.units;
    let levels = &findings.computed.levels;
    let weyl = subject.weyl();
    let found = findings.computed.repeated();
    let below = levels.first.saturating_sub(1) as f64;
    let (mut x, mut steps) = (Vec::new(), Vec::new());
    let mut count = below;
    let mut step = |k: f64, count: f64| {
        x.push(units.value(k));
        steps.push(count - weyl.count(k, 0.0));
    };
    let lowest = findings
        .check
        .as_ref()
        .map_or(levels.to, |check| check.from);
    step(
        lowest,
        below + found.partition_point(|k| *k < lowest) as f64,
    );
    for level in &levels.levels {
        if level.k > lowest {
            step(level.k, count);
            step(level.k, count + level.multiplicity as f64);
        }
        count += level.multiplicity as f64;
    }
    step(levels.to, count);
    let width = SMOOTHING * weyl.mean_spacing(0.5 * (lowest + levels.to));
    let from = if levels.from > 0.0 {
        lowest.max(levels.from + REACH * width)
    } else {
        lowest
    };
    let to = levels.to - REACH * width;
    let k: Vec<f64> = if from < to {
        (0..POINTS)
            .map(|index| from + (to - from) * index as f64 / (POINTS - 1) as f64)
            .collect()
    } else {
        Vec::new()
    };
    let smoothed: Vec<f64> = staircase(&found, &k, width)
        .iter()
        .zip(&k)
        .map(|(levels, &k)| below + levels - weyl.count(k, width))
        .collect();
    let at: Vec<f64> = k.iter().map(|&k| units.value(k)).collect();
    let values: Vec<f64> = found.iter().map(|&k| units.value(k)).collect();
    let unit = units.level_label();
    let mut captions = vec![format!("{}.", findings.computed.completeness())];
    captions.extend(
        findings
            .check
            .as_ref()
            .map(|check| format!("Staircase less smooth count: {}.", check.words(subject))),
    );
    levels_picture(&LevelCurves {
        title: &subject.title(),
        variable: units.column(),
        unit: Some(unit.as_str()).filter(|unit| !unit.is_empty()),
        steps: (&x, &steps),
        smoothed: (&at, &smoothed),
        smoothing: SMOOTHING,
        levels: &values,
        captions: &captions,
    })
}
