//! Summary and picture of a length spectrum.

use super::names::{causes_at, orbit_at};
use super::tables::{
    Named, SHOWN_PEAKS, misfit_lines, misfits_in_full, peak_table, peaks_in_full, shown_peaks,
    spectrum_table,
};
use super::{Findings, STRAY, shortest};
use crate::command::answer::Answer;
use crate::command::completeness;
use crate::command::note::Note;
use crate::command::text::{counted, listed, significant};
use orbitsum::levels::lengths::{Agreement, Misfit, Peak, Side, Taper};
use orbitsum::report::{LengthCurves, LengthMark, lengths_picture};
use orbitsum::trace::Term;
use serde_json::{Map, Value, json};

/// Digits of lengths, which are good to a small part of the resolution.
pub(super) const LENGTH_DIGITS: usize = 4;
/// Digits of amplitudes.
pub(super) const DIGITS: usize = 3;

/// Everything that `lengths` has to say.
pub(super) fn answer(findings: &Findings<'_>) -> Answer {
    let peaks: Vec<Named<Peak>> = findings
        .comparison
        .peaks
        .iter()
        .map(|peak| Named {
            orbit: (peak.agreement != Some(Agreement::None))
                .then(|| orbit_at(findings, peak.length, peak.amplitude))
                .flatten(),
            causes: Vec::new(),
            what: *peak,
        })
        .collect();
    let misfits: Vec<Named<Misfit>> = findings
        .comparison
        .misfits
        .iter()
        .map(|misfit| Named {
            orbit: orbit_at(findings, misfit.length, misfit.size),
            causes: causes_at(findings, misfit.length, misfit.side),
            what: *misfit,
        })
        .collect();
    let (completeness, mut notes) = completeness::of_search(findings.catalogue);
    notes.extend(findings.plan.notes.iter().cloned());
    notes.extend(list_notes(findings));
    notes.extend(completeness::omissions(
        findings.subject,
        findings.catalogue,
        findings.plan.middle,
        0.0,
    ));
    if peaks.len() > SHOWN_PEAKS {
        notes.push(Note::MoreRows {
            which: "highest",
            shown: SHOWN_PEAKS,
            all: peaks.len(),
        });
    }
    let mut metadata = metadata(findings, &completeness);
    metadata.insert("peaks".into(), peaks_in_full(&peaks).json());
    metadata.insert("unmatched".into(), misfits_in_full(&misfits).json());
    Answer {
        name: "lengths",
        summary: summary(findings, &peaks, &misfits, &completeness),
        shown: shown_peaks(&peaks),
        table: spectrum_table(findings),
        more_tables: vec![
            ("peaks", peak_table(&peaks)),
            ("unmatched", misfits_in_full(&misfits)),
        ],
        metadata,
        notes,
        pictures: vec![("lengths.svg".into(), picture(findings, &peaks, &misfits))],
        obsolete: None,
        failure: None,
    }
}

/// Notes about the list; that it begins late does no harm here.
fn list_notes(findings: &Findings<'_>) -> Vec<Note> {
    let mut notes: Vec<Note> = findings
        .given
        .notes
        .iter()
        .filter(|note| !matches!(note, Note::ListBegins { .. }))
        .cloned()
        .collect();
    let found = findings.spectrum.count;
    let off = (found as f64 - findings.expected).abs();
    if off > STRAY.0 + STRAY.1 * findings.expected {
        notes.push(Note::CountOff {
            found,
            expected: findings.expected,
        });
    }
    if findings
        .comparison
        .explained
        .is_some_and(|part| part <= 0.0)
    {
        notes.push(Note::NothingExplained);
    }
    if !findings.comparison.noise.is_measured() {
        let terms: Vec<Term> = findings.terms.iter().map(|sourced| sourced.term).collect();
        let subject = findings.subject;
        notes.push(Note::NoiseUnmeasured {
            shortest: subject.length(shortest(findings.catalogue, &terms), LENGTH_DIGITS),
            needed: subject.length(
                findings
                    .comparison
                    .noise
                    .shortest_measurable(&findings.spectrum.taper),
                DIGITS,
            ),
        });
    }
    notes
}

fn summary(
    findings: &Findings<'_>,
    peaks: &[Named<Peak>],
    misfits: &[Named<Misfit>],
    completeness: &str,
) -> String {
    let mut lines = findings.plan.choices.clone();
    lines.extend(result_lines(findings, peaks));
    let mut text = format!(
        "{}{}{completeness}\n",
        findings.subject.heading(),
        listed(&lines)
    );
    for (side, heading) in [
        (
            Side::Levels,
            "in the levels and not in the orbits (left out by the sum or by the search)",
        ),
        (
            Side::Orbits,
            "in the orbits and not in the levels (terms that are too large, or left out by the list)",
        ),
        (
            Side::Phase,
            "in both with different phases (terms that are rough, or lengths that are off)",
        ),
    ] {
        let of_side: Vec<&Named<Misfit>> = misfits
            .iter()
            .filter(|misfit| misfit.what.side == side)
            .collect();
        if !of_side.is_empty() {
            text += &format!("\n{heading}:\n{}", misfit_lines(of_side));
        }
    }
    text
}

