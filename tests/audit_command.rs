//! The command `audit`: its columns and files, its exit codes, that units and threads do not matter, and that it knows nothing but the
//! list, the smooth count and the orbits.
//!
//! Lists are those of `data/levels/quarter-stadium.csv` (which names the call that made it) with known levels taken out or put in; the
//! rectangle's are exact.

use serde_json::Value;
use std::fmt::Write;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

const QUARTER: &str = "billiards/quarter-stadium.toml";
/// The quarter stadium with R = 120 mm, levels in GHz.
const CAVITY: &str = "data/example-cavity.toml";
/// A rectangle of 200 by 120 nm, levels in meV.
const DOT: &str = "tests/cli/dot.toml";
/// k R for the cavity at one GHz, c = 299 792 458 m/s exact by the SI.
const PER_GIGAHERTZ: f64 = 2.0 * std::f64::consts::PI * 1e9 * 0.12 / 299_792_458.0;
/// Levels of the short lists, and which of them (from 0) are taken out.
const LEVELS: usize = 60;
const REMOVED: [usize; 2] = [24, 41];

fn root(path: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join(path)
}

/// Levels of the quarter stadium.
fn levels() -> Vec<f64> {
    let all = orbitsum::levels::read(&root("data/levels/quarter-stadium.csv")).expect("a list");
    all.values[..LEVELS].to_vec()
}

/// The same without the two.
fn gaps() -> Vec<f64> {
    let kept = |index: &usize| !REMOVED.contains(index);
    let all = levels();
    (0..LEVELS).filter(kept).map(|index| all[index]).collect()
}

fn text(header: &str, values: &[f64]) -> String {
    let mut text = format!("{header}\n");
    for value in values {
        writeln!(text, "{value:?}").expect("memory");
    }
    text
}

/// A folder for a list and what is made of it.
struct Run {
    folder: tempfile::TempDir,
}

impl Run {
    fn new(list: &str) -> Self {
        let folder = tempfile::tempdir().expect("a temporary folder");
        fs::write(folder.path().join("list.csv"), list).expect("a list");
        Self { folder }
    }

    fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    fn call(&self, system: &str, options: &[&str]) -> Output {
        Command::new(env!("CARGO_BIN_EXE_orbitsum"))
            .arg("audit")
            .arg(root(system))
            .arg("--levels")
            .arg(self.path("list.csv"))
            .args(options)
            .current_dir(self.folder.path())
            .output()
            .expect("the program starts")
    }

    /// Standard output of a call that ends well.
    fn answer(&self, system: &str, options: &[&str]) -> String {
        let output = self.call(system, options);
        assert_eq!(output.status.code(), Some(0), "{}", string(&output.stderr));
        string(&output.stdout)
    }

    fn json(&self, system: &str) -> Value {
        let printed = self.answer(system, &["--format", "json", "--quiet"]);
        serde_json::from_str(&printed).expect("json")
    }

    fn read(&self, name: &str) -> String {
        fs::read_to_string(self.path(name)).expect(name)
    }
}

fn string(bytes: &[u8]) -> String {
    String::from_utf8_lossy(bytes).into_owned()
}

fn number(value: &Value) -> f64 {
    value.as_f64().expect("a number")
}

fn list(value: &Value) -> &Vec<Value> {
    value.as_array().expect("a list")
}

#[test]
fn files_have_the_documented_columns_and_the_corrected_list_reads_again() {
    let run = Run::new(&text("k", &gaps()));
    let printed = run.answer(QUARTER, &["--out", "out"]);
    assert!(
        printed.contains("2 of 60 levels are missing: near k = ") && printed.contains("no drift"),
        "{printed}"
    );
    let events = run.read("out/audit.csv");
    let mut rows = events.lines();
    assert_eq!(
        rows.next(),
        Some("kind,k,k_error,spacings_error,confidence,count,listed_n,listed_k")
    );
    let all = levels();
    for (row, removed) in rows.by_ref().zip(REMOVED) {
        let fields: Vec<&str> = row.split(',').collect();
        assert_eq!(fields[0], "missing");
        let at: f64 = fields[1].parse().expect("a number");
        assert!((at - all[removed]).abs() < 0.05, "{at} {}", all[removed]);
        assert_eq!((fields[5], fields[6], fields[7]), ("1", "", ""));
    }
    assert_eq!(rows.next(), None);
    let corrected = orbitsum::levels::read(&run.path("out/audit-corrected.csv")).expect("a list");
    assert!(corrected.notes.is_empty(), "{:?}", corrected.notes);
    let errors = corrected.errors.expect("errors of the estimates");
    for ((index, level), error) in corrected.values.iter().enumerate().zip(errors) {
        if REMOVED.contains(&index) {
            assert!(error > 0.0 && (level - all[index]).abs() < 0.05);
        } else {
            assert_eq!(error, 0.0);
            assert!((level / all[index] - 1.0).abs() < 1e-13);
        }
    }
    let marks = run.read("out/audit-corrected.csv");
    assert_eq!(marks.lines().next(), Some("k,error,estimated"));
    assert_eq!(marks.lines().filter(|line| line.ends_with(",1")).count(), 2);
    for name in ["audit.svg", "audit-statistics.svg"] {
        assert!(run.read(&format!("out/{name}")).contains("<svg"), "{name}");
    }
}

