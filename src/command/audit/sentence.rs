//! What was found, in a sentence.

use super::Audited;
use super::corrected::spread;
use super::fit::Parameter;
use crate::command::text::{counted, significant, to_error, with_error};
use orbitsum::levels::audit::{Fault, FaultKind, Measured, Measures, Trend, TrendKind, Verdict};

/// Places of one kind that are named; the table has all.
const NAMED: usize = 6;
/// Digits of listed levels.
const LISTED_DIGITS: usize = 9;
/// Standard deviations within which a measure agrees.
const AGREES: f64 = 3.0;
/// Smallest part by which measures are said to agree or not: finer is below the error of any Weyl expansion.
const LEAST_PART: f64 = 1e-6;

/// The whole sentence: `2 of 312 levels are missing: near k = 31.42 +- 0.03 and 40.17 +- 0.02; 1 is false: 44.7121 (number 301); ...`.
pub(super) fn sentence(audited: &Audited<'_>) -> String {
    let findings = audited.findings;
    let mut parts: Vec<String> = audited.fitted.iter().map(Parameter::words).collect();
    if findings.verdict == Verdict::Foreign {
        parts.push("the list is not one of this shape, or not one that its orbits describe: what follows means nothing".to_owned());
        return parts.join("; ");
    }
    parts.extend(fault_parts(audited));
    if findings.faults.is_empty() && findings.verdict == Verdict::Audited {
        let levels = counted(audited.part.levels.len(), "level", "levels");
        parts.push(match findings.trend.kind {
            TrendKind::None => format!("nothing is wrong with the {levels}"),
            _ => format!("none of the {levels} is false, and none is missing"),
        });
    }
    if findings.below > 0 {
        parts.push(format!(
            "{} below the first one of the list",
            counted(findings.below, "level lies", "levels lie")
        ));
    }
    parts.push(trend_words(audited, &findings.trend));
    if let Some(measures) = &findings.measures {
        parts.push(measure_words(audited, measures));
    }
    parts.join("; ")
}

/// What a strict audit counts, if there is anything.
pub(super) fn found(audited: &Audited<'_>) -> Option<String> {
    let findings = audited.findings;
    let mut parts = Vec::new();
    for kind in KINDS {
        let count = total(&of_kind(&findings.faults, kind));
        if count > 0 {
            parts.push(counted(
                count,
                &format!("{} level", kind.word()),
                &format!("{} levels", kind.word()),
            ));
        }
    }
    parts.extend(audited.fitted.iter().filter_map(Parameter::difference));
    match findings.trend.kind {
        TrendKind::None => {}
        TrendKind::Drift => parts.push("a drift".to_owned()),
        TrendKind::Geometry => parts.push("another geometry".to_owned()),
    }
    if findings.verdict == Verdict::Foreign {
        parts.push("a list of another shape".to_owned());
    }
    (!parts.is_empty()).then(|| format!("the audit found {}", and(&parts)))
}

/// A fault in a few words, for notes: `missing near k = 31.42 +- 0.03 (0.62)`.
pub(super) fn suspicion(audited: &Audited<'_>, fault: &Fault) -> String {
    format!(
        "{} {} ({})",
        fault.kind.word(),
        place(audited, fault),
        significant(fault.confidence, 2)
    )
}

pub(super) const KINDS: [FaultKind; 4] = [
    FaultKind::Missing,
    FaultKind::False,
    FaultKind::Shifted,
    FaultKind::Unresolved,
];

pub(super) fn of_kind(faults: &[Fault], kind: FaultKind) -> Vec<&Fault> {
    faults.iter().filter(|fault| fault.kind == kind).collect()
}

/// Levels that faults stand for.
pub(super) fn total(faults: &[&Fault]) -> usize {
    faults.iter().map(|fault| fault.count).sum()
}

/// `and` between the last two.
pub(super) fn and(parts: &[String]) -> String {
    match parts {
        [] => String::new(),
        [one] => one.clone(),
        [many @ .., last] => format!("{} and {last}", many.join(", ")),
    }
}

fn fault_parts(audited: &Audited<'_>) -> Vec<String> {
    let faults = &audited.findings.faults;
    let mut parts = Vec::new();
    for kind in KINDS {
        let found = of_kind(faults, kind);
        if found.is_empty() {
            continue;
        }
        let count = total(&found);
        let verb = if count == 1 { "is" } else { "are" };
        let head = match (kind, parts.is_empty()) {
            (FaultKind::Missing, _) => {
                let levels = audited.findings.corrected.len();
                let word = if levels == 1 { "level" } else { "levels" };
                format!("{count} of {levels} {word} {verb} missing")
            }
            (_, true) => {
                let levels = counted(audited.part.levels.len(), "listed level", "listed levels");
                format!("{count} of {levels} {verb} {}", kind.word())
            }
            (_, false) => format!("{count} {verb} {}", kind.word()),
        };
        parts.push(format!("{head}: {}", places(audited, &found)));
    }
    parts
}

