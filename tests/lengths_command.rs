//! The command `lengths`: its columns and files, what it says of lists with something wrong, and that units do not matter.

use serde_json::Value;
use std::fs;
use std::path::Path;
use std::process::Command;

const QUARTER: &str = "billiards/quarter-stadium.toml";
const LIST: &str = "data/quarter-stadium.csv";

fn call(arguments: &[&str]) -> (String, String) {
    let output = Command::new(env!("CARGO_BIN_EXE_orbitsum"))
        .arg("lengths")
        .args(arguments)
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .output()
        .expect("the program starts");
    let text = |bytes: Vec<u8>| String::from_utf8(bytes).expect("output is text");
    let (printed, remarks) = (text(output.stdout), text(output.stderr));
    assert_eq!(output.status.code(), Some(0), "{arguments:?}\n{remarks}");
    (printed, remarks)
}

fn json(arguments: &[&str]) -> Value {
    let arguments: Vec<&str> = arguments
        .iter()
        .copied()
        .chain(["--format", "json", "--quiet"])
        .collect();
    serde_json::from_str(&call(&arguments).0).expect("json")
}

/// The entry of a list of peaks or differences at a length.
fn at(entries: &Value, length: f64, within: f64) -> Option<Value> {
    let entries = entries.as_array().expect("a list");
    entries
        .iter()
        .find(|entry| (entry["length"].as_f64().expect("a number") - length).abs() < within)
        .cloned()
}

fn number(value: &Value) -> f64 {
    value.as_f64().expect("a number")
}

#[test]
fn csv_files_have_the_documented_columns() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let out = folder.path().to_str().expect("a path of text");
    let (printed, _) = call(&[
        QUARTER,
        "--levels",
        LIST,
        "--max-length",
        "6",
        "--out",
        out,
        "--format",
        "csv",
        "--quiet",
    ]);
    assert!(printed.starts_with("length,levels,orbits\n"));
    for (name, header) in [
        ("lengths.csv", "length,levels,orbits"),
        ("lengths-peaks.csv", "length,amplitude,orbit"),
        (
            "lengths-unmatched.csv",
            "length,levels,orbits,difference,side,orbit,cause",
        ),
    ] {
        let text = fs::read_to_string(folder.path().join(name)).expect(name);
        assert_eq!(text.lines().next(), Some(header), "{name}");
    }
    let peaks = fs::read_to_string(folder.path().join("lengths-peaks.csv")).expect("peaks");
    assert!(peaks.contains(",\"strip 1-3, length 2\"\n"), "{peaks}");
    let written = fs::read_to_string(folder.path().join("lengths.json")).expect("json");
    let value: Value = serde_json::from_str(&written).expect("json");
    assert_eq!(value["command"], "lengths");
    assert_eq!(value["levels"]["count"], 276);
    assert_eq!(value["noise"]["measured"], true);
    assert!(number(&value["resolution"]) > 0.3);
    let strip = at(&value["peaks"], 2.0, 0.02).expect("the strip");
    assert_eq!(strip["agreement"], "full");
}

/// With three bounces at most a search leaves out the diamond (4 bounces) and orbits of five near it: they are reported as in the levels
/// alone.
#[test]
fn what_a_search_left_out_is_named() {
    let found = json(&[
        QUARTER,
        "--levels",
        LIST,
        "--max-length",
        "8",
        "--max-bounces",
        "3",
    ]);
    let diamond = at(&found["unmatched"], 4.85, 0.1).expect("orbits of four and five bounces");
    assert_eq!(diamond["side"], "levels");
    assert!(number(&diamond["levels"]) > 0.2);
    assert!(diamond["orbit"].is_null());
    // The strip needs two bounces.
    let strip = at(&found["peaks"], 2.0, 0.02).expect("the strip");
    assert_eq!(strip["agreement"], "full");
}

/// The strips of the L shape whose edges diffract are named as such; an orbit from the outer to the inner corner and back, 2 sqrt(2)
/// long, is in no sum.
#[test]
fn strips_that_diffract_are_named() {
    let found = json(&[
        "billiards/l-shape.toml",
        "--levels",
        "data/levels/l-shape.csv",
    ]);
    for length in [3.99, 8.4, 8.9] {
        let misfit = at(&found["unmatched"], length, 0.1).expect("a difference");
        let cause = misfit["cause"].as_str().expect("a cause");
        assert!(
            cause.contains("diffraction at the edges of strips"),
            "{cause}"
        );
        assert!(
            misfit["orbit"]
                .as_str()
                .expect("an orbit")
                .starts_with("strip")
        );
    }
    let corners = at(&found["unmatched"], 8_f64.sqrt(), 0.03).expect("a diffracted orbit");
    assert_eq!(corners["side"], "levels");
    assert_eq!(corners["cause"], "orbits that diffract at corners");
}

