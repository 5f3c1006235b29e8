//! Calls of the program: wrong ones, each with its message, and what good ones print and write.

#[path = "common/folder.rs"]
mod folder;

use folder::names;
use serde_json::Value;
use std::fs;
use std::io::Write;
use std::process::{Command, Output, Stdio};

/// Least number of wrong calls that are kept here.
const LEAST: usize = 90;

const QUARTER: &str = "billiards/quarter-stadium.toml";
const STADIUM: &str = "billiards/stadium.toml";
const ELLIPSE: &str = "billiards/ellipse.toml";
const DISK: &str = "billiards/disk.toml";
const LIST: &str = "data/quarter-stadium.csv";
const CAVITY: &str = "tests/cli/cavity.toml";
const DOT: &str = "tests/cli/dot.toml";

fn program(arguments: &[&str]) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_orbitsum"));
    command.args(arguments).env_remove("RUST_BACKTRACE");
    command
}

fn call(arguments: &[&str]) -> Output {
    program(arguments).output().expect("the program starts")
}

fn text(bytes: &[u8]) -> String {
    String::from_utf8(bytes.to_vec()).expect("output is text")
}

/// Standard output of a call that must succeed without a word on standard error.
fn answer(arguments: &[&str]) -> String {
    let output = call(arguments);
    let errors = text(&output.stderr);
    assert!(
        output.status.success() && errors.is_empty(),
        "{arguments:?}: {:?}\n{errors}",
        output.status
    );
    text(&output.stdout)
}

