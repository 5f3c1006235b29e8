//! Tables, summary and picture of a length spectrum.

use super::names::{causes_at, orbit_at};
use super::{Findings, STRAY, shortest};
use crate::command::answer::Answer;
use crate::command::completeness;
use crate::command::note::Note;
use crate::command::table::{Cell, Table};
use crate::command::text::{counted, listed, significant};
use orbitsum::levels::lengths::{Agreement, Misfit, Peak, Side, Taper};
use orbitsum::report::{LengthCurves, LengthMark, lengths_picture};
use orbitsum::trace::Term;
use serde_json::{Map, Value, json};

/// Rows of the table of peaks for people.
const SHOWN_PEAKS: usize = 30;
/// Rows of each table of differences for people.
const SHOWN_MISFITS: usize = 10;
/// Digits of lengths, which are good to a small part of the resolution.
const LENGTH_DIGITS: usize = 4;
/// Digits of amplitudes.
const DIGITS: usize = 3;

/// A peak or a difference with the words that belong to it.
struct Named<T> {
    what: T,
    orbit: Option<String>,
    causes: Vec<String>,
}

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

fn spectrum_table(findings: &Findings<'_>) -> Table {
    let mut table = Table::new(&["length", "levels", "orbits"]);
    let spectrum = findings.spectrum;
    for ((length, levels), orbits) in spectrum
        .lengths
        .iter()
        .zip(&spectrum.levels)
        .zip(&spectrum.orbits)
    {
        table.push(vec![
            (*length).into(),
            levels.norm().into(),
            orbits.norm().into(),
        ]);
    }
    table
}

/// The peaks as scripts read them.
fn peak_table(peaks: &[Named<Peak>]) -> Table {
    let mut table = Table::new(&["length", "amplitude", "orbit"]);
    for peak in peaks {
        table.push(vec![
            peak.what.length.into(),
            peak.what.amplitude.into(),
            peak.orbit.clone().into(),
        ]);
    }
    table
}

fn peaks_in_full(peaks: &[Named<Peak>]) -> Table {
    let mut table = Table::new(&[
        "length",
        "amplitude",
        "orbit",
        "orbits",
        "difference",
        "agreement",
    ]);
    for peak in peaks {
        table.push(vec![
            peak.what.length.into(),
            peak.what.amplitude.into(),
            peak.orbit.clone().into(),
            peak.what.orbits.into(),
            peak.what.difference.into(),
            peak.what.agreement.map(agreement_word).into(),
        ]);
    }
    table
}

fn misfits_in_full(misfits: &[Named<Misfit>]) -> Table {
    let mut table = Table::new(&[
        "length",
        "levels",
        "orbits",
        "difference",
        "side",
        "orbit",
        "cause",
    ]);
    for misfit in misfits {
        let causes = misfit.causes.join("; ");
        table.push(vec![
            misfit.what.length.into(),
            misfit.what.levels.into(),
            misfit.what.orbits.into(),
            misfit.what.size.into(),
            side_word(misfit.what.side).into(),
            misfit.orbit.clone().into(),
            Some(causes).filter(|words| !words.is_empty()).into(),
        ]);
    }
    table
}

fn agreement_word(agreement: Agreement) -> &'static str {
    match agreement {
        Agreement::Full => "full",
        Agreement::Part => "part",
        Agreement::None => "none",
    }
}

fn side_word(side: Side) -> &'static str {
    match side {
        Side::Levels => "levels",
        Side::Orbits => "orbits",
        Side::Phase => "phase",
    }
}

/// A number for people in a table that is aligned as words, so that it keeps its few digits.
fn short(value: f64, digits: usize) -> Cell {
    significant(value, digits).into()
}

/// The highest peaks, in the order of their lengths.
fn shown_peaks(peaks: &[Named<Peak>]) -> Table {
    let mut heights: Vec<f64> = peaks.iter().map(|peak| peak.what.amplitude).collect();
    heights.sort_by(|a, b| b.total_cmp(a));
    let least = heights.get(SHOWN_PEAKS - 1).copied().unwrap_or(0.0);
    let mut table = Table::new(&["length", "amplitude", "difference", "agreement", "orbit"]);
    for peak in peaks.iter().filter(|peak| peak.what.amplitude >= least) {
        table.push(vec![
            short(peak.what.length, LENGTH_DIGITS),
            short(peak.what.amplitude, DIGITS),
            short(peak.what.difference, DIGITS),
            peak.what.agreement.map_or("beyond", agreement_word).into(),
            peak.orbit.clone().into(),
        ]);
    }
    table
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

/// Differences of one side, largest first.
fn misfit_lines(mut misfits: Vec<&Named<Misfit>>) -> String {
    misfits.sort_by(|a, b| b.what.size.total_cmp(&a.what.size));
    let mut table = Table::new(&[
        "length",
        "levels",
        "orbits",
        "difference",
        "orbit",
        "likely cause",
    ]);
    for misfit in misfits.iter().take(SHOWN_MISFITS) {
        let causes = misfit.causes.join("; ");
        table.push(vec![
            short(misfit.what.length, LENGTH_DIGITS),
            short(misfit.what.levels, DIGITS),
            short(misfit.what.orbits, DIGITS),
            short(misfit.what.size, DIGITS),
            misfit.orbit.clone().unwrap_or_else(|| "-".into()).into(),
            causes.into(),
        ]);
    }
    let more = match misfits.len().saturating_sub(SHOWN_MISFITS) {
        0 => String::new(),
        more => format!("and {more} smaller (lengths-unmatched.csv with --out)\n"),
    };
    table.aligned() + &more
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