/// Beyond the longest orbit less a peak's half width at its foot nothing is said to be missing.
#[test]
fn beyond_the_longest_orbit_nothing_is_unmatched() {
    let found = json(&[QUARTER, "--levels", LIST, "--max-length", "5.2"]);
    let end = number(&found["compared_to"]);
    assert!((4.7..4.8).contains(&end), "{end}");
    for misfit in found["unmatched"].as_array().expect("a list") {
        assert!(number(&misfit["length"]) <= end);
    }
    let beyond = at(&found["peaks"], 4.84, 0.05).expect("a peak");
    assert!(beyond["agreement"].is_null());
}

/// A list in GHz of a cavity in millimetres has the lengths of the one in k, times its size, with the same amplitudes.
#[test]
fn units_change_lengths_only() {
    // R = a = 150 mm; f = c k/(2 pi).
    let folder = tempfile::tempdir().expect("a temporary folder");
    let path = folder.path().join("levels.csv");
    let list =
        fs::read_to_string(Path::new(env!("CARGO_MANIFEST_DIR")).join(LIST)).expect("the list");
    let mut text = "frequency\n".to_owned();
    for line in list
        .lines()
        .filter(|line| line.starts_with(|first: char| first.is_ascii_digit()))
    {
        let k: f64 = line
            .split(',')
            .nth(1)
            .expect("k")
            .parse()
            .expect("a number");
        text += &format!(
            "{:?}\n",
            k / 150.0 * 299.792_458 / (2.0 * std::f64::consts::PI)
        );
    }
    fs::write(&path, text).expect("written");
    let levels = path.to_str().expect("a path of text");
    let ghz = 299.792_458 / (2.0 * std::f64::consts::PI * 150.0);
    let window = format!("{:?}:{:?}", 8.0 * ghz, 45.0 * ghz);
    let cavity = json(&[
        "tests/cli/cavity.toml",
        "--levels",
        levels,
        "--frequency",
        &window,
        "--max-length",
        "1200",
    ]);
    let plain = json(&[
        QUARTER,
        "--levels",
        LIST,
        "--k",
        "8:45",
        "--max-length",
        "8",
    ]);
    let (a, b) = (
        plain["rows"].as_array().expect("rows"),
        cavity["rows"].as_array().expect("rows"),
    );
    assert_eq!(a.len(), b.len());
    for (a, b) in a.iter().zip(b) {
        assert!((150.0 * number(&a["length"]) - number(&b["length"])).abs() < 1e-6);
        for side in ["levels", "orbits"] {
            assert!((number(&a[side]) - number(&b[side])).abs() < 1e-6);
        }
    }
}

/// A list without its lowest 60 levels is as good from there on; one that lacks every tenth is warned of.
#[test]
fn lists_that_begin_late_or_lack_levels_are_taken() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let list =
        fs::read_to_string(Path::new(env!("CARGO_MANIFEST_DIR")).join(LIST)).expect("the list");
    let levels: Vec<&str> = list
        .lines()
        .filter(|line| line.starts_with(|first: char| first.is_ascii_digit()))
        .map(|line| line.split(',').nth(1).expect("k"))
        .collect();
    let write = |name: &str, levels: &[&str]| {
        let path = folder.path().join(name);
        fs::write(&path, format!("k\n{}\n", levels.join("\n"))).expect("written");
        path.to_str().expect("a path of text").to_owned()
    };
    let late = json(&[QUARTER, "--levels", &write("late.csv", &levels[60..])]);
    let first: f64 = levels[60].parse().expect("a number");
    assert!((number(&late["window"]["from"]) - first).abs() < 1e-12);
    assert_eq!(
        at(&late["peaks"], 2.0, 0.02).expect("the strip")["agreement"],
        "full"
    );
    assert!(!late["notes"].to_string().contains("the level list begins"));
    let thinned: Vec<&str> = levels
        .iter()
        .enumerate()
        .filter(|(index, _)| (index * 7) % 10 != 3 || index % 3 == 0)
        .map(|(_, k)| *k)
        .collect();
    let lacking = json(&[QUARTER, "--levels", &write("lacking.csv", &thinned)]);
    assert!(
        lacking["notes"]
            .to_string()
            .contains("levels are missing or false"),
        "{}",
        lacking["notes"]
    );
}

/// A list of another shape with as many levels: the orbits explain nothing of it, and the answer says so.
#[test]
fn a_list_of_another_shape_is_not_explained() {
    // Areas 1.785 and 1.720, perimeters 5.571 and 5: the counts differ by a few per cent.
    let (printed, _) = call(&[QUARTER, "--levels", "data/levels/pentagon.csv"]);
    assert!(
        printed.contains("warning: the orbits explain nothing of what the levels show"),
        "{printed}"
    );
}