fn result_lines(findings: &Findings<'_>, peaks: &[Named<Peak>]) -> Vec<(String, String)> {
    let subject = findings.subject;
    let comparison = findings.comparison;
    let noise = &comparison.noise;
    let middle = 0.5 * comparison.compared_to;
    let with = |wanted: Option<Agreement>| {
        peaks
            .iter()
            .filter(|peak| peak.what.agreement == wanted)
            .count()
    };
    let beyond = match with(None) {
        0 => String::new(),
        count => format!(", {count} beyond"),
    };
    vec![
        (
            "levels".into(),
            format!(
                "{} in the window ({} by the smooth count)",
                findings.spectrum.count,
                significant(findings.expected, 5)
            ),
        ),
        (
            "resolution".into(),
            format!(
                "{} (width of a peak at half its height; Blackman's window function, side lobes {})",
                subject.length(findings.spectrum.taper.resolution(), DIGITS),
                Taper::side_lobe(),
            ),
        ),
        (
            "noise".into(),
            format!(
                "{} level at length {}: nothing below {} is listed there",
                significant(noise.at(middle), 2),
                subject.length(middle, DIGITS),
                significant(comparison.least_listed(middle), 2),
            ),
        ),
        (
            "compared".into(),
            format!(
                "up to length {}, where orbits longer than those known begin to show",
                subject.length(comparison.compared_to, DIGITS)
            ),
        ),
        ("explained".into(), explained(comparison.explained)),
        (
            "peaks".into(),
            format!(
                "{}: orbits explain {} in full, {} in part, {} not{beyond}",
                counted(peaks.len(), "peak of the levels", "peaks of the levels"),
                with(Some(Agreement::Full)),
                with(Some(Agreement::Part)),
                with(Some(Agreement::None)),
            ),
        ),
    ]
}

/// How much of the levels' spectrum the orbits explain.
fn explained(part: Option<f64>) -> String {
    match part {
        None => "nothing to explain".into(),
        Some(part) if part <= 0.0 => {
            "nothing: levels and orbits differ by more than the levels alone".into()
        }
        Some(part) => format!(
            "{} % of the squared spectrum of the levels by the orbits",
            significant(100.0 * part, 4)
        ),
    }
}

fn metadata(findings: &Findings<'_>, completeness: &str) -> Map<String, Value> {
    let (subject, plan, comparison) = (findings.subject, findings.plan, findings.comparison);
    let noise = &comparison.noise;
    let mut map = subject.metadata("lengths");
    map.insert(
        "window".into(),
        json!({ "from": plan.window.from, "to": plan.window.to, "function": "Blackman" }),
    );
    map.insert(
        "resolution".into(),
        findings.spectrum.taper.resolution().into(),
    );
    map.insert("max_length".into(), plan.limits.max_length.into());
    map.insert("max_bounces".into(), plan.limits.max_bounces.into());
    map.insert("compared_to".into(), comparison.compared_to.into());
    map.insert("terms".into(), findings.terms.len().into());
    map.insert("completeness".into(), completeness.into());
    map.insert(
        "levels".into(),
        json!({ "count": findings.spectrum.count, "smooth_count": findings.expected }),
    );
    map.insert(
        "noise".into(),
        json!({
            "size": noise.size,
            "at_length": noise.reference,
            "power": noise.power,
            "least": noise.least,
            "threshold_factor": noise.factor,
            "measured": noise.is_measured(),
        }),
    );
    map.insert("explained".into(), comparison.explained.into());
    map
}

fn picture(findings: &Findings<'_>, peaks: &[Named<Peak>], misfits: &[Named<Misfit>]) -> String {
    let spectrum = findings.spectrum;
    let moduli = |values: &[num_complex::Complex64]| -> Vec<f64> {
        values.iter().map(|value| value.norm()).collect()
    };
    let (levels, orbits) = (moduli(&spectrum.levels), moduli(&spectrum.orbits));
    let difference = moduli(&spectrum.difference());
    let threshold: Vec<f64> = spectrum
        .lengths
        .iter()
        .map(|&length| findings.comparison.least_listed(length))
        .collect();
    let label = |length: f64| significant(length, LENGTH_DIGITS);
    let peaks: Vec<LengthMark> = peaks
        .iter()
        .map(|peak| LengthMark {
            length: peak.what.length,
            height: peak.what.amplitude,
            label: label(peak.what.length),
        })
        .collect();
    let misfits: Vec<LengthMark> = misfits
        .iter()
        .map(|misfit| LengthMark {
            length: misfit.what.length,
            height: misfit.what.size,
            label: label(misfit.what.length),
        })
        .collect();
    let unit = findings.subject.system.units.length_label();
    let captions = captions(findings);
    lengths_picture(&LengthCurves {
        title: &findings.subject.title(),
        unit: Some(unit).filter(|unit| !unit.is_empty()),
        lengths: &spectrum.lengths,
        levels: &levels,
        orbits: &orbits,
        difference: &difference,
        threshold: &threshold,
        compared_to: findings.comparison.compared_to,
        peaks: &peaks,
        misfits: &misfits,
        captions: &captions,
    })
}

/// What is written below the picture.
fn captions(findings: &Findings<'_>) -> Vec<String> {
    let subject = findings.subject;
    vec![format!(
        "{} for {}; lengths closer than {} are not told apart. Orbits up to length {} and {}: beyond the shaded edge longer ones \
         would show.",
        counted(findings.spectrum.count, "level", "levels"),
        findings.plan.window.words(subject),
        subject.length(findings.spectrum.taper.resolution(), DIGITS),
        subject.length(findings.plan.limits.max_length, LENGTH_DIGITS),
        counted(findings.plan.limits.max_bounces, "bounce", "bounces"),
    )]
}