/// The places of faults of one kind.
fn places(audited: &Audited<'_>, faults: &[&Fault]) -> String {
    let name = |(index, fault): (usize, &&Fault)| {
        let words = place(audited, fault);
        // The variable is named once.
        match words.strip_prefix(&near(audited)) {
            Some(value) if index > 0 => value.to_owned(),
            _ => words,
        }
    };
    let mut parts: Vec<String> = faults.iter().enumerate().take(NAMED).map(name).collect();
    if faults.len() > NAMED {
        parts.push(format!("{} more (see the table)", faults.len() - NAMED));
    }
    and(&parts)
}

fn near(audited: &Audited<'_>) -> String {
    format!("near {} = ", audited.subject.system.units.column())
}

fn place(audited: &Audited<'_>, fault: &Fault) -> String {
    let units = &audited.subject.system.units;
    let error = spread(audited.subject, fault.k, fault.k_error);
    let at = label(audited, with_error(units.value(fault.k), error));
    let value_of = |value: f64| label(audited, significant(value, LISTED_DIGITS));
    match (fault.kind, listed(audited, fault)) {
        (FaultKind::False, Some((number, value))) => {
            format!("{} (number {number})", value_of(value))
        }
        (FaultKind::Shifted, Some((number, value))) => format!(
            "{} (number {number}), which belongs {}{at}",
            value_of(value),
            near(audited),
        ),
        (FaultKind::Unresolved, Some((number, value))) => {
            format!("{} (number {number}) stands for two", value_of(value))
        }
        _ => {
            let times = match fault.count {
                1 => String::new(),
                count => format!(" ({count} levels)"),
            };
            format!("{}{at}{times}", near(audited))
        }
    }
}

/// A number with the unit of levels.
fn label(audited: &Audited<'_>, number: String) -> String {
    match audited.subject.system.units.level_label() {
        unit if unit.is_empty() => number,
        unit => format!("{number} {unit}"),
    }
}

/// Number and value of the listed level that a fault is about.
pub(super) fn listed(audited: &Audited<'_>, fault: &Fault) -> Option<(usize, f64)> {
    let number = audited.part.before + fault.listed?;
    let value = audited.given.values.get(number.checked_sub(1)?)?;
    Some((number, *value))
}

fn trend_words(audited: &Audited<'_>, trend: &Trend) -> String {
    match trend.kind {
        TrendKind::None => "no drift".to_owned(),
        TrendKind::Drift => {
            let from = match trend.noticed_from {
                Some(k) => {
                    let units = &audited.subject.system.units;
                    format!(
                        "levels above {} = {} lie",
                        units.column(),
                        audited.subject.level(units.value(k), 3)
                    )
                }
                None => "levels lie".to_owned(),
            };
            let lost = trend.at_end.round();
            let left = if lost >= 1.0 {
                format!(
                    ", so that {} of the levels that belong below the last one {} above it, not in the list",
                    significant(lost, 3),
                    if lost > 1.0 { "lie" } else { "lies" }
                )
            } else {
                String::new()
            };
            format!(
                "drift: {from} too {}, the last one by {} mean spacings{left} (levels times 1 {} {} (k/last)^{})",
                if trend.at_end >= 0.0 { "high" } else { "low" },
                significant(trend.at_end.abs(), 2),
                if trend.factor >= 0.0 { "+" } else { "-" },
                with_error(trend.factor.abs(), trend.factor_error),
                significant(trend.power, 3)
            )
        }
        TrendKind::Geometry => {
            "the list comes from another geometry than the one in the file".to_owned()
        }
    }
}

fn measure_words(audited: &Audited<'_>, measures: &Measures) -> String {
    let other = audited.findings.trend.kind == TrendKind::Geometry;
    let mut words = vec![compared("area", &measures.area)];
    if other || !agrees(&measures.perimeter) {
        words.push(compared("perimeter", &measures.perimeter));
    }
    if other {
        words.push(format!(
            "it fits best with all lengths times {}",
            with_error(measures.scale.list, measures.scale.error)
        ));
    }
    words.join(", ")
}

fn agrees(measured: &Measured) -> bool {
    (measured.list - measured.file).abs() <= AGREES * measured.error
}

/// `area agrees within 0.1 %`, or the two values.
fn compared(name: &str, measured: &Measured) -> String {
    let size = measured.file.abs().max(f64::MIN_POSITIVE);
    let off = measured.list - measured.file;
    if agrees(measured) {
        let within = off.abs().max(measured.error) / size;
        return format!(
            "{name} agrees within {} %",
            significant(100.0 * within.max(LEAST_PART), 1)
        );
    }
    format!(
        "{name} {} by the list and {} by the file",
        with_error(measured.list, measured.error),
        significant(to_error(measured.file, 0.1 * measured.error), 8)
    )
}
