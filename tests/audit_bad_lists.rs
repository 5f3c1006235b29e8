//! Lists that no audit can use: each gets one message that says what is wrong and what would be right. Lists with a fault that an audit
//! is made for are told as findings.
//!
//! The levels are those of `data/levels/quarter-stadium.csv` (which names the call that made it), converted by hand where the list is in
//! another unit: f = c k/(2 pi), with c = 299 792 458 m/s exact by the SI.

use std::fmt::Write;
use std::fs;
use std::path::Path;
use std::process::Command;

const QUARTER: &str = "billiards/quarter-stadium.toml";
const STADIUM: &str = "billiards/stadium.toml";
/// The quarter stadium with R = 120 mm, levels in GHz.
const CAVITY: &str = "data/example-cavity.toml";
/// A rectangle of 200 by 120 nm, levels in meV.
const DOT: &str = "tests/cli/dot.toml";
/// k R for the cavity at one GHz.
const PER_GIGAHERTZ: f64 = 2.0 * std::f64::consts::PI * 1e9 * 0.12 / 299_792_458.0;

/// Levels of the quarter stadium.
fn levels(count: usize) -> Vec<f64> {
    let list = Path::new(env!("CARGO_MANIFEST_DIR")).join("data/levels/quarter-stadium.csv");
    let all = orbitsum::levels::read(&list).expect("a list").values;
    all[..count].to_vec()
}

fn text(header: &str, values: impl IntoIterator<Item = f64>) -> String {
    let mut text = header.to_owned();
    for value in values {
        writeln!(text, "{value:?}").expect("memory");
    }
    text
}

/// Exit code, standard output, standard error of an audit of a list that is written for it.
fn audit(system: &str, list: &str, options: &[&str]) -> (Option<i32>, String, String) {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let file = folder.path().join("list.csv");
    fs::write(&file, list).expect("a list");
    let output = Command::new(env!("CARGO_BIN_EXE_orbitsum"))
        .args(["audit", system, "--levels"])
        .arg(&file)
        .args(options)
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .output()
        .expect("the program starts");
    let text = |bytes: Vec<u8>| String::from_utf8(bytes).expect("output is text");
    (
        output.status.code(),
        text(output.stdout),
        text(output.stderr),
    )
}

/// The list is refused with exit code 2 and one line that holds these words.
fn refused(system: &str, list: &str, options: &[&str], words: &[&str]) {
    let (code, printed, message) = audit(system, list, options);
    assert_eq!(code, Some(2), "{words:?}: {printed}{message}");
    assert!(printed.is_empty(), "{words:?}: {printed}");
    assert_eq!(message.lines().count(), 1, "{words:?}: {message}");
    for word in words {
        assert!(message.contains(word), "`{word}` is not in {message}");
    }
}

#[test]
fn what_is_no_list_of_levels_is_refused() {
    let good = levels(40);
    let with = |line: &str| text("", good.iter().copied()) + line + "\n";
    for (list, words) in [
        (String::new(), ["is empty", "at least one line"]),
        ("k,error\n".into(), ["is empty", "at least one line"]),
        (with("NaN"), ["line 41", "not finite"]),
        (with("inf"), ["line 41", "not finite"]),
        (with("-3"), ["line 41", "negative"]),
        (with("3,5"), ["line 41", "not a number"]),
        (with("about 7"), ["line 41", "2 fields"]),
        (
            "n,place\n1,3.64\n".into(),
            ["no column of levels", "n, place"],
        ),
        ("k\n5.5\n".into(), ["the list holds 1 level", "at least 10"]),
        (
            text("k\n", levels(9)),
            ["the list holds 9 levels", "at least 10"],
        ),
        (
            text("k\n", vec![7.0; 50]),
            ["holds 50 levels", "another shape"],
        ),
        (
            text("k\n", vec![0.0; 50]),
            ["holds 50 levels", "another shape"],
        ),
    ] {
        refused(QUARTER, &list, &[], &words);
    }
}

#[test]
fn more_levels_than_can_be_audited_are_refused() {
    // The leading term of the count, area/(4 pi) k^2 with area 1 + pi/4, is enough to look like the shape.
    let per = (1.0 + std::f64::consts::PI / 4.0) / (4.0 * std::f64::consts::PI);
    let list = text("", (1..=1_000_000).map(|n| (f64::from(n) / per).sqrt()));
    refused(
        QUARTER,
        &list,
        &[],
        &["1000000 levels", "4000", "--k FROM:TO"],
    );
}

