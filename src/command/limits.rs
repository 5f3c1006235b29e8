//! Window, smoothing and orbit limits: what was asked for, and what is chosen where nothing was.

use super::arguments::{Audit, Density, Lengths, OrbitLimits};
use super::error::CommandError;
use super::note::Note;
use super::subject::Subject;
use super::text::significant;
use super::value;
use super::window::{self, Begin, Window};
use orbitsum::baseline::{Weyl, weyl};
use orbitsum::billiard::Wall;
use orbitsum::orbit::Limits;

/// Levels between which the default window lies, by the smooth count: above the first few, where the semiclassical terms are
/// rough, and short enough that a default is quick.
const DEFAULT_LEVELS: (f64, f64) = (10.0, 250.0);
/// Default smoothing in mean spacings: short orbits describe a staircase smoothed like this to a few hundredths of a level.
pub(super) const DEFAULT_SMOOTHING: f64 = 2.0;
/// Smoothing width x longest orbit at which the shortest orbit that is left out counts exp(-9/2) = 0.011 of its term.
pub(super) const ENOUGH: f64 = 3.0;
/// Rounding of width x length that is no reason for a warning.
const SLACK: f64 = 1e-6;
/// Longest orbit of a polygon that is looked for without being asked, in mean chords of one symmetry copy of the shape: the
/// strips grow in number as a power of the length, and so does the time of the search.
const MOST_POLYGON_CHORDS: f64 = 40.0;
/// Significant digits of numbers that are chosen here.
const DIGITS: usize = 3;
/// Largest number of bounces that can be asked for.
const MOST_BOUNCES: usize = 10_000;

/// What a density is computed for; k, lengths and widths without units.
#[derive(Clone, Debug)]
pub(super) struct Plan {
    /// Window in the file's unit.
    pub(super) window: Window,
    /// Middle of the window in k.
    pub(super) middle: f64,
    /// Mean spacing there, in k.
    pub(super) spacing: f64,
    /// Standard deviation of the Gaussian in k, 0 where nothing is smoothed.
    pub(super) width: f64,
    /// How far orbits are looked for.
    pub(super) limits: Limits,
    /// What was chosen and why, one line each: name and sentence.
    pub(super) choices: Vec<(String, String)>,
    /// What the user should know about it.
    pub(super) notes: Vec<Note>,
}

/// Numbers that were asked for.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct Wishes {
    pub(super) window: Option<Window>,
    /// In mean spacings.
    smoothing: Option<f64>,
    /// In the file's unit.
    width: Option<f64>,
    pub(super) length: Option<f64>,
    bounces: Option<usize>,
}

impl Wishes {
    /// Numbers of the command `density`.
    pub(super) fn of_density(typed: &Density, subject: &Subject) -> Result<Self, CommandError> {
        let positive = |option, text: &Option<String>| {
            text.as_deref()
                .map(|text| value::positive(option, text))
                .transpose()
        };
        Ok(Self {
            window: window::asked(&typed.window, subject, Begin::AboveZero)?,
            smoothing: positive("smoothing", &typed.smoothing)?,
            width: positive("smoothing-width", &typed.smoothing_width)?,
            ..Self::of_limits(&typed.limits)?
        })
    }

    /// Numbers of the command `lengths`.
    pub(super) fn of_lengths(typed: &Lengths, subject: &Subject) -> Result<Self, CommandError> {
        Ok(Self {
            window: window::asked(&typed.window, subject, Begin::AboveZero)?,
            ..Self::of_limits(&typed.limits)?
        })
    }

    /// Numbers of the command `audit`, whose window may begin at zero.
    pub(super) fn of_audit(typed: &Audit, subject: &Subject) -> Result<Self, CommandError> {
        Ok(Self {
            window: window::asked(&typed.window, subject, Begin::AtZero)?,
            ..Self::of_limits(&typed.limits)?
        })
    }

    /// Numbers of the command `orbits`.
    pub(super) fn of_limits(typed: &OrbitLimits) -> Result<Self, CommandError> {
        Ok(Self {
            length: typed
                .max_length
                .as_deref()
                .map(|text| value::positive("max-length", text))
                .transpose()?,
            bounces: typed
                .max_bounces
                .as_deref()
                .map(|text| value::count("max-bounces", text, MOST_BOUNCES))
                .transpose()?,
            ..Self::default()
        })
    }
}