#[test]
fn json_has_the_windows_to_search_again() {
    let mut listed = gaps();
    // Half way between two levels.
    let all = levels();
    let invented = 0.5 * (all[50] + all[51]);
    listed.push(invented);
    let found = Run::new(&text("k", &listed)).json(QUARTER);
    assert_eq!(found["command"], "audit");
    assert_eq!(found["verdict"], "audited");
    assert_eq!(found["levels"], LEVELS - 1);
    let faults = list(&found["faults"]);
    assert_eq!(faults.len(), 3, "{faults:?}");
    for (fault, place) in faults.iter().zip([all[24], all[41], invented]) {
        let window = &fault["window"];
        assert!(number(&window["from"]) < place && place < number(&window["to"]));
        assert!(number(&fault["confidence"]) >= 0.9);
    }
    assert_eq!(faults[2]["kind"], "false");
    // The 51st true level is the 49th that is left.
    assert_eq!(faults[2]["listed_n"], 50);
    assert!((number(&faults[2]["listed_k"]) - invented).abs() < 1e-12);
    let curves = &found["curves"];
    let points = list(&curves["k"]).len();
    for curve in ["before", "after", "noise"] {
        assert_eq!(list(&curves[curve]).len(), points, "{curve}");
    }
    assert!(found["statistics"]["spacings"]["brody"]["value"].is_number());
    assert_eq!(list(&found["rows"]).len(), 3);
}

#[test]
fn strict_ends_with_3_when_something_is_found_and_writes_all_the_same() {
    let run = Run::new(&text("k", &gaps()));
    let output = run.call(QUARTER, &["--strict", "--out", "out", "--quiet"]);
    assert_eq!(output.status.code(), Some(3));
    assert_eq!(
        string(&output.stderr),
        "strict: the audit found 2 missing levels\n"
    );
    assert!(run.read("out/audit.csv").lines().count() == 3);
    let clean = Run::new(&text("k", &levels()));
    let output = clean.call(QUARTER, &["--strict", "--quiet"]);
    assert_eq!(output.status.code(), Some(0), "{}", string(&output.stderr));
    assert!(string(&output.stdout).contains("nothing is wrong with the 60 levels"));
}

#[test]
fn frequencies_are_told_as_frequencies() {
    let in_gigahertz: Vec<f64> = gaps().iter().map(|k| k / PER_GIGAHERTZ).collect();
    let plain = Run::new(&text("k", &gaps())).json(QUARTER);
    let run = Run::new(&text("frequency", &in_gigahertz));
    let found = run.json(CAVITY);
    let (faults, others) = (list(&found["faults"]), list(&plain["faults"]));
    assert_eq!(faults.len(), others.len());
    for (fault, other) in faults.iter().zip(others) {
        for (name, own) in [("frequency", "k"), ("frequency_error", "k_error")] {
            let ratio = number(&fault[name]) * PER_GIGAHERTZ / number(&other[own]);
            assert!((ratio - 1.0).abs() < 1e-4, "{name}: {ratio}");
        }
        let ends = |fault: &Value| {
            (
                number(&fault["window"]["from"]),
                number(&fault["window"]["to"]),
            )
        };
        let (here, there) = (ends(fault), ends(other));
        assert!((here.0 * PER_GIGAHERTZ / there.0 - 1.0).abs() < 1e-4);
        assert!((here.1 * PER_GIGAHERTZ / there.1 - 1.0).abs() < 1e-4);
    }
    let printed = run.answer(CAVITY, &["--format", "csv", "--quiet"]);
    assert!(printed.starts_with(
        "kind,frequency,frequency_error,spacings_error,confidence,count,listed_n,listed_frequency\n"
    ));
}

