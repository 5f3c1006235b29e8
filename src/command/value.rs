//! Values of options, from text to numbers.

use super::error::CommandError;

/// A finite number.
pub(super) fn number(option: &'static str, text: &str) -> Result<f64, CommandError> {
    let value: f64 = text.trim().parse().map_err(|_| CommandError::NotANumber {
        option,
        text: text.to_owned(),
    })?;
    if value.is_finite() {
        Ok(value)
    } else {
        Err(CommandError::NotFinite {
            option,
            text: text.to_owned(),
        })
    }
}

/// A finite number above zero.
pub(super) fn positive(option: &'static str, text: &str) -> Result<f64, CommandError> {
    match number(option, text)? {
        value if value > 0.0 => Ok(value),
        value => Err(CommandError::NotPositive { option, value }),
    }
}

/// A whole number from 1 to `most`.
pub(super) fn count(option: &'static str, text: &str, most: usize) -> Result<usize, CommandError> {
    match text.trim().parse() {
        Ok(value) if (1..=most).contains(&value) => Ok(value),
        _ => Err(CommandError::NotCount {
            option,
            text: text.to_owned(),
            least: 1,
            most,
        }),
    }
}

/// Several positive numbers with commas between them.
pub(super) fn positive_list(
    option: &'static str,
    texts: &[String],
) -> Result<Vec<f64>, CommandError> {
    texts
        .iter()
        .flat_map(|text| text.split(','))
        .map(|text| positive(option, text))
        .collect()
}

/// NAME=VALUE, the value left as text: it may be a formula.
pub(super) fn setting(text: &str) -> Result<(String, String), CommandError> {
    match text.split_once('=') {
        Some((name, value)) if !name.trim().is_empty() && !value.trim().is_empty() => {
            Ok((name.trim().to_owned(), value.trim().to_owned()))
        }
        _ => Err(CommandError::Setting {
            text: text.to_owned(),
        }),
    }
}

/// A window in the unit of the file's levels: 0 < from < to.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Window {
    /// Lower end.
    pub(super) from: f64,
    /// Upper end.
    pub(super) to: f64,
}

/// FROM:TO.
pub(super) fn window(option: &'static str, text: &str) -> Result<Window, CommandError> {
    let (from, to) = text
        .split_once(':')
        .ok_or_else(|| CommandError::WindowForm {
            option,
            text: text.to_owned(),
        })?;
    let (from, to) = (number(option, from)?, number(option, to)?);
    if from <= 0.0 {
        Err(CommandError::WindowBegin { option, from })
    } else if from > to {
        Err(CommandError::WindowReversed { option, from, to })
    } else if from == to {
        Err(CommandError::WindowEmpty { option, at: from })
    } else {
        Ok(Window { from, to })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_window_is_two_numbers_in_order() {
        let read = window("k", "8:42.5").expect("a window");
        assert_eq!(
            read,
            Window {
                from: 8.0,
                to: 42.5
            }
        );
        for wrong in [
            "", ":", "8", "8:", ":42", "8:8", "9:8", "-1:8", "0:8", "nan:8", "8:inf", "8:9:10",
            "a:b",
        ] {
            assert!(window("k", wrong).is_err(), "{wrong}");
        }
    }

    #[test]
    fn settings_may_hold_formulas() {
        let (name, value) = setting("a = 2*(b==1)").expect("a setting");
        assert_eq!((name.as_str(), value.as_str()), ("a", "2*(b==1)"));
        for wrong in ["a", "=1", "a=", ""] {
            assert!(setting(wrong).is_err(), "{wrong}");
        }
    }

    #[test]
    fn lists_take_commas_and_repetition() {
        let typed = ["1,2.5".to_owned(), "3e1".to_owned()];
        assert_eq!(
            positive_list("at", &typed).expect("numbers"),
            [1.0, 2.5, 30.0]
        );
        assert!(positive_list("at", &["1,,2".to_owned()]).is_err());
    }
}
