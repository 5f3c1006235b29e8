//! What can be wrong with a system file, and where.

use super::diagnostics;
use super::formula::{FormulaError, Span};
use crate::billiard::{GeometryError, Vec2};
use std::path::PathBuf;
use std::sync::Arc;
use thiserror::Error;

/// A text that messages point into: a system file, a table of points, the value of a setting.
#[derive(Clone, Debug)]
pub(super) struct Source {
    /// Name for people.
    pub(super) name: String,
    /// The whole text.
    pub(super) text: Arc<str>,
}

/// A mistake in a system file with its place.
#[derive(Clone, Debug)]
pub struct SystemError(Box<Details>);

#[derive(Clone, Debug)]
pub(super) struct Details {
    pub(super) problem: Problem,
    /// The text it is in; filled in by whoever knows it.
    pub(super) source: Option<Source>,
    pub(super) span: Option<Span>,
    /// A second place that belongs to it, with what it is.
    pub(super) other: Option<(Span, &'static str)>,
}

impl SystemError {
    /// A mistake somewhere in the text being read.
    pub(super) fn at(span: Span, problem: Problem) -> Self {
        Self(Box::new(Details {
            problem,
            source: None,
            span: Some(span),
            other: None,
        }))
    }

    /// A mistake of a text as a whole.
    pub(super) fn whole(name: String, problem: Problem) -> Self {
        Self(Box::new(Details {
            problem,
            source: Some(Source {
                name,
                text: Arc::from(""),
            }),
            span: None,
            other: None,
        }))
    }

    /// Points out a second place.
    pub(super) fn beside(mut self, other: Span, what: &'static str) -> Self {
        self.0.other = Some((other, what));
        self
    }

    /// Moves a mistake of another file as a whole to the place where that file is named.
    pub(super) fn named_at(mut self, span: Span) -> Self {
        if self.0.span.is_none() {
            self.0.span = Some(span);
            self.0.source = None;
        }
        self
    }

    /// Says which text the places refer to, unless that is known already.
    pub(super) fn in_source(mut self, source: &Source) -> Self {
        self.0.source.get_or_insert_with(|| source.clone());
        self
    }

    /// What is wrong.
    #[must_use]
    pub fn problem(&self) -> &Problem {
        &self.0.problem
    }

    /// Line and column of the mistake, counted from 1, columns in characters.
    #[must_use]
    pub fn position(&self) -> Option<(usize, usize)> {
        let (source, span) = (self.0.source.as_ref()?, self.0.span?);
        Some(diagnostics::position(&source.text, span.start))
    }

