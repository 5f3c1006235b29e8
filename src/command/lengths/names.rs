//! Which orbit a peak belongs to, and what may have caused one that belongs to none.

use super::Findings;
use crate::command::orbits::torus_word;
use crate::command::text::{counted, significant};
use orbitsum::levels::lengths::Side;
use orbitsum::orbit::{OmissionKind, SourcedTerm, TermSource};

/// Digits of the lengths of orbits.
const DIGITS: usize = 6;
/// A contribution below this part of a peak does not name it.
const LEAST_SHARE: f64 = 0.05;

/// The orbit with the largest contribution at a length among those whose peaks reach it with half of their height or more: word,
/// repetition and length.
pub(super) fn orbit_at(findings: &Findings<'_>, length: f64, amplitude: f64) -> Option<String> {
    let reach = 0.5 * findings.spectrum.taper.resolution();
    let (largest, weight) = findings
        .terms
        .iter()
        .filter(|sourced| (sourced.term.length - length).abs() <= reach)
        .map(|sourced| (sourced, contribution(findings, sourced, length)))
        .max_by(|a, b| a.1.total_cmp(&b.1))?;
    (weight >= LEAST_SHARE * amplitude).then(|| name(largest))
}

/// What a term contributes at a length, in levels.
fn contribution(findings: &Findings<'_>, sourced: &SourcedTerm<'_>, length: f64) -> f64 {
    let response = findings
        .spectrum
        .taper
        .response(sourced.term.length - length);
    sourced.term.amplitude_at(findings.plan.middle).norm() * response.abs()
}

fn name(sourced: &SourcedTerm<'_>) -> String {
    let repetition = sourced.term.repetition;
    let word = match &sourced.source {
        TermSource::Orbit(orbit) => orbit.word.clone(),
        TermSource::Strip(strip) => format!("strip {}", strip.word),
        TermSource::Torus(family) => format!(
            "{}, {}",
            torus_word(family.kind, family.winding / repetition),
            counted((family.bounces / repetition) as usize, "bounce", "bounces")
        ),
    };
    let times = match repetition {
        1 => String::new(),
        times => format!(" x {times}"),
    };
    format!(
        "{word}{times}, length {}",
        significant(sourced.term.length, DIGITS)
    )
}

/// What the sum leaves out or describes badly near a length, largest first. Of orbits that diffract at corners only the shortest from
/// each corner to itself are known: where nothing else explains what only the levels show, longer ones may.
pub(super) fn causes_at(findings: &Findings<'_>, length: f64, side: Side) -> Vec<String> {
    let near = 0.5 * findings.spectrum.taper.resolution();
    let k = findings.plan.middle;
    let mut kinds: Vec<(f64, String)> = findings
        .catalogue
        .omissions
        .iter()
        .filter(|omission| omission.shows_at(length, near))
        .map(|omission| (omission.size_at(k, 0.0), omission.kind.to_string()))
        .collect();
    kinds.sort_by(|a, b| b.0.total_cmp(&a.0));
    let mut words: Vec<String> = kinds.into_iter().map(|(_, words)| words).collect();
    words.dedup();
    let diffracts = findings
        .catalogue
        .omissions
        .iter()
        .any(|omission| omission.kind == OmissionKind::Corners && omission.length < length);
    if words.is_empty() && side == Side::Levels && diffracts {
        words.push("perhaps a longer orbit that diffracts at corners".into());
    }
    words
}
