//! Table, summary and picture of a density.

use super::{Comparison, Findings};
use crate::command::answer::Answer;
use crate::command::completeness;
use crate::command::note::Note;
use crate::command::table::{Cell, Table};
use crate::command::text::{counted, listed, significant};
use orbitsum::report::{DensityCurves, density_picture};
use serde_json::{Value, json};

/// Rows of the table for people.
const SHOWN_ROWS: usize = 21;
/// Digits of an rms: it is a statistical figure.
const DIGITS: usize = 3;

/// Everything that `density` has to say.
pub(super) fn answer(findings: &Findings<'_>) -> Answer {
    let table = table(findings);
    let (completeness, mut notes) = completeness::of_search(findings.catalogue);
    let plan = findings.plan;
    notes.extend(plan.notes.iter().cloned());
    notes.extend(list_notes(findings));
    notes.extend(completeness::omissions(
        findings.subject,
        findings.catalogue,
        plan.middle,
        plan.width,
    ));
    Answer {
        name: "density",
        summary: summary(findings, &completeness),
        shown: table.thinned(SHOWN_ROWS),
        metadata: metadata(findings, &completeness),
        pictures: vec![("density.svg".into(), picture(findings))],
        more_tables: Vec::new(),
        obsolete: None,
        failure: findings
            .comparison
            .and_then(|comparison| comparison.given.direct.as_ref())
            .and_then(|direct| direct.failure(findings.subject)),
        table,
        notes,
    }
}

fn table(findings: &Findings<'_>) -> Table {
    let mut columns = vec![
        findings.subject.system.units.column(),
        "density_smooth",
        "density_orbits",
        "density",
        "staircase_smooth",
        "staircase_orbits",
        "staircase",
    ];
    if findings.comparison.is_some() {
        columns.extend(["density_levels", "staircase_levels", "residual"]);
    }
    let mut table = Table::new(&columns);
    let curves = findings.curves;
    for index in 0..curves.k.len() {
        let slope = curves.slope[index];
        let mut row: Vec<Cell> = vec![
            curves.at[index].into(),
            (curves.density_smooth[index] * slope).into(),
            (curves.orbits.density[index] * slope).into(),
            (curves.density(index) * slope).into(),
            curves.staircase_smooth[index].into(),
            curves.orbits.staircase[index].into(),
            curves.staircase(index).into(),
        ];
        if let Some(comparison) = findings.comparison {
            row.push((comparison.density[index] * slope).into());
            row.push(comparison.staircase[index].into());
            let residual = Some(comparison.residual[index]);
            row.push(
                residual
                    .filter(|_| comparison.counts(curves.k[index]))
                    .into(),
            );
        }
        table.push(row);
    }
    table
}

fn list_notes(findings: &Findings<'_>) -> Vec<Note> {
    let Some(comparison) = findings.comparison else {
        return Vec::new();
    };
    let subject = findings.subject;
    let mut notes = comparison.given.notes.clone();
    let end = subject.level(subject.system.units.value(comparison.given.end), 6);
    if comparison.size.points == 0 {
        notes.push(Note::ListTooShort { end });
    } else if comparison.size.cut > 0.0 {
        let used_to = subject.system.units.value(comparison.size.used_to);
        notes.push(Note::ListEnds {
            end,
            used_to: subject.level(used_to, 6),
        });
    }
    let counted: Vec<usize> = (0..comparison.residual.len())
        .filter(|&index| comparison.counts(findings.curves.k[index]))
        .collect();
    let size = |index: &usize| comparison.residual[*index].abs();
    let first = counted.iter().find(|index| size(index) > LARGE_RESIDUAL);
    let largest = counted.iter().max_by(|a, b| size(a).total_cmp(&size(b)));
    if let (Some(&first), Some(&largest)) = (first, largest) {
        notes.push(Note::LargeResidual {
            from: format!(
                "{} = {}",
                subject.system.units.column(),
                subject.level(findings.curves.at[first], 4)
            ),
            size: comparison.residual[largest],
        });
    }
    notes
}

/// A residual above this many levels is more than the error of a usable orbit sum: half of a missing level.
const LARGE_RESIDUAL: f64 = 0.5;

/// Name and value of what a comparison found, for people.
fn result_lines(comparison: &Comparison) -> Vec<(String, String)> {
    let rms = |value: Option<f64>| {
        value.map_or_else(
            || "nothing to compare".to_owned(),
            |value| format!("{} level", significant(value, DIGITS)),
        )
    };
    vec![
        (
            "levels".into(),
            match &comparison.given.direct {
                Some(direct) => format!("computed directly: {}", direct.completeness()),
                None => counted(
                    comparison.given.k.len(),
                    "level in the list",
                    "levels in the list",
                ),
            },
        ),
        (
            "rms before the orbits".into(),
            format!(
                "{} (smoothed staircase of the levels less smooth part)",
                rms(comparison.before.rms)
            ),
        ),
        (
            "rms residual".into(),
            format!("{} (less the orbit sum as well)", rms(comparison.size.rms)),
        ),
    ]
}

