//! The commands: read, call the library, write.
//!
//! * [`arguments`] holds what was typed; [`options`] and [`value`] turn it into validated options.
//! * [`direct`] computes levels, window by window, with a [`journal`] that an interrupted computation is taken up from.
//! * [`subject`] is the system that a command is about, with its symmetry and class.
//! * one module per command makes an [`answer`], which is written to standard output and to files.

mod answer;
mod arguments;
mod audit;
mod completeness;
mod density;
mod direct;
mod error;
mod fluctuation;
mod given;
mod journal;
mod lengths;
mod levels;
mod limits;
mod note;
mod options;
mod orbits;
mod output;
mod progress;
mod show;
mod subject;
mod table;
mod text;
mod value;
mod weyl;
mod window;

pub(crate) use arguments::Arguments;
pub(crate) use error::CommandError;

use arguments::Command;
use options::Options;

/// Runs the command that was typed.
pub(crate) fn run(arguments: Arguments) -> Result<(), CommandError> {
    let options = Options::from_arguments(&arguments.common)?;
    let answer = match &arguments.command {
        Command::Show(typed) => show::run(typed, &options),
        Command::Weyl(typed) => weyl::run(typed, &options),
        Command::Orbits(typed) => orbits::run(typed, &options),
        Command::Density(typed) => density::run(typed, &options),
        Command::Levels(typed) => levels::run(typed, &options),
        Command::Lengths(typed) => lengths::run(typed, &options),
        Command::Audit(typed) => audit::run(typed, &options),
    }?;
    answer.deliver(&options)
}