/// Chooses what was not asked for. `list_end` is the last level of a list (file's unit), if there is one.
pub(super) fn plan(
    subject: &Subject,
    wishes: &Wishes,
    list_end: Option<f64>,
) -> Result<Plan, CommandError> {
    let (window, why) = wishes.window.map_or_else(
        || default_window(subject, &subject.weyl(), list_end),
        |window| (window, asked_words(window, subject)),
    );
    let mut plan = Plan::new(subject, window, why)?;
    plan.choose_smoothing(subject, wishes);
    plan.choose_bounces(subject, wishes);
    plan.warn(subject);
    Ok(plan)
}

pub(super) fn asked_words(window: Window, subject: &Subject) -> String {
    format!("{} (as asked)", window.words(subject))
}

impl Plan {
    /// A plan that knows its window only.
    pub(super) fn new(
        subject: &Subject,
        window: Window,
        why: String,
    ) -> Result<Self, CommandError> {
        let units = &subject.system.units;
        let weyl = subject.weyl();
        let middle = 0.5 * (units.k(window.from) + units.k(window.to));
        let spacing = weyl.mean_spacing(middle);
        if !spacing.is_finite() {
            return Err(CommandError::BelowFirstLevel {
                option: units.window_option(),
                at: units.value(middle),
                first: units.value(weyl.k_at_count(1.0)),
            });
        }
        Ok(Self {
            window,
            middle,
            spacing,
            width: 0.0,
            limits: Limits {
                max_length: 0.0,
                max_bounces: 0,
            },
            choices: vec![("window".to_owned(), why)],
            notes: Vec::new(),
        })
    }

    pub(super) fn choose_longest(&mut self, subject: &Subject, length: f64, why: &str) {
        self.limits.max_length = length;
        self.choices.push((
            "longest orbit".into(),
            format!("{} ({why})", subject.length(length, DIGITS)),
        ));
    }

    /// Width and longest orbit: each follows from the other where only one is given.
    fn choose_smoothing(&mut self, subject: &Subject, wishes: &Wishes) {
        let units = &subject.system.units;
        let asked = match (wishes.smoothing, wishes.width) {
            (Some(spacings), _) => Some(spacings * self.spacing),
            (None, Some(width)) => Some(width * units.derivative(units.value(self.middle))),
            (None, None) => None,
        };
        let wanted = asked.unwrap_or(DEFAULT_SMOOTHING * self.spacing);
        let most = match wishes.length {
            Some(length) => length,
            None => longest_default(subject, ENOUGH / wanted),
        };
        let (length, why) = match wishes.length {
            Some(length) => (length, "as asked".to_owned()),
            None if ENOUGH / wanted > most => {
                self.notes.push(Note::ShortOrbits {
                    wanted: subject.length(ENOUGH / wanted, DIGITS),
                    taken: subject.length(most, DIGITS),
                });
                (most, "the longest that is quick to find".to_owned())
            }
            None => (
                ENOUGH / wanted,
                format!(
                    "{ENOUGH}/(smoothing width in k): the next one would count 0.011 of its term"
                ),
            ),
        };
        let from_length = asked.is_none() && (wishes.length.is_some() || ENOUGH / wanted > most);
        self.width = if from_length { ENOUGH / length } else { wanted };
        let reason = if asked.is_some() {
            "as asked"
        } else if from_length {
            "width in k = 3/(longest orbit)"
        } else {
            "the default"
        };
        let constant = match units.column() {
            "k" => String::new(),
            _ => format!(
                " there, {} in k throughout",
                significant(self.width, DIGITS)
            ),
        };
        self.choices.push((
            "smoothing".into(),
            format!(
                "{} mean spacings at the middle of the window ({reason}): Gaussian of standard deviation {}{constant}",
                significant(self.width / self.spacing, DIGITS),
                subject.level(self.width_in_units(subject), DIGITS),
            ),
        ));
        self.choose_longest(subject, length, &why);
    }

    pub(super) fn choose_bounces(&mut self, subject: &Subject, wishes: &Wishes) {
        let default = Limits::up_to(self.limits.max_length, &subject.system.domain);
        self.limits.max_bounces = wishes.bounces.unwrap_or(default.max_bounces);
        let why = if wishes.bounces.is_some() {
            "as asked"
        } else {
            "the default for this shape"
        };
        self.choices.push((
            "most bounces".into(),
            format!("{} ({why})", self.limits.max_bounces),
        ));
    }

