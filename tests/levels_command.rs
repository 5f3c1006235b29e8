//! The command `levels`: what it prints and writes, interruptions, and what `density` makes of its lists.

#[path = "common/folder.rs"]
mod folder;

use folder::names;
use serde_json::Value;
use std::fs;
use std::path::Path;
use std::process::{Command, Output, Stdio};

const QUARTER: &str = "billiards/quarter-stadium.toml";
const STADIUM: &str = "billiards/stadium.toml";
const DISK: &str = "billiards/disk.toml";
/// Two windows of the quarter stadium, at an accuracy that is quick.
const TWO_WINDOWS: [&str; 6] = ["levels", QUARTER, "--k", "0:32", "--accuracy", "1e-7"];
const FILES: [&str; 3] = ["levels.csv", "levels.json", "levels.svg"];
const JOURNAL: &str = "levels.partial";

fn program(arguments: &[&str]) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_orbitsum"));
    command.args(arguments);
    command
}

fn call(arguments: &[&str], more: &[&str]) -> Output {
    let words: Vec<&str> = arguments.iter().chain(more).copied().collect();
    program(&words).output().expect("the program starts")
}

fn text(bytes: &[u8]) -> String {
    String::from_utf8(bytes.to_vec()).expect("output is text")
}

/// Standard output of a call that succeeds.
fn answer(arguments: &[&str], more: &[&str]) -> String {
    let output = call(arguments, more);
    assert!(
        output.status.success(),
        "{arguments:?} {more:?}: {}",
        text(&output.stderr)
    );
    text(&output.stdout)
}

fn rows(csv: &str) -> Vec<Vec<f64>> {
    csv.lines()
        .skip(1)
        .map(|line| {
            line.split(',')
                .map(|field| field.parse().expect("a number"))
                .collect()
        })
        .collect()
}

fn path(folder: &Path) -> &str {
    folder.to_str().expect("a path of text")
}

/// The files of results in a folder.
fn results(folder: &Path) -> Vec<Vec<u8>> {
    assert!(!folder.join(JOURNAL).exists(), "the journal is removed");
    FILES
        .iter()
        .map(|name| fs::read(folder.join(name)).expect("a file of results"))
        .collect()
}

#[test]
fn columns_are_those_of_the_unit() {
    let header = |arguments: &[&str]| -> String {
        let csv = answer(arguments, &["--format", "csv", "--quiet"]);
        csv.lines().next().expect("a first line").to_owned()
    };
    assert_eq!(
        header(&["levels", QUARTER, "--k", "0:5"]),
        "n,k,energy,error,multiplicity"
    );
    assert_eq!(
        header(&["levels", "tests/cli/cavity.toml", "--frequency", "0:2"]),
        "n,frequency,error,multiplicity"
    );
    assert_eq!(
        header(&["levels", "tests/cli/dot.toml", "--energy", "0:1"]),
        "n,energy,error,multiplicity"
    );
}

/// Zeros of Bessel functions: M. Abramowitz & I. A. Stegun, Handbook of Mathematical Functions (1964), table 9.5.
#[test]
fn double_levels_are_one_row() {
    let csv = answer(
        &["levels", DISK, "--k", "0:5.6"],
        &["--format", "csv", "--quiet"],
    );
    let expected = [
        (1.0, 2.404_825_557_7, 1.0),
        (2.0, 3.831_705_970_2, 2.0),
        (4.0, 5.135_622_301_8, 2.0),
        (6.0, 5.520_078_110_3, 1.0),
    ];
    let rows = rows(&csv);
    assert_eq!(rows.len(), expected.len());
    for (row, (number, k, multiplicity)) in rows.iter().zip(expected) {
        assert_eq!((row[0], row[4]), (number, multiplicity));
        // Half of the last digit of the table.
        assert!((row[1] - k).abs() < 0.6e-10, "{row:?}");
        assert!((row[2] - k * k).abs() < 1e-8 && row[3] < 1e-10, "{row:?}");
    }
}

