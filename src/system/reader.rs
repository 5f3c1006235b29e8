//! Takes values out of the tree that the TOML reader makes, and says where they stand when they are wrong.

use super::error::{Problem, SystemError};
use super::formula::{self, Builder, FormulaError, Scope, Span, Tape};
use crate::billiard::Vec2;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// A value with its place.
pub(super) type Value<'t> = &'t Spanned<DeValue<'t>>;

/// Lengths beyond this size, and coordinates, would overflow when squared and multiplied.
const LARGEST: f64 = 1e60;

/// Place of a value.
pub(super) fn span<T>(value: &Spanned<T>) -> Span {
    let range = value.span();
    Span::new(range.start, range.end)
}

/// A table with its place and its name for people.
#[derive(Clone, Copy)]
pub(super) struct Table<'t> {
    table: &'t DeTable<'t>,
    pub(super) span: Span,
    pub(super) title: &'static str,
}

impl<'t> Table<'t> {
    pub(super) fn new(table: &'t DeTable<'t>, span: Span, title: &'static str) -> Self {
        Self { table, span, title }
    }

    /// The value as a table, all of whose keys are known.
    pub(super) fn of(
        value: Value<'t>,
        title: &'static str,
        known: &'static [&'static str],
    ) -> Result<Self, SystemError> {
        let table = Self::any(value, title)?;
        table.deny_unknown(known)?;
        Ok(table)
    }

    /// The value as a table with any keys.
    pub(super) fn any(value: Value<'t>, title: &'static str) -> Result<Self, SystemError> {
        match value.get_ref() {
            DeValue::Table(table) => Ok(Self::new(table, span(value), title)),
            other => Err(wrong_type(value, title, "a table", other)),
        }
    }

    /// The same table under another name for people.
    pub(super) fn called(self, title: &'static str) -> Self {
        Self { title, ..self }
    }

    pub(super) fn deny_unknown(&self, known: &'static [&'static str]) -> Result<(), SystemError> {
        let unknown = self
            .keys()
            .find(|(key, _)| !known.contains(&key.get_ref().as_ref()));
        match unknown {
            None => Ok(()),
            Some((key, _)) => Err(SystemError::at(
                span(key),
                Problem::UnknownKey {
                    key: key.get_ref().to_string(),
                    table: self.title,
                    known,
                },
            )),
        }
    }

    /// Keys and values in the order of the file.
    pub(super) fn keys(
        &self,
    ) -> impl Iterator<Item = (&'t Spanned<toml::de::DeString<'t>>, Value<'t>)> {
        let mut keys: Vec<_> = self.table.iter().collect();
        keys.sort_by_key(|(key, _)| key.span().start);
        keys.into_iter()
    }

    pub(super) fn get(&self, key: &str) -> Option<Value<'t>> {
        self.table.get(key)
    }

    pub(super) fn require(
        &self,
        key: &'static str,
        example: &'static str,
    ) -> Result<Value<'t>, SystemError> {
        self.get(key).ok_or_else(|| {
            SystemError::at(
                self.span,
                Problem::Missing {
                    key,
                    table: self.title,
                    example,
                },
            )
        })
    }
}

fn wrong_type(
    value: Value<'_>,
    what: &str,
    expected: &'static str,
    found: &DeValue<'_>,
) -> SystemError {
    SystemError::at(
        span(value),
        Problem::WrongType {
            what: what.to_owned(),
            expected,
            found: kind(found),
        },
    )
}

fn kind(value: &DeValue<'_>) -> &'static str {
    match value {
        DeValue::String(_) => "text",
        DeValue::Integer(_) | DeValue::Float(_) => "a number",
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a date",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}

/// The value as text.
pub(super) fn text<'t>(value: Value<'t>, what: &str) -> Result<&'t str, SystemError> {
    match value.get_ref() {
        DeValue::String(text) => Ok(text),
        other => Err(wrong_type(value, what, "text in quotes", other)),
    }
}

/// The value as one of the known words.
pub(super) fn word(
    value: Value<'_>,
    key: &'static str,
    known: &'static [&'static str],
) -> Result<usize, SystemError> {
    let word = text(value, key)?;
    known
        .iter()
        .position(|&other| other == word)
        .ok_or_else(|| {
            SystemError::at(
                span(value),
                Problem::UnknownWord {
                    key,
                    word: word.to_owned(),
                    known,
                },
            )
        })
}

/// The value as a list.
pub(super) fn list<'t>(
    value: Value<'t>,
    what: &str,
) -> Result<&'t [Spanned<DeValue<'t>>], SystemError> {
    match value.get_ref() {
        DeValue::Array(items) => Ok(items),
        other => Err(wrong_type(value, what, "a list [ ... ]", other)),
    }
}

