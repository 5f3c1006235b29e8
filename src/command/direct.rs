//! Directly computed levels of a subject: window by window, with progress and, where files are written, a journal.

use super::error::CommandError;
use super::journal::{Journal, Opened, fingerprint};
use super::options::Options;
use super::output;
use super::progress::Steps;
use super::subject::Subject;
use super::text::{counted, significant};
use orbitsum::solver::{Levels, Solver, Window};
use std::path::PathBuf;

/// What is to be computed.
#[derive(Clone, Debug)]
pub(super) struct Task {
    /// Window in k.
    pub(super) window: Window,
    /// Relative accuracy of k that is aimed at.
    pub(super) accuracy: f64,
    /// Where finished windows are kept until all is done.
    pub(super) journal: Option<PathBuf>,
}

/// What was computed.
#[derive(Clone, Debug)]
pub(super) struct Direct {
    pub(super) levels: Levels,
    /// The windows that it was computed in.
    pub(super) windows: Vec<Window>,
}

/// A solver for the levels of the subject's class, or for all.
pub(super) fn solver(subject: &Subject, accuracy: f64) -> Result<Solver, CommandError> {
    let solver = Solver::new(
        &subject.system.domain,
        &subject.symmetry,
        subject.class.as_ref(),
    )?;
    Ok(solver.with_accuracy(accuracy))
}

/// Computes the levels, beginning with what a journal holds already.
pub(super) fn compute(
    subject: &Subject,
    solver: &Solver,
    task: &Task,
    options: &Options,
) -> Result<Direct, CommandError> {
    let Window { from, to } = task.window;
    let windows = solver.windows(from, to)?;
    let mut levels = Levels::new(from, to);
    let mut journal = task
        .journal
        .as_deref()
        .map(|path| Journal::open(path, &fingerprint(subject, task), &windows))
        .transpose()?;
    let mut done = 0;
    if let Some(journal) = &mut journal {
        if !options.quiet {
            announce(&journal.opened, windows.len());
        }
        for window in journal.finished() {
            levels.append(window);
            done += 1;
        }
    }
    let steps = Steps::new(options, "window", done, windows.len());
    let mut failure = None;
    solver.run(&windows[done..], |window| {
        if let Some(journal) = &mut journal
            && let Err(error) = journal.add(&window)
        {
            failure = Some(error);
            return false;
        }
        levels.append(window);
        steps.advance(counted(levels.found(), "level", "levels"));
        true
    })?;
    if let Some(error) = failure {
        return Err(error);
    }
    levels.finish(&subject.weyl());
    Ok(Direct { levels, windows })
}

/// Says on standard error what was found in the folder: it is no part of the result, which does not depend on it.
fn announce(opened: &Opened, windows: usize) {
    match opened {
        Opened::New => {}
        Opened::GoesOn { windows: done } => output::remark(&format!(
            "note: taking up an interrupted computation: {done} of {} are done",
            counted(windows, "window", "windows")
        )),
        Opened::Replaced { differing } => output::remark(&format!(
            "note: an interrupted computation in this folder is of another {}: it is replaced",
            differing.join(", another ")
        )),
    }
}

impl Direct {
    /// What is wrong with the list: windows in which found and counted levels disagree.
    pub(super) fn failure(&self, subject: &Subject) -> Option<CommandError> {
        let units = &subject.system.units;
        let levels = &self.levels;
        let windows: Vec<String> = levels
            .disagreeing
            .iter()
            .map(|window| {
                format!(
                    "{} from {} to {}",
                    units.column(),
                    significant(units.value(window.from), 8),
                    subject.level(units.value(window.to), 8)
                )
            })
            .collect();
        (!levels.complete).then(|| CommandError::Incomplete {
            found: levels.found(),
            counted: levels.counted,
            windows: windows.join(", "),
        })
    }

    /// k of the levels, each as often as it occurs.
    pub(super) fn repeated(&self) -> Vec<f64> {
        let levels = self.levels.levels.iter();
        levels
            .flat_map(|level| std::iter::repeat_n(level.k, level.multiplicity))
            .collect()
    }

    /// Levels found and counted, in a sentence.
    pub(super) fn completeness(&self) -> String {
        let levels = &self.levels;
        let found = counted(levels.found(), "level", "levels");
        let windows = counted(self.windows.len(), "window", "windows");
        let agreement = if levels.complete {
            "as many as are counted by inertia".to_owned()
        } else {
            format!("{} are counted by inertia", levels.counted)
        };
        format!("{found} found in {windows}, {agreement}")
    }
}
