//! Parameters of the system file that fit the list best.

use super::{Part, prediction};
use crate::command::error::CommandError;
use crate::command::options::Options;
use crate::command::progress;
use crate::command::subject::Subject;
use crate::command::text::with_error;
use orbitsum::baseline::Weyl;
use orbitsum::levels::audit::{Family, Fitted, Prediction, fit};
use orbitsum::orbit::{Catalogue, Limits};
use serde_json::{Value, json};
use std::path::Path;

/// Standard deviations beyond which a fitted value is not that of the file.
const DIFFERS: f64 = 3.0;

/// A fitted parameter with its name.
pub(super) struct Parameter {
    name: String,
    fitted: Fitted,
}

/// Checks names of parameters; each counts once.
pub(super) fn names(typed: &[String], subject: &Subject) -> Result<Vec<String>, CommandError> {
    let parameters = &subject.system.parameters;
    let mut names: Vec<String> = Vec::new();
    for name in typed.iter().map(|name| name.trim()) {
        if !parameters.iter().any(|(known, _)| known == name) {
            let known: Vec<&str> = parameters.iter().map(|(name, _)| name.as_str()).collect();
            return Err(CommandError::UnknownParameter {
                name: name.to_owned(),
                known: match known.len() {
                    0 => "the system file has none".to_owned(),
                    _ => format!("the system file has {}", known.join(", ")),
                },
            });
        }
        if !names.iter().any(|known| known == name) {
            names.push(name.to_owned());
        }
    }
    Ok(names)
}

/// The shapes that a system file describes with other values of some of its parameters.
struct Shapes<'a> {
    path: &'a Path,
    options: &'a Options,
    names: &'a [String],
    limits: Limits,
}

impl Shapes<'_> {
    fn at(&self, values: &[f64]) -> Result<Subject, CommandError> {
        let mut settings = self.options.settings.clone();
        settings.retain(|(name, _)| !self.names.contains(name));
        // The shortest digits that give the same number again.
        let own = self.names.iter().zip(values);
        settings.extend(own.map(|(name, value)| (name.clone(), format!("{value:?}"))));
        Subject::with_settings(self.path, &settings, self.options.class.as_deref())
    }
}

impl Family for Shapes<'_> {
    type Error = CommandError;

    fn smooth(&self, values: &[f64]) -> Result<Weyl, CommandError> {
        Ok(self.at(values)?.weyl())
    }

    fn whole(&self, values: &[f64]) -> Result<Prediction, CommandError> {
        let subject = self.at(values)?;
        let catalogue = Catalogue::find(&subject.system.domain, &subject.symmetry, self.limits);
        Ok(prediction(&subject, &catalogue, self.limits))
    }
}

/// Fits parameters to a list; the subject comes back with the values that fit best.
pub(super) fn fitted(
    path: &Path,
    subject: Subject,
    names: &[String],
    part: &Part,
    limits: Limits,
    options: &Options,
) -> Result<(Subject, Vec<Parameter>), CommandError> {
    if names.is_empty() {
        return Ok((subject, Vec::new()));
    }
    let shapes = Shapes {
        path,
        options,
        names,
        limits,
    };
    let file: Vec<f64> = names
        .iter()
        .filter_map(|name| {
            let parameters = &subject.system.parameters;
            parameters.iter().find(|(known, _)| known == name)
        })
        .map(|(_, value)| *value)
        .collect();
    let found = progress::during(options, "fitting parameters", || {
        fit(&part.listed(&subject), &shapes, &file)
    })?;
    let Some((fitted, _)) = found else {
        return Err(CommandError::NotFitted {
            names: names.join(", "),
        });
    };
    let values: Vec<f64> = fitted.iter().map(|fitted| fitted.value).collect();
    let parameters = names
        .iter()
        .zip(fitted)
        .map(|(name, fitted)| Parameter {
            name: name.clone(),
            fitted,
        })
        .collect();
    Ok((shapes.at(&values)?, parameters))
}

impl Parameter {
    /// `a = 1.01000 +- 0.00002 fits best (1 in the file; 1.012 +- 0.005 by the smooth count alone)`.
    pub(super) fn words(&self) -> String {
        let fitted = &self.fitted;
        format!(
            "{} = {} fits best ({} in the file; {} by the smooth count alone)",
            self.name,
            with_error(fitted.value, fitted.error),
            fitted.file,
            with_error(fitted.smooth, fitted.smooth_error)
        )
    }

    /// What a strict audit says of a value that is not that of the file.
    pub(super) fn difference(&self) -> Option<String> {
        let fitted = &self.fitted;
        ((fitted.value - fitted.file).abs() > DIFFERS * fitted.error)
            .then(|| format!("another value of {}", self.name))
    }

    pub(super) fn json(&self) -> Value {
        let fitted = &self.fitted;
        json!({
            "name": self.name,
            "file": fitted.file,
            "value": fitted.value,
            "error": fitted.error,
            "smooth_value": fitted.smooth,
            "smooth_error": fitted.smooth_error,
        })
    }
}
