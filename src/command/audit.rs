//! `audit`: which levels of a list are missing, which are false, and where.

mod check;
mod corrected;
mod fit;
mod present;
mod sentence;
mod statistics;
mod statistics_picture;
mod tables;
mod unit;

use super::answer::Answer;
use super::arguments::Audit;
use super::error::CommandError;
use super::given::GivenLevels;
use super::limits::{Plan, Wishes, asked_words, longest_default};
use super::note::Note;
use super::options::Options;
use super::orbits;
use super::progress;
use super::subject::Subject;
use super::window::Window;
use fit::Parameter;
use orbitsum::levels::audit::{Findings, LeftOut, Listed, Prediction, audit};
use orbitsum::orbit::{Catalogue, ClassWeights, Limits, terms};
use statistics::Measured;

/// Smoothing at the end of the list, in mean spacings, that single levels are placed well under; orbits are looked for up to the
/// length that it asks for.
const SMOOTHING: f64 = 1.5;
/// Smoothing width times the longest orbit under which an audit smooths: longer orbits are damped to 0.04.
const REACH: f64 = 2.5;
/// Significant digits of numbers that are chosen here.
const DIGITS: usize = 3;

pub(super) fn run(typed: &Audit, options: &Options) -> Result<Answer, CommandError> {
    let subject = Subject::load(&typed.system, options)?;
    let wishes = Wishes::of_audit(typed, &subject)?;
    let names = fit::names(&typed.fit, &subject)?;
    subject.check_class_of_orbits()?;
    let given = GivenLevels::read(&typed.levels, &subject)?;
    let part = Part::new(&given, wishes.window, &subject);
    check::check(&subject, &given, &part, &typed.levels)?;
    let plan = plan(&subject, &wishes, &part)?;
    check::check_resolution(&subject, &part, &plan)?;
    let (subject, fitted) =
        fit::fitted(&typed.system, subject, &names, &part, plan.limits, options)?;
    let catalogue = orbits::find(&subject, plan.limits, options);
    let prediction = prediction(&subject, &catalogue, plan.limits);
    let findings = progress::during(options, "auditing the list", || {
        audit(&part.listed(&subject), &prediction)
    })
    .ok_or_else(|| CommandError::NotAudited {
        path: typed.levels.clone(),
    })?;
    let measured = Measured::new(&subject, &part.levels, &prediction);
    Ok(present::answer(&Audited {
        subject: &subject,
        plan: &plan,
        given: &given,
        part: &part,
        catalogue: &catalogue,
        findings: &findings,
        measured: &measured,
        fitted: &fitted,
        strict: typed.strict,
    }))
}

/// All that is to be presented.
struct Audited<'a> {
    subject: &'a Subject,
    plan: &'a Plan,
    given: &'a GivenLevels,
    part: &'a Part,
    catalogue: &'a Catalogue,
    findings: &'a Findings,
    measured: &'a Measured,
    /// Parameters that were fitted; the subject has these values.
    fitted: &'a [Parameter],
    /// Does anything that is found end the command with its own exit code?
    strict: bool,
}

/// The part of a list that is audited: the levels in the window, in k.
struct Part {
    /// Number of listed levels below it.
    before: usize,
    levels: Vec<f64>,
    errors: Option<Vec<f64>>,
    widths: Option<Vec<f64>>,
    /// In the file's unit; as far as the list claims to be complete.
    window: Window,
    asked: bool,
}

impl Part {
    fn new(given: &GivenLevels, asked: Option<Window>, subject: &Subject) -> Self {
        let units = &subject.system.units;
        let window = asked.unwrap_or(Window {
            from: given.values.first().copied().unwrap_or(0.0),
            to: given.last(),
        });
        let (from, to) = match asked {
            Some(window) => (units.k(window.from), units.k(window.to)),
            None => (0.0, f64::INFINITY),
        };
        let before = given.k.partition_point(|&k| k < from);
        let inside = before..given.k.partition_point(|&k| k <= to).max(before);
        let cut = |values: &Option<Vec<f64>>| {
            values
                .as_ref()
                .map(|values| values[inside.clone()].to_vec())
        };
        Self {
            before,
            levels: given.k[inside.clone()].to_vec(),
            errors: cut(&given.errors),
            widths: cut(&given.widths),
            window,
            asked: asked.is_some(),
        }
    }

    fn listed(&self, subject: &Subject) -> Listed<'_> {
        Listed {
            levels: &self.levels,
            errors: self.errors.as_deref(),
            widths: self.widths.as_deref(),
            to: self.asked.then(|| subject.system.units.k(self.window.to)),
        }
    }

    /// In words: `k from 3.64 to 45 (all of the list)`.
    fn words(&self, subject: &Subject) -> String {
        if self.asked {
            asked_words(self.window, subject)
        } else {
            format!("{} (all of the list)", self.window.words(subject))
        }
    }
}

/// Chooses the longest orbit by what is quick to find.
fn plan(subject: &Subject, wishes: &Wishes, part: &Part) -> Result<Plan, CommandError> {
    let units = &subject.system.units;
    let mut plan = Plan::new(subject, part.window, part.words(subject))?;
    let end = units.k(part.window.to);
    let wanted = REACH / (SMOOTHING * subject.weyl().mean_spacing(end));
    let (longest, why) = match wishes.length {
        Some(length) => (length, "as asked".to_owned()),
        None => {
            let longest = longest_default(subject, wanted);
            if longest < wanted {
                plan.notes.push(Note::ShortOrbits {
                    wanted: subject.length(wanted, DIGITS),
                    taken: subject.length(longest, DIGITS),
                });
                (longest, "the longest that is quick to find".to_owned())
            } else {
                (
                    longest,
                    format!("for a smoothing of {SMOOTHING} mean spacings at the end of the list"),
                )
            }
        }
    };
    plan.choose_longest(subject, longest, &why);
    plan.choose_bounces(subject, wishes);
    plan.notes
        .extend(units.warning(part.window.to).map(Note::NotFlat));
    Ok(plan)
}

/// What an audit compares with: smooth count, orbit sum, and what this leaves out.
fn prediction(subject: &Subject, catalogue: &Catalogue, limits: Limits) -> Prediction {
    let weights = ClassWeights::new(&subject.symmetry, subject.class.as_ref());
    Prediction {
        weyl: subject.weyl(),
        terms: terms(catalogue, &weights),
        max_length: limits.max_length,
        left_out: catalogue
            .omissions
            .iter()
            .map(|omission| LeftOut {
                what: omission.kind.to_string(),
                count: omission.count,
                length: omission.length,
                amplitude: omission.amplitude,
                power: omission.power,
            })
            .collect(),
    }
}
