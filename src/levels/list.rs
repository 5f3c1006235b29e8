//! What a level list holds, what there is to say about it, and what can be wrong with it.

use std::fmt;
use std::path::PathBuf;

/// Levels in ascending order, in the unit of the file they came from.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct LevelList {
    /// The levels, each as often as it occurs: a double level stands twice.
    pub values: Vec<f64>,
    /// Uncertainty of each level, in the unit of `values`, where the file has a column `error`.
    pub errors: Option<Vec<f64>>,
    /// Width of each level (a resonance's), in the unit of `values`, where the file has a column `width`.
    pub widths: Option<Vec<f64>>,
    /// What the values are, where the file names their column.
    pub column: Option<ListColumn>,
    /// What a user should know about how the file was read.
    pub notes: Vec<ListNote>,
}

/// The names that the column of levels can have.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ListColumn {
    /// Wave number, `k`.
    WaveNumber,
    /// Energy, `energy`.
    Energy,
    /// Frequency, `frequency`.
    Frequency,
}

impl ListColumn {
    /// All of them, the preferred one first where a file has several.
    pub const ALL: [Self; 3] = [Self::WaveNumber, Self::Energy, Self::Frequency];

    /// The name in the file.
    pub fn name(self) -> &'static str {
        match self {
            Self::WaveNumber => "k",
            Self::Energy => "energy",
            Self::Frequency => "frequency",
        }
    }
}

impl fmt::Display for ListColumn {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        formatter.write_str(self.name())
    }
}

/// A remark about a level list that was read without error.
#[derive(Clone, Debug, PartialEq)]
pub enum ListNote {
    /// The levels were not in ascending order and have been sorted.
    Sorted {
        /// Line of the first level that is smaller than the one before it.
        line: usize,
    },
    /// Some values occur more than once; they count as often as they occur.
    Repeated {
        /// Number of distinct values that occur more than once.
        values: usize,
    },
    /// The file has several columns that could be the levels; the others were not read. An energy that is k^2 beside k is
    /// not worth a remark.
    OtherLevels {
        /// The column that was read.
        used: ListColumn,
        /// A column that was not.
        ignored: ListColumn,
    },
    /// A column whose name says nothing to this program was not read.
    UnknownColumn {
        /// Its name.
        name: String,
    },
}

impl fmt::Display for ListNote {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Sorted { line } => write!(
                formatter,
                "the levels were not in ascending order (first at line {line}) and have been sorted"
            ),
            Self::Repeated { values: 1 } => write!(
                formatter,
                "one value occurs more than once and is taken as a level of that multiplicity"
            ),
            Self::Repeated { values } => write!(
                formatter,
                "{values} values occur more than once and are taken as levels of that multiplicity"
            ),
            Self::OtherLevels { used, ignored } => {
                write!(
                    formatter,
                    "column `{used}` was read and column `{ignored}` was not"
                )
            }
            Self::UnknownColumn { name } => write!(formatter, "column `{name}` was not read"),
        }
    }
}

/// Why a level list cannot be used.
#[derive(Debug, thiserror::Error)]
pub enum ListError {
    /// The file cannot be opened or read.
    #[error("cannot read the level list {}: {source}", path.display())]
    Unreadable {
        /// The file.
        path: PathBuf,
        /// What the system says.
        source: std::io::Error,
    },
    /// The file is larger than any level list can be.
    #[error("{} is larger than {limit} bytes: a level list is text with one level a line", path.display())]
    TooLarge {
        /// The file.
        path: PathBuf,
        /// Largest size that is read.
        limit: u64,
    },
    /// The file is not text.
    #[error("{}, line {line}: not UTF-8 text: a level list is plain text with one level a line", path.display())]
    NotText {
        /// The file.
        path: PathBuf,
        /// Line of the first wrong byte.
        line: usize,
    },
    /// There is no level in the file.
    #[error("{}: the level list is empty: it needs at least one line with a number", path.display())]
    Empty {
        /// The file.
        path: PathBuf,
    },
    /// There are several columns and none is named as the levels.
    #[error(
        "{}, line {line}: no column of levels among {found}: name one of them k, energy or frequency in the first line, \
         or give a single column",
        path.display()
    )]
    NoLevelColumn {
        /// The file.
        path: PathBuf,
        /// Line of the header, or the first line of numbers.
        line: usize,
        /// The columns that are there.
        found: String,
    },
    /// The same column is named twice.
    #[error("{}, line {line}: two columns are named `{name}`: rename or remove one", path.display())]
    DoubleColumn {
        /// The file.
        path: PathBuf,
        /// Line of the header.
        line: usize,
        /// The name.
        name: String,
    },
    /// A row has more or fewer fields than the first one.
    #[error("{}, line {line}: {found} fields where the lines above have {expected}", path.display())]
    FieldCount {
        /// The file.
        path: PathBuf,
        /// The row's line.
        line: usize,
        /// Number of fields in this row.
        found: usize,
        /// Number of fields in the first row.
        expected: usize,
    },
    /// A field is not a number.
    #[error("{}, line {line}: `{text}` in column `{column}` is not a number", path.display())]
    NotANumber {
        /// The file.
        path: PathBuf,
        /// The row's line.
        line: usize,
        /// Name of the column.
        column: String,
        /// What stands there.
        text: String,
    },
    /// A number is infinite or not a number.
    #[error("{}, line {line}: `{text}` in column `{column}` is not finite: remove the line or give a number", path.display())]
    NotFinite {
        /// The file.
        path: PathBuf,
        /// The row's line.
        line: usize,
        /// Name of the column.
        column: String,
        /// What stands there.
        text: String,
    },
    /// A number is negative where it cannot be.
    #[error("{}, line {line}: {value} in column `{column}` is negative: levels, errors and widths are zero or positive", path.display())]
    Negative {
        /// The file.
        path: PathBuf,
        /// The row's line.
        line: usize,
        /// Name of the column.
        column: String,
        /// The number.
        value: f64,
    },
    /// A multiplicity is not a whole number from 1 on.
    #[error("{}, line {line}: multiplicity `{text}` is not a whole number from 1 to {limit}", path.display())]
    Multiplicity {
        /// The file.
        path: PathBuf,
        /// The row's line.
        line: usize,
        /// What stands there.
        text: String,
        /// Largest multiplicity that is taken.
        limit: usize,
    },
}