/// Wrong calls: arguments, and a part of the message.
const WRONG: &[(&[&str], &str)] = &[
    // The call itself.
    (&[], "Usage"),
    (&["ebk", QUARTER], "unrecognized subcommand 'ebk'"),
    (&["show"], "required arguments were not provided"),
    (&["show", QUARTER, QUARTER], "unexpected argument"),
    (
        &["show", QUARTER, "--colour"],
        "unexpected argument '--colour'",
    ),
    (
        &["show", QUARTER, "--k", "1:2"],
        "unexpected argument '--k'",
    ),
    (&["show", QUARTER, "--format", "xml"], "invalid value 'xml'"),
    (
        &["show", QUARTER, "--threads", "0"],
        "--threads: `0` is not a whole number from 1",
    ),
    (
        &["show", QUARTER, "--threads", "-2"],
        "--threads: `-2` is not a whole number",
    ),
    (
        &["show", QUARTER, "--threads", "two"],
        "--threads: `two` is not a whole number",
    ),
    (&["show", QUARTER, "--threads", "100000"], "from 1 to 1024"),
    // The system file.
    (&["show", "billiards/nowhere.toml"], "nowhere.toml"),
    (&["show", "billiards"], "billiards"),
    (&["show", "tests/cli/words.csv"], "words.csv:1:2"),
    (
        &["orbits", "tests/wrong/open-outline.toml"],
        "does not close",
    ),
    (&["weyl", "tests/wrong/clockwise-outline.toml"], "clockwise"),
    (&["density", "tests/wrong/crossing-walls.toml"], "crosses"),
    // Settings.
    (
        &["show", QUARTER, "--set", "R"],
        "--set: `R` is not of the form NAME=VALUE",
    ),
    (
        &["show", QUARTER, "--set", "=2"],
        "--set: `=2` is not of the form NAME=VALUE",
    ),
    (
        &["show", QUARTER, "--set", "R="],
        "--set: `R=` is not of the form NAME=VALUE",
    ),
    (&["show", QUARTER, "--set", "radius=2"], "radius"),
    (&["show", QUARTER, "--set", "R=2*"], "R=2*"),
    (&["show", QUARTER, "--set", "R=1/0"], "R=1/0"),
    (&["show", QUARTER, "--set", "R=sqrt(-1)"], "R=sqrt(-1)"),
    (&["show", QUARTER, "--set", "R=nan"], "R=nan"),
    (&["show", QUARTER, "--set", "R=inf"], "R=inf"),
    (&["show", QUARTER, "--set", "R=1e999"], "R=1e999"),
    (&["show", QUARTER, "--set", "R=0"], "error: "),
    (&["show", QUARTER, "--set", "R=-1"], "error: "),
    // Classes.
    (&["weyl", QUARTER, "--class", "odd"], "it has no symmetry"),
    (
        &["weyl", STADIUM, "--class", "C"],
        "classes A1 (even,even), A2 (odd,odd), B1 (odd,even), B2 (even,odd)",
    ),
    (
        &["weyl", STADIUM, "--class", ""],
        "is not a class of this shape",
    ),
    (
        &["density", STADIUM, "--class", "odd"],
        "`odd` is not a class",
    ),
    (
        &["weyl", DISK, "--class", "even"],
        "symmetric under all rotations",
    ),
    (
        &["orbits", ELLIPSE, "--class", "odd,odd"],
        "leave --class out",
    ),
    (
        &["density", ELLIPSE, "--class", "odd,odd"],
        "leave --class out",
    ),
    // Places and windows.
    (&["weyl", QUARTER, "--at", "0"], "--at: 0 is not positive"),
    (&["weyl", QUARTER, "--at", "-3"], "--at: -3 is not positive"),
    (
        &["weyl", QUARTER, "--at", "ten"],
        "--at: `ten` is not a number",
    ),
    (
        &["weyl", QUARTER, "--at", "1,,2"],
        "--at: `` is not a number",
    ),
    (
        &["weyl", QUARTER, "--at", "inf"],
        "--at: `inf` is not finite",
    ),
    (
        &["density", QUARTER, "--k", "42:8"],
        "--k: the window 42:8 is reversed",
    ),
    (
        &["density", QUARTER, "--k", "8:8"],
        "--k: the window 8:8 is empty",
    ),
    (
        &["density", QUARTER, "--k", "-8:42"],
        "--k: the window begins at -8",
    ),
    (&["density", QUARTER, "--k", "0:42"], "must begin above 0"),
    (
        &["density", QUARTER, "--k", "8"],
        "--k: `8` is not of the form FROM:TO",
    ),
    (&["density", QUARTER, "--k", ":"], "--k: `` is not a number"),
    (
        &["density", QUARTER, "--k", "8:"],
        "--k: `` is not a number",
    ),
    (
        &["density", QUARTER, "--k", "8:9:10"],
        "--k: `9:10` is not a number",
    ),
    (
        &["density", QUARTER, "--k", "eight:42"],
        "--k: `eight` is not a number",
    ),
    (
        &["density", QUARTER, "--k", "nan:42"],
        "--k: `nan` is not finite",
    ),
    (
        &["density", QUARTER, "--k", "8:inf"],
        "--k: `inf` is not finite",
    ),
    (
        &["density", QUARTER, "--k", "8:1e999"],
        "--k: `1e999` is not finite",
    ),
    (
        &["density", QUARTER, "--k", "8:9", "--k", "9:10"],
        "cannot be used multiple times",
    ),
    (
        &["density", QUARTER, "--k", "0.01:0.02"],
        "the smooth count does not grow",
    ),
    (
        &["density", QUARTER, "--k", "1:1e9"],
        "choose a narrower window",
    ),
    (
        &["density", QUARTER, "--energy", "8:42"],
        "give the window with --k FROM:TO",
    ),
    (
        &["density", QUARTER, "--frequency", "8:42"],
        "give the window with --k FROM:TO",
    ),
    (
        &["density", QUARTER, "--k", "8:9", "--energy", "8:9"],
        "cannot be given together",
    ),
    (
        &["density", CAVITY, "--k", "8:42"],
        "frequency in GHz: give the window with --frequency FROM:TO",
    ),
    (
        &["density", DOT, "--frequency", "8:42"],
        "energy in meV: give the window with --energy FROM:TO",
    ),
    // Smoothing and limits.
    (
        &["density", QUARTER, "--smoothing", "0"],
        "--smoothing: 0 is not positive",
    ),
    (
        &["density", QUARTER, "--smoothing", "-2"],
        "--smoothing: -2 is not positive",
    ),
    (
        &["density", QUARTER, "--smoothing", "nan"],
        "--smoothing: `nan` is not finite",
    ),
    (
        &["density", QUARTER, "--smoothing", "much"],
        "--smoothing: `much` is not a number",
    ),
    (
        &["density", QUARTER, "--smoothing-width", "-0.1"],
        "--smoothing-width: -0.1 is not positive",
    ),
    (
        &[
            "density",
            QUARTER,
            "--smoothing",
            "2",
            "--smoothing-width",
            "1",
        ],
        "cannot be used with",
    ),
    (
        &["orbits", QUARTER, "--max-length", "0"],
        "--max-length: 0 is not positive",
    ),
    (
        &["orbits", QUARTER, "--max-length", "-1"],
        "--max-length: -1 is not positive",
    ),
    (
        &["density", QUARTER, "--max-length", "inf"],
        "--max-length: `inf` is not finite",
    ),
    (
        &["orbits", QUARTER, "--max-length", "long"],
        "--max-length: `long` is not a number",
    ),
    (
        &["orbits", QUARTER, "--max-bounces", "0"],
        "--max-bounces: `0` is not a whole number from 1",
    ),
    (
        &["orbits", QUARTER, "--max-bounces", "-4"],
        "--max-bounces: `-4` is not a whole number",
    ),
    (
        &["orbits", QUARTER, "--max-bounces", "2.5"],
        "--max-bounces: `2.5` is not a whole number",
    ),
    (
        &["orbits", QUARTER, "--max-bounces", "1000000"],
        "from 1 to 10000",
    ),
    // Level lists.
    (
        &["density", QUARTER, "--levels", "nowhere.csv"],
        "cannot read the level list nowhere.csv",
    ),
    (
        &["density", QUARTER, "--levels", "data"],
        "cannot read the level list data",
    ),
    (
        &["density", QUARTER, "--levels", "tests/cli/empty.csv"],
        "the level list is empty",
    ),
    (
        &["density", QUARTER, "--levels", "tests/cli/words.csv"],
        "words.csv, line 3: `four`",
    ),
    (
        &["density", QUARTER, "--levels", "tests/cli/not-finite.csv"],
        "not-finite.csv, line 3: `inf`",
    ),
    (
        &["density", QUARTER, "--levels", "tests/cli/negative.csv"],
        "negative.csv, line 2: -3",
    ),
    (
        &["density", QUARTER, "--levels", "tests/cli/two-columns.csv"],
        "no column of levels",
    ),
    (
        &["density", CAVITY, "--levels", "tests/cli/energies.csv"],
        "a column `energy`",
    ),
    (
        &[
            "density",
            QUARTER,
            "--direct",
            "--levels",
            "data/quarter-stadium.csv",
        ],
        "cannot be used with",
    ),
    (
        &["density", QUARTER, "--levels", "tests/cli/multiplicity.csv"],
        "multiplicity.csv, line 3: multiplicity `0` is not a whole number from 1",
    ),
    // Computed levels.
    (
        &["levels", QUARTER],
        "no window is given: ask for one with --k FROM:TO",
    ),
    (&["levels", CAVITY], "ask for one with --frequency FROM:TO"),
    (
        &["levels", CAVITY, "--k", "0:20"],
        "give the window with --frequency FROM:TO",
    ),
    (
        &["levels", QUARTER, "--k", "-1:20"],
        "the window begins at -1: it must begin at 0 or above",
    ),
    (
        &["levels", QUARTER, "--k", "20:10"],
        "the window 20:10 is reversed",
    ),
    (
        &["levels", QUARTER, "--k", "20:20"],
        "the window 20:20 is empty",
    ),
    (&["levels", QUARTER, "--k", "0:inf"], "`inf` is not finite"),
    (
        &["levels", QUARTER, "--k", "0:1e6"],
        "take a lower window, or one symmetry class",
    ),
    (
        &["levels", QUARTER, "--k", "0:9", "--accuracy", "0.1"],
        "--accuracy: 0.1 is out of range: give a number from 1e-13 to 1e-3",
    ),
    (
        &["levels", QUARTER, "--k", "0:9", "--accuracy", "-1e-9"],
        "--accuracy: -1e-9 is out of range",
    ),
    (
        &["levels", QUARTER, "--k", "0:9", "--accuracy", "high"],
        "--accuracy: `high` is not a number",
    ),
    (
        &["levels", QUARTER, "--k", "0:9", "--only", "3"],
        "required arguments were not provided",
    ),
    (
        &["levels", STADIUM, "--k", "0:9", "--class", "odd"],
        "`odd` is not a class",
    ),
    (
        &["levels", "tests/cli/cusp.toml", "--k", "0:9"],
        "cusp of angle zero at (1, 0)",
    ),
    (
        &["levels", "tests/wrong/hamiltonian.toml", "--k", "0:9"],
        "hamiltonian",
    ),
    (
        &["levels", QUARTER, "--k", "0:9", "--vectors", "Cargo.toml"],
        "--vectors: cannot write into `Cargo.toml`",
    ),
    // Length spectra.
    (
        &["lengths", QUARTER],
        "required arguments were not provided",
    ),
    (
        &["lengths", QUARTER, "--levels", "nowhere.csv"],
        "cannot read the level list nowhere.csv",
    ),
    (
        &["lengths", QUARTER, "--levels", "tests/cli/empty.csv"],
        "the level list is empty",
    ),
    (
        &["lengths", QUARTER, "--levels", "tests/cli/negative.csv"],
        "negative.csv, line 2: -3",
    ),
    (
        &["lengths", QUARTER, "--levels", "tests/cli/one-level.csv"],
        "the list holds 1 level: a length spectrum needs at least 10",
    ),
    (
        &["lengths", CAVITY, "--levels", "tests/cli/energies.csv"],
        "a column `energy`",
    ),
    (
        &["lengths", QUARTER, "--levels", LIST, "--k", "60:80"],
        "the list runs from 3.64 to 46 and has no levels in the window, which begins at 60",
    ),
    (
        &["lengths", QUARTER, "--levels", LIST, "--k", "1:5"],
        "the window (k from 1 to 5) holds 2 levels",
    ),
    (
        &[
            "lengths",
            QUARTER,
            "--levels",
            LIST,
            "--k",
            "10.00001:10.00002",
        ],
        "holds 0 levels",
    ),
    (
        &["lengths", QUARTER, "--levels", LIST, "--k", "42:8"],
        "the window 42:8 is reversed",
    ),
    (
        &["lengths", QUARTER, "--levels", LIST, "--frequency", "8:42"],
        "give the window with --k FROM:TO",
    ),
    (
        &["lengths", QUARTER, "--levels", LIST, "--k", "8:14"],
        "give a wider window or a larger --max-length",
    ),
    (
        &["lengths", QUARTER, "--levels", LIST, "--max-length", "0.5"],
        "lengths below 0.491 cannot be told from the smooth part",
    ),
    (
        &["lengths", QUARTER, "--levels", LIST, "--max-length", "-1"],
        "--max-length: -1 is not positive",
    ),
    (
        &["lengths", QUARTER, "--levels", LIST, "--max-length", "1e9"],
        "choose a narrower window or a smaller --max-length",
    ),
    (
        &["lengths", QUARTER, "--levels", LIST, "--max-bounces", "0"],
        "--max-bounces: `0` is not a whole number",
    ),
    (
        &["lengths", QUARTER, "--levels", LIST, "--smoothing", "2"],
        "unexpected argument '--smoothing'",
    ),
    (
        &["lengths", QUARTER, "--levels", LIST, "--class", "odd"],
        "it has no symmetry",
    ),
    (
        &["lengths", ELLIPSE, "--levels", LIST, "--class", "odd,odd"],
        "leave --class out",
    ),
    // Lists of another shape, class, size or unit.
    (
        &["lengths", "billiards/l-shape.toml", "--levels", LIST],
        "it belongs to another shape, size, class or unit",
    ),
    (
        &["lengths", STADIUM, "--levels", LIST],
        "where the smooth count of stadium is",
    ),
    (
        &["lengths", QUARTER, "--levels", "data/levels/disk.csv"],
        "it belongs to another shape, size, class or unit",
    ),
    (
        &["lengths", QUARTER, "--levels", LIST, "--set", "R=3"],
        "it belongs to another shape, size, class or unit",
    ),
    // Audits; wrong lists have a file of tests of their own.
    (&["audit", QUARTER], "required arguments were not provided"),
    (
        &["audit", "--levels", LIST],
        "required arguments were not provided",
    ),
    (
        &["audit", QUARTER, "--levels", "nowhere.csv"],
        "cannot read the level list nowhere.csv",
    ),
    (
        &["audit", QUARTER, "--levels", "tests/cli/one-level.csv"],
        "the list holds 1 level: an audit needs at least 10",
    ),
    (
        &["audit", QUARTER, "--levels", "data/example-cavity.csv"],
        "give a column `k`, or put [units] into the system file",
    ),
    (
        &["audit", CAVITY, "--levels", "tests/cli/energies.csv"],
        "give a column `frequency` or `k`",
    ),
    (
        &["audit", QUARTER, "--levels", LIST, "--direct"],
        "unexpected argument '--direct'",
    ),
    (
        &["audit", QUARTER, "--levels", LIST, "--k", "42:8"],
        "the window 42:8 is reversed",
    ),
    (
        &["audit", QUARTER, "--levels", LIST, "--energy", "0:42"],
        "give the window with --k FROM:TO",
    ),
    (
        &["audit", QUARTER, "--levels", LIST, "--max-length", "1e9"],
        "give a smaller --max-length or a narrower window",
    ),
    (
        &["audit", QUARTER, "--levels", LIST, "--max-length", "0.01"],
        "orbits up to 0.01 resolve nothing in this window",
    ),
    (
        &["audit", QUARTER, "--levels", LIST, "--max-bounces", "0"],
        "--max-bounces: `0` is not a whole number",
    ),
    (
        &["audit", QUARTER, "--levels", LIST, "--fit", "b"],
        "--fit: `b` is not a parameter: the system file has R, a",
    ),
    (
        &["audit", QUARTER, "--levels", LIST, "--fit", ""],
        "--fit: `` is not a parameter",
    ),
    (
        &["audit", QUARTER, "--levels", LIST, "--class", "odd"],
        "it has no symmetry",
    ),
    (
        &["audit", ELLIPSE, "--levels", LIST, "--class", "odd,odd"],
        "leave --class out",
    ),
    (&["audit", STADIUM, "--levels", LIST], "give --class A2"),
    // The output folder.
    (
        &["show", QUARTER, "--out", "Cargo.toml"],
        "--out: cannot write into `Cargo.toml`",
    ),
    (
        &["density", QUARTER, "--out", "Cargo.toml/deeper"],
        "--out: cannot write into `Cargo.toml/deeper`",
    ),
];

