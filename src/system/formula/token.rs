//! Cuts a formula into tokens that know their place.

use super::{FormulaError, FormulaProblem, Span};

/// What a token is.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Kind {
    Number(f64),
    Name,
    Plus,
    Minus,
    Star,
    Slash,
    Caret,
    Open,
    Close,
    Comma,
    End,
}

/// A token and its place in the formula.
#[derive(Clone, Copy, Debug)]
pub(super) struct Token {
    pub(super) kind: Kind,
    pub(super) span: Span,
}

/// All tokens of a formula, the last one being [`Kind::End`].
pub(super) fn tokens(text: &str) -> Result<Vec<Token>, FormulaError> {
    let mut found = Vec::new();
    let mut rest = text.char_indices().peekable();
    while let Some(&(start, character)) = rest.peek() {
        if character.is_whitespace() {
            rest.next();
            continue;
        }
        let (kind, end) = match character {
            '0'..='9' | '.' => number(text, start)?,
            'a'..='z' | 'A'..='Z' | '_' => (Kind::Name, end_of_name(text, start)),
            other => (symbol(other, start)?, start + other.len_utf8()),
        };
        found.push(Token {
            kind,
            span: Span::new(start, end),
        });
        while rest.next_if(|&(at, _)| at < end).is_some() {}
    }
    found.push(Token {
        kind: Kind::End,
        span: Span::new(text.len(), text.len()),
    });
    Ok(found)
}

fn symbol(character: char, start: usize) -> Result<Kind, FormulaError> {
    Ok(match character {
        '+' => Kind::Plus,
        '-' => Kind::Minus,
        '*' => Kind::Star,
        '/' => Kind::Slash,
        '^' => Kind::Caret,
        '(' => Kind::Open,
        ')' => Kind::Close,
        ',' => Kind::Comma,
        other => {
            return Err(FormulaError::new(
                Span::new(start, start + other.len_utf8()),
                FormulaProblem::Character { character: other },
            ));
        }
    })
}

fn end_of_name(text: &str, start: usize) -> usize {
    end_while(text, start, |byte| {
        byte.is_ascii_alphanumeric() || byte == b'_'
    })
}

/// Index of the first byte from `start` on that does not satisfy the condition.
fn end_while(text: &str, start: usize, belongs: impl Fn(u8) -> bool) -> usize {
    text.as_bytes()[start..]
        .iter()
        .position(|&byte| !belongs(byte))
        .map_or(text.len(), |length| start + length)
}

/// Digits with at most one point, and an exponent if one follows: 12, 1.5, .5, 1e-3.
fn number(text: &str, start: usize) -> Result<(Kind, usize), FormulaError> {
    let bytes = text.as_bytes();
    let mut end = end_while(text, start, |byte| byte.is_ascii_digit() || byte == b'.');
    if matches!(bytes.get(end), Some(b'e' | b'E')) {
        let sign = usize::from(matches!(bytes.get(end + 1), Some(b'+' | b'-')));
        if bytes.get(end + 1 + sign).is_some_and(u8::is_ascii_digit) {
            end = end_while(text, end + 1 + sign, |byte| byte.is_ascii_digit());
        }
    }
    let span = Span::new(start, end);
    match text[start..end].parse::<f64>() {
        Ok(value) if value.is_finite() => Ok((Kind::Number(value), end)),
        Ok(_) => Err(FormulaError::new(
            span,
            FormulaProblem::NotFinite {
                operation: text[start..end].to_owned(),
            },
        )),
        Err(_) => Err(FormulaError::new(
            span,
            FormulaProblem::Number {
                text: text[start..end].to_owned(),
            },
        )),
    }
}
