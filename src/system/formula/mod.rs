//! Formulas in system files: read once into a tape, evaluated with plain numbers or with derivatives.
//!
//! A formula is folded as far as its constants go. What is left is a straight list of operations that [`Tape::evaluate`] runs
//! with any [`Number`]: `f64` for values, [`Jet`] for three derivatives with respect to one variable. Derivatives come from the
//! arithmetic of the numbers (forward-mode automatic differentiation), never from differences.

mod function;
mod number;
mod parse;
mod tape;
mod token;

#[cfg(test)]
mod tests;

pub use function::Function;
pub use number::{Jet, Number};
pub use parse::Builder;
pub use tape::{Origin, Pieces, Tape};

use thiserror::Error;

/// A stretch of text, in bytes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Span {
    /// First byte.
    pub start: usize,
    /// One past the last byte.
    pub end: usize,
}

impl Span {
    /// The bytes from `start` up to, not including, `end`.
    #[must_use]
    pub fn new(start: usize, end: usize) -> Self {
        Self { start, end }
    }

    /// The same stretch counted from an earlier origin.
    #[must_use]
    pub fn shifted(self, offset: usize) -> Self {
        Self::new(self.start + offset, self.end + offset)
    }
}

/// Named constants that formulas may use.
#[derive(Clone, Debug, Default)]
pub struct Scope(Vec<(String, f64)>);

impl Scope {
    /// Adds a constant after those that are there.
    pub fn insert(&mut self, name: &str, value: f64) {
        self.0.push((name.to_owned(), value));
    }

    /// Value of a constant.
    #[must_use]
    pub fn get(&self, name: &str) -> Option<f64> {
        self.0
            .iter()
            .find(|(known, _)| known == name)
            .map(|&(_, value)| value)
    }

    /// Names in the order in which they were added.
    pub fn names(&self) -> impl Iterator<Item = &str> {
        self.0.iter().map(|(name, _)| name.as_str())
    }

    /// All constants in the order in which they were added.
    #[must_use]
    pub fn into_pairs(self) -> Vec<(String, f64)> {
        self.0
    }
}

/// A mistake in a formula.
#[derive(Clone, Debug, Error, PartialEq)]
#[error("{problem}")]
pub struct FormulaError {
    /// Where in the formula.
    pub span: Span,
    /// What.
    pub problem: FormulaProblem,
}

impl FormulaError {
    fn new(span: Span, problem: FormulaProblem) -> Self {
        Self { span, problem }
    }
}

/// What is wrong with a formula.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum FormulaProblem {
    /// Nothing in it.
    #[error("the formula is empty")]
    Empty,
    /// A character that has no meaning.
    #[error("`{character}` has no meaning in a formula")]
    Character {
        /// The character.
        character: char,
    },
    /// Digits that are not a number.
    #[error("`{text}` is not a number")]
    Number {
        /// What was written.
        text: String,
    },
    /// Something else should stand here.
    #[error("expected {what}, found {found}")]
    Expected {
        /// What should stand here.
        what: &'static str,
        /// What stands here.
        found: String,
    },
    /// `**` instead of `^`.
    #[error("`**` is not an operator")]
    DoubleStar,
    /// A name that is neither a parameter nor a variable.
    #[error("unknown name `{name}`")]
    UnknownName {
        /// The name.
        name: String,
        /// Names that are known here.
        known: Vec<String>,
    },
    /// A function that does not exist.
    #[error("unknown function `{name}`")]
    UnknownFunction {
        /// The name.
        name: String,
    },
    /// A number that is used like a function.
    #[error("`{name}` is a number, not a function")]
    NotAFunction {
        /// The name.
        name: String,
    },
    /// A function without arguments.
    #[error("the function `{name}` needs its arguments in parentheses")]
    NoArguments {
        /// The function.
        name: String,
    },
    /// Too many or too few arguments.
    #[error("`{name}` takes {expected} argument{}, not {found}", if *.expected == 1 { "" } else { "s" })]
    ArgumentCount {
        /// The function.
        name: String,
        /// How many it takes.
        expected: usize,
        /// How many it got.
        found: usize,
    },
    /// Nested too deeply.
    #[error("the formula is nested more than {limit} levels deep")]
    TooDeep {
        /// The limit.
        limit: usize,
    },
    /// Too long.
    #[error("the formula is longer than {limit} bytes")]
    TooLong {
        /// The limit.
        limit: usize,
    },
    /// A constant divided by zero.
    #[error("division by zero")]
    DivisionByZero,
    /// A constant part without a finite value.
    #[error("{operation} is not a finite number")]
    NotFinite {
        /// What was to be computed.
        operation: String,
    },
}

impl FormulaProblem {
    /// What would be right.
    #[must_use]
    pub fn help(&self) -> Option<String> {
        match self {
            Self::UnknownName { known, .. } => Some(format!("known here: {}", known.join(", "))),
            Self::UnknownFunction { name } => Some(if name == "ln" {
                "the natural logarithm is written log(x)".to_owned()
            } else {
                format!("known functions: {}", function_names().join(", "))
            }),
            Self::NotAFunction { name } => Some(format!("for a product write {name}*(...)")),
            Self::NoArguments { name } => Some(format!("write {name}(...)")),
            Self::DoubleStar => Some("write x^2 for a power".to_owned()),
            Self::Expected {
                what: "an operator",
                ..
            } => Some("a product needs its *: 2*x, not 2x".to_owned()),
            Self::Character { .. } => {
                Some("formulas use numbers, names, + - * / ^, parentheses and commas".to_owned())
            }
            Self::TooDeep { .. } | Self::TooLong { .. } => {
                Some("name parts of it as parameters".to_owned())
            }
            _ => None,
        }
    }
}

/// Names of all functions.
#[must_use]
pub fn function_names() -> Vec<&'static str> {
    let one = Function::NAMES.iter().map(|&(name, _)| name);
    one.chain(tape::Binary::NAMES.iter().map(|&(name, _)| name))
        .collect()
}

/// May a parameter have this name? Names of functions and of pi have their meaning already, and `t` is the variable of curves.
#[must_use]
pub fn is_reserved(name: &str) -> bool {
    name == "pi" || name == "t" || parse::arity(name).is_some()
}

/// Is this the form of a name: a letter or _, then letters, digits or _?
#[must_use]
pub fn is_name(text: &str) -> bool {
    let mut bytes = text.bytes();
    bytes
        .next()
        .is_some_and(|byte| byte.is_ascii_alphabetic() || byte == b'_')
        && bytes.all(|byte| byte.is_ascii_alphanumeric() || byte == b'_')
}

/// Value of a formula in constants only.
///
/// # Errors
/// What is wrong with the formula, and where.
pub fn constant(text: &str, scope: &Scope) -> Result<f64, FormulaError> {
    Builder::new(scope, &[]).value(text)
}
