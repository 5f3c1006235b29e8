//! Windows of levels in the unit of the system file.

use super::arguments::WindowOptions;
use super::error::CommandError;
use super::subject::Subject;
use super::text::significant;
use super::value::number;

/// A window in the unit of the file's levels: 0 <= from < to.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Window {
    /// Lower end.
    pub(super) from: f64,
    /// Upper end.
    pub(super) to: f64,
}

/// Where a window may begin.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Begin {
    /// At zero or above: all levels from the lowest one on.
    AtZero,
    /// Above zero: semiclassical terms mean nothing at k = 0.
    AboveZero,
}

impl Window {
    /// The window for people: `k from 8 to 42`.
    pub(super) fn words(self, subject: &Subject) -> String {
        format!(
            "{} from {} to {}",
            subject.system.units.column(),
            significant(self.from, 6),
            subject.level(self.to, 6)
        )
    }
}

/// The window that was typed as --k, --energy or --frequency, which must be the variable of the file.
pub(super) fn asked(
    typed: &WindowOptions,
    subject: &Subject,
    begin: Begin,
) -> Result<Option<Window>, CommandError> {
    let units = &subject.system.units;
    let windows = [
        ("k", &typed.k),
        ("energy", &typed.energy),
        ("frequency", &typed.frequency),
    ];
    let mut given = windows
        .iter()
        .filter_map(|(option, text)| text.as_deref().map(|text| (*option, text)));
    let Some((option, text)) = given.next() else {
        return Ok(None);
    };
    if let Some((second, _)) = given.next() {
        return Err(CommandError::TwoWindows {
            first: option,
            second,
        });
    }
    let expected = units.window_option();
    if option != expected {
        let label = units.level_label();
        let unit = if label.is_empty() {
            label
        } else {
            format!(" in {label}")
        };
        return Err(CommandError::WindowUnit {
            given: option,
            expected,
            unit,
        });
    }
    parse(option, text, begin).map(Some)
}

/// FROM:TO.
fn parse(option: &'static str, text: &str, begin: Begin) -> Result<Window, CommandError> {
    let (from, to) = text
        .split_once(':')
        .ok_or_else(|| CommandError::WindowForm {
            option,
            text: text.to_owned(),
        })?;
    let (from, to) = (number(option, from)?, number(option, to)?);
    if from < 0.0 || (from == 0.0 && begin == Begin::AboveZero) {
        Err(CommandError::WindowBegin {
            option,
            from,
            least: match begin {
                Begin::AtZero => "at 0 or above",
                Begin::AboveZero => "above 0",
            },
        })
    } else if from > to {
        Err(CommandError::WindowReversed { option, from, to })
    } else if from == to {
        Err(CommandError::WindowEmpty { option, at: from })
    } else {
        // -0 is 0
        Ok(Window {
            from: from.abs(),
            to,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_window_is_two_numbers_in_order() {
        let read = parse("k", "8:42.5", Begin::AboveZero).expect("a window");
        assert_eq!(
            read,
            Window {
                from: 8.0,
                to: 42.5
            }
        );
        for wrong in [
            "", ":", "8", "8:", ":42", "8:8", "9:8", "-1:8", "nan:8", "8:inf", "8:9:10", "a:b",
            "0:0",
        ] {
            for begin in [Begin::AtZero, Begin::AboveZero] {
                assert!(parse("k", wrong, begin).is_err(), "{wrong}");
            }
        }
        assert!(parse("k", "0:8", Begin::AboveZero).is_err());
        assert_eq!(
            parse("k", "0:8", Begin::AtZero).expect("a window").from,
            0.0
        );
    }
}