#[test]
fn a_later_window_goes_on_with_the_numbers() {
    let csv = |window: &str| {
        answer(
            &["levels", STADIUM, "--k", window, "--accuracy", "1e-7"],
            &["--format", "csv", "--quiet"],
        )
    };
    let (whole, upper) = (rows(&csv("0:9")), rows(&csv("6:9")));
    let skipped = whole.len() - upper.len();
    for (row, same) in upper.iter().zip(&whole[skipped..]) {
        assert_eq!((row[0], row[4]), (same[0], same[4]));
        // Both were asked for to 1e-7.
        assert!((row[1] / same[1] - 1.0).abs() < 1e-7, "{row:?} {same:?}");
    }
    let classes: usize = ["A1", "A2", "B1", "B2"]
        .iter()
        .map(|class| {
            let csv = answer(
                &["levels", STADIUM, "--k", "0:9", "--accuracy", "1e-7"],
                &["--class", class, "--format", "csv", "--quiet"],
            );
            rows(&csv).len()
        })
        .sum();
    assert_eq!(classes, whole.len());
}

#[test]
fn threads_do_not_change_a_digit() {
    for call in [
        TWO_WINDOWS.to_vec(),
        vec!["levels", STADIUM, "--k", "0:12"],
        vec!["levels", "billiards/l-shape.toml", "--k", "0:20"],
    ] {
        let with = |threads| {
            answer(
                &call,
                &["--format", "json", "--quiet", "--threads", threads],
            )
        };
        assert_eq!(with("1"), with("2"), "{call:?}");
    }
}

#[test]
fn json_says_how_complete_the_list_is() {
    let json = answer(&TWO_WINDOWS, &["--format", "json", "--quiet"]);
    let value: Value = serde_json::from_str(&json).expect("json");
    assert_eq!(value["command"], "levels");
    let completeness = &value["completeness"];
    assert_eq!(completeness["complete"], true);
    assert_eq!(completeness["first"], 1);
    assert_eq!(completeness["found"], completeness["counted"]);
    assert!(completeness["windows"].as_u64() > Some(1));
    let (mean, expected) = (
        value["less_smooth_count"]["mean"]
            .as_f64()
            .expect("a number"),
        value["less_smooth_count"]["expected_rms"]
            .as_f64()
            .expect("a number"),
    );
    assert!(
        mean.abs() < 4.0 * expected && expected < 0.5,
        "{mean} {expected}"
    );
}

/// A journal with all windows: what is left when the results cannot be written.
fn whole_journal(folder: &Path) -> Vec<u8> {
    let blocked = folder.join("levels.csv");
    fs::create_dir(&blocked).expect("created");
    fs::write(blocked.join("in-the-way"), "").expect("written");
    let output = call(&TWO_WINDOWS, &["--out", path(folder)]);
    assert_eq!(output.status.code(), Some(1), "{}", text(&output.stderr));
    fs::remove_dir_all(&blocked).expect("removed");
    fs::read(folder.join(JOURNAL)).expect("a journal")
}

#[test]
fn an_interrupted_computation_ends_with_the_same_files() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let folder = folder.path();
    let journal = whole_journal(folder);
    answer(&TWO_WINDOWS, &["--out", path(folder)]);
    let expected = results(folder);
    let lines: Vec<usize> = (0..journal.len())
        .filter(|&index| journal[index] == b'\n')
        .collect();
    let windows = lines.len() - 1;
    assert!(
        windows > 1,
        "one window cannot be interrupted after the first"
    );
    let done = format!("1 of {windows} windows are done");
    // Within the first line, at its end, within the first window, at its end, within the second window.
    for length in [10, lines[0] + 1, lines[0] + 300, lines[1] + 1, lines[2] - 5] {
        for name in FILES {
            fs::remove_file(folder.join(name)).expect("removed");
        }
        fs::write(folder.join(JOURNAL), &journal[..length]).expect("written");
        let output = call(&TWO_WINDOWS, &["--out", path(folder)]);
        assert!(output.status.success());
        let taken_up = text(&output.stderr).contains(&done);
        assert_eq!(taken_up, length > lines[1], "{}", text(&output.stderr));
        assert!(results(folder) == expected, "cut at {length}");
    }
}

#[test]
fn a_journal_of_another_computation_is_replaced() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let folder = folder.path();
    whole_journal(folder);
    let other = ["levels", QUARTER, "--k", "0:8", "--accuracy", "1e-7"];
    let output = call(&other, &["--out", path(folder)]);
    assert!(output.status.success());
    assert!(
        text(&output.stderr).contains("is of another window: it is replaced"),
        "{}",
        text(&output.stderr)
    );
    let fresh = tempfile::tempdir().expect("a temporary folder");
    answer(&other, &["--out", path(fresh.path())]);
    assert!(results(folder) == results(fresh.path()));
}

