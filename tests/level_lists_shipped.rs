//! The shipped level lists (data/levels/, data/quarter-stadium.csv): complete from the lowest level to beyond the 300th, with
//! multiplicities and errors.
//!
//! Exact levels, where there are some, are those of the tables in data/reference/ (source in their first lines) and of closed
//! forms (Lame 1852 for the triangle). The mean of the staircase about the smooth count finds a level that is missing anywhere in a
//! list: one in its middle moves the mean by half a level.

#[path = "common/direct.rs"]
mod direct;

use direct::{
    Case, Expected, Found, LIST_END, annuli, copies, disks, ellipse, equilaterals, half_disks,
    judge, rectangles, right_isosceles, shape,
};
use orbitsum::baseline::weyl;
use orbitsum::billiard::detect;
use orbitsum::levels::{ListNote, mean_staircase, read};
use std::fs;
use std::path::{Path, PathBuf};

/// Every list of data/levels/ holds this many levels or more.
const LEAST_LEVELS: usize = 300;
/// Largest stated error, relative.
const LARGEST_ERROR: f64 = 1e-9;
/// Largest mean of the staircase about the smooth count, in levels: a fifth of what a level missing in the middle makes.
/// Measured: 0.086 for the annulus, which fluctuates most, below 0.025 for all others.
const LARGEST_MEAN: f64 = 0.1;

/// One list.
struct Shipped {
    path: PathBuf,
    /// Name of the shape in billiards/.
    shape: String,
    class: Option<String>,
    /// End of its window in k, from the command in its first line.
    end: f64,
    rows: Vec<Found>,
}

impl Shipped {
    /// Reads a list with the call in its first line; numbers of rows must be those of the first copies.
    fn read(path: PathBuf) -> Self {
        let text = fs::read_to_string(&path).expect("a list");
        let call = text.lines().next().expect("a first line");
        let after = |word: &str| {
            let mut words = call.split_whitespace().skip_while(|&it| it != word);
            words.nth(1).map(str::to_owned)
        };
        let file = after("levels").expect("a system file");
        let window = after("--k").expect("a window");
        let end = window.strip_prefix("0:").expect("from the lowest level");
        let mut reader = csv::ReaderBuilder::new()
            .comment(Some(b'#'))
            .from_reader(text.as_bytes());
        let mut first = 1;
        let mut rows = Vec::new();
        for record in reader.records() {
            let record = record.expect("a row");
            let whole = |index: usize| record[index].parse::<usize>().expect("a whole number");
            let real = |index: usize| record[index].parse::<f64>().expect("a number");
            assert_eq!(whole(0), first, "{}", path.display());
            rows.push(Found {
                k: real(1),
                error: real(3),
                multiplicity: whole(4),
            });
            first += whole(4);
        }
        Self {
            shape: Path::new(&file)
                .file_stem()
                .and_then(|stem| stem.to_str())
                .expect("a name")
                .to_owned(),
            class: after("--class"),
            end: end.parse().expect("a number"),
            path,
            rows,
        }
    }

    fn name(&self) -> String {
        self.path.display().to_string()
    }

    /// Mean of the staircase about the smooth count from the lowest level to the end, in levels.
    fn mean(&self) -> f64 {
        let domain = shape(&self.shape, &[]);
        let symmetry = detect(&domain);
        let class = self
            .class
            .as_ref()
            .map(|name| symmetry.class(name).expect("a class"));
        let from = self.rows[0].k;
        mean_staircase(&copies(&self.rows), from, self.end)
            - weyl(&domain, &symmetry, class).mean_count(from, self.end)
    }
}

/// The lists of data/levels/, but for the one that is wrong on purpose.
fn shipped() -> Vec<Shipped> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("data/levels");
    let mut paths: Vec<PathBuf> = fs::read_dir(folder)
        .expect("a folder")
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|end| end == "csv"))
        .filter(|path| {
            let name = path.file_name().and_then(|name| name.to_str());
            name.is_some_and(|name| !name.starts_with("second-order-"))
        })
        .collect();
    paths.sort();
    paths.into_iter().map(Shipped::read).collect()
}

/// The list of one shape.
fn list(name: &str) -> Shipped {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(format!("data/levels/{name}.csv"));
    Shipped::read(path)
}

#[test]
fn every_shape_has_a_list() {
    let lists = shipped();
    for entry in fs::read_dir("billiards").expect("a folder") {
        let path = entry.expect("an entry").path();
        let name = path.file_stem().and_then(|name| name.to_str());
        assert!(
            lists
                .iter()
                .any(|list| Some(list.shape.as_str()) == name && list.class.is_none()),
            "{name:?}"
        );
    }
}

#[test]
fn lists_are_long_ascending_and_precise() {
    for list in shipped() {
        let name = list.name();
        let levels = copies(&list.rows);
        assert!(levels.len() >= LEAST_LEVELS, "{name}: {}", levels.len());
        assert!(
            list.rows.windows(2).all(|pair| pair[0].k < pair[1].k),
            "{name}"
        );
        assert!(levels.iter().all(|&k| k > 0.0 && k < list.end), "{name}");
        for row in &list.rows {
            assert!(
                row.error > 0.0 && row.error < LARGEST_ERROR * row.k,
                "{name}: {row:?}"
            );
        }
    }
}

/// As `density --levels` takes them: multiplicities count, and there is nothing to remark but that.
#[test]
fn lists_are_read_without_remarks() {
    for list in shipped() {
        let name = list.name();
        let read = read(&list.path).expect("a list");
        assert_eq!(read.values, copies(&list.rows), "{name}");
        let expected = |note: &ListNote| matches!(note, ListNote::Repeated { .. });
        assert!(read.notes.iter().all(expected), "{name}: {:?}", read.notes);
    }
}

#[test]
fn staircases_follow_the_smooth_count() {
    for list in shipped() {
        let mean = list.mean();
        assert!(mean.abs() < LARGEST_MEAN, "{}: {mean} level", list.name());
    }
}

#[test]
fn lists_of_solvable_shapes_are_the_exact_ones() {
    let cases: [(&str, Case); 7] = [
        ("disk", disks().swap_remove(0)),
        ("annulus", annuli().swap_remove(0)),
        ("half-disk", half_disks().swap_remove(0)),
        ("ellipse", ellipse()),
        ("rectangle", rectangles().swap_remove(0)),
        ("right-isosceles", right_isosceles().swap_remove(0)),
        ("equilateral", equilaterals().swap_remove(0)),
    ];
    for (name, case) in cases {
        let mut list = list(name);
        let end = list.end.min(LIST_END);
        list.rows.retain(|row| row.k < end);
        let expected = Expected {
            levels: case.between(0.0, end),
            degenerate: case.degenerate,
            claim: LARGEST_ERROR,
        };
        if let Err(reason) = judge(&list.rows, &expected) {
            panic!("{name}: {reason}");
        }
    }
}

/// The list of the README is the beginning of the longer one, which another window of the same solver gave, within the sum of their
/// errors.
#[test]
fn both_lists_of_the_quarter_stadium_agree() {
    let long = list("quarter-stadium");
    let short =
        Shipped::read(Path::new(env!("CARGO_MANIFEST_DIR")).join("data/quarter-stadium.csv"));
    assert_eq!(
        short.rows.len(),
        long.rows.iter().filter(|row| row.k < short.end).count()
    );
    for (a, b) in short.rows.iter().zip(&long.rows) {
        assert!((a.k - b.k).abs() <= a.error + b.error, "{a:?} {b:?}");
    }
}
