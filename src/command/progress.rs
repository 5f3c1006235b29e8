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
