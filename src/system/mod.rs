//! From a system file to a validated model.
//!
//! [`load`] reads a TOML file, works out its parameters (formulas in the parameters before them, or settings from outside),
//! builds the walls and checks them. Every mistake becomes a [`SystemError`] that knows its place in the file.

mod curves;
mod diagnostics;
mod error;
pub mod formula;
mod outline;
mod points;
mod reader;
mod regularity;
#[cfg(test)]
mod tests;
mod unit_reader;
mod units;
mod walls;

pub use error::{Problem, SystemError};
pub use units::{
    ELECTRON_MASS, HBAR, LengthUnit, LevelUnit, MILLIELECTRONVOLT, NotFlat, SPEED_OF_LIGHT, Units,
};

use crate::billiard::{Domain, GeometryError};
use error::Source;
use formula::{Scope, Span};
use reader::{Reader, Table, Value, span, text};
use std::io::Read;
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// Largest system file (and table of points) in bytes; those that people write have a few hundred.
pub const LARGEST_FILE: u64 = 1 << 20;

/// Keys at the top of a file.
const TOP_KEYS: &[&str] = &[
    "name",
    "about",
    "symmetry",
    "parameters",
    "outline",
    "hole",
    "slit",
    "units",
];

/// Words for `symmetry` beside further C5, ..., 7-gon, ... and sigma(45), the reflection at an axis of that angle.
const SYMMETRIES: &[&str] = &[
    "none",
    "reflection",
    "C2",
    "C3",
    "C4",
    "rectangle",
    "triangle",
    "square",
    "5-gon",
    "6-gon",
    "x->-x",
    "y->-y",
];
/// Highest order of a rotation group that can be declared.
const LARGEST_ORDER: u32 = 64;

/// A validated system.
#[derive(Clone, Debug)]
pub struct System {
    /// Name, the file's name without its ending if the file gives none.
    pub name: String,
    /// What it is, in a sentence; may be empty.
    pub about: String,
    /// Parameters with their values, in the order of the file.
    pub parameters: Vec<(String, f64)>,
    /// The shape.
    pub domain: Domain,
    /// What the file says about its symmetry.
    pub declared_symmetry: Option<String>,
    /// Units of lengths and levels.
    pub units: Units,
    /// The file.
    pub source: PathBuf,
    text: Source,
    wall_spans: Vec<Span>,
    symmetry_span: Option<Span>,
}

impl System {
    /// An error of the geometry that was found later (such as a crossing), at the place of its wall in the file.
    #[must_use]
    pub fn geometry_error(&self, error: &GeometryError) -> SystemError {
        outline::locate(error, &self.wall_spans).in_source(&self.text)
    }

    /// The declared symmetry is not the one that was found; `found` is its name.
    #[must_use]
    pub fn symmetry_error(&self, found: &str) -> SystemError {
        let problem = Problem::Symmetry {
            declared: self.declared_symmetry.clone().unwrap_or_default(),
            found: found.to_owned(),
        };
        let span = self.symmetry_span.unwrap_or(Span::new(0, 0));
        SystemError::at(span, problem).in_source(&self.text)
    }
}

/// Reads a system file. `settings` are parameters with the values (numbers or formulas in the parameters before them) that
/// replace those of the file; of two for the same parameter the last one holds.
///
/// # Errors
/// Everything that is wrong with the file, with its place.
pub fn load(path: &Path, settings: &[(String, String)]) -> Result<System, SystemError> {
    let source = read_text(path)?;
    parse(&source.text, path, settings)
}

/// Reads a system from text; `name` is the file that the text came from, for messages and for files named in it.
///
/// # Errors
/// As [`load`].
pub fn parse(
    text: &str,
    name: &Path,
    settings: &[(String, String)],
) -> Result<System, SystemError> {
    let source = Source {
        name: name.display().to_string(),
        text: Arc::from(text),
    };
    read_system(&source, name, settings).map_err(|error| error.in_source(&source))
}

/// Text of a file that is not too large.
fn read_text(path: &Path) -> Result<Source, SystemError> {
    let name = path.display().to_string();
    let unreadable = |error: std::io::Error| {
        let why = error.to_string();
        let path = path.to_owned();
        SystemError::whole(name.clone(), Problem::Unreadable { path, why })
    };
    let mut bytes = Vec::new();
    let file = std::fs::File::open(path).map_err(unreadable)?;
    let size = file.metadata().map_err(unreadable)?.len();
    file.take(LARGEST_FILE + 1)
        .read_to_end(&mut bytes)
        .map_err(unreadable)?;
    let read = bytes.len() as u64;
    if read > LARGEST_FILE {
        let problem = Problem::TooLarge {
            bytes: size.max(read),
            limit: LARGEST_FILE,
        };
        return Err(SystemError::whole(name, problem));
    }
    match String::from_utf8(bytes) {
        Ok(text) => Ok(Source {
            name,
            text: Arc::from(text),
        }),
        Err(error) => {
            let byte = error.utf8_error().valid_up_to();
            Err(SystemError::whole(name, Problem::NotText { byte }))
        }
    }
}

