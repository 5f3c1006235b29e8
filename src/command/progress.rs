//! Progress on standard error, and only to a terminal.

use super::options::Options;
use indicatif::{ProgressBar, ProgressStyle};
use std::time::Duration;

/// Time between two frames.
const FRAME: Duration = Duration::from_millis(120);

/// Runs `work` with a line on the terminal that says what is being done and for how long.
pub(super) fn during<T>(options: &Options, what: &'static str, work: impl FnOnce() -> T) -> T {
    if options.quiet {
        return work();
    }
    let bar = ProgressBar::new_spinner();
    if let Ok(style) = ProgressStyle::with_template("{spinner} {msg} ({elapsed})") {
        bar.set_style(style);
    }
    bar.set_message(what);
    bar.enable_steady_tick(FRAME);
    let result = work();
    bar.finish_and_clear();
    result
}

/// A bar on the terminal for work in steps of known number.
pub(super) struct Steps {
    bar: ProgressBar,
}

impl Steps {
    /// Begins with `done` steps of `total` behind it.
    pub(super) fn new(options: &Options, what: &'static str, done: usize, total: usize) -> Self {
        let bar = if options.quiet {
            ProgressBar::hidden()
        } else {
            ProgressBar::new(total as u64)
        };
        if let Ok(style) =
            ProgressStyle::with_template("{spinner} {prefix} {pos}/{len} {msg} ({elapsed})")
        {
            bar.set_style(style);
        }
        bar.set_prefix(what);
        bar.set_position(done as u64);
        bar.enable_steady_tick(FRAME);
        Self { bar }
    }

    /// One more step is done; `message` says what there is so far.
    pub(super) fn advance(&self, message: String) {
        self.bar.inc(1);
        self.bar.set_message(message);
    }
}

impl Drop for Steps {
    fn drop(&mut self) {
        self.bar.finish_and_clear();
    }
}