/// The value of `key` as a list of tables, each called `title`.
pub(super) fn tables<'t>(
    value: Value<'t>,
    key: &str,
    title: &'static str,
    known: &'static [&'static str],
) -> Result<Vec<Table<'t>>, SystemError> {
    list(value, key)?
        .iter()
        .map(|item| Table::of(item, title, known))
        .collect()
}

/// The text of a formula and where it stands in the file.
#[derive(Clone, Debug)]
pub(super) struct FormulaText {
    pub(super) text: String,
    whole: Span,
    /// Byte of the file at which the text begins, if it stands there unchanged.
    inside: Option<usize>,
}

impl FormulaText {
    /// Place in the file of a place in the formula.
    pub(super) fn locate(&self, span: Span) -> Span {
        self.inside
            .map_or(self.whole, |offset| span.shifted(offset))
    }

    pub(super) fn error(&self, error: FormulaError) -> SystemError {
        SystemError::at(self.locate(error.span), Problem::Formula(error))
    }
}

/// What values are read with: the text of the file and the parameters known so far.
#[derive(Clone, Copy)]
pub(super) struct Reader<'a> {
    pub(super) text: &'a str,
    pub(super) scope: &'a Scope,
}

impl Reader<'_> {
    /// The value as a number: a number or a formula in the parameters.
    pub(super) fn number(&self, value: Value<'_>, what: &str) -> Result<f64, SystemError> {
        let text = self.formula_text(value, what)?;
        match value.get_ref() {
            DeValue::String(_) => {
                formula::constant(&text.text, self.scope).map_err(|error| text.error(error))
            }
            _ => plain_number(value),
        }
    }

    /// A number that must be positive.
    pub(super) fn positive(
        &self,
        value: Value<'_>,
        what: &'static str,
    ) -> Result<f64, SystemError> {
        let number = self.length(value, what)?;
        if number > 0.0 {
            Ok(number)
        } else {
            Err(SystemError::at(
                span(value),
                Problem::Range {
                    what,
                    value: number,
                    must: "positive",
                },
            ))
        }
    }

    /// A coordinate or a length.
    pub(super) fn length(&self, value: Value<'_>, what: &'static str) -> Result<f64, SystemError> {
        let number = self.number(value, what)?;
        if number.abs() <= LARGEST {
            Ok(number)
        } else {
            Err(SystemError::at(
                span(value),
                Problem::Range {
                    what,
                    value: number,
                    must: "below 1e60 in size",
                },
            ))
        }
    }

    /// A point [x, y].
    pub(super) fn point(&self, value: Value<'_>, what: &'static str) -> Result<Vec2, SystemError> {
        match value.get_ref() {
            DeValue::Array(items) if items.len() == 2 => Ok(Vec2::new(
                self.length(&items[0], what)?,
                self.length(&items[1], what)?,
            )),
            other => Err(wrong_type(value, what, "a point [x, y]", other)),
        }
    }

    /// The value as the text of a formula; plain numbers are formulas too.
    pub(super) fn formula_text(
        &self,
        value: Value<'_>,
        what: &str,
    ) -> Result<FormulaText, SystemError> {
        let whole = span(value);
        let written = self.text.get(whole.start..whole.end).unwrap_or("");
        let (text, inside) = match value.get_ref() {
            DeValue::String(text) => {
                // Escapes make the text differ from what stands in the file; then only the whole value can be shown.
                let inside = written.find(text.as_ref()).filter(|_| !text.is_empty());
                (text.to_string(), inside.map(|offset| whole.start + offset))
            }
            DeValue::Integer(_) | DeValue::Float(_) => {
                (format!("({})", plain_number(value)?), None)
            }
            other => return Err(wrong_type(value, what, "a number or a formula", other)),
        };
        Ok(FormulaText {
            text,
            whole,
            inside,
        })
    }

    /// Compiles formulas in the variable t.
    pub(super) fn tape(&self, formulas: &[FormulaText]) -> Result<Tape, SystemError> {
        let mut builder = Builder::new(self.scope, &["t"]);
        for formula in formulas {
            builder = builder
                .formula(&formula.text)
                .map_err(|error| formula.error(error))?;
        }
        Ok(builder.finish())
    }
}

fn plain_number(value: Value<'_>) -> Result<f64, SystemError> {
    let (number, text) = match value.get_ref() {
        DeValue::Integer(integer) => {
            let number = i64::from_str_radix(integer.as_str(), integer.radix());
            (number.map_or(f64::NAN, |n| n as f64), integer.to_string())
        }
        DeValue::Float(float) => {
            let number = float.as_str().parse::<f64>();
            (number.unwrap_or(f64::NAN), float.to_string())
        }
        _ => (f64::NAN, "this".to_owned()),
    };
    if number.is_finite() {
        Ok(number)
    } else {
        Err(SystemError::at(span(value), Problem::NotFinite { text }))
    }
}
