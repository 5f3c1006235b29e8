//! Command line of orbitsum: parses, dispatches, turns errors into messages and exit codes.

mod command;

use clap::Parser;
use command::{Arguments, CommandError};
use std::io::Write;
use std::process::ExitCode;

fn main() -> ExitCode {
    let arguments = match Arguments::try_parse() {
        Ok(arguments) => arguments,
        Err(message) => return explain(&message),
    };
    match command::run(arguments) {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            complain(&error);
            error.exit_code()
        }
    }
}

/// Prints what the parser of arguments has to say: help and version on standard output, mistakes on standard error.
fn explain(message: &clap::Error) -> ExitCode {
    // Nobody is left to tell when even this cannot be written.
    let _ = message.print();
    ExitCode::from(u8::try_from(message.exit_code()).unwrap_or(2))
}

fn complain(error: &CommandError) {
    let _ = writeln!(std::io::stderr().lock(), "{}", error.message());
}
