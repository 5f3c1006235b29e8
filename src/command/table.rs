//! Tables of results, and their forms: csv, rows of json, columns for people.

use super::text::significant;
use serde_json::{Map, Value};

/// Digits of a number in a table for people.
const DIGITS: usize = 7;

/// One entry.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Cell {
    /// Nothing to say.
    Empty,
    /// A number; one that is not finite is left empty in files.
    Number(f64),
    /// A count.
    Count(usize),
    /// Words.
    Text(String),
}

impl From<f64> for Cell {
    fn from(value: f64) -> Self {
        Self::Number(value)
    }
}

impl From<usize> for Cell {
    fn from(value: usize) -> Self {
        Self::Count(value)
    }
}

impl From<&str> for Cell {
    fn from(value: &str) -> Self {
        Self::Text(value.to_owned())
    }
}

impl From<String> for Cell {
    fn from(value: String) -> Self {
        Self::Text(value)
    }
}

impl<T: Into<Cell>> From<Option<T>> for Cell {
    fn from(value: Option<T>) -> Self {
        value.map_or(Self::Empty, Into::into)
    }
}

impl Cell {
    /// In full: the shortest digits that give the same number again.
    fn exact(&self) -> String {
        match self {
            Self::Number(value) if value.is_finite() => format!("{value:?}"),
            Self::Count(value) => value.to_string(),
            Self::Text(text) => text.clone(),
            Self::Empty | Self::Number(_) => String::new(),
        }
    }

    fn for_people(&self) -> String {
        match self {
            Self::Number(value) => significant(*value, DIGITS),
            _ => self.exact(),
        }
    }

    fn json(&self) -> Value {
        match self {
            Self::Empty => Value::Null,
            // Numbers that are not finite become null: json has none.
            Self::Number(value) => Value::from(*value),
            Self::Count(value) => Value::from(*value),
            Self::Text(text) => Value::from(text.as_str()),
        }
    }
}

/// Rows under named columns.
#[derive(Clone, Debug, Default)]
pub(super) struct Table {
    pub(super) columns: Vec<&'static str>,
    pub(super) rows: Vec<Vec<Cell>>,
}

impl Table {
    pub(super) fn new(columns: &[&'static str]) -> Self {
        Self {
            columns: columns.to_vec(),
            rows: Vec::new(),
        }
    }

    pub(super) fn push(&mut self, row: Vec<Cell>) {
        debug_assert_eq!(row.len(), self.columns.len());
        self.rows.push(row);
    }

    /// Comma-separated, the names of the columns in the first line.
    pub(super) fn csv(&self) -> String {
        let mut writer = csv::Writer::from_writer(Vec::new());
        let header = std::iter::once(self.columns.iter().map(|&name| name.to_owned()).collect());
        let rows = self
            .rows
            .iter()
            .map(|row| row.iter().map(Cell::exact).collect());
        for record in header.chain(rows) {
            let record: Vec<String> = record;
            // Writing into memory cannot fail, and all records have the same number of fields.
            let _ = writer.write_record(record);
        }
        let bytes = writer.into_inner().unwrap_or_default();
        String::from_utf8_lossy(&bytes).into_owned()
    }

    /// One object per row.
    pub(super) fn json(&self) -> Value {
        let object = |row: &Vec<Cell>| -> Value {
            let pairs = self.columns.iter().zip(row);
            let map: Map<String, Value> = pairs
                .map(|(&name, cell)| (name.to_owned(), cell.json()))
                .collect();
            Value::Object(map)
        };
        Value::Array(self.rows.iter().map(object).collect())
    }

    /// Columns for people: words to the left, numbers to the right.
    pub(super) fn aligned(&self) -> String {
        let cells: Vec<Vec<String>> = self
            .rows
            .iter()
            .map(|row| row.iter().map(Cell::for_people).collect())
            .collect();
        let width = |column: usize| {
            let own = self.columns[column].chars().count();
            cells
                .iter()
                .map(|row| row[column].chars().count())
                .fold(own, usize::max)
        };
        let widths: Vec<usize> = (0..self.columns.len()).map(width).collect();
        let is_text: Vec<bool> = (0..self.columns.len())
            .map(|column| {
                self.rows
                    .iter()
                    .any(|row| matches!(row[column], Cell::Text(_)))
            })
            .collect();
        let line = |row: &[String]| -> String {
            let fields: Vec<String> = row
                .iter()
                .enumerate()
                .map(|(column, field)| {
                    let width = widths[column];
                    if is_text[column] {
                        format!("{field:<width$}")
                    } else {
                        format!("{field:>width$}")
                    }
                })
                .collect();
            format!("{}\n", fields.join("  ").trim_end())
        };
        let header: Vec<String> = self.columns.iter().map(|&name| name.to_owned()).collect();
        std::iter::once(line(&header))
            .chain(cells.iter().map(|row| line(row)))
            .collect()
    }

    /// About `wanted` of the rows, evenly spread, the first and the last among them.
    pub(super) fn thinned(&self, wanted: usize) -> Self {
        if self.rows.len() <= wanted || wanted < 2 {
            return self.clone();
        }
        let last = self.rows.len() - 1;
        Self {
            columns: self.columns.clone(),
            rows: (0..wanted)
                .map(|index| self.rows[index * last / (wanted - 1)].clone())
                .collect(),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn table() -> Table {
        let mut table = Table::new(&["word", "length", "index"]);
        table.push(vec!["1,2".into(), 0.1.into(), 3_usize.into()]);
        table.push(vec![Cell::Empty, f64::NAN.into(), 10_usize.into()]);
        table
    }

    #[test]
    fn csv_quotes_commas_and_leaves_out_what_is_no_number() {
        assert_eq!(table().csv(), "word,length,index\n\"1,2\",0.1,3\n,,10\n");
    }

    #[test]
    fn json_has_no_nan() {
        let text = table().json().to_string();
        assert!(
            text.contains("\"length\":null") && !text.contains("NaN"),
            "{text}"
        );
    }

    #[test]
    fn csv_numbers_come_back_exactly() {
        for value in [0.1 + 0.2, 1e-300, 1e22, 123_456_789.123_456_78] {
            let back: f64 = Cell::Number(value).exact().parse().expect("a number");
            assert_eq!(back, value);
        }
    }

    #[test]
    fn thinning_keeps_both_ends() {
        let mut table = Table::new(&["n"]);
        for n in 0..100_usize {
            table.push(vec![n.into()]);
        }
        let thin = table.thinned(7);
        assert_eq!(thin.rows.len(), 7);
        assert_eq!(thin.rows[0], [Cell::Count(0)]);
        assert_eq!(thin.rows[6], [Cell::Count(99)]);
    }

    #[test]
    fn words_stand_left_and_numbers_right() {
        assert_eq!(
            table().aligned(),
            "word  length  index\n1,2      0.1      3\n           -     10\n"
        );
    }
}
