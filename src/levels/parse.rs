//! Reading a level list.
//!
//! The file is csv (comma or semicolon) or white-space text, with comment lines that begin with `#`. It holds one column, or
//! several with their names in the first line: `k`, `energy` or `frequency` for the levels, `error`, `width` and
//! `multiplicity` beside it; `n` and `estimated` (marks of an audit) are skipped.

use std::fs::File;
use std::io::Read;
use std::path::Path;

use super::list::{LevelList, ListColumn, ListError, ListNote};

/// Largest file that is read, in bytes: ten million levels with their errors fit in.
const MAX_BYTES: u64 = 1 << 29;

/// Largest multiplicity of one row. Symmetry forces two or three, a mistaken column would give its row numbers.
const MAX_MULTIPLICITY: usize = 1000;

/// Reads the level list at `path`.
///
/// Values come back sorted, repeated ones kept; a row with a multiplicity m stands m times.
pub fn read(path: &Path) -> Result<LevelList, ListError> {
    let unreadable = |source| ListError::Unreadable {
        path: path.to_owned(),
        source,
    };
    let mut bytes = Vec::new();
    let file = File::open(path).map_err(unreadable)?;
    file.take(MAX_BYTES + 1)
        .read_to_end(&mut bytes)
        .map_err(unreadable)?;
    if bytes.len() as u64 > MAX_BYTES {
        return Err(ListError::TooLarge {
            path: path.to_owned(),
            limit: MAX_BYTES,
        });
    }
    let text = std::str::from_utf8(&bytes).map_err(|error| {
        let before = &bytes[..error.valid_up_to()];
        let line = 1 + before.iter().filter(|&&byte| byte == b'\n').count();
        ListError::NotText {
            path: path.to_owned(),
            line,
        }
    })?;
    parse(path, text)
}

/// Relative difference from k^2 up to which an energy beside k says nothing new. Lists of seven digits or more pass; it
/// moves the count of the thousandth level by 0.001.
const SAME_ENERGY: f64 = 1e-6;

/// One row: its line in the file and what it says about one level.
struct Row {
    line: usize,
    value: f64,
    error: f64,
    width: f64,
    multiplicity: usize,
}

fn parse(path: &Path, text: &str) -> Result<LevelList, ListError> {
    let empty = || ListError::Empty {
        path: path.to_owned(),
    };
    let text = text.strip_prefix('\u{feff}').unwrap_or(text);
    let mut lines = text
        .lines()
        .enumerate()
        .map(|(index, line)| (index + 1, line.trim()))
        .filter(|(_, line)| !line.is_empty() && !line.starts_with('#'))
        .peekable();
    let &(first_line, first) = lines.peek().ok_or_else(empty)?;
    let separator = Separator::of(first);
    let first_fields = separator.split(first);
    let named = first_fields.iter().all(|field| is_name(field));
    if named {
        lines.next();
    }
    let mut notes = Vec::new();
    let header = Header {
        path,
        line: first_line,
        fields: &first_fields,
        named,
    };
    let columns = header.columns(&mut notes)?;
    let mut rows = Vec::new();
    let mut energy_is_redundant = true;
    for (line, text) in lines {
        let fields = separator.split(text);
        let row = columns.row(path, line, &fields)?;
        energy_is_redundant &= columns.energy_is_square(&row, &fields);
        rows.push(row);
    }
    if rows.is_empty() {
        return Err(empty());
    }
    if energy_is_redundant {
        notes.retain(|note| {
            !matches!(
                note,
                ListNote::OtherLevels {
                    used: ListColumn::WaveNumber,
                    ignored: ListColumn::Energy
                }
            )
        });
    }
    Ok(collect(rows, &columns, notes))
}

/// Sorts the rows and repeats them by their multiplicity.
fn collect(mut rows: Vec<Row>, columns: &Columns, mut notes: Vec<ListNote>) -> LevelList {
    if let Some(pair) = rows.windows(2).find(|pair| pair[1].value < pair[0].value) {
        notes.push(ListNote::Sorted { line: pair[1].line });
        rows.sort_by(|a, b| a.value.total_cmp(&b.value));
    }
    let repeat = |pick: fn(&Row) -> f64| -> Vec<f64> {
        rows.iter()
            .flat_map(|row| std::iter::repeat_n(pick(row), row.multiplicity))
            .collect()
    };
    let values = repeat(|row| row.value);
    let repeated = values
        .chunk_by(|a, b| a == b)
        .filter(|chunk| chunk.len() > 1)
        .count();
    if repeated > 0 {
        notes.push(ListNote::Repeated { values: repeated });
    }
    LevelList {
        errors: columns.error.map(|_| repeat(|row| row.error)),
        widths: columns.width.map(|_| repeat(|row| row.width)),
        column: columns.kind,
        values,
        notes,
    }
}

/// What stands between the fields of a row.
#[derive(Clone, Copy)]
enum Separator {
    Character(char),
    WhiteSpace,
}

impl Separator {
    fn of(line: &str) -> Self {
        [',', ';']
            .into_iter()
            .find(|&mark| line.contains(mark))
            .map_or(Self::WhiteSpace, Self::Character)
    }

    fn split(self, line: &str) -> Vec<&str> {
        match self {
            Self::Character(mark) => line.split(mark).map(strip_quotes).collect(),
            Self::WhiteSpace => line.split_whitespace().map(strip_quotes).collect(),
        }
    }
}

