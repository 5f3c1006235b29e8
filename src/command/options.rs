//! Validated options of every command.

use super::arguments::{Common, Format};
use super::error::CommandError;
use super::output::Folder;
use super::value;

/// Largest number of threads that is taken for a meant one.
const MOST_THREADS: usize = 1024;

/// Options of every command.
#[derive(Debug)]
pub(super) struct Options {
    /// Parameters with the values that replace those of the file.
    pub(super) settings: Vec<(String, String)>,
    /// Name of a class.
    pub(super) class: Option<String>,
    /// Where files go.
    pub(super) folder: Option<Folder>,
    /// Form of standard output.
    pub(super) format: Format,
    /// No progress, no notes.
    pub(super) quiet: bool,
}

impl Options {
    /// Checks the common options, makes the output folder, starts the threads.
    pub(super) fn from_arguments(typed: &Common) -> Result<Self, CommandError> {
        let settings = typed
            .settings
            .iter()
            .map(|text| value::setting(text))
            .collect::<Result<_, _>>()?;
        if let Some(text) = &typed.threads {
            start_threads(value::count("threads", text, MOST_THREADS)?)?;
        }
        Ok(Self {
            settings,
            class: typed.class.clone(),
            folder: typed
                .out
                .as_deref()
                .map(|path| Folder::prepare("out", path))
                .transpose()?,
            format: typed.format,
            quiet: typed.quiet,
        })
    }
}

fn start_threads(threads: usize) -> Result<(), CommandError> {
    rayon::ThreadPoolBuilder::new()
        .num_threads(threads)
        .build_global()
        .map_err(|error| CommandError::Threads {
            threads,
            reason: error.to_string(),
        })
}
