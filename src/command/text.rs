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
