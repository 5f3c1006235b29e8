//! Statistics of the list beside its audit.

use super::statistics_picture;
use crate::command::fluctuation::{classes, statistics};
use crate::command::note::Note;
use crate::command::subject::Subject;
use crate::command::text::{significant, with_error};
use orbitsum::levels::audit::Prediction;
use orbitsum::levels::statistics::{
    Fit, LevelStatistics, MissingEstimates, MissingFraction, Orbits, Place, Reference, Spacings,
    level_statistics, unfold,
};

/// Places in the list over which curves from orbits are averaged.
const PLACES: usize = 9;
/// Estimates that differ by more than this many standard deviations rest on wrong assumptions.
const DISAGREEMENT: f64 = 3.0;
/// A fraction with a smaller error than this stands at an end of its range, where all parts of the list give the same.
const LEAST_ERROR: f64 = 1e-4;

/// The statistics, or why there are none.
pub(super) struct Measured(Result<LevelStatistics, String>);

impl Measured {
    /// Measures levels (in k).
    pub(super) fn new(subject: &Subject, levels: &[f64], prediction: &Prediction) -> Self {
        let weyl = &prediction.weyl;
        let places: Vec<Place> = (0..PLACES)
            .filter_map(|index| levels.get((2 * index + 1) * levels.len() / (2 * PLACES)))
            .map(|&k| Place {
                k,
                density: weyl.density(k, 0.0),
            })
            .collect();
        let shortest = prediction
            .terms
            .iter()
            .map(|term| term.length)
            .fold(f64::INFINITY, f64::min);
        let orbits = Orbits {
            shortest,
            terms: &prediction.terms,
            max_length: prediction.max_length,
            places: &places,
        };
        let middle = levels[levels.len() / 2];
        let expected = Reference::superposition(&classes(subject, middle), statistics(subject));
        let positions = unfold(levels, |k| weyl.count(k, 0.0));
        Self(match expected {
            None => Err("the smooth count does not grow in the middle of the list".to_owned()),
            Some(expected) => level_statistics(
                &positions,
                &expected,
                shortest.is_finite().then_some(&orbits),
            )
            .map_err(|error| error.to_string()),
        })
    }

    /// Rows of the summary.
    pub(super) fn lines(&self) -> Vec<(String, String)> {
        let Ok(statistics) = &self.0 else {
            return Vec::new();
        };
        vec![
            ("spacings".into(), spacing_words(&statistics.spacings)),
            ("by statistics".into(), missing_words(&statistics.missing)),
        ]
    }

    /// Why there are none.
    pub(super) fn note(&self) -> Option<Note> {
        self.0.as_ref().err().map(|reason| Note::NoStatistics {
            reason: reason.clone(),
        })
    }

    pub(super) fn json(&self) -> serde_json::Value {
        match &self.0 {
            Ok(statistics) => serde_json::to_value(statistics).unwrap_or_default(),
            Err(_) => serde_json::Value::Null,
        }
    }

    pub(super) fn picture(&self, subject: &Subject) -> Option<String> {
        let statistics = self.0.as_ref().ok()?;
        let mut captions = vec![format!("{}.", spacing_words(&statistics.spacings))];
        captions.push(format!(
            "By statistics: {}.",
            missing_words(&statistics.missing)
        ));
        Some(statistics_picture::picture(
            &format!("{}: statistics of the list", subject.title()),
            statistics,
            &captions,
        ))
    }
}

fn fitted(fit: &Fit) -> String {
    with_error(fit.value, fit.error.unwrap_or(f64::NAN))
}

fn spacing_words(spacings: &Spacings) -> String {
    format!(
        "Brody parameter {} (0: uncorrelated, 0.95: orthogonal ensemble), regular fraction {} (Berry and Robnik)",
        fitted(&spacings.brody),
        fitted(&spacings.regular_fraction)
    )
}

/// The fraction of missing levels that does not rest on their number.
fn missing_words(missing: &MissingFraction) -> String {
    match missing {
        MissingFraction::Unknown(reason) => {
            format!("no independent estimate of what is missing: {reason}")
        }
        MissingFraction::Estimated(estimates) => estimate_words(estimates),
    }
}

fn estimate_words(estimates: &MissingEstimates) -> String {
    let percent = |fit: &Fit| match fit.error {
        Some(error) if error >= LEAST_ERROR => {
            format!("{} %", with_error(100.0 * fit.value, 100.0 * error))
        }
        _ => format!("about {} %", significant(100.0 * fit.value, 2)),
    };
    let trust = if estimates.disagreement > DISAGREEMENT {
        "; they disagree, do not trust them"
    } else {
        ""
    };
    format!(
        "{} of the levels are missing by the number variance, {} by the rigidity, {} by the spacings (whatever their number){trust}",
        percent(&estimates.number_variance),
        percent(&estimates.rigidity),
        percent(&estimates.spacings)
    )
}
