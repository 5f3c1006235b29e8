//! Numbers and words for people.

/// Exponents of ten between which numbers are written without an exponent.
const PLAIN: std::ops::Range<i32> = -4..8;

/// A number with at most `digits` significant digits, without trailing zeros; `-` where it is not a number.
pub(super) fn significant(value: f64, digits: usize) -> String {
    if value.is_nan() {
        return "-".into();
    }
    if value.is_infinite() {
        return if value > 0.0 { "infinite" } else { "-infinite" }.into();
    }
    if value == 0.0 {
        return "0".into();
    }
    let scientific = format!("{value:.*e}", digits.saturating_sub(1));
    let Some((mantissa, exponent)) = scientific.split_once('e') else {
        return scientific;
    };
    let power: i32 = exponent.parse().unwrap_or(0);
    if PLAIN.contains(&power) {
        let decimals = (digits as i32 - 1 - power).max(0) as usize;
        trimmed(&format!("{value:.decimals$}")).to_owned()
    } else {
        format!("{}e{power}", trimmed(mantissa))
    }
}

/// Without the zeros at the end of a decimal fraction.
fn trimmed(text: &str) -> &str {
    if text.contains('.') {
        text.trim_end_matches('0').trim_end_matches('.')
    } else {
        text
    }
}

/// A value with its standard deviation, `31.42 +- 0.03`: the deviation to one digit, to two where the first is a one.
pub(super) fn with_error(value: f64, error: f64) -> String {
    let decimals = decimals_of(error);
    match decimals {
        Some(decimals) if value.is_finite() => {
            let (value, error) = (fixed(value, decimals), fixed(error, decimals));
            format!("{value} +- {error}")
        }
        _ => significant(value, DIGITS_WITHOUT_ERROR),
    }
}

/// A value to as many decimals as its standard deviation allows.
pub(super) fn to_error(value: f64, error: f64) -> f64 {
    decimals_of(error)
        .and_then(|decimals| fixed(value, decimals).parse().ok())
        .unwrap_or(value)
}

/// Digits of a value whose error is not known.
const DIGITS_WITHOUT_ERROR: usize = 7;

/// Decimals of one digit of an error, of two where the first is a one; negative for tens.
fn decimals_of(error: f64) -> Option<i32> {
    if !(error > 0.0 && error.is_finite()) {
        return None;
    }
    let power = error.log10().floor();
    let digits = if error / 10f64.powf(power) < 1.95 {
        2
    } else {
        1
    };
    Some(digits - 1 - power as i32)
}

/// With that many decimals; whole tens where they are negative.
fn fixed(value: f64, decimals: i32) -> String {
    let text = if decimals >= 0 {
        format!("{value:.*}", decimals as usize)
    } else {
        let unit = 10f64.powi(-decimals);
        format!("{:.0}", (value / unit).round() * unit)
    };
    match text.strip_prefix('-') {
        Some(zero) if zero.chars().all(|c| matches!(c, '0' | '.')) => zero.to_owned(),
        _ => text,
    }
}

/// A number with its unit, if it has one.
pub(super) fn with_unit(value: f64, digits: usize, unit: &str) -> String {
    let number = significant(value, digits);
    if unit.is_empty() {
        number
    } else {
        format!("{number} {unit}")
    }
}

/// `1 orbit`, `2 orbits`.
pub(super) fn counted(count: usize, one: &str, many: &str) -> String {
    format!("{count} {}", if count == 1 { one } else { many })
}

/// Two columns: names and what they are.
pub(super) fn listed(pairs: &[(String, String)]) -> String {
    let width = pairs
        .iter()
        .map(|(name, _)| name.chars().count())
        .max()
        .unwrap_or(0);
    pairs
        .iter()
        .map(|(name, value)| format!("{name:<width$}  {value}").trim_end().to_owned() + "\n")
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn errors_have_one_or_two_digits() {
        for (value, error, text) in [
            (31.4187, 0.0312, "31.42 +- 0.03"),
            (31.4187, 0.0128, "31.419 +- 0.013"),
            (31.4187, 0.0098, "31.419 +- 0.010"),
            (0.000_312_4, 2e-6, "0.000312 +- 0.000002"),
            (1234.5, 33.0, "1230 +- 30"),
            (8.0, 1.0, "8.0 +- 1.0"),
            (-0.5, 0.04, "-0.50 +- 0.04"),
            (-0.3, 5.0, "0 +- 5"),
            (2.5, 0.0, "2.5"),
            (2.5, f64::NAN, "2.5"),
            (f64::NAN, 0.1, "-"),
        ] {
            assert_eq!(with_error(value, error), text);
        }
        assert_eq!(to_error(31.4187, 0.0312), 31.42);
        assert_eq!(to_error(31.4187, f64::INFINITY), 31.4187);
    }

    #[test]
    fn numbers_are_short_and_right() {
        for (value, text) in [
            (0.0, "0"),
            (1.0, "1"),
            (-0.5, "-0.5"),
            (123_456.789, "123456.8"),
            (0.000_123_456_78, "0.0001234568"),
            (1.5e-7, "1.5e-7"),
            (2.0e9, "2e9"),
            (9.999_999_99, "10"),
            (f64::INFINITY, "infinite"),
        ] {
            assert_eq!(significant(value, 7), text);
        }
    }
}
