//! Summary, files and picture of an audit.

use super::corrected::spread;
use super::fit::Parameter;
use super::sentence::{KINDS, and, found, of_kind, sentence, suspicion, total};
use super::{Audited, corrected, tables};
use crate::command::answer::Answer;
use crate::command::completeness;
use crate::command::error::CommandError;
use crate::command::note::Note;
use crate::command::text::{listed, significant, to_error};
use orbitsum::levels::audit::{FINDING, Fault, FaultKind, Measured, Verdict};
use orbitsum::report::{AuditCurves, AuditMark, AuditMarkKind, audit_picture};
use serde_json::{Map, Value, json};

/// Digits of numbers for people.
const DIGITS: usize = 3;
/// Digits of the ends of ranges.
const RANGE_DIGITS: usize = 4;
/// Digits of places in the picture.
const LABEL_DIGITS: usize = 7;
/// Suspicions that are named; the file has all.
const NAMED: usize = 5;

/// Everything that `audit` has to say.
pub(super) fn answer(audited: &Audited<'_>) -> Answer {
    let (completeness, mut notes) = completeness::of_search(audited.catalogue);
    notes.extend(audited.plan.notes.iter().cloned());
    notes.extend(list_notes(audited));
    notes.extend(finding_notes(audited));
    notes.extend(audited.measured.note());
    notes.extend(completeness::omissions(
        audited.subject,
        audited.catalogue,
        audited.plan.middle,
        audited.findings.smoothing,
    ));
    let sentence = sentence(audited);
    let mut pictures = vec![("audit.svg".to_owned(), picture(audited, &sentence))];
    pictures.extend(
        audited
            .measured
            .picture(audited.subject)
            .map(|picture| ("audit-statistics.svg".to_owned(), picture)),
    );
    let failure = found(audited)
        .filter(|_| audited.strict)
        .map(|found| CommandError::AuditFound { found });
    Answer {
        name: "audit",
        summary: summary(audited, &sentence, &completeness),
        shown: tables::shown(audited),
        table: tables::events(audited),
        more_tables: vec![("corrected", corrected::table(audited))],
        metadata: metadata(audited, &sentence, &completeness),
        notes,
        pictures,
        obsolete: None,
        failure,
    }
}

/// Notes about the list; that it begins late is no fault here.
fn list_notes(audited: &Audited<'_>) -> Vec<Note> {
    audited
        .given
        .notes
        .iter()
        .filter(|note| !matches!(note, Note::ListBegins { .. }))
        .cloned()
        .collect()
}

fn finding_notes(audited: &Audited<'_>) -> Vec<Note> {
    let mut notes = Vec::new();
    match &audited.findings.verdict {
        Verdict::Audited => {}
        Verdict::Foreign => notes.push(Note::Foreign),
        Verdict::Unresolved { ranges } => notes.push(Note::NotAuditable {
            ranges: range_words(audited, ranges),
        }),
    }
    let mut doubts: Vec<&Fault> = audited.findings.doubts.iter().collect();
    if !doubts.is_empty() {
        doubts.sort_by(|a, b| b.confidence.total_cmp(&a.confidence));
        let mut words: Vec<String> = doubts
            .iter()
            .take(NAMED)
            .map(|doubt| suspicion(audited, doubt))
            .collect();
        if doubts.len() > NAMED {
            words.push(format!("{} more", doubts.len() - NAMED));
        }
        notes.push(Note::Suspicions {
            words: format!("{} (confidence below {FINDING})", and(&words)),
        });
    }
    notes
}

fn range_words(audited: &Audited<'_>, ranges: &[[f64; 2]]) -> String {
    let units = &audited.subject.system.units;
    let words: Vec<String> = ranges
        .iter()
        .map(|[from, to]| {
            format!(
                "from {} to {}",
                significant(units.value(*from), RANGE_DIGITS),
                audited.subject.level(units.value(*to), RANGE_DIGITS)
            )
        })
        .collect();
    and(&words)
}

fn summary(audited: &Audited<'_>, sentence: &str, completeness: &str) -> String {
    let mut lines = audited.plan.choices.clone();
    lines.extend(result_lines(audited));
    lines.extend(audited.measured.lines());
    let mut text = format!(
        "{}{sentence}\n\n{}{completeness}\n",
        audited.subject.heading(),
        listed(&lines)
    );
    if let Some(certificate) = tables::certificate(audited) {
        text += &format!("\n{certificate}");
    }
    text
}

fn result_lines(audited: &Audited<'_>) -> Vec<(String, String)> {
    let findings = audited.findings;
    let noise = middle(&findings.noise);
    vec![
        (
            "compared".into(),
            format!(
                "{}; smoothed by a Gaussian of {} mean spacings at the middle",
                range_words(audited, &[findings.span]),
                significant(findings.smoothing / audited.plan.spacing, DIGITS)
            ),
        ),
        (
            "noise".into(),
            format!(
                "{} level (median of the standard deviation of the residual); single levels scatter by {} mean spacings",
                significant(noise, 2),
                significant(findings.level_error, 2)
            ),
        ),
    ]
}

/// The median.
fn middle(values: &[f64]) -> f64 {
    let mut sorted = values.to_vec();
    sorted.sort_by(f64::total_cmp);
    sorted.get(sorted.len() / 2).copied().unwrap_or(f64::NAN)
}