#[test]
fn wrong_calls_are_refused_with_one_message() {
    assert!(WRONG.len() >= LEAST, "{}", WRONG.len());
    let mut wrong = Vec::new();
    for (arguments, fragment) in WRONG {
        let output = call(arguments);
        let (printed, message) = (text(&output.stdout), text(&output.stderr));
        if output.status.code() != Some(2)
            || !message.contains(fragment)
            || !printed.is_empty()
            || message.contains("panicked")
        {
            wrong.push(format!(
                "{arguments:?}: {:?}, `{fragment}` expected in\n{message}{printed}",
                output.status.code()
            ));
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n\n"));
}

#[test]
fn a_huge_file_is_refused_unread() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let path = folder.path().join("huge.toml");
    let mut file = fs::File::create(&path).expect("created");
    for _ in 0..2048 {
        file.write_all(&[b'#'; 1024]).expect("written");
    }
    drop(file);
    let output = call(&["show", path.to_str().expect("a path of text")]);
    assert_eq!(output.status.code(), Some(2));
    assert!(
        text(&output.stderr).contains("2097152 bytes"),
        "{}",
        text(&output.stderr)
    );
}

#[test]
fn an_output_folder_that_cannot_be_written_is_refused_before_the_search() {
    // This search would take hours.
    let output = call(&[
        "orbits",
        QUARTER,
        "--max-length",
        "100",
        "--max-bounces",
        "500",
        "--out",
        "Cargo.toml",
    ]);
    assert_eq!(output.status.code(), Some(2));
}

fn header(csv: &str) -> &str {
    csv.lines().next().expect("a first line")
}

/// Rows of a csv text as maps from column to text.
fn rows(csv: &str) -> Vec<Vec<String>> {
    csv::Reader::from_reader(csv.as_bytes())
        .records()
        .map(|record| {
            let record = record.expect("as many fields as columns");
            record.iter().map(str::to_owned).collect()
        })
        .collect()
}

const QUICK: [&str; 4] = ["--k", "8:20", "--smoothing", "4"];

fn density(more: &[&str]) -> Vec<String> {
    let call = ["density", QUARTER].iter().chain(&QUICK).chain(more);
    call.map(|word| (*word).to_owned()).collect()
}

fn answer_of(words: &[String]) -> String {
    answer(&words.iter().map(String::as_str).collect::<Vec<_>>())
}

#[test]
fn csv_has_the_documented_columns() {
    assert_eq!(
        header(&answer(&[
            "orbits",
            QUARTER,
            "--max-length",
            "5",
            "--format",
            "csv",
            "--quiet"
        ])),
        "id,word,bounces,length,trace,index,partner,symmetry,kind,residual,full_length,full_bounces"
    );
    assert_eq!(
        header(&answer_of(&density(&["--format", "csv", "--quiet"]))),
        "k,density_smooth,density_orbits,density,staircase_smooth,staircase_orbits,staircase"
    );
    let levels = [
        "--format",
        "csv",
        "--quiet",
        "--levels",
        "data/quarter-stadium.csv",
    ];
    let compared = answer_of(&density(&levels));
    assert_eq!(
        header(&compared),
        "k,density_smooth,density_orbits,density,staircase_smooth,staircase_orbits,staircase,\
         density_levels,staircase_levels,residual"
    );
    for row in rows(&compared) {
        for field in row {
            let value: f64 = field.parse().expect("a number");
            assert!(value.is_finite());
        }
    }
    assert_eq!(
        header(&answer(&["weyl", QUARTER, "--format", "csv", "--quiet"])),
        "term,at,value"
    );
    let cavity = answer(&[
        "density",
        CAVITY,
        "--smoothing",
        "5",
        "--format",
        "csv",
        "--quiet",
    ]);
    assert!(header(&cavity).starts_with("frequency,density_smooth,"));
    let dot = answer(&[
        "density",
        DOT,
        "--smoothing",
        "5",
        "--format",
        "csv",
        "--quiet",
    ]);
    assert!(header(&dot).starts_with("energy,density_smooth,"));
}

/// Perimeter and area by hand: R = a = 1, so A = 1 + pi/4, L = 2 + 2 + pi/2, corners three times pi/2: 3/16 - ... each
/// (pi^2 - alpha^2)/(24 pi alpha) = 1/16, curvature (pi/2)/(12 pi) = 1/24.
#[test]
fn weyl_counts_what_a_hand_counts() {
    let csv = answer(&["weyl", QUARTER, "--at", "10", "--format", "csv", "--quiet"]);
    let value = |term: &str| -> f64 {
        rows(&csv)
            .iter()
            .find(|row| row[0] == term)
            .unwrap_or_else(|| panic!("{term} is there"))[2]
            .parse()
            .expect("a number")
    };
    let pi = std::f64::consts::PI;
    let area = (1.0 + pi / 4.0) * 100.0 / (4.0 * pi);
    let perimeter = -(4.0 + pi / 2.0) * 10.0 / (4.0 * pi);
    assert!((value("area") - area).abs() < 1e-12);
    assert!((value("perimeter_dirichlet") - perimeter).abs() < 1e-12);
    assert!(value("perimeter_neumann").abs() < 1e-15);
    assert!((value("curvature") - 1.0 / 24.0).abs() < 1e-12);
    assert!((value("corners") - 3.0 / 16.0).abs() < 1e-12);
    let count = area + perimeter + 1.0 / 24.0 + 3.0 / 16.0 + value("inverse_k");
    assert!((value("count") - count).abs() < 1e-12);
    // The shortest family alone (bouncing between the straight walls, amplitude 0.3) makes more than this.
    assert!((0.2..1.0).contains(&value("fluctuation")));
}

#[test]
fn json_says_what_its_rows_depend_on() {
    let words = density(&[
        "--format",
        "json",
        "--quiet",
        "--levels",
        "data/quarter-stadium.csv",
    ]);
    let value: Value = serde_json::from_str(&answer_of(&words)).expect("json");
    assert_eq!(value["command"], "density");
    assert_eq!(value["system"], "quarter stadium");
    assert_eq!(value["parameters"]["R"], 1.0);
    assert_eq!(value["window"]["from"], 8.0);
    assert_eq!(value["window"]["to"], 20.0);
    assert!(value["class"].is_null());
    assert!((value["smoothing"]["spacings"].as_f64().expect("a number") - 4.0).abs() < 1e-12);
    let after = value["levels"]["residual_rms"].as_f64().expect("a number");
    let before = value["levels"]["fluctuation_rms"]
        .as_f64()
        .expect("a number");
    assert!(after < 0.1 * before, "{after} {before}");
    let rows = value["rows"].as_array().expect("rows");
    assert!(rows.len() > 100);
    assert!(rows[0]["staircase_levels"].is_number());
    for command in ["show", "weyl"] {
        let text = answer(&[command, STADIUM, "--format", "json", "--quiet"]);
        let value: Value = serde_json::from_str(&text).expect("json");
        assert_eq!(value["command"], command);
        assert!(
            value["rows"]
                .as_array()
                .is_some_and(|rows| !rows.is_empty())
        );
    }
}

#[test]
fn classes_by_name_and_by_parity_are_the_same() {
    let count = |class: &str| {
        answer(&[
            "weyl", STADIUM, "--at", "30", "--class", class, "--format", "csv", "--quiet",
        ])
    };
    assert_eq!(count("A2"), count("odd,odd"));
    assert_ne!(count("A1"), count("A2"));
}

#[test]
fn threads_do_not_change_a_digit() {
    for call in [
        vec!["orbits", STADIUM, "--max-length", "6"],
        vec![
            "density",
            STADIUM,
            "--class",
            "odd,odd",
            "--k",
            "8:20",
            "--smoothing",
            "4",
        ],
        vec!["density", DISK, "--k", "8:20"],
        vec!["lengths", QUARTER, "--levels", LIST, "--max-length", "8"],
        vec!["weyl", "billiards/sinai.toml"],
        vec!["show", "billiards/sinai.toml"],
    ] {
        let with = |threads: &str| {
            let mut words = call.clone();
            words.extend(["--format", "csv", "--quiet", "--threads", threads]);
            answer(&words)
        };
        assert_eq!(with("1"), with("2"), "{call:?}");
    }
}

#[test]
fn settings_reach_the_shape() {
    let show = answer(&[
        "show", QUARTER, "--set", "R=2", "--set", "a=R/4", "--format", "csv",
    ]);
    let area = rows(&show)
        .into_iter()
        .find(|row| row[0] == "area")
        .expect("the area is there");
    let expected = 1.0 + std::f64::consts::PI;
    assert!((area[1].parse::<f64>().expect("a number") - expected).abs() < 1e-12);
}

#[test]
fn files_are_written_whole_and_nothing_else_is_left() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let deep = folder.path().join("new/folder");
    let out = deep.to_str().expect("a path of text");
    answer(&["show", STADIUM, "--out", out]);
    answer(&["weyl", STADIUM, "--out", out]);
    answer(&["orbits", STADIUM, "--max-length", "5.05", "--out", out]);
    answer_of(&density(&[
        "--out",
        out,
        "--levels",
        "data/quarter-stadium.csv",
    ]));
    answer(&[
        "lengths",
        QUARTER,
        "--levels",
        LIST,
        "--max-length",
        "8",
        "--out",
        out,
    ]);
    assert_eq!(
        names(&deep),
        [
            "density.csv",
            "density.json",
            "density.svg",
            "lengths-peaks.csv",
            "lengths-unmatched.csv",
            "lengths.csv",
            "lengths.json",
            "lengths.svg",
            "orbits.csv",
            "orbits.json",
            "orbits.svg",
            "shape.svg",
            "show.csv",
            "show.json",
            "weyl.csv",
            "weyl.json",
        ]
    );
    for name in names(&deep) {
        let content = fs::read_to_string(deep.join(&name)).expect("text");
        match name.rsplit('.').next() {
            Some("svg") => well_formed(&content),
            Some("json") => {
                serde_json::from_str::<Value>(&content).expect("json");
            }
            _ => assert!(!rows(&content).is_empty()),
        }
    }
    // Once more over the files that are there.
    answer(&["show", STADIUM, "--out", out]);
    assert_eq!(names(&deep).len(), 16);
}