/// Spreadsheets put quotation marks around names and sometimes around numbers.
fn strip_quotes(field: &str) -> &str {
    let field = field.trim();
    field
        .strip_prefix('"')
        .and_then(|field| field.strip_suffix('"'))
        .unwrap_or(field)
        .trim()
}

/// Whether a field of the first line is the name of a column rather than a number, right or wrong.
fn is_name(field: &str) -> bool {
    let begins_as_name = field.starts_with(|c: char| c.is_alphabetic() || c == '_');
    begins_as_name && field.parse::<f64>().is_err()
}

/// The first line that is no comment.
struct Header<'a> {
    path: &'a Path,
    line: usize,
    fields: &'a [&'a str],
    named: bool,
}

impl Header<'_> {
    fn columns(&self, notes: &mut Vec<ListNote>) -> Result<Columns, ListError> {
        if !self.named {
            return match self.fields {
                [_] => Ok(Columns::single()),
                fields => {
                    Err(self.no_level_column(format!("{} columns without names", fields.len())))
                }
            };
        }
        let names: Vec<String> = self
            .fields
            .iter()
            .map(|field| field.to_lowercase())
            .collect();
        for (index, name) in names.iter().enumerate() {
            if names[..index].contains(name) {
                return Err(ListError::DoubleColumn {
                    path: self.path.to_owned(),
                    line: self.line,
                    name: name.clone(),
                });
            }
        }
        let find = |wanted: &str| names.iter().position(|name| name == wanted);
        let mut levels = ListColumn::ALL
            .into_iter()
            .filter_map(|kind| find(kind.name()).map(|index| (kind, index)));
        let Some((kind, value)) = levels.next() else {
            return Err(self.no_level_column(self.fields.join(", ")));
        };
        notes.extend(levels.map(|(ignored, _)| ListNote::OtherLevels {
            used: kind,
            ignored,
        }));
        let known = |name: &str| {
            ["error", "width", "n", "multiplicity", "estimated"].contains(&name)
                || ListColumn::ALL.iter().any(|kind| kind.name() == name)
        };
        let unknown = names
            .iter()
            .zip(self.fields)
            .filter(|(name, _)| !known(name));
        notes.extend(unknown.map(|(_, field)| ListNote::UnknownColumn {
            name: (*field).to_owned(),
        }));
        Ok(Columns {
            count: names.len(),
            kind: Some(kind),
            value,
            energy: find(ListColumn::Energy.name()),
            error: find("error"),
            width: find("width"),
            multiplicity: find("multiplicity"),
        })
    }

    fn no_level_column(&self, found: String) -> ListError {
        ListError::NoLevelColumn {
            path: self.path.to_owned(),
            line: self.line,
            found,
        }
    }
}

/// Which field of a row is what.
struct Columns {
    count: usize,
    kind: Option<ListColumn>,
    value: usize,
    energy: Option<usize>,
    error: Option<usize>,
    width: Option<usize>,
    multiplicity: Option<usize>,
}

impl Columns {
    fn single() -> Self {
        Self {
            count: 1,
            kind: None,
            value: 0,
            energy: None,
            error: None,
            width: None,
            multiplicity: None,
        }
    }

    /// Whether the column `energy` holds the square of the level of this row.
    fn energy_is_square(&self, row: &Row, fields: &[&str]) -> bool {
        let square = row.value * row.value;
        self.energy
            .and_then(|index| fields[index].parse::<f64>().ok())
            .is_some_and(|energy| (energy - square).abs() <= SAME_ENERGY * square)
    }

    fn row(&self, path: &Path, line: usize, fields: &[&str]) -> Result<Row, ListError> {
        if fields.len() != self.count {
            return Err(ListError::FieldCount {
                path: path.to_owned(),
                line,
                found: fields.len(),
                expected: self.count,
            });
        }
        let number = |index: Option<usize>, column: &str| match index {
            Some(index) => Field {
                path,
                line,
                column,
                text: fields[index],
            }
            .number(),
            None => Ok(0.0),
        };
        Ok(Row {
            line,
            value: number(
                Some(self.value),
                self.kind.map_or("levels", ListColumn::name),
            )?,
            error: number(self.error, "error")?,
            width: number(self.width, "width")?,
            multiplicity: self
                .multiplicity
                .map_or(Ok(1), |index| multiplicity(path, line, fields[index]))?,
        })
    }
}

fn multiplicity(path: &Path, line: usize, text: &str) -> Result<usize, ListError> {
    match text.parse() {
        Ok(count) if (1..=MAX_MULTIPLICITY).contains(&count) => Ok(count),
        _ => Err(ListError::Multiplicity {
            path: path.to_owned(),
            line,
            text: text.to_owned(),
            limit: MAX_MULTIPLICITY,
        }),
    }
}

/// One field and where it stands.
struct Field<'a> {
    path: &'a Path,
    line: usize,
    column: &'a str,
    text: &'a str,
}

impl Field<'_> {
    /// The field as a finite number that is not negative.
    fn number(&self) -> Result<f64, ListError> {
        let (path, line, column) = (self.path.to_owned(), self.line, self.column.to_owned());
        let text = self.text.to_owned();
        match self.text.parse::<f64>() {
            Err(_) => Err(ListError::NotANumber {
                path,
                line,
                column,
                text,
            }),
            Ok(value) if !value.is_finite() => Err(ListError::NotFinite {
                path,
                line,
                column,
                text,
            }),
            Ok(value) if value < 0.0 => Err(ListError::Negative {
                path,
                line,
                column,
                value,
            }),
            // -0 would sort before 0
            Ok(value) => Ok(value.abs()),
        }
    }
}
