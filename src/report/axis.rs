//! The range of a quantity, its ticks and their labels.

/// A span below this fraction of the numbers themselves is only rounding: no ticks could be told apart.
const SMALLEST_RELATIVE_SPAN: f64 = 1e-11;
/// Numbers beyond this size are drawn at this size, so that no difference of two numbers overflows.
const LARGEST: f64 = 1e300;
/// Labels longer than this many digits are written as a difference from a common offset.
const MOST_DIGITS: i32 = 7;
/// Powers of ten of the largest label outside of which a common factor is taken out.
const PLAIN_POWERS: std::ops::RangeInclusive<i32> = -2..=4;

/// Places of the ticks, and what is written at them.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Ticks {
    /// Where they are, increasing.
    pub(super) values: Vec<f64>,
    /// Their labels.
    pub(super) labels: Vec<String>,
    /// What to do to a label to get the value, such as a common factor; empty if nothing.
    pub(super) note: String,
}

/// A drawn range.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Axis {
    /// Lower end.
    pub(super) low: f64,
    /// Upper end, above `low`.
    pub(super) high: f64,
}

impl Axis {
    /// The range from `low` to `high`; without extent it is widened, upside down it is turned round.
    pub(super) fn new(low: f64, high: f64) -> Self {
        let clean = |value: f64| {
            if value.is_nan() {
                0.0
            } else {
                value.clamp(-LARGEST, LARGEST)
            }
        };
        let (low, high) = (clean(low).min(clean(high)), clean(low).max(clean(high)));
        let size = low.abs().max(high.abs());
        // A span that is not a normal number has no ticks either.
        if high - low > (SMALLEST_RELATIVE_SPAN * size).max(f64::MIN_POSITIVE * 1e12) {
            return Self { low, high };
        }
        let middle = 0.5 * (low + high);
        let half = if size > 1e-280 { 0.05 * size } else { 1.0 };
        Self {
            low: middle - half,
            high: middle + half,
        }
    }

    /// The range of the finite ones of some values; from 0 to 1 if there is none.
    pub(super) fn around(values: impl IntoIterator<Item = f64>) -> Self {
        let (mut low, mut high) = (f64::INFINITY, f64::NEG_INFINITY);
        for value in values.into_iter().filter(|value| value.is_finite()) {
            low = low.min(value);
            high = high.max(value);
        }
        if low > high {
            Self {
                low: 0.0,
                high: 1.0,
            }
        } else {
            Self::new(low, high)
        }
    }

    /// The range widened at both ends by a fraction of itself.
    pub(super) fn widened(self, fraction: f64) -> Self {
        let margin = fraction * (self.high - self.low);
        Self {
            low: self.low - margin,
            high: self.high + margin,
        }
    }

    /// The smallest range that is symmetric about zero and holds this one.
    pub(super) fn symmetric(self) -> Self {
        let reach = self.low.abs().max(self.high.abs());
        Self {
            low: -reach,
            high: reach,
        }
    }

    /// Extent.
    pub(super) fn span(self) -> f64 {
        self.high - self.low
    }

    /// Position of a value, 0 at the lower end and 1 at the upper.
    pub(super) fn fraction(self, value: f64) -> f64 {
        (value - self.low) / self.span()
    }

    /// Ticks at multiples of 1, 2 or 5 times a power of ten, at most `most` intervals.
    pub(super) fn ticks(self, most: usize) -> Ticks {
        let (mantissa, power) = nice_step(self.span() / most.max(1) as f64);
        let step = scaled(mantissa, power);
        // A tick that rounding puts just outside belongs to the end of the axis.
        let slack = 1e-6;
        let first = (self.low / step - slack).ceil();
        let last = (self.high / step + slack).floor();
        if last < first {
            // The step is longer than the axis and none of its multiples lies on it: a finer one has a tick.
            return self.ticks(most.max(1) + 1);
        }
        let count = (last - first) as usize + 1;
        let multiples: Vec<f64> = (0..count).map(|index| first + index as f64).collect();
        let values = multiples.iter().map(|multiple| multiple * step).collect();
        let size = self.low.abs().max(self.high.abs());
        let digits = power_of_ten(size) - power + 1;
        let offset = if digits > MOST_DIGITS { first } else { 0.0 };
        let size = if offset == 0.0 { size } else { self.span() };
        let factor = if PLAIN_POWERS.contains(&power_of_ten(size)) {
            0
        } else {
            power_of_ten(size)
        };
        let decimals = usize::try_from(factor - power).unwrap_or(0);
        let labels = multiples
            .iter()
            .map(|multiple| {
                plain(
                    scaled((multiple - offset) * mantissa, power - factor),
                    decimals,
                )
            })
            .collect();
        Ticks {
            values,
            labels,
            note: note(factor, offset * step, usize::try_from(-power).unwrap_or(0)),
        }
    }
}

