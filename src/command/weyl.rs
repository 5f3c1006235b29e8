//! `weyl`: the smooth count term by term, and the expected fluctuation about it.

use super::answer::Answer;
use super::arguments::Weyl;
use super::error::CommandError;
use super::fluctuation::Fluctuation;
use super::note::Note;
use super::options::Options;
use super::subject::Subject;
use super::table::{Cell, Table};
use super::text::significant;
use super::value;
use orbitsum::baseline::Omission;
use serde_json::json;

/// Level numbers at which the count is given if nothing was asked.
const DEFAULT_LEVELS: [f64; 3] = [10.0, 100.0, 1000.0];

pub(super) fn run(typed: &Weyl, options: &Options) -> Result<Answer, CommandError> {
    let asked = value::positive_list("at", &typed.at)?;
    let subject = Subject::load(&typed.system, options)?;
    let weyl = subject.weyl();
    let units = &subject.system.units;
    let places: Vec<f64> = if asked.is_empty() {
        DEFAULT_LEVELS
            .iter()
            .map(|&n| super::limits::rounded(units.value(weyl.k_at_count(n))))
            .collect()
    } else {
        asked
    };
    let fluctuation = Fluctuation::new(&subject, options);
    let mut table = Table::new(&["term", "at", "value"]);
    let mut shown = Table::new(&["term", "at", "value"]);
    for &at in &places {
        let k = units.k(at);
        let mut row = |term: &'static str, value: Cell| {
            table.push(vec![term.into(), at.into(), value.clone()]);
            shown.push(vec![term.into(), at.into(), value]);
        };
        for (term, value) in weyl.contributions(k) {
            row(term, value.into());
        }
        row("count", weyl.count(k, 0.0).into());
        row("fluctuation", fluctuation.at(k).into());
    }
    let mut notes: Vec<Note> = weyl.omissions.iter().filter_map(omission).collect();
    let highest = places.iter().copied().fold(0.0, f64::max);
    notes.extend(units.warning(highest).map(Note::NotFlat));
    if !fluctuation.is_known() {
        notes.push(Note::SmoothPart(
            "the fluctuation is not estimated for single classes of this integrable shape",
        ));
    }
    if places
        .iter()
        .any(|&at| !weyl.mean_spacing(units.k(at)).is_finite())
    {
        notes.push(Note::SmoothPart(
            "at the lowest of these values the smooth count does not grow yet: it means nothing there",
        ));
    }
    let mut metadata = subject.metadata("weyl");
    let coefficients: serde_json::Value = weyl
        .terms
        .iter()
        .map(|term| {
            json!({
                "term": term.contribution.name(),
                "power_of_k": term.power,
                "coefficient": term.coefficient,
            })
        })
        .collect();
    metadata.insert("coefficients".into(), coefficients);
    metadata.insert("fluctuation_from".into(), fluctuation.source().into());
    Ok(Answer {
        name: "weyl",
        summary: summary(&subject, &weyl, &fluctuation),
        shown,
        table,
        metadata,
        notes,
        pictures: Vec::new(),
        more_tables: Vec::new(),
        obsolete: None,
        failure: None,
    })
}

fn omission(omission: &Omission) -> Option<Note> {
    Some(Note::SmoothPart(match omission {
        Omission::InverseK => {
            "the term c/k is left out: it is not known for corners between curved walls that are not right angles, nor for cusps"
        }
        Omission::ZeroAngle { .. } => {
            "a corner of angle zero is left out: its contribution to the smooth count is not known"
        }
    }))
}

fn summary(
    subject: &Subject,
    weyl: &orbitsum::baseline::Weyl,
    fluctuation: &Fluctuation,
) -> String {
    let mut formula = String::new();
    for power in [2, 1, 0, -1] {
        let coefficient = weyl.coefficient(power);
        if coefficient == 0.0 {
            continue;
        }
        let size = significant(coefficient.abs(), 8);
        formula += match (coefficient < 0.0, formula.is_empty()) {
            (true, true) => "-",
            (true, false) => " - ",
            (false, true) => "",
            (false, false) => " + ",
        };
        formula += &match power {
            2 => format!("{size} k^2"),
            1 => format!("{size} k"),
            0 => size,
            _ => format!("{size}/k"),
        };
    }
    let unit = match subject.system.units.length_label() {
        "" => String::new(),
        unit => format!(", k in 1/{unit}"),
    };
    let levels = match subject.class.as_ref().map_or(1, |irrep| irrep.dimension) {
        1 => "",
        _ => " (every level counted with its multiplicity)",
    };
    format!(
        "{}smooth count{levels}: N(k) = {formula}{unit}\nfluctuation: {}; `at` is {}\n",
        subject.heading(),
        fluctuation.source(),
        match subject.system.units.level_label().as_str() {
            "" => subject.system.units.column().to_owned(),
            unit => format!("{} in {unit}", subject.system.units.column()),
        },
    )
}