/// The lowest 80 levels (meV) of a rectangle of `a` by 120 nm with an effective mass of 0.067: (hbar pi)^2/(2 m) (i^2/a^2 + j^2/b^2),
/// hbar^2/(2 m_e) = 38.0998212 meV nm^2 (CODATA 2018).
fn rectangle(a: f64) -> Vec<f64> {
    let pi = std::f64::consts::PI;
    let mut levels: Vec<f64> = (1..30)
        .flat_map(|i| (1..30).map(move |j| (f64::from(i) / a, f64::from(j) / 120.0)))
        .map(|(x, y)| 38.099_821_2 / 0.067 * pi * pi * (x * x + y * y))
        .collect();
    levels.sort_by(f64::total_cmp);
    levels.truncate(80);
    levels
}

#[test]
fn a_level_of_a_rectangle_is_missed_in_energy() {
    let mut levels = rectangle(200.0);
    let gone = levels.remove(40);
    let run = Run::new(&text("energy", &levels));
    let found = run.json(DOT);
    let faults = list(&found["faults"]);
    assert_eq!(faults.len(), 1, "{faults:?}");
    assert_eq!(faults[0]["kind"], "missing");
    let (place, error) = (
        number(&faults[0]["energy"]),
        number(&faults[0]["energy_error"]),
    );
    assert!((place - gone).abs() < 5.0 * error && error < 0.1 * (levels[41] - levels[38]));
    // Levels of regular motion say nothing by themselves about what is missing.
    assert_eq!(found["statistics"]["missing"]["unknown"], "uncorrelated");
}

/// The list is that of a rectangle 0.5 % longer than in the file.
#[test]
fn a_side_is_fitted() {
    let run = Run::new(&text("energy", &rectangle(201.0)));
    let options = ["--fit", "a", "--format", "json", "--quiet"];
    let found: Value = serde_json::from_str(&run.answer(DOT, &options)).expect("json");
    let fit = &list(&found["fit"])[0];
    assert_eq!(fit["name"], "a");
    assert_eq!(fit["file"], 200.0);
    let (value, error) = (number(&fit["value"]), number(&fit["error"]));
    assert!((value - 201.0).abs() < 5.0 * error && error < 0.02, "{fit}");
    // The orbits add digits to what the smooth count says.
    assert!(number(&fit["smooth_error"]) > 2.0 * error, "{fit}");
    assert!(list(&found["faults"]).is_empty());
    assert!((number(&found["parameters"]["a"]) - value).abs() < 1e-9);
    let strict = run.call(DOT, &["--fit", "a", "--strict", "--quiet"]);
    assert_eq!(strict.status.code(), Some(3));
    let words = string(&strict.stderr);
    assert!(words.contains("another value of a"), "{words}");
}

#[test]
fn what_lies_beyond_the_window_is_left_alone() {
    let mut listed = gaps();
    let all = levels();
    let window = format!("0:{}", 0.5 * (all[35] + all[36]));
    // Beyond the window, as the second level that was taken out.
    listed.push(0.5 * (all[50] + all[51]));
    let run = Run::new(&text("k", &listed));
    let printed = run.answer(
        QUARTER,
        &["--k", &window, "--format", "csv", "--out", "out", "--quiet"],
    );
    assert_eq!(printed.lines().count(), 2, "{printed}");
    assert!(printed.contains("missing,"));
    let corrected = orbitsum::levels::read(&run.path("out/audit-corrected.csv")).expect("a list");
    assert_eq!(corrected.values.len(), listed.len() + 1);
}

#[test]
fn results_do_not_depend_on_the_number_of_threads() {
    let run = Run::new(&text("k", &gaps()));
    let with = |threads| {
        let options = ["--threads", threads, "--format", "json", "--quiet"];
        run.answer(QUARTER, &options)
    };
    assert_eq!(with("1"), with("3"));
}

/// A system file and a list are enough: the program is run where there is nothing else.
#[test]
fn an_audit_needs_no_other_file() {
    let run = Run::new(&text("k", &gaps()));
    fs::copy(root(QUARTER), run.path("shape.toml")).expect("a system file");
    let output = Command::new(env!("CARGO_BIN_EXE_orbitsum"))
        .args(["audit", "shape.toml", "--levels", "list.csv", "--quiet"])
        .current_dir(run.folder.path())
        .output()
        .expect("the program starts");
    assert!(output.status.success());
    assert!(string(&output.stdout).contains("2 of 60 levels are missing"));
}