    fn warn(&mut self, subject: &Subject) {
        let product = self.width * self.limits.max_length;
        if product < ENOUGH * (1.0 - SLACK) {
            self.notes.push(Note::TooNarrow {
                product,
                enough: ENOUGH,
            });
        }
        let units = &subject.system.units;
        if self.width > units.k(self.window.to) - units.k(self.window.from) {
            self.notes.push(Note::WiderThanWindow);
        }
        let reach = REACH * self.width;
        if units.k(self.window.from) < reach {
            self.notes.push(Note::NearZero {
                reach: subject.level(units.value(reach), DIGITS),
            });
        }
        self.notes
            .extend(units.warning(self.window.to).map(Note::NotFlat));
    }

    /// The width at the middle of the window in the file's unit.
    pub(super) fn width_in_units(&self, subject: &Subject) -> f64 {
        let units = &subject.system.units;
        self.width / units.derivative(units.value(self.middle))
    }
}

/// Distance in standard deviations at which a Gaussian has ended.
const REACH: f64 = 5.0;

/// The longest orbits, up to `wanted`, that are looked for without being asked.
pub(super) fn longest_default(subject: &Subject, wanted: f64) -> f64 {
    let domain = &subject.system.domain;
    if subject.integrable.is_some() {
        // Tori are listed without a search.
        return wanted;
    }
    if domain.walls.iter().all(Wall::is_straight) {
        return wanted.min(MOST_POLYGON_CHORDS * copy_chord(subject));
    }
    let affordable = Limits::up_to(wanted, domain)
        .affordable(domain, &subject.symmetry)
        .max_length;
    if affordable < wanted {
        rounded_down(affordable)
    } else {
        wanted
    }
}

/// Mean chord of one symmetry copy of the domain, pi area/perimeter, with the pieces of axes that bound it: its measures
/// are those in the smooth count of the class that is even under everything.
fn copy_chord(subject: &Subject) -> f64 {
    let even = &subject.symmetry.irreps[0];
    let copy = weyl(&subject.system.domain, &subject.symmetry, Some(even));
    let perimeter: f64 = copy
        .terms
        .iter()
        .filter(|term| term.power == 1)
        .map(|term| term.coefficient.abs())
        .sum();
    std::f64::consts::PI * copy.coefficient(2) / perimeter
}

/// From the tenth level to the 250th by the smooth count, or to the end of the list.
fn default_window(subject: &Subject, weyl: &Weyl, list_end: Option<f64>) -> (Window, String) {
    let units = &subject.system.units;
    let level = |n: f64| rounded(units.value(weyl.k_at_count(n)));
    let (low, high) = DEFAULT_LEVELS;
    let from = level(low);
    if let Some(end) = list_end {
        let last = units.k(end);
        let width = DEFAULT_SMOOTHING * weyl.mean_spacing(0.5 * (units.k(from) + last));
        let to = rounded_down(units.value((last - REACH * width).max(0.0)));
        if to > from {
            let window = Window { from, to };
            let why = format!(
                "{} (from about the {low:.0}th level to five smoothing widths below the end of the list)",
                window.words(subject)
            );
            return (window, why);
        }
    }
    let window = Window {
        from,
        to: level(high),
    };
    let why = format!(
        "{} (from about the {low:.0}th to the {high:.0}th level by the smooth count)",
        window.words(subject)
    );
    (window, why)
}

/// To a few digits, for numbers that are chosen here.
pub(super) fn rounded(value: f64) -> f64 {
    let unit = digit_unit(value);
    // Dividing by a power of ten gives the nearest number to the short decimal.
    if unit < 1.0 {
        let per = (1.0 / unit).round();
        (value * per).round() / per
    } else {
        (value / unit).round() * unit
    }
}

fn rounded_down(value: f64) -> f64 {
    let near = rounded(value);
    if near > value {
        rounded(near - digit_unit(value))
    } else {
        near
    }
}

/// Value of the last of the digits that are kept.
fn digit_unit(value: f64) -> f64 {
    10f64.powi(value.abs().max(f64::MIN_POSITIVE).log10().floor() as i32 + 1 - DIGITS as i32)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn chosen_numbers_are_short() {
        assert_eq!(rounded(6.012_345), 6.01);
        assert_eq!(rounded(12_345.0), 12_300.0);
        assert_eq!(rounded(0.001_234_5), 0.001_23);
        assert_eq!(rounded_down(41.99), 41.9);
        assert_eq!(rounded_down(6.019), 6.01);
    }
}