    /// The complete message for people, without colour: what is wrong, file, line and column, the offending line, and what
    /// would be right.
    #[must_use]
    pub fn render(&self) -> String {
        diagnostics::render(&self.0)
    }
}

impl std::fmt::Display for SystemError {
    fn fmt(&self, formatter: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        if let Some(source) = &self.0.source {
            write!(formatter, "{}", source.name)?;
            if let Some((line, column)) = self.position() {
                write!(formatter, ":{line}:{column}")?;
            }
            write!(formatter, ": ")?;
        }
        write!(formatter, "{}", self.0.problem)
    }
}

impl std::error::Error for SystemError {
    fn source(&self) -> Option<&(dyn std::error::Error + 'static)> {
        Some(&self.0.problem)
    }
}

/// Everything that can be wrong with a system file.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum Problem {
    /// The file cannot be read.
    #[error("cannot read {}: {why}", path.display())]
    Unreadable {
        /// The file.
        path: PathBuf,
        /// What the operating system says.
        why: String,
    },
    /// The file is larger than a system file can sensibly be.
    #[error("the file has {bytes} bytes, more than the {limit} that are read")]
    TooLarge {
        /// Its size.
        bytes: u64,
        /// The limit.
        limit: u64,
    },
    /// The file is not text.
    #[error("the file is not text (its byte {byte} is not valid UTF-8)")]
    NotText {
        /// The first byte that is wrong, counted from 0.
        byte: usize,
    },
    /// Not TOML.
    #[error("{message}")]
    Syntax {
        /// What the TOML reader says.
        message: String,
    },
    /// A key that has no meaning here.
    #[error("unknown key `{key}` in {table}")]
    UnknownKey {
        /// The key.
        key: String,
        /// Where it stands.
        table: &'static str,
        /// Keys that have a meaning here.
        known: &'static [&'static str],
    },
    /// A key that must be there.
    #[error("{table} has no `{key}`")]
    Missing {
        /// The key.
        key: &'static str,
        /// Where it is missing.
        table: &'static str,
        /// What to write.
        example: &'static str,
    },
    /// A value of another kind.
    #[error("{what} must be {expected}, not {found}")]
    WrongType {
        /// What it is for.
        what: String,
        /// What it must be.
        expected: &'static str,
        /// What it is.
        found: &'static str,
    },
    /// A formula is wrong.
    #[error("{0}")]
    Formula(FormulaError),
    /// A number is NaN or infinite.
    #[error("{text} is not a finite number")]
    NotFinite {
        /// What was written.
        text: String,
    },
    /// A name that a parameter cannot have.
    #[error("`{name}` cannot be the name of a parameter: {why}")]
    ParameterName {
        /// The name.
        name: String,
        /// Why not.
        why: &'static str,
    },
    /// A setting names a parameter that the system does not have.
    #[error("the system has no parameter `{name}`")]
    UnknownSetting {
        /// The name.
        name: String,
        /// Parameters of the system.
        known: Vec<String>,
    },
    /// A smooth system.
    #[error("smooth systems (`hamiltonian`) are not supported in this version")]
    Hamiltonian,
    /// A word that has no meaning for this key.
    #[error("`{word}` is not a value of `{key}`")]
    UnknownWord {
        /// The key.
        key: &'static str,
        /// The word.
        word: String,
        /// Words that have a meaning.
        known: &'static [&'static str],
    },
    /// A wall of no kind, or of several.
    #[error("a wall must be of exactly one kind, this one has {}", if found.is_empty() { "none".to_owned() } else { found.join(" and ") })]
    WallKind {
        /// Kinds it has.
        found: Vec<&'static str>,
    },
    /// A number outside its range.
    #[error("{what} is {value:?}, it must be {must}")]
    Range {
        /// What it is for.
        what: &'static str,
        /// The number.
        value: f64,
        /// What it must be.
        must: &'static str,
    },
    /// An arc whose ends are at different distances from its centre.
    #[error(
        "the arc begins at the distance {start} from its center and ends at the distance {end}"
    )]
    ArcRadius {
        /// Distance of its first point.
        start: f64,
        /// Distance of its last point.
        end: f64,
    },
    /// A wall does not begin where the wall before it ends.
    #[error("this wall begins at ({}, {}), but the one before ends at ({}, {})", start.x, start.y, end.x, end.y)]
    Gap {
        /// Where it begins.
        start: Vec2,
        /// Where the wall before ends.
        end: Vec2,
    },
    /// `start` contradicts the first wall.
    #[error("`start` is ({}, {}), but the first wall begins at ({}, {})", start.x, start.y, wall.x, wall.y)]
    Start {
        /// The given start.
        start: Vec2,
        /// Where the first wall begins.
        wall: Vec2,
    },
    /// A slit that leads back to its start.
    #[error("a slit must not be closed")]
    ClosedSlit,
    /// An outline that encloses nothing.
    #[error("the outline encloses no area")]
    NoArea,
    /// A curve without a finite value or derivative.
    #[error("the curve or one of its derivatives is not finite at t = {t}")]
    CurveNotFinite {
        /// Where.
        t: f64,
    },
    /// A curve with a kink, a jump or a pole.
    #[error("the formula has a kink, a jump or a pole between t = {from} and t = {to}")]
    Kink {
        /// Last sample before it.
        from: f64,
        /// First sample behind it.
        to: f64,
    },
    /// A polar curve with a negative radius.
    #[error("the radius is negative: r = {radius} at t = {t}")]
    NegativeRadius {
        /// Where.
        t: f64,
        /// The radius there.
        radius: f64,
    },
    /// A row of a table of points.
    #[error("this row has no two finite numbers x and y")]
    PointRow,
    /// Too few points.
    #[error("too few points: {found}, at least {least} are needed")]
    FewPoints {
        /// How many there are.
        found: usize,
        /// How many there must be.
        least: usize,
    },
    /// Two neighbouring points are the same.
    #[error("this point is the same as the one before")]
    RepeatedPoint,
    /// A key of `[units]` that has no meaning with these levels.
    #[error("`{key}` has no meaning with levels = \"{levels}\"")]
    UnitKey {
        /// The key.
        key: &'static str,
        /// The levels.
        levels: String,
    },
    /// A key of `[units]` that these levels need.
    #[error("levels = \"{levels}\" needs `{key}`")]
    UnitMissing {
        /// The key.
        key: &'static str,
        /// The levels.
        levels: String,
        /// What to write.
        example: &'static str,
    },
    /// The declared symmetry is not that of the shape.
    #[error(
        "the file declares the symmetry `{declared}`, but the shape has the symmetry `{found}`"
    )]
    Symmetry {
        /// What the file says.
        declared: String,
        /// What was found.
        found: String,
    },
    /// A curve that crosses itself.
    #[error("this wall crosses itself at ({}, {})", at.x, at.y)]
    CrossesItself {
        /// Where.
        at: Vec2,
    },
    /// The walls do not bound a domain.
    #[error("{0}")]
    Geometry(GeometryError),
}