/// Tags are nested and closed, and there is one root, `svg`.
fn well_formed(document: &str) {
    let mut open: Vec<&str> = Vec::new();
    let mut roots = Vec::new();
    let mut rest = document;
    while let Some(start) = rest.find('<') {
        assert!(!rest[..start].contains('>'), "a bare >");
        let end = start + rest[start..].find('>').expect("a tag ends");
        let tag = &rest[start + 1..end];
        rest = &rest[end + 1..];
        assert!(tag.matches('"').count().is_multiple_of(2), "{tag}");
        if tag.starts_with('?') {
            continue;
        }
        if let Some(name) = tag.strip_prefix('/') {
            assert_eq!(open.pop(), Some(name), "closed in order");
            continue;
        }
        let name = tag.split([' ', '/', '\n']).next().expect("a name");
        if open.is_empty() {
            roots.push(name);
        }
        if !tag.ends_with('/') {
            open.push(name);
        }
    }
    assert!(open.is_empty() && rest.trim().is_empty());
    assert_eq!(roots, ["svg"]);
}

#[test]
fn a_reader_that_goes_away_is_no_failure() {
    let words = density(&["--format", "json"]);
    let words: Vec<&str> = words.iter().map(String::as_str).collect();
    let mut child = program(&words)
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program starts");
    drop(child.stdout.take());
    let output = child.wait_with_output().expect("it ends");
    assert!(output.status.success(), "{}", text(&output.stderr));
    assert!(
        !text(&output.stderr).contains("error"),
        "{}",
        text(&output.stderr)
    );
}

