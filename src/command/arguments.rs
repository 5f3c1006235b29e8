//! What was typed, not yet looked at.

use clap::{Args, Parser, Subcommand, ValueEnum};
use std::path::PathBuf;

/// Level counts and level densities of billiards from their periodic orbits.
///
/// A system file describes the shape; `orbitsum show FILE` is a good start.
#[derive(Debug, Parser)]
#[command(
    name = "orbitsum",
    version,
    max_term_width = 100,
    arg_required_else_help = true
)]
pub(crate) struct Arguments {
    #[command(subcommand)]
    pub(crate) command: Command,
    #[command(flatten)]
    pub(crate) common: Common,
}

#[derive(Debug, Subcommand)]
pub(crate) enum Command {
    /// Show what a system file describes: measures, corners, symmetry, dynamics
    Show(Show),
    /// Count levels smoothly (Weyl), term by term, with the expected fluctuation
    Weyl(Weyl),
    /// List the periodic orbits up to a length and a number of bounces
    Orbits(Orbits),
    /// Predict density and staircase of levels, and compare them with a list
    ///
    /// Without a window: from the 10th to the 250th level, or to the end of the list.
    Density(Density),
    /// Compute levels directly, with an error for each and a count of all
    Levels(Levels),
    /// Compare the length spectrum of a list of levels with that of the orbits
    ///
    /// It shows which orbits a list knows of, what a search of orbits left out and what a measurement did. Without a window: from
    /// about the 5th level to the end of the list.
    Lengths(Lengths),
    /// Find the levels that a list lacks and those that are false, with their places and how sure that is
    ///
    /// The list is compared with the smooth count and the periodic orbits alone. The window is the range in which it claims to be
    /// complete; without one: from its first level to its last.
    Audit(Audit),
}

/// Options of every command.
#[derive(Debug, Args)]
#[command(next_help_heading = "Options of every command")]
pub(crate) struct Common {
    /// Give a parameter of the system file another value (a number or a formula); may be repeated
    #[arg(
        long = "set",
        value_name = "NAME=VALUE",
        global = true,
        allow_hyphen_values = true
    )]
    pub(crate) settings: Vec<String>,
    /// Take the levels of one symmetry class only; `show` lists the classes
    #[arg(long, value_name = "NAME", global = true)]
    pub(crate) class: Option<String>,
    /// Write tables and pictures into this folder
    #[arg(long, value_name = "DIR", global = true)]
    pub(crate) out: Option<PathBuf>,
    /// What standard output gets
    #[arg(long, value_enum, default_value_t = Format::Table, global = true)]
    pub(crate) format: Format,
    /// Number of threads [default: all cores]; results do not depend on it
    #[arg(long, value_name = "N", global = true, allow_hyphen_values = true)]
    pub(crate) threads: Option<String>,
    /// No progress and no notes on standard error
    #[arg(long, global = true)]
    pub(crate) quiet: bool,
}

/// Form of standard output.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub(crate) enum Format {
    /// For people
    Table,
    /// All rows, comma-separated
    Csv,
    /// All rows with what they depend on
    Json,
}

#[derive(Debug, Args)]
pub(crate) struct Show {
    /// System file
    #[arg(value_name = "SYSTEM.toml")]
    pub(crate) system: PathBuf,
}

#[derive(Debug, Args)]
pub(crate) struct Weyl {
    /// System file
    #[arg(value_name = "SYSTEM.toml")]
    pub(crate) system: PathBuf,
    /// Where to count: a value in the unit of the file's levels, or several with commas; may be repeated [default: near the
    /// 10th, 100th and 1000th level]
    #[arg(long, value_name = "VALUE", allow_hyphen_values = true)]
    pub(crate) at: Vec<String>,
}

/// How far orbits are looked for.
#[derive(Debug, Args)]
pub(crate) struct OrbitLimits {
    /// Longest orbit (reduced by symmetry), in the file's unit of length [default: 3/(smoothing width in k), or what is
    /// quick to find]
    #[arg(long, value_name = "LENGTH", allow_hyphen_values = true)]
    pub(crate) max_length: Option<String>,
    /// Largest number of bounces on walls (reduced by symmetry) [default: 24; more for polygons and integrable shapes]
    #[arg(long, value_name = "N", allow_hyphen_values = true)]
    pub(crate) max_bounces: Option<String>,
}