#[test]
fn lists_in_another_unit_are_recognised() {
    let k = levels(60);
    let times = |factor: f64| text("", k.iter().map(|k| factor * k));
    let named = |name: &str, factor: f64| format!("{name}\n{}", times(factor));
    let squares = |factor: f64| text("", k.iter().map(|k| factor * k * k));
    let gigahertz = 1.0 / PER_GIGAHERTZ;
    for (system, list, words) in [
        (QUARTER, squares(1.0), ["energies k^2", "column `energy`"]),
        (
            QUARTER,
            named("energy", 1.0),
            ["wave numbers k", "column `k`"],
        ),
        // R = 1 of the file taken as a metre.
        (QUARTER, times(0.12 * gigahertz), ["GHz", "lengths in m:"]),
        (QUARTER, times(120.0 * gigahertz), ["GHz", "lengths in mm:"]),
        (
            QUARTER,
            text("", (1..=200).map(f64::from)),
            ["numbers of rows", "name their column"],
        ),
        (
            CAVITY,
            times(gigahertz * 1e3),
            ["MHz", "divide them by 1000"],
        ),
        (CAVITY, times(gigahertz * 1e9), ["Hz", "divide them by 1e9"]),
        (
            CAVITY,
            times(1.0 / 120.0),
            ["wave numbers k (1/mm)", "column `k`"],
        ),
        (
            CAVITY,
            times(1000.0 / 120.0),
            ["wave numbers in 1/m", "multiply them by 0.001"],
        ),
        (
            CAVITY,
            squares(1.0 / 14_400.0),
            ["energies k^2", "square roots"],
        ),
        (
            CAVITY,
            named("k", gigahertz),
            ["levels in GHz", "column `frequency`"],
        ),
        (
            CAVITY,
            named("k", 1000.0 / 120.0),
            ["1/m where 1/mm is expected", "multiply them by 0.001"],
        ),
    ] {
        refused(system, &list, &[], &words);
    }
}

/// Levels of a rectangle of 200 by 120 nm: (hbar pi)^2/(2 m) (i^2/a^2 + j^2/b^2) with hbar^2/(2 m_e) = 38.0998212 meV nm^2 (CODATA
/// 2018).
#[test]
fn electronvolts_are_recognised() {
    let pi = std::f64::consts::PI;
    let mut levels: Vec<f64> = (1..30)
        .flat_map(|i| (1..30).map(move |j| (f64::from(i) / 200.0, f64::from(j) / 120.0)))
        .map(|(x, y)| 38.099_821_2 / 0.067 * pi * pi * (x * x + y * y))
        .collect();
    levels.sort_by(f64::total_cmp);
    let list = text("", levels[..80].iter().map(|level| 1e-3 * level));
    refused(
        DOT,
        &list,
        &[],
        &[
            "levels in eV where meV is expected",
            "multiply them by 1000",
        ],
    );
}

#[test]
fn lists_of_another_shape_class_or_size_are_refused() {
    let k = levels(60);
    let own = text("", k.iter().copied());
    let copies = text("", k.iter().flat_map(|k| [*k, *k]));
    refused(
        QUARTER,
        &copies,
        &[],
        &["every level stands 2 times", "remove the copies"],
    );
    // All walls of the quarter are Dirichlet: these are the levels of the stadium that are odd under both reflections.
    refused(
        STADIUM,
        &own,
        &[],
        &["class A2 (odd,odd) alone", "--class A2"],
    );
    let disk = fs::read_to_string("data/levels/disk.csv").expect("a list");
    refused(
        QUARTER,
        &disk,
        &[],
        &["all lengths 1.3", "compare shape, size and unit"],
    );
    let smaller = text("", k.iter().map(|k| k / 2.5));
    refused(QUARTER, &smaller, &[], &["all lengths 2.5 times as long"]);
    let squares = text("k\n", (1..=60).map(|n| f64::from(n).powi(3)));
    refused(
        QUARTER,
        &squares,
        &[],
        &["holds 60 levels", "another shape, size, class or unit"],
    );
}

#[test]
fn windows_without_levels_are_refused() {
    let list = text("k\n", levels(60));
    for (window, words) in [
        ("60:80", ["k from 60 to 80", "0 levels"]),
        ("10:10.5", ["k from 10 to 10.5", "2 levels"]),
    ] {
        refused(QUARTER, &list, &["--k", window], &words);
    }
}

#[test]
fn a_repeated_and_an_invented_level_are_findings() {
    let mut list = levels(60);
    list.push(list[30]);
    list.push(13.9);
    let (code, printed, _) = audit(QUARTER, &text("", list), &["--format", "csv"]);
    assert_eq!(code, Some(0));
    let found: Vec<&str> = printed.lines().skip(1).collect();
    assert_eq!(found.len(), 2, "{printed}");
    assert!(
        found.iter().all(|line| line.starts_with("false,")),
        "{printed}"
    );
}
