//! Everything that ends a command early, with its message and exit code.

use orbitsum::levels::ListError;
use orbitsum::solver::SolverError;
use orbitsum::system::SystemError;
use std::path::PathBuf;
use std::process::ExitCode;
use thiserror::Error;

/// The computation failed.
const FAILED: u8 = 1;
/// The input or the call is wrong.
const WRONG_INPUT: u8 = 2;
/// A strict audit found something.
const FOUND: u8 = 3;

/// Why a command did not answer.
#[derive(Debug, Error)]
pub(crate) enum CommandError {
    /// The system file or a setting is wrong.
    #[error("{}", .0.render())]
    System(SystemError),
    /// The level list is wrong.
    #[error(transparent)]
    Levels(#[from] ListError),
    /// The list's column cannot be turned into the file's unit.
    #[error(
        "{}: the list has a column `{column}`, but the levels of the system file are {expected}: give a column {}",
        path.display(),
        if *expected == "k" {
            "`k`, or put [units] into the system file".to_owned()
        } else {
            format!("`{expected}` or `k`")
        }
    )]
    ListUnit {
        path: PathBuf,
        column: &'static str,
        expected: &'static str,
    },
    /// An option's value is not a number.
    #[error("--{option}: `{text}` is not a number")]
    NotANumber { option: &'static str, text: String },
    /// An option's value is infinite or not a number.
    #[error("--{option}: `{text}` is not finite: give a finite number")]
    NotFinite { option: &'static str, text: String },
    /// An option's value must be positive.
    #[error("--{option}: {value} is not positive: give a number above 0")]
    NotPositive { option: &'static str, value: f64 },
    /// An option's value is no whole number in its range.
    #[error("--{option}: `{text}` is not a whole number from {least} to {most}")]
    NotCount {
        option: &'static str,
        text: String,
        least: usize,
        most: usize,
    },
    /// An option's value lies outside its range.
    #[error("--{option}: {value:?} is out of range: give a number from {least:e} to {most:e}")]
    OutOfRange {
        option: &'static str,
        value: f64,
        least: f64,
        most: f64,
    },
    /// An option's value is no list of whole numbers.
    #[error(
        "--{option}: `{text}` is no number of a level nor a range of them: give numbers from 1 on such as 12,15-18"
    )]
    NotNumbers { option: &'static str, text: String },
    /// A list of numbers that asks for too much.
    #[error("--{option}: more than {most} levels are asked for: name at most {most}")]
    TooManyNumbers { option: &'static str, most: usize },
    /// More waves than anybody wants files of.
    #[error(
        "--vectors: the window holds about {expected:.0} levels, more than the {most} that files are written for: choose a \
         narrower window, or name levels with --only"
    )]
    TooManyWaves { expected: f64, most: usize },
    /// A level that is not in the window.
    #[error(
        "--only: level {number} is not in the window, which holds the levels {first} to {last}"
    )]
    NoSuchLevel {
        number: usize,
        first: usize,
        last: usize,
    },
    /// A setting is not of the form NAME=VALUE.
    #[error("--set: `{text}` is not of the form NAME=VALUE")]
    Setting { text: String },
    /// A window is not of the form FROM:TO.
    #[error("--{option}: `{text}` is not of the form FROM:TO")]
    WindowForm { option: &'static str, text: String },
    /// A window begins where there are no levels.
    #[error("--{option}: the window begins at {from}: it must begin {least}")]
    WindowBegin {
        option: &'static str,
        from: f64,
        /// Such as `above 0`.
        least: &'static str,
    },
    /// A command that needs a window got none.
    #[error("no window is given: ask for one with --{expected} FROM:TO")]
    NoWindow { expected: &'static str },
    /// A window ends before it begins.
    #[error("--{option}: the window {from}:{to} is reversed: the smaller value comes first")]
    WindowReversed {
        option: &'static str,
        from: f64,
        to: f64,
    },
    /// A window without extent.
    #[error("--{option}: the window {at}:{at} is empty")]
    WindowEmpty { option: &'static str, at: f64 },
    /// Two windows.
    #[error("--{first} and --{second} cannot be given together: give one window")]
    TwoWindows {
        first: &'static str,
        second: &'static str,
    },
    /// A window in a variable that is not that of the file.
    #[error(
        "--{given}: the levels of this system file are given as {expected}{unit}: give the window with --{expected} FROM:TO"
    )]
    WindowUnit {
        given: &'static str,
        expected: &'static str,
        /// Such as ` in GHz`.
        unit: String,
    },
    /// A window that lies where the smooth count does not grow.
    #[error(
        "--{option}: the smooth count does not grow at {at}, the middle of the window: choose a window above the first \
         level, which lies near {first}"
    )]
    BelowFirstLevel {
        option: &'static str,
        at: f64,
        first: f64,
    },
    /// A window that a list does not reach into.
    #[error(
        "the list runs from {first} to {last} and has no levels in the window, which begins at {begin}: choose a window that it covers, \
         or give a longer list"
    )]
    ListOutsideWindow {
        begin: String,
        first: String,
        last: String,
    },
    /// Too few levels for a length spectrum.
    #[error(
        "{place} holds {found}: a length spectrum needs at least {least} to tell any lengths apart"
    )]
    TooFewLevels {
        /// `the list`, or the window in words.
        place: String,
        /// Such as `1 level`.
        found: String,
        least: usize,
    },
    /// A list whose number of levels fits no shape like this.
    #[error(
        "the list holds {found} levels in the window ({window}), where the smooth count of {system} is {expected:.0}: it belongs to \
         another shape, size, class or unit"
    )]
    AnotherList {
        window: String,
        found: usize,
        expected: f64,
        system: String,
    },
    /// A list that seems to be something else.
    #[error(
        "{}: as it stands the list does not fit the shape, but it looks like {what}: {cure}", path.display()
    )]
    ListLooksLike {
        path: PathBuf,
        what: String,
        cure: String,
    },
    /// Too few levels for an audit.
    #[error("{place} holds {found}: an audit needs at least {least} to tell a fault from noise")]
    TooFewToAudit {
        /// `the list`, or the window in words.
        place: String,
        /// Such as `1 level`.
        found: String,
        least: usize,
    },
    /// More levels than an audit takes.
    #[error(
        "{found} levels are more than the {most} that are audited at once: take a part of the list with --{option} FROM:TO"
    )]
    TooManyLevels {
        found: usize,
        most: usize,
        option: &'static str,
    },
    /// Longer orbits than an audit can use.
    #[error(
        "orbits up to {longest} would need a record of {points:.0} points, more than {limit:.0}: give a smaller --max-length or a narrower \
         window"
    )]
    TooFine {
        longest: String,
        points: f64,
        limit: f64,
    },
    /// Orbits too short for an audit of the window.
    #[error(
        "orbits up to {longest} resolve nothing in this window: give a --max-length of {needed} or more, or a wider window"
    )]
    TooCoarse { longest: String, needed: String },
    /// A parameter to be fitted that the file does not have.
    #[error("--fit: `{name}` is not a parameter: {known}")]
    UnknownParameter { name: String, known: String },
    /// Parameters that the list does not determine.
    #[error(
        "--fit: the list does not determine {names}: fit fewer parameters, or give a longer list"
    )]
    NotFitted { names: String },
    /// A list that the noise model cannot take.
    #[error("{}: the list cannot be compared with the prediction: its levels are too close to each other or to 0", path.display())]
    NotAudited { path: PathBuf },
    /// A strict audit found something.
    #[error("{found}")]
    AuditFound {
        /// In words.
        found: String,
    },
    /// A window that tells no orbit from the smooth part.
    #[error(
        "in this window lengths below {resolved} cannot be told from the smooth part, and a comparison takes orbits up to {needed}, \
         where they are looked for up to {longest}: give a wider window or a larger --max-length"
    )]
    NothingResolved {
        resolved: String,
        needed: String,
        longest: String,
    },
    /// More lengths than make sense.
    #[error(
        "a window this wide would tell {lengths:.0} lengths up to {longest} apart, more than {limit}: choose a narrower window or a \
         smaller --max-length"
    )]
    TooManyLengths {
        lengths: f64,
        longest: String,
        limit: usize,
    },
    /// More points than make sense.
    #[error(
        "the window is {widths:.0} times as wide as the smoothing and would need {points:.0} points, more than {limit}: \
         choose a narrower window or a larger smoothing"
    )]
    TooManyPoints {
        widths: f64,
        points: f64,
        limit: usize,
    },
    /// A class that the symmetry group does not have.
    #[error("--class: `{name}` is not a class of this shape: {known}")]
    UnknownClass { name: String, known: String },
    /// A class of a shape whose orbit sum has none.
    #[error("--class: {reason}")]
    ClassUnavailable { reason: &'static str },
    /// The output folder cannot be made or written.
    #[error("--{option}: cannot write into `{}`: {source}", path.display())]
    Output {
        option: &'static str,
        path: PathBuf,
        source: std::io::Error,
    },
    /// A file could not be written after all was computed.
    #[error("cannot write `{}`: {source}", path.display())]
    Write {
        path: PathBuf,
        source: std::io::Error,
    },
    /// The levels cannot be computed.
    #[error(transparent)]
    Solver(#[from] SolverError),
    /// Fewer or more levels were found than counted.
    #[error(
        "the list is not complete: {found} levels were found and {counted} counted; they disagree in {windows}; try another \
         --accuracy, or one --class at a time"
    )]
    Incomplete {
        found: usize,
        counted: usize,
        /// The windows in words.
        windows: String,
    },
    /// Standard output does not take the result.
    #[error("cannot write to standard output: {0}")]
    StandardOutput(std::io::Error),
    /// The threads could not be started.
    #[error("cannot start {threads} threads: {reason}")]
    Threads { threads: usize, reason: String },
}

impl CommandError {
    /// The complete message.
    pub(crate) fn message(&self) -> String {
        match self {
            // This one has its heading already.
            Self::System(_) => self.to_string(),
            // Nothing went wrong.
            Self::AuditFound { .. } => format!("strict: {self}"),
            _ => format!("error: {self}"),
        }
    }

    /// 2 where the input or the call is wrong, 1 where the computation failed, 3 where a strict audit found something.
    pub(crate) fn exit_code(&self) -> ExitCode {
        ExitCode::from(match self {
            Self::Write { .. }
            | Self::StandardOutput(_)
            | Self::Threads { .. }
            | Self::Incomplete { .. }
            | Self::NotAudited { .. }
            | Self::NotFitted { .. }
            | Self::Solver(SolverError::Mesh(_)) => FAILED,
            Self::AuditFound { .. } => FOUND,
            _ => WRONG_INPUT,
        })
    }
}

impl From<SystemError> for CommandError {
    fn from(error: SystemError) -> Self {
        Self::System(error)
    }
}