fn metadata(audited: &Audited<'_>, sentence: &str, completeness: &str) -> Map<String, Value> {
    let (subject, plan, findings) = (audited.subject, audited.plan, audited.findings);
    let units = &subject.system.units;
    let faults = |faults: &[Fault]| -> Value {
        faults
            .iter()
            .map(|fault| tables::fault_json(audited, fault))
            .collect()
    };
    let range = |[from, to]: [f64; 2]| json!({ "from": units.value(from), "to": units.value(to) });
    let (verdict, ranges) = match &findings.verdict {
        Verdict::Audited => ("audited", Vec::new()),
        Verdict::Unresolved { ranges } => {
            ("unresolved", ranges.iter().map(|r| range(*r)).collect())
        }
        Verdict::Foreign => ("foreign", Vec::new()),
    };
    let trend = &findings.trend;
    let mut map = subject.metadata("audit");
    map.insert("summary".into(), sentence.into());
    map.insert("verdict".into(), verdict.into());
    map.insert("not_audited".into(), Value::Array(ranges));
    map.insert(
        "window".into(),
        json!({ "from": audited.part.window.from, "to": audited.part.window.to }),
    );
    map.insert("compared".into(), range(findings.span));
    map.insert("smoothing_k".into(), findings.smoothing.into());
    map.insert("max_length".into(), plan.limits.max_length.into());
    map.insert("max_bounces".into(), plan.limits.max_bounces.into());
    map.insert("completeness".into(), completeness.into());
    map.insert("levels".into(), audited.part.levels.len().into());
    map.insert("levels_below".into(), findings.below.into());
    map.insert("level_error_spacings".into(), findings.level_error.into());
    map.insert("faults".into(), faults(&findings.faults));
    map.insert("doubts".into(), faults(&findings.doubts));
    map.insert(
        "trend".into(),
        json!({
            "kind": trend.kind,
            "log_odds": trend.odds,
            "factor": trend.factor,
            "factor_error": trend.factor_error,
            "power_of_k": trend.power,
            "noticed_from": trend.noticed_from.map(|k| units.value(k)),
            "spacings_at_end": trend.at_end,
        }),
    );
    let measured = |measured: &Measured| json!(measured);
    map.insert(
        "measures".into(),
        findings.measures.as_ref().map_or(Value::Null, |measures| {
            json!({
                "area": measured(&measures.area),
                "perimeter_dirichlet_less_neumann": measured(&measures.perimeter),
                "scale": measured(&measures.scale),
            })
        }),
    );
    let fitted = audited.fitted.iter().map(Parameter::json);
    map.insert("fit".into(), fitted.collect());
    map.insert("parts".into(), tables::parts_json(audited));
    map.insert("statistics".into(), audited.measured.json());
    map.insert(
        "curves".into(),
        json!({
            units.column(): in_units(audited),
            "before": findings.before,
            "after": findings.after,
            "noise": findings.noise,
        }),
    );
    map
}

/// The points of the curves in the file's unit.
fn in_units(audited: &Audited<'_>) -> Vec<f64> {
    let units = &audited.subject.system.units;
    let points = &audited.findings.points;
    points.iter().map(|&k| units.value(k)).collect()
}

fn picture(audited: &Audited<'_>, sentence: &str) -> String {
    let (subject, findings) = (audited.subject, audited.findings);
    let units = &subject.system.units;
    let place = |fault: &Fault| match fault.kind {
        FaultKind::False => units.value(fault.k),
        _ => to_error(
            units.value(fault.k),
            spread(subject, fault.k, fault.k_error),
        ),
    };
    let marks: Vec<AuditMark> = findings
        .faults
        .iter()
        .map(|fault| AuditMark {
            kind: mark_kind(fault.kind),
            at: units.value(fault.k),
            label: significant(place(fault), LABEL_DIGITS),
        })
        .collect();
    let unit = units.level_label();
    let captions = [format!("{}.", capitalised(sentence))];
    audit_picture(&AuditCurves {
        title: &format!("{}: {}", subject.title(), counts(audited)),
        variable: units.column(),
        unit: Some(unit.as_str()).filter(|unit| !unit.is_empty()),
        x: &in_units(audited),
        before: &findings.before,
        after: &findings.after,
        noise: &findings.noise,
        marks: &marks,
        captions: &captions,
    })
}

/// `2 missing, 1 false`.
fn counts(audited: &Audited<'_>) -> String {
    let counts: Vec<String> = KINDS
        .into_iter()
        .map(|kind| (kind, total(&of_kind(&audited.findings.faults, kind))))
        .filter(|(_, count)| *count > 0)
        .map(|(kind, count)| format!("{count} {}", kind.word()))
        .collect();
    if counts.is_empty() {
        "no faults found".to_owned()
    } else {
        counts.join(", ")
    }
}

fn capitalised(text: &str) -> String {
    let mut letters = text.chars();
    letters
        .next()
        .map(|first| first.to_uppercase().chain(letters).collect())
        .unwrap_or_default()
}

fn mark_kind(kind: FaultKind) -> AuditMarkKind {
    match kind {
        FaultKind::Missing => AuditMarkKind::Missing,
        FaultKind::False => AuditMarkKind::False,
        FaultKind::Shifted => AuditMarkKind::Shifted,
        FaultKind::Unresolved => AuditMarkKind::Unresolved,
    }
}
