//! Tables of a length spectrum, for scripts and for people.

use super::Findings;
use super::present::{DIGITS, LENGTH_DIGITS};
use crate::command::table::{Cell, Table};
use crate::command::text::significant;
use orbitsum::levels::lengths::{Agreement, Misfit, Peak, Side};

/// Rows of the table of peaks for people.
pub(super) const SHOWN_PEAKS: usize = 30;
/// Rows of each table of differences for people.
const SHOWN_MISFITS: usize = 10;

/// A peak or a difference with the words that belong to it.
pub(super) struct Named<T> {
    pub(super) what: T,
    pub(super) orbit: Option<String>,
    pub(super) causes: Vec<String>,
}

pub(super) fn spectrum_table(findings: &Findings<'_>) -> Table {
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
pub(super) fn peak_table(peaks: &[Named<Peak>]) -> Table {
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

pub(super) fn peaks_in_full(peaks: &[Named<Peak>]) -> Table {
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

pub(super) fn misfits_in_full(misfits: &[Named<Misfit>]) -> Table {
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
pub(super) fn shown_peaks(peaks: &[Named<Peak>]) -> Table {
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

/// Differences of one side, largest first.
pub(super) fn misfit_lines(mut misfits: Vec<&Named<Misfit>>) -> String {
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
