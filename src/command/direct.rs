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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::command::arguments::Format;
    use orbitsum::solver::{Level, WindowLevels};
    use std::path::Path;

    #[test]
    fn a_window_with_too_few_levels_is_named() {
        let options = Options {
            settings: Vec::new(),
            class: None,
            folder: None,
            format: Format::Csv,
            quiet: true,
        };
        let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("billiards/quarter-stadium.toml");
        let subject = Subject::load(&path, &options).expect("a shipped shape");
        let windows = vec![Window { from: 0.0, to: 4.0 }, Window { from: 4.0, to: 6.5 }];
        let mut levels = Levels::new(0.0, 6.5);
        for (window, counted) in windows.iter().zip([1, 3]) {
            let level = Level {
                k: window.to - 0.3,
                error: 1e-12,
                multiplicity: 1,
                forced: 1,
            };
            levels.append(WindowLevels {
                window: *window,
                levels: vec![level],
                below: 0,
                counted,
                complete: counted == 1,
            });
        }
        let direct = Direct { levels, windows };
        let failure = direct.failure(&subject).expect("a failure");
        let message = failure.message();
        assert!(
            message.contains("2 levels were found and 4 counted; they disagree in k from 4 to 6.5"),
            "{message}"
        );
        assert_eq!(
            format!("{:?}", failure.exit_code()),
            format!("{:?}", std::process::ExitCode::from(1))
        );
    }
}
