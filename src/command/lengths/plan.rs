//! Window and longest orbit of a length spectrum.

use crate::command::error::CommandError;
use crate::command::limits::{
    DEFAULT_SMOOTHING, ENOUGH, Plan, Wishes, asked_words, longest_default, rounded,
};
use crate::command::note::Note;
use crate::command::subject::Subject;
use crate::command::window::Window;

/// Level at which the default window of a length spectrum begins, by the smooth count: its window function weighs what lies near
/// its ends, where semiclassical terms are rough, hardly at all.
const FIRST_LEVEL_OF_LENGTHS: f64 = 5.0;
/// Significant digits of numbers in messages.
const DIGITS: usize = 3;

/// How far a list reaches, in the file's unit.
#[derive(Clone, Copy, Debug)]
pub(super) struct Reach {
    /// From here on it is complete.
    pub(super) complete_from: f64,
    /// Its first level.
    pub(super) first: f64,
    /// Its last level.
    pub(super) last: f64,
}

/// Chooses what was not asked for a length spectrum: its window function ends where the list does.
pub(super) fn plan(subject: &Subject, wishes: &Wishes, list: &Reach) -> Result<Plan, CommandError> {
    let units = &subject.system.units;
    let default = Window {
        from: rounded(units.value(subject.weyl().k_at_count(FIRST_LEVEL_OF_LENGTHS))),
        to: list.last,
    };
    let wanted = wishes.window.unwrap_or(default);
    let window = Window {
        from: wanted.from.max(list.complete_from),
        to: wanted.to.min(list.last),
    };
    if window.from >= window.to {
        return Err(CommandError::ListOutsideWindow {
            begin: subject.level(wanted.from, DIGITS),
            first: subject.level(list.first, DIGITS),
            last: subject.level(list.last, DIGITS),
        });
    }
    let why = match wishes.window {
        Some(asked) if asked == window => asked_words(window, subject),
        Some(_) => format!(
            "{} (as far as the list reaches into what was asked)",
            window.words(subject)
        ),
        None if window.from > default.from => {
            format!("{} (all of the list)", window.words(subject))
        }
        None => format!(
            "{} (from about the {FIRST_LEVEL_OF_LENGTHS:.0}th level to the end of the list)",
            window.words(subject)
        ),
    };
    let mut plan = Plan::new(subject, window, why)?;
    let wanted = ENOUGH / (DEFAULT_SMOOTHING * plan.spacing);
    let (longest, why) = match wishes.length {
        Some(length) => (length, "as asked".to_owned()),
        None => (
            longest_default(subject, wanted),
            "what the default smoothing of `density` asks for, if it is quick to find".to_owned(),
        ),
    };
    plan.choose_longest(subject, longest, &why);
    plan.choose_bounces(subject, wishes);
    plan.notes
        .extend(units.warning(plan.window.to).map(Note::NotFlat));
    Ok(plan)
}