/// mantissa x 10^power, rounded as the decimal number would be (a product with 10^-n is not).
fn scaled(mantissa: f64, power: i32) -> f64 {
    if (-300..0).contains(&power) {
        mantissa / 10f64.powi(-power)
    } else {
        mantissa * 10f64.powi(power)
    }
}

/// The smallest of 1, 2, 5 x 10^n that is not below `least`: mantissa and n.
fn nice_step(least: f64) -> (f64, i32) {
    let power = power_of_ten(least);
    for mantissa in [1.0, 2.0, 5.0] {
        if scaled(mantissa, power) >= least * (1.0 - 1e-9) {
            return (mantissa, power);
        }
    }
    (1.0, power + 1)
}

/// Largest n with 10^n <= value (to rounding); 0 for zero.
fn power_of_ten(value: f64) -> i32 {
    if value > 0.0 {
        (value.log10() + 1e-12).floor() as i32
    } else {
        0
    }
}

/// A decimal number with a true minus sign, and none before zero.
fn plain(value: f64, decimals: usize) -> String {
    let text = format!("{:.decimals$}", value.abs());
    if value < 0.0
        && text
            .chars()
            .any(|letter| letter.is_ascii_digit() && letter != '0')
    {
        format!("\u{2212}{text}")
    } else {
        text
    }
}

/// How labels become values.
fn note(factor: i32, offset: f64, decimals: usize) -> String {
    let mut text = String::new();
    if factor != 0 {
        text = format!("\u{d7}10{}", superscript(factor));
    }
    if offset != 0.0 {
        let sign = if offset < 0.0 { '\u{2212}' } else { '+' };
        let size = if offset.abs() < 1e15 {
            format!("{:.decimals$}", offset.abs())
        } else {
            format!("{:e}", offset.abs())
        };
        text = format!("{text} {sign} {size}").trim_start().into();
    }
    text
}

/// An integer in superscript digits.
fn superscript(value: i32) -> String {
    let raise = |letter| match letter {
        '-' => '\u{207b}',
        '1' => '\u{b9}',
        '2' => '\u{b2}',
        '3' => '\u{b3}',
        digit => char::from_u32(0x2070 + digit as u32 - '0' as u32).unwrap_or(digit),
    };
    value.to_string().chars().map(raise).collect()
}