#[derive(Debug, Args)]
pub(crate) struct Orbits {
    /// System file
    #[arg(value_name = "SYSTEM.toml")]
    pub(crate) system: PathBuf,
    #[command(flatten)]
    pub(crate) limits: OrbitLimits,
}

/// A window, in whichever variable the system file names.
#[derive(Debug, Args)]
pub(crate) struct WindowOptions {
    /// Window in k, for files whose levels are wave numbers
    #[arg(long, value_name = "FROM:TO", allow_hyphen_values = true)]
    pub(crate) k: Option<String>,
    /// Window in energy, for files whose levels are energies
    #[arg(long, value_name = "FROM:TO", allow_hyphen_values = true)]
    pub(crate) energy: Option<String>,
    /// Window in frequency, for files whose levels are frequencies
    #[arg(long, value_name = "FROM:TO", allow_hyphen_values = true)]
    pub(crate) frequency: Option<String>,
}

#[derive(Debug, Args)]
pub(crate) struct Density {
    /// System file
    #[arg(value_name = "SYSTEM.toml")]
    pub(crate) system: PathBuf,
    #[command(flatten)]
    pub(crate) window: WindowOptions,
    /// Standard deviation of the Gaussian in mean spacings at the middle of the window [default: 2, or more
    /// where the longest orbit asks for it]
    #[arg(
        long,
        value_name = "S",
        allow_hyphen_values = true,
        conflicts_with = "smoothing_width"
    )]
    pub(crate) smoothing: Option<String>,
    /// Standard deviation of the Gaussian in the unit of the file's levels
    #[arg(long, value_name = "W", allow_hyphen_values = true)]
    pub(crate) smoothing_width: Option<String>,
    /// Levels to compare with: one a line, or csv with a column k, energy or frequency
    #[arg(long, value_name = "FILE")]
    pub(crate) levels: Option<PathBuf>,
    /// Compute the levels to compare with, as `levels` does
    #[arg(long, conflicts_with = "levels")]
    pub(crate) direct: bool,
    #[command(flatten)]
    pub(crate) limits: OrbitLimits,
}

#[derive(Debug, Args)]
pub(crate) struct Levels {
    /// System file
    #[arg(value_name = "SYSTEM.toml")]
    pub(crate) system: PathBuf,
    #[command(flatten)]
    pub(crate) window: WindowOptions,
    /// Relative accuracy of k that is aimed at, from 1e-13 to 1e-3; coarser is faster [default: 1e-11]
    #[arg(long, value_name = "A", allow_hyphen_values = true)]
    pub(crate) accuracy: Option<String>,
    /// Write the waves into this folder: values on a grid, on the walls, and a picture of each
    #[arg(long, value_name = "DIR")]
    pub(crate) vectors: Option<PathBuf>,
    /// Numbers of the levels whose waves are written, such as 12,15-18 [default: all in the window]
    #[arg(
        long,
        value_name = "LIST",
        allow_hyphen_values = true,
        requires = "vectors"
    )]
    pub(crate) only: Option<String>,
}

#[derive(Debug, Args)]
pub(crate) struct Lengths {
    /// System file
    #[arg(value_name = "SYSTEM.toml")]
    pub(crate) system: PathBuf,
    #[command(flatten)]
    pub(crate) window: WindowOptions,
    /// Levels: one a line, or csv with a column k, energy or frequency
    #[arg(long, value_name = "FILE")]
    pub(crate) levels: PathBuf,
    #[command(flatten)]
    pub(crate) limits: OrbitLimits,
}

#[derive(Debug, Args)]
pub(crate) struct Audit {
    /// System file
    #[arg(value_name = "SYSTEM.toml")]
    pub(crate) system: PathBuf,
    /// Levels: one a line, or csv with a column k, energy or frequency, and perhaps error or width
    #[arg(long, value_name = "FILE")]
    pub(crate) levels: PathBuf,
    #[command(flatten)]
    pub(crate) window: WindowOptions,
    #[command(flatten)]
    pub(crate) limits: OrbitLimits,
    /// Fit a parameter of the system file to the list, and audit with the value that fits best; may be repeated
    #[arg(long, value_name = "NAME")]
    pub(crate) fit: Vec<String>,
    /// Exit with 3 if anything is found
    #[arg(long)]
    pub(crate) strict: bool,
}