#[cfg(target_os = "linux")]
#[test]
fn a_full_disk_is_a_failure() {
    let full = fs::OpenOptions::new()
        .write(true)
        .open("/dev/full")
        .expect("a device that is always full");
    let output = program(&["show", QUARTER])
        .stdout(full)
        .output()
        .expect("the program starts");
    assert_eq!(output.status.code(), Some(1));
    assert!(text(&output.stderr).contains("cannot write to standard output"));
}

#[test]
fn help_lists_what_works_and_succeeds() {
    let help = answer(&["--help"]);
    for command in [
        "show", "weyl", "orbits", "density", "levels", "lengths", "audit",
    ] {
        assert!(help.contains(command));
        assert!(answer(&[command, "--help"]).contains("SYSTEM.toml"));
    }
    assert!(answer(&["--version"]).starts_with("orbitsum "));
}

#[test]
fn remarks_are_quiet_when_asked() {
    let words = [
        "density",
        CAVITY,
        "--frequency",
        "10:20",
        "--smoothing",
        "6",
        "--format",
        "csv",
    ];
    let loud = call(&words);
    assert!(loud.status.success());
    assert!(
        text(&loud.stderr).contains("warning: above 18.737029 GHz"),
        "{}",
        text(&loud.stderr)
    );
    let quiet: Vec<&str> = words.iter().copied().chain(["--quiet"]).collect();
    assert_eq!(answer(&quiet), text(&loud.stdout));
}