fn summary(findings: &Findings<'_>, completeness: &str) -> String {
    let catalogue = findings.catalogue;
    let orbits = [
        (catalogue.orbits.len(), "orbit", "orbits"),
        (
            catalogue.strips.len(),
            "strip of parallel orbits",
            "strips of parallel orbits",
        ),
        (
            catalogue.tori.families.len(),
            "family of tori",
            "families of tori, repetitions included",
        ),
    ];
    let found: Vec<String> = orbits
        .iter()
        .filter(|(count, ..)| *count > 0)
        .map(|&(count, one, many)| counted(count, one, many))
        .collect();
    let found = if found.is_empty() {
        "no orbits".to_owned()
    } else {
        found.join(", ")
    };
    let mut lines = vec![(
        "orbit sum".to_owned(),
        format!(
            "{found}; {} with repetitions",
            counted(findings.terms, "term", "terms")
        ),
    )];
    let plan = findings.plan;
    lines.push((
        "mean spacing".into(),
        format!(
            "{} at the middle of the window",
            findings.subject.level(
                plan.spacing * plan.width_in_units(findings.subject) / plan.width,
                4
            )
        ),
    ));
    if let Some(comparison) = findings.comparison {
        lines.extend(result_lines(comparison));
    }
    let mut all = plan.choices.clone();
    all.extend(lines);
    format!(
        "{}{}{completeness}\n",
        findings.subject.heading(),
        listed(&all)
    )
}

fn metadata(findings: &Findings<'_>, completeness: &str) -> serde_json::Map<String, Value> {
    let (subject, plan) = (findings.subject, findings.plan);
    let mut map = subject.metadata("density");
    map.insert(
        "window".into(),
        json!({ "from": plan.window.from, "to": plan.window.to }),
    );
    map.insert(
        "smoothing".into(),
        json!({
            "spacings": plan.width / plan.spacing,
            "width": plan.width_in_units(subject),
            "width_in_k": plan.width,
            "middle_in_k": plan.middle,
        }),
    );
    map.insert("max_length".into(), plan.limits.max_length.into());
    map.insert("max_bounces".into(), plan.limits.max_bounces.into());
    map.insert("terms".into(), findings.terms.into());
    map.insert("completeness".into(), completeness.into());
    let choices: serde_json::Map<String, Value> = plan
        .choices
        .iter()
        .map(|(name, why)| (name.replace(' ', "_"), why.as_str().into()))
        .collect();
    map.insert("choices".into(), choices.into());
    if let Some(comparison) = findings.comparison {
        map.insert(
            "levels".into(),
            json!({
                "count": comparison.given.k.len(),
                "direct": comparison.given.direct.as_ref().map(|direct| json!({
                    "counted": direct.levels.counted,
                    "complete": direct.levels.complete,
                })),
                "used_to": subject.system.units.value(comparison.size.used_to.max(0.0)),
                "residual_rms": comparison.size.rms,
                "fluctuation_rms": comparison.before.rms,
                "points": comparison.size.points,
            }),
        );
    }
    map
}

fn picture(findings: &Findings<'_>) -> String {
    let (subject, curves) = (findings.subject, findings.curves);
    let scaled = |density: &dyn Fn(usize) -> f64| -> Vec<f64> {
        (0..curves.k.len())
            .map(|index| density(index) * curves.slope[index])
            .collect()
    };
    let density_smooth = scaled(&|index| curves.density_smooth[index]);
    let density = scaled(&|index| curves.density(index));
    let of_levels = findings.comparison.map(|comparison| {
        let counts = |index: usize, value: f64| {
            if comparison.counts(curves.k[index]) {
                value
            } else {
                f64::NAN
            }
        };
        let density = scaled(&|index| counts(index, comparison.density[index]));
        let fluctuation: Vec<f64> = (0..curves.k.len())
            .map(|index| {
                counts(
                    index,
                    comparison.staircase[index] - curves.staircase_smooth[index],
                )
            })
            .collect();
        let residual: Vec<f64> = (0..curves.k.len())
            .map(|index| counts(index, comparison.residual[index]))
            .collect();
        (density, fluctuation, residual)
    });
    let unit = subject.system.units.level_label();
    let title = subject.title();
    let captions = captions(findings);
    density_picture(&DensityCurves {
        title: &title,
        variable: subject.system.units.column(),
        unit: Some(unit.as_str()).filter(|unit| !unit.is_empty()),
        x: &curves.at,
        density_smooth: &density_smooth,
        density: &density,
        density_levels: of_levels.as_ref().map(|(density, ..)| density.as_slice()),
        staircase_fluctuation_orbits: &curves.orbits.staircase,
        staircase_fluctuation_levels: of_levels
            .as_ref()
            .map(|(_, fluctuation, _)| fluctuation.as_slice()),
        levels: findings
            .comparison
            .map(|comparison| comparison.given.values.as_slice()),
        residual: of_levels.as_ref().map(|(.., residual)| residual.as_slice()),
        residual_rms: findings
            .comparison
            .and_then(|comparison| comparison.size.rms),
        captions: &captions,
    })
}

/// What is written below the picture.
fn captions(findings: &Findings<'_>) -> Vec<String> {
    let plan = findings.plan;
    let mut captions = vec![format!(
        "Smoothed with a Gaussian of standard deviation {} ({} mean spacings at the middle); orbits up to length {} and {}.",
        findings
            .subject
            .level(plan.width_in_units(findings.subject), DIGITS),
        significant(plan.width / plan.spacing, DIGITS),
        findings.subject.length(plan.limits.max_length, DIGITS),
        counted(plan.limits.max_bounces, "bounce", "bounces"),
    )];
    if let Some(comparison) = findings.comparison
        && let (Some(before), Some(after)) = (comparison.before.rms, comparison.size.rms)
    {
        captions.push(format!(
            "Staircase of the levels less smooth part: rms {}; less orbit sum as well: rms {} level.",
            significant(before, DIGITS),
            significant(after, DIGITS)
        ));
    }
    captions
}
