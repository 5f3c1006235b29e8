//! Tables of exact levels in data/reference/.
#![allow(dead_code)]

use std::path::Path;

/// One row of a committed table.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Row {
    /// Angular order (zero where the table has none).
    pub(crate) order: f64,
    pub(crate) multiplicity: usize,
    pub(crate) k: f64,
    /// Error of k (zero where the table has none).
    pub(crate) error: f64,
}

/// Column names and rows of a committed table.
fn read(name: &str) -> (csv::StringRecord, Vec<csv::StringRecord>) {
    let path = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("data/reference")
        .join(name);
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_path(path)
        .expect("table exists");
    let headers = reader.headers().expect("table has a header").clone();
    let rows = reader.records().map(|row| row.expect("row is csv"));
    (headers, rows.collect())
}

fn column(headers: &csv::StringRecord, wanted: &str) -> Option<usize> {
    headers.iter().position(|name| name == wanted)
}

/// Rows of a committed table, columns named in its second line.
pub(crate) fn table(name: &str) -> Vec<Row> {
    let (headers, rows) = read(name);
    let k = column(&headers, "k").expect("column k");
    let multiplicity = column(&headers, "multiplicity");
    let [order, error] = ["order", "error"].map(|name| column(&headers, name));
    let number = |row: &csv::StringRecord, i: usize| row[i].parse().expect("a number");
    rows.iter()
        .map(|row| Row {
            order: order.map_or(0.0, |i| number(row, i)),
            multiplicity: multiplicity.map_or(1, |i| row[i].parse().expect("a number")),
            k: number(row, k),
            error: error.map_or(0.0, |i| number(row, i)),
        })
        .collect()
}

/// Levels of a committed table, each as often as its multiplicity says.
pub(crate) fn levels(name: &str) -> Vec<f64> {
    table(name)
        .iter()
        .flat_map(|row| std::iter::repeat_n(row.k, row.multiplicity))
        .collect()
}

/// Levels of a committed table with the given parities under x -> -x and y -> -y, such as `even odd`.
pub(crate) fn levels_of_class(name: &str, class: &str) -> Vec<f64> {
    let (headers, rows) = read(name);
    let of_class = column(&headers, "class").expect("column class");
    table(name)
        .iter()
        .zip(&rows)
        .filter(|(_, text)| &text[of_class] == class)
        .map(|(row, _)| row.k)
        .collect()
}

/// Levels of a part of a disk or annulus: those with the angular orders that are kept, once each.
pub(crate) fn levels_of_orders(name: &str, keep: impl Fn(u32) -> bool) -> Vec<f64> {
    table(name)
        .iter()
        .filter(|row| keep(row.order as u32))
        .map(|row| row.k)
        .collect()
}