/// A value for people, with four significant digits.
pub(super) fn rounded(value: f64) -> String {
    if value == 0.0 || !value.is_finite() {
        return plain(value, 0);
    }
    let power = power_of_ten(value.abs());
    if (-4..=6).contains(&power) {
        plain(value, usize::try_from(3 - power).unwrap_or(0))
    } else {
        format!(
            "{}\u{d7}10{}",
            plain(value / 10f64.powi(power), 3),
            superscript(power)
        )
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn labels(low: f64, high: f64, most: usize) -> (String, String) {
        let ticks = Axis::new(low, high).ticks(most);
        (ticks.labels.join(" "), ticks.note)
    }

    #[test]
    fn ordinary_ranges_have_round_labels() {
        for (low, high, expected) in [
            (0.0, 10.0, "0 2 4 6 8 10"),
            (0.0, 1.0, "0.0 0.2 0.4 0.6 0.8 1.0"),
            (-1.0, 1.0, "\u{2212}1.0 \u{2212}0.5 0.0 0.5 1.0"),
            (8.0, 42.0, "10 20 30 40"),
            (
                -0.03,
                0.011,
                "\u{2212}0.03 \u{2212}0.02 \u{2212}0.01 0.00 0.01",
            ),
            (1000.0, 1100.0, "1000 1020 1040 1060 1080 1100"),
        ] {
            assert_eq!(labels(low, high, 5), (expected.into(), String::new()));
        }
    }

    #[test]
    fn tiny_and_huge_ranges_take_out_a_factor() {
        assert_eq!(
            labels(0.0, 5e-7, 5),
            ("0 1 2 3 4 5".into(), "\u{d7}10\u{207b}\u{2077}".into())
        );
        assert_eq!(labels(0.0, 1e9, 5).1, "\u{d7}10\u{2079}");
        assert_eq!(labels(-2e-12, 0.0, 2).0, "\u{2212}2 \u{2212}1 0");
    }

    #[test]
    fn narrow_ranges_far_from_zero_take_out_an_offset() {
        let (labels, note) = labels(1e6, 1e6 + 9e-4, 5);
        // The second tick is 2 x 10^-4 + 10^6.
        assert_eq!(labels, "0 2 4 6 8");
        assert_eq!(note, "\u{d7}10\u{207b}\u{2074} + 1000000.0000");
    }

    #[test]
    fn degenerate_ranges_are_widened() {
        for (low, high) in [
            (0.0, 0.0),
            (3.0, 3.0),
            (5.0, 5.0 + 1e-14),
            (f64::NAN, f64::NAN),
            (f64::NEG_INFINITY, f64::INFINITY),
            (f64::MAX, f64::MIN),
            (0.0, 5e-324),
            (1e-310, 2e-310),
        ] {
            let axis = Axis::new(low, high);
            assert!(
                axis.low < axis.high && axis.span().is_finite(),
                "{low} {high}"
            );
            let ticks = axis.ticks(5);
            assert!(
                (1..=7).contains(&ticks.values.len()),
                "{low} {high}: {ticks:?}"
            );
        }
        assert_eq!(
            Axis::around([]),
            Axis {
                low: 0.0,
                high: 1.0
            }
        );
        assert_eq!(
            Axis::around([f64::NAN, 2.0, 4.0]),
            Axis {
                low: 2.0,
                high: 4.0
            }
        );
    }

    #[test]
    fn values_for_people_have_four_digits() {
        for (value, text) in [
            (0.0, "0"),
            (0.006_412_3, "0.006412"),
            (2.345_67, "2.346"),
            (-12.0, "\u{2212}12.00"),
            (1.5e-9, "1.500\u{d7}10\u{207b}\u{2079}"),
            (123_456.0, "123456"),
        ] {
            assert_eq!(rounded(value), text);
        }
    }

    /// No multiple of the first step lies on this axis.
    #[test]
    fn a_short_axis_has_a_tick() {
        let axis = Axis::new(88.514_22, 88.957_78);
        let ticks = axis.ticks(2);
        assert!(!ticks.values.is_empty());
        assert!(
            ticks
                .values
                .iter()
                .all(|value| (0.0..=1.0).contains(&axis.fraction(*value)))
        );
    }

    proptest! {
        #[test]
        fn ticks_lie_in_the_range_and_have_different_labels(
            middle in -1e3f64..1e3, scale in -12i32..12, half in 0.01f64..1.0, most in 2usize..12,
        ) {
            let (middle, half) = (middle * 10f64.powi(scale), half * 10f64.powi(scale));
            let axis = Axis::new(middle - half, middle + half);
            let ticks = axis.ticks(most);
            prop_assert!(ticks.values.len() <= most + 1);
            for pair in ticks.values.windows(2) {
                prop_assert!(pair[0] < pair[1]);
            }
            for value in &ticks.values {
                prop_assert!((-1e-5..=1.0 + 1e-5).contains(&axis.fraction(*value)));
            }
            for pair in ticks.labels.windows(2) {
                prop_assert_ne!(&pair[0], &pair[1]);
            }
        }
    }
}
