//! Lists that no audit can say anything about: too short, too long, of another shape or in another unit.

use super::{Part, REACH, unit};
use crate::command::error::CommandError;
use crate::command::given::GivenLevels;
use crate::command::limits::Plan;
use crate::command::subject::Subject;
use crate::command::text::counted;
use std::path::Path;

/// Fewest levels: with fewer the noise of the record cannot be told from a fault.
const FEWEST: usize = 10;
/// Most levels: the noise of the record is a matrix of about as many rows, which takes a minute then.
const MOST: usize = 4000;
/// Most points of the record, for the same reason; a point is four fifths of the smoothing width.
const MOST_POINTS: f64 = 6000.0;
const POINTS_PER_WIDTH: f64 = 1.25;
/// Fewest smoothing widths in a window: with fewer there is nothing to compare neighbouring places with.
const FEWEST_WIDTHS: f64 = 8.0;
/// A list with less or more than this part of the levels that are expected is another one.
const COUNT: std::ops::RangeInclusive<f64> = 0.7..=1.3;
/// Levels by which a staircase strays from the smooth count without any level missing.
const STRAY: f64 = 4.0;

/// Refuses what cannot be audited, with what it seems to be where that can be told.
pub(super) fn check(
    subject: &Subject,
    given: &GivenLevels,
    part: &Part,
    path: &Path,
) -> Result<(), CommandError> {
    if given.k.len() < FEWEST {
        return Err(too_few("the list".into(), given.k.len()));
    }
    let words = part.window.words(subject);
    if part.levels.len() < FEWEST {
        return Err(too_few(format!("the window ({words})"), part.levels.len()));
    }
    let expected = expected(subject, part);
    let found = part.levels.len();
    let range = COUNT.start() * expected - STRAY..=COUNT.end() * expected + STRAY;
    if !range.contains(&(found as f64)) {
        return Err(match unit::recognise(subject, given) {
            Some(like) => CommandError::ListLooksLike {
                path: path.to_owned(),
                what: like.what,
                cure: like.cure,
            },
            None => CommandError::AnotherList {
                window: words,
                found,
                expected,
                system: subject.title(),
            },
        });
    }
    if found > MOST {
        return Err(CommandError::TooManyLevels {
            found,
            most: MOST,
            option: subject.system.units.window_option(),
        });
    }
    Ok(())
}

/// Refuses longest orbits under which the record would be far too fine or too coarse.
pub(super) fn check_resolution(
    subject: &Subject,
    part: &Part,
    plan: &Plan,
) -> Result<(), CommandError> {
    let units = &subject.system.units;
    let longest = plan.limits.max_length;
    let widths = (units.k(part.window.to) - units.k(part.window.from)) * longest / REACH;
    if widths * POINTS_PER_WIDTH > MOST_POINTS {
        return Err(CommandError::TooFine {
            longest: subject.length(longest, 3),
            points: widths * POINTS_PER_WIDTH,
            limit: MOST_POINTS,
        });
    }
    if widths < FEWEST_WIDTHS {
        return Err(CommandError::TooCoarse {
            longest: subject.length(longest, 3),
            needed: subject.length(longest * FEWEST_WIDTHS / widths, 3),
        });
    }
    Ok(())
}

fn too_few(place: String, found: usize) -> CommandError {
    CommandError::TooFewToAudit {
        place,
        found: counted(found, "level", "levels"),
        least: FEWEST,
    }
}

/// Levels in the window by the smooth count; between the first and the last level where no window was asked for.
fn expected(subject: &Subject, part: &Part) -> f64 {
    let (weyl, units) = (subject.weyl(), &subject.system.units);
    let (from, to) = (units.k(part.window.from), units.k(part.window.to));
    // The last level itself is in the list.
    let last = if part.asked { 0.0 } else { 1.0 };
    count_at(&weyl, to) - count_at(&weyl, from) + last
}

/// The smooth count, 0 where it means nothing.
fn count_at(weyl: &orbitsum::baseline::Weyl, k: f64) -> f64 {
    if k > 0.0 {
        weyl.count(k, 0.0).max(0.0)
    } else {
        0.0
    }
}