impl Problem {
    /// What would be right.
    #[must_use]
    pub fn help(&self) -> Option<String> {
        let list = |words: &[&str]| words.join(", ");
        Some(match self {
            Self::TooLarge { .. } => {
                "put long lists of points into a file of their own: { points = \"outline.csv\" }"
                    .to_owned()
            }
            Self::UnknownKey { key, known, .. } => {
                if super::TOP_KEYS.contains(&key.as_str()) && !known.contains(&key.as_str()) {
                    format!("`{key}` belongs to the top of the file, before the first [table]")
                } else {
                    format!("known here: {}", list(known))
                }
            }
            Self::Missing { example, .. } | Self::UnitMissing { example, .. } => {
                format!("write {example}")
            }
            Self::Formula(error) => return error.problem.help(),
            Self::WrongType { what, .. } if what.starts_with("[[") => {
                format!("write {what} with two brackets: there may be several")
            }
            Self::UnknownSetting { known, .. } if known.is_empty() => {
                "it has no parameters at all".to_owned()
            }
            Self::UnknownSetting { known, .. } => format!("its parameters: {}", known.join(", ")),
            Self::Hamiltonian => "describe a billiard by [outline] with `wall`".to_owned(),
            Self::UnknownWord { known, .. } => format!("known: {}", list(known)),
            Self::WallKind { .. } => format!("kinds of walls: {}", list(&super::walls::KINDS)),
            Self::ArcRadius { .. } => {
                "both ends of an arc must have the same distance from `center`".to_owned()
            }
            Self::Gap { .. } => "walls must follow each other without gaps".to_owned(),
            Self::Start { .. } => "a curve has its own first point: leave `start` out".to_owned(),
            Self::ClosedSlit => "a closed wall inside the outline is a [[hole]]".to_owned(),
            Self::CurveNotFinite { .. } => {
                "choose a parameter in which the curve is smooth, such as an angle".to_owned()
            }
            Self::Kink { .. } => "a wall must be smooth: split it there into two walls".to_owned(),
            Self::PointRow => {
                "a row is x and y, separated by a comma or white space; comments begin with #"
                    .to_owned()
            }
            Self::Symmetry { found, .. } => {
                format!("write symmetry = \"{found}\", or leave it out")
            }
            Self::NoArea => "its walls must go around the shape, not back on themselves".to_owned(),
            Self::Geometry(error) => return geometry_help(error).map(str::to_owned),
            _ => return None,
        })
    }
}

fn geometry_help(error: &GeometryError) -> Option<&'static str> {
    Some(match error {
        GeometryError::Open { .. } => "the last wall must lead back to the start",
        GeometryError::NoLength { .. } => {
            "leave it out, or check the parameters that its ends depend on"
        }
        GeometryError::Clockwise { .. } => {
            "give the walls in the opposite order, counter-clockwise"
        }
        GeometryError::Crossing { .. } => "walls may meet at their common ends only",
        GeometryError::Outside { .. } => {
            "holes and slits must lie inside the outline, and not inside each other"
        }
        // What is irregular says itself what would be right.
        GeometryError::Irregular { .. } => return None,
    })
}