fn read_system(
    source: &Source,
    path: &Path,
    settings: &[(String, String)],
) -> Result<System, SystemError> {
    let tree = toml::de::DeTable::parse(&source.text).map_err(|error| {
        let place = error.span().unwrap_or(0..0);
        let message = error.message().to_owned();
        SystemError::at(
            Span::new(place.start, place.end),
            Problem::Syntax { message },
        )
    })?;
    let top = Table::new(tree.get_ref(), Span::new(0, 0), "the file");
    if let Some((key, _)) = top.keys().find(|(key, _)| key.get_ref() == "hamiltonian") {
        return Err(SystemError::at(span(key), Problem::Hamiltonian));
    }
    top.deny_unknown(TOP_KEYS)?;
    let scope = parameters(top.get("parameters"), &source.text, settings)?;
    let reader = Reader {
        text: &source.text,
        scope: &scope,
    };
    let name = match top.get("name") {
        Some(value) => text(value, "name")?.to_owned(),
        None => path
            .file_stem()
            .map_or_else(String::new, |stem| stem.to_string_lossy().into_owned()),
    };
    let about = top
        .get("about")
        .map_or(Ok(""), |value| text(value, "about"))?
        .to_owned();
    let symmetry = top.get("symmetry").map(symmetry).transpose()?;
    let units = unit_reader::read(top.get("units"), reader)?;
    let folder = path.parent().unwrap_or(Path::new(""));
    let drawn = outline::read(top, reader, folder)?;
    drawn
        .domain
        .check_crossings()
        .map_err(|error| outline::locate(&error, &drawn.spans))?;
    Ok(System {
        name,
        about,
        parameters: scope.into_pairs(),
        domain: drawn.domain,
        declared_symmetry: symmetry.as_ref().map(|(word, _)| word.clone()),
        units,
        source: path.to_owned(),
        text: source.clone(),
        wall_spans: drawn.spans,
        symmetry_span: symmetry.map(|(_, span)| span),
    })
}

/// Values of the parameters, in the order of the file: each may depend on those before it.
fn parameters(
    value: Option<Value<'_>>,
    file: &str,
    settings: &[(String, String)],
) -> Result<Scope, SystemError> {
    let mut scope = Scope::default();
    if let Some(value) = value {
        for (key, value) in Table::any(value, "[parameters]")?.keys() {
            let name = key.get_ref().as_ref();
            check_name(name).map_err(|problem| SystemError::at(span(key), problem))?;
            let setting = settings.iter().rev().find(|(known, _)| known == name);
            let number = match setting {
                Some((_, text)) => setting_value(name, text, &scope)?,
                None => {
                    let reader = Reader {
                        text: file,
                        scope: &scope,
                    };
                    reader.number(value, "a parameter")?
                }
            };
            scope.insert(name, number);
        }
    }
    match settings.iter().find(|(name, _)| scope.get(name).is_none()) {
        None => Ok(scope),
        Some((name, text)) => Err(SystemError::at(
            Span::new(0, name.len()),
            Problem::UnknownSetting {
                name: name.clone(),
                known: scope.names().map(str::to_owned).collect(),
            },
        )
        .in_source(&Source {
            name: "--set".to_owned(),
            text: Arc::from(format!("{name}={text}")),
        })),
    }
}

fn setting_value(name: &str, text: &str, scope: &Scope) -> Result<f64, SystemError> {
    formula::constant(text, scope).map_err(|error| {
        let span = error.span.shifted(name.len() + 1);
        SystemError::at(span, Problem::Formula(error)).in_source(&Source {
            name: "--set".to_owned(),
            text: Arc::from(format!("{name}={text}")),
        })
    })
}

fn check_name(name: &str) -> Result<(), Problem> {
    let why = if !formula::is_name(name) {
        "a name is a letter or _ followed by letters, digits or _"
    } else if formula::is_reserved(name) {
        "it has a meaning in formulas already"
    } else {
        return Ok(());
    };
    Err(Problem::ParameterName {
        name: name.to_owned(),
        why,
    })
}

/// The declared symmetry and its place.
fn symmetry(value: Value<'_>) -> Result<(String, Span), SystemError> {
    let word = text(value, "symmetry")?;
    let order = |digits: &str, least: u32| {
        digits
            .parse::<u32>()
            .is_ok_and(|order| (least..=LARGEST_ORDER).contains(&order))
    };
    let known = SYMMETRIES.contains(&word)
        || word
            .strip_prefix('C')
            .is_some_and(|digits| order(digits, 2))
        || word
            .strip_suffix("-gon")
            .is_some_and(|digits| order(digits, 3))
        || word
            .strip_prefix("sigma(")
            .and_then(|rest| rest.strip_suffix(')'))
            .is_some_and(|angle| angle.parse::<f64>().is_ok_and(f64::is_finite));
    if known {
        return Ok((word.to_owned(), span(value)));
    }
    Err(SystemError::at(
        span(value),
        Problem::UnknownWord {
            key: "symmetry",
            word: word.to_owned(),
            known: SYMMETRIES,
        },
    ))
}
