//! `lengths`: the length spectrum of a list of levels beside that of the orbits.

mod names;
mod plan;
mod present;
mod tables;

use super::answer::Answer;
use super::arguments::Lengths;
use super::error::CommandError;
use super::given::GivenLevels;
use super::limits::{Plan, Wishes};
use super::note::Note;
use super::options::Options;
use super::orbits;
use super::progress;
use super::subject::Subject;
use super::text::counted;
use orbitsum::levels::lengths::{LengthComparison, LengthInput, LengthSpectrum, Taper};
use orbitsum::orbit::{Catalogue, ClassWeights, SourcedTerm, sourced_terms};
use orbitsum::trace::Term;
use plan::Reach;

/// Least number of levels: with n of them about n/2.3 lengths are told apart below that of the mean spacing (2 pi times the
/// density), four with this many.
const LEAST_LEVELS: usize = 10;
/// A list with less or more than this part of the levels that are expected is another one: with a third missing or false, their
/// noise hides every orbit that is not a wide family.
const COUNT: std::ops::RangeInclusive<f64> = 0.7..=1.3;
/// Levels by which a staircase strays from the smooth count without any level missing, and the part of all that is not worth a
/// warning.
const STRAY: (f64, f64) = (4.0, 0.01);
/// Largest number of lengths that are told apart: a spectrum of a million levels stays below.
const MOST_LENGTHS: usize = 50_000;

pub(super) fn run(typed: &Lengths, options: &Options) -> Result<Answer, CommandError> {
    let subject = Subject::load(&typed.system, options)?;
    let wishes = Wishes::of_lengths(typed, &subject)?;
    subject.check_class_of_orbits()?;
    let given = GivenLevels::read(&typed.levels, &subject)?;
    enough("the list".into(), given.k.len())?;
    let plan = plan::plan(&subject, &wishes, &reach(&given))?;
    let taper = taper(&subject, &plan);
    let expected = check_count(&subject, &plan, &taper, &given)?;
    check_resolution(&subject, &plan, &taper)?;
    let catalogue = orbits::find(&subject, plan.limits, options);
    let weights = ClassWeights::new(&subject.symmetry, subject.class.as_ref());
    let sourced = sourced_terms(&catalogue, &weights);
    let terms: Vec<Term> = sourced.iter().map(|sourced| sourced.term).collect();
    let weyl = subject.weyl();
    let spectrum = progress::during(options, "transforming", || {
        LengthSpectrum::new(&LengthInput {
            levels: &given.k,
            errors: given.errors.as_deref(),
            density: &|k| weyl.density(k, 0.0),
            terms: &terms,
            taper,
            longest: plan.limits.max_length,
        })
    })
    .ok_or_else(|| nothing_resolved(&subject, &plan, &taper))?;
    let comparison = spectrum.compare(shortest(&catalogue, &terms), plan.limits.max_length);
    Ok(present::answer(&Findings {
        subject: &subject,
        plan: &plan,
        given: &given,
        expected,
        catalogue: &catalogue,
        terms: &sourced,
        spectrum: &spectrum,
        comparison: &comparison,
    }))
}

/// All that is to be presented.
struct Findings<'a> {
    subject: &'a Subject,
    plan: &'a Plan,
    given: &'a GivenLevels,
    /// Levels in the window by the smooth count.
    expected: f64,
    catalogue: &'a Catalogue,
    terms: &'a [SourcedTerm<'a>],
    spectrum: &'a LengthSpectrum,
    comparison: &'a LengthComparison,
}

/// A list that does not begin with the lowest level is complete from its first level on only.
fn reach(given: &GivenLevels) -> Reach {
    let first = given.values.first().copied().unwrap_or(0.0);
    let late = given
        .notes
        .iter()
        .any(|note| matches!(note, Note::ListBegins { .. }));
    Reach {
        complete_from: if late { first } else { 0.0 },
        first,
        last: given.last(),
    }
}

fn taper(subject: &Subject, plan: &Plan) -> Taper {
    let units = &subject.system.units;
    Taper {
        from: units.k(plan.window.from),
        to: units.k(plan.window.to),
    }
}

fn enough(place: String, found: usize) -> Result<(), CommandError> {
    if found >= LEAST_LEVELS {
        return Ok(());
    }
    Err(CommandError::TooFewLevels {
        place,
        found: counted(found, "level", "levels"),
        least: LEAST_LEVELS,
    })
}

/// Levels in the window by the smooth count, unless the list has far more or fewer.
fn check_count(
    subject: &Subject,
    plan: &Plan,
    taper: &Taper,
    given: &GivenLevels,
) -> Result<f64, CommandError> {
    let inside = given
        .k
        .iter()
        .filter(|k| (taper.from..=taper.to).contains(*k));
    let found = inside.count();
    let words = plan.window.words(subject);
    enough(format!("the window ({words})"), found)?;
    let weyl = subject.weyl();
    let expected = weyl.count(taper.to, 0.0) - weyl.count(taper.from, 0.0);
    let least = COUNT.start() * expected - STRAY.0;
    let most = COUNT.end() * expected + STRAY.0;
    if !(least..=most).contains(&(found as f64)) {
        return Err(CommandError::AnotherList {
            window: words,
            found,
            expected,
            system: subject.title(),
        });
    }
    Ok(expected)
}

/// Refuses windows that resolve nothing, or far too much.
fn check_resolution(subject: &Subject, plan: &Plan, taper: &Taper) -> Result<(), CommandError> {
    let longest = plan.limits.max_length;
    let lengths = longest / taper.resolution();
    if lengths > MOST_LENGTHS as f64 {
        return Err(CommandError::TooManyLengths {
            lengths,
            longest: subject.length(longest, 3),
            limit: MOST_LENGTHS,
        });
    }
    // The comparison ends a main lobe below the longest orbit, and begins one above zero.
    if longest < 2.0 * taper.main_lobe() + taper.resolution() {
        return Err(nothing_resolved(subject, plan, taper));
    }
    Ok(())
}

fn nothing_resolved(subject: &Subject, plan: &Plan, taper: &Taper) -> CommandError {
    CommandError::NothingResolved {
        resolved: subject.length(taper.main_lobe(), 3),
        needed: subject.length(2.0 * taper.main_lobe() + taper.resolution(), 3),
        longest: subject.length(plan.limits.max_length, 3),
    }
}

/// The smallest length at which anything is expected: a term, or something that the terms leave out.
fn shortest(catalogue: &Catalogue, terms: &[Term]) -> f64 {
    let terms = terms.iter().map(|term| term.length);
    let omissions = catalogue
        .omissions
        .iter()
        .flat_map(|left_out| &left_out.lengths);
    terms
        .chain(omissions.copied())
        .fold(f64::INFINITY, f64::min)
}