/// A list beside a shape in another unit: k of the list is turned into frequencies.
#[test]
fn lists_in_k_are_converted() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let path = folder.path().join("levels.csv");
    // k in 1/mm of the cavity, which is 150 times as large as the quarter stadium of the list.
    let list = fs::read_to_string("data/quarter-stadium.csv").expect("the list");
    let scaled: String = list
        .lines()
        .filter(|line| line.starts_with(|first: char| first.is_ascii_digit()))
        .map(|line| {
            let k: f64 = line
                .split(',')
                .nth(1)
                .expect("k")
                .parse()
                .expect("a number");
            format!("{}\n", k / 150.0)
        })
        .collect();
    fs::write(&path, format!("k\n{scaled}")).expect("written");
    let levels = path.to_str().expect("a path of text");
    let json = answer(&[
        "density",
        CAVITY,
        "--smoothing",
        "2.8",
        "--levels",
        levels,
        "--format",
        "json",
        "--quiet",
    ]);
    let value: Value = serde_json::from_str(&json).expect("json");
    let rms = value["levels"]["residual_rms"].as_f64().expect("a number");
    assert!(rms < 0.02, "{rms}");
    let notes = value["notes"].to_string();
    assert!(
        notes.contains("its column `k` was converted to frequency"),
        "{notes}"
    );
}
