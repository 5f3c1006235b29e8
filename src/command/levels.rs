//! `levels`: directly computed levels, each with an error, counted independently of the search, and their waves.

mod check;
mod present;
mod waves;

use super::answer::Answer;
use super::arguments::Levels;
use super::direct::{self, Direct, Task};
use super::error::CommandError;
use super::options::Options;
use super::subject::Subject;
use super::value;
use super::window::{self, Begin};
use check::SecondCheck;
use orbitsum::solver::{DEFAULT_ACCURACY, Window};
use waves::WaveFiles;

/// Accuracies that can be asked for: rounding allows no better ones, and with a coarser one levels could not be told apart.
const ACCURACIES: [f64; 2] = [1e-13, 1e-3];
/// Finished windows of a computation that is not finished.
const JOURNAL: &str = "levels.partial";

pub(super) fn run(typed: &Levels, options: &Options) -> Result<Answer, CommandError> {
    let accuracy = match &typed.accuracy {
        Some(text) => value::within("accuracy", text, ACCURACIES)?,
        None => DEFAULT_ACCURACY,
    };
    let files = WaveFiles::from_arguments(typed)?;
    let subject = Subject::load(&typed.system, options)?;
    let units = &subject.system.units;
    let asked =
        window::asked(&typed.window, &subject, Begin::AtZero)?.ok_or(CommandError::NoWindow {
            expected: units.window_option(),
        })?;
    let task = Task {
        window: Window {
            from: units.k(asked.from),
            to: units.k(asked.to),
        },
        accuracy,
        journal: options.folder.as_ref().map(|folder| folder.file(JOURNAL)),
    };
    if let Some(files) = &files {
        files.check_number(&subject, task.window)?;
    }
    let solver = direct::solver(&subject, accuracy)?;
    let computed = direct::compute(&subject, &solver, &task, options)?;
    let written = match &files {
        Some(files) => files.write(&subject, &solver, &computed, options)?,
        None => Vec::new(),
    };
    Ok(present::answer(&Findings {
        subject: &subject,
        asked,
        task: &task,
        computed: &computed,
        check: SecondCheck::new(&subject, &computed, options),
        waves: written,
    }))
}

/// All that is to be presented.
struct Findings<'a> {
    subject: &'a Subject,
    /// The window in the file's unit.
    asked: window::Window,
    task: &'a Task,
    computed: &'a Direct,
    check: Option<SecondCheck>,
    /// Names of the files of waves.
    waves: Vec<String>,
}
