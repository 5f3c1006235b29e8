//! Values of options, from text to numbers.

use super::error::CommandError;
use std::collections::BTreeSet;

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

/// Whole numbers from 1 on and ranges of them, `12,15-18`: ascending, each once.
pub(super) fn numbers(
    option: &'static str,
    text: &str,
    most: usize,
) -> Result<Vec<usize>, CommandError> {
    let wrong = |part: &str| CommandError::NotNumbers {
        option,
        text: part.to_owned(),
    };
    let one = |text: &str, part: &str| -> Result<usize, CommandError> {
        match text.trim().parse() {
            Ok(number) if number > 0 => Ok(number),
            _ => Err(wrong(part)),
        }
    };
    let mut numbers = BTreeSet::new();
    for part in text.split(',') {
        let (first, last) = part.split_once('-').unwrap_or((part, part));
        let (first, last) = (one(first, part)?, one(last, part)?);
        if first > last {
            return Err(wrong(part));
        }
        if last - first >= most {
            return Err(CommandError::TooManyNumbers { option, most });
        }
        numbers.extend(first..=last);
    }
    if numbers.len() > most {
        return Err(CommandError::TooManyNumbers { option, most });
    }
    Ok(numbers.into_iter().collect())
}

/// A number from `least` to `most`.
pub(super) fn within(
    option: &'static str,
    text: &str,
    [least, most]: [f64; 2],
) -> Result<f64, CommandError> {
    match number(option, text)? {
        value if (least..=most).contains(&value) => Ok(value),
        value => Err(CommandError::OutOfRange {
            option,
            value,
            least,
            most,
        }),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lists_of_numbers_have_ranges() {
        let read = |text| numbers("only", text, 10).ok();
        assert_eq!(read("12, 15-18"), Some(vec![12, 15, 16, 17, 18]));
        assert_eq!(read("3,1-3,2"), Some(vec![1, 2, 3]));
        for wrong in [
            "", ",", "0", "1-", "-1", "5-3", "1.5", "a", "1-11", "1-6,7-12", "1-2-3",
        ] {
            assert_eq!(read(wrong), None, "{wrong}");
        }
    }

    #[test]
    fn ranges_hold_their_ends() {
        let read = |text| within("accuracy", text, [1e-13, 1e-3]);
        assert!(read("1e-3").is_ok() && read("1e-13").is_ok());
        for wrong in ["0", "-1e-5", "2e-3", "9e-14", "nan", "x"] {
            assert!(read(wrong).is_err(), "{wrong}");
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