/// Killed whenever it happens to be: what is left behind is gone on with.
#[test]
fn a_killed_computation_ends_with_the_same_files() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let folder = folder.path();
    let mut child = program(&TWO_WINDOWS)
        .args(["--out", path(folder), "--threads", "1"])
        .stdout(Stdio::null())
        .stderr(Stdio::null())
        .spawn()
        .expect("the program starts");
    let begun = || fs::read(folder.join(JOURNAL)).is_ok_and(|bytes| !bytes.is_empty());
    while !begun() && child.try_wait().expect("its state").is_none() {
        std::thread::yield_now();
    }
    // It may be over already: then there is nothing to kill.
    let _ = child.kill();
    child.wait().expect("it ends");
    answer(&TWO_WINDOWS, &["--out", path(folder)]);
    let fresh = tempfile::tempdir().expect("a temporary folder");
    answer(&TWO_WINDOWS, &["--out", path(fresh.path())]);
    assert!(results(folder) == results(fresh.path()));
}

#[test]
fn density_takes_computed_levels_either_way() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    answer(
        &["levels", DISK, "--k", "0:20", "--accuracy", "1e-8"],
        &["--out", path(folder.path())],
    );
    let list = folder.path().join("levels.csv");
    let density = ["density", DISK, "--k", "6:14", "--smoothing", "4"];
    let quiet = ["--format", "csv", "--quiet"];
    let compared = rows(&answer(
        &density,
        &[&["--levels", path(&list)][..], &quiet].concat(),
    ));
    let direct = rows(&answer(&density, &[&["--direct"][..], &quiet].concat()));
    assert_eq!(compared.len(), direct.len());
    for (a, b) in compared.iter().zip(&direct) {
        for (x, y) in a.iter().zip(b) {
            assert!((x - y).abs() < 1e-6 * x.abs().max(1.0), "{a:?} {b:?}");
        }
        // The last column is the residual.
        assert!(b.last().expect("a column").abs() < 0.1, "{b:?}");
    }
    let summary = answer(&density, &["--direct"]);
    assert!(
        summary.contains("as many as are counted by inertia"),
        "{summary}"
    );
}

#[test]
fn waves_are_written_with_their_numbers() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let out = path(folder.path());
    let disk = ["levels", DISK, "--k", "0:6", "--accuracy", "1e-8"];
    answer(&disk, &["--vectors", out, "--only", "2-3,6"]);
    let expected: Vec<String> = ["000002", "000003", "000006"]
        .iter()
        .flat_map(|n| ["-walls.csv", ".csv", ".svg"].map(|ending| format!("wave-{n}{ending}")))
        .collect();
    assert_eq!(names(folder.path()), expected);
    // The sixth wave is J0(k r), up to its sign and norm: largest at the centre, and with no angle in it.
    let grid = fs::read_to_string(folder.path().join("wave-000006.csv")).expect("text");
    assert!(grid.starts_with("x,y,u\n"));
    let rows = rows(&grid);
    let largest = rows.iter().max_by(|a, b| a[2].abs().total_cmp(&b[2].abs()));
    let largest = largest.expect("rows");
    assert!(largest[0].hypot(largest[1]) < 0.02, "{largest:?}");
    let walls = fs::read_to_string(folder.path().join("wave-000006-walls.csv")).expect("text");
    assert!(walls.starts_with("wall,t,x,y,u,normal_derivative\n"));
    for (arguments, message) in [
        (
            ["--only", "99"],
            "level 99 is not in the window, which holds the levels 1 to 6",
        ),
        (["--only", "3-1"], "`3-1` is no number of a level"),
        (["--only", "1-500"], "more than 200 levels are asked for"),
        (
            ["--k", "0:60"],
            "more than the 200 that files are written for",
        ),
    ] {
        let base: &[&str] = if arguments[0] == "--k" {
            &["levels", DISK]
        } else {
            &disk
        };
        let output = call(base, &[&arguments[..], &["--vectors", out]].concat());
        assert_eq!(output.status.code(), Some(2), "{arguments:?}");
        assert!(
            text(&output.stderr).contains(message),
            "{}",
            text(&output.stderr)
        );
    }
}
