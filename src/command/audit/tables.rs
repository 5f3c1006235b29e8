//! Tables of an audit: events, and the certificate.

use super::Audited;
use super::corrected::spread;
use super::sentence::listed;
use crate::command::table::Table;
use crate::command::text::{significant, with_error};
use orbitsum::levels::audit::{Fault, FaultKind, Part};
use serde_json::{Value, json};

/// Digits of the ends of windows: a window is as wide as three errors, or a mean spacing.
const WINDOW_DIGITS: usize = 6;
/// Digits of listed levels.
const LISTED_DIGITS: usize = 9;
/// Rows of the certificate for people; more are joined by twos.
const SHOWN_PARTS: usize = 12;

/// The columns of events as the file's levels name them.
fn columns(variable: &str) -> [&'static str; 8] {
    let (at, error, listed) = match variable {
        "energy" => ("energy", "energy_error", "listed_energy"),
        "frequency" => ("frequency", "frequency_error", "listed_frequency"),
        _ => ("k", "k_error", "listed_k"),
    };
    [
        "kind",
        at,
        error,
        "spacings_error",
        "confidence",
        "count",
        "listed_n",
        listed,
    ]
}

/// All events, as scripts read them.
pub(super) fn events(audited: &Audited<'_>) -> Table {
    let (subject, units) = (audited.subject, &audited.subject.system.units);
    let mut table = Table::new(&columns(units.column()));
    for fault in &audited.findings.faults {
        let listed = listed(audited, fault);
        table.push(vec![
            fault.kind.word().into(),
            units.value(fault.k).into(),
            spread(subject, fault.k, fault.k_error).into(),
            fault.spacings_error.into(),
            fault.confidence.into(),
            fault.count.into(),
            listed.map(|(number, _)| number).into(),
            listed.map(|(_, value)| value).into(),
        ]);
    }
    table
}

/// The events with the windows to search again, for people.
pub(super) fn shown(audited: &Audited<'_>) -> Table {
    let (subject, units) = (audited.subject, &audited.subject.system.units);
    let mut table = Table::new(&[
        "kind",
        units.column(),
        "spacings_error",
        "confidence",
        "count",
        "listed",
        "search again",
    ]);
    for fault in &audited.findings.faults {
        let place = match fault.kind {
            // A false level is where it is listed.
            FaultKind::False => significant(units.value(fault.k), LISTED_DIGITS),
            _ => with_error(
                units.value(fault.k),
                spread(subject, fault.k, fault.k_error),
            ),
        };
        let listed = listed(audited, fault).map(|(number, value)| {
            format!("{} (number {number})", significant(value, LISTED_DIGITS))
        });
        let [from, to] = fault.window.map(|k| units.value(k));
        table.push(vec![
            fault.kind.word().into(),
            place.into(),
            significant(fault.spacings_error, 2).into(),
            certainty(fault.confidence).into(),
            fault.count.into(),
            listed.unwrap_or_else(|| "-".into()).into(),
            format!(
                "{} to {}",
                significant(from, WINDOW_DIGITS),
                significant(to, WINDOW_DIGITS)
            )
            .into(),
        ]);
    }
    table
}

/// A probability that is not rounded up to one.
fn certainty(confidence: f64) -> String {
    match confidence {
        high if high > 0.9995 => "> 0.999".into(),
        confidence => significant(confidence, 3),
    }
}

/// A fault with everything that is known of it.
pub(super) fn fault_json(audited: &Audited<'_>, fault: &Fault) -> Value {
    let (subject, units) = (audited.subject, &audited.subject.system.units);
    let [_, at, error, ..] = columns(units.column());
    let listed = listed(audited, fault);
    let [from, to] = fault.window.map(|k| units.value(k));
    json!({
        "kind": fault.kind.word(),
        at: units.value(fault.k),
        error: spread(subject, fault.k, fault.k_error),
        "spacings_error": fault.spacings_error,
        "confidence": fault.confidence,
        "count": fault.count,
        "listed_n": listed.map(|(number, _)| number),
        format!("listed_{at}"): listed.map(|(_, value)| value),
        "window": { "from": from, "to": to },
    })
}

/// Bounds on the number of levels in parts of the list, in words.
pub(super) fn certificate(audited: &Audited<'_>) -> Option<String> {
    let units = &audited.subject.system.units;
    let parts = &audited.findings.parts;
    let (first, last) = (parts.first()?, parts.last()?);
    let heading = "certificate (bounds from the mean of the residual; semiclassical, not rigorous)";
    if parts.iter().all(is_exact) {
        return Some(format!(
            "{heading}:\n{} from {} to {} hold exactly as many levels as are listed\n",
            if parts.len() == 1 {
                format!("the part of {}", units.column())
            } else {
                format!("all {} parts of {}", parts.len(), units.column())
            },
            significant(units.value(first.from), WINDOW_DIGITS),
            audited.subject.level(units.value(last.to), WINDOW_DIGITS),
        ));
    }
    let mut table = Table::new(&["from", "to", "listed", "least", "most"]);
    let joined = parts.len().div_ceil(SHOWN_PARTS);
    for parts in runs(parts, joined) {
        let number = |value: f64| significant(units.value(value), WINDOW_DIGITS).into();
        table.push(vec![
            number(parts.from),
            number(parts.to),
            parts.listed.into(),
            parts.least.into(),
            parts.most.into(),
        ]);
    }
    Some(format!("{heading}:\n{}", table.aligned()))
}

fn is_exact(part: &Part) -> bool {
    part.least == part.listed && part.most == part.listed
}

/// Parts that are told together: neighbours that are exact make one, the others stay by themselves unless there are too many.
fn runs(parts: &[Part], joined: usize) -> Vec<Part> {
    let mut told: Vec<Part> = Vec::new();
    let mut length = 0;
    for part in parts {
        match told.last_mut() {
            Some(last) if (is_exact(last) && is_exact(part)) || length < joined => {
                last.to = part.to;
                last.listed += part.listed;
                last.least += part.least;
                last.most += part.most;
                length += 1;
            }
            _ => {
                told.push(*part);
                length = 1;
            }
        }
    }
    told
}

pub(super) fn parts_json(audited: &Audited<'_>) -> Value {
    let units = &audited.subject.system.units;
    let part = |part: &Part| {
        json!({
            "from": units.value(part.from),
            "to": units.value(part.to),
            "listed": part.listed,
            "least": part.least,
            "most": part.most,
        })
    };
    audited.findings.parts.iter().map(part).collect()
}
