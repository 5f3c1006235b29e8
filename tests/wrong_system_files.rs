//! Wrong system files, one mistake each: the message beside each file (`.txt`) is what a user reads.
//!
//! After a message was changed on purpose, run the test with `ORBITSUM_WRITE_MESSAGES=1` and read the difference.

use orbitsum::system::{LARGEST_FILE, Problem, SystemError, load, parse};
use proptest::prelude::*;
use proptest::test_runner::FileFailurePersistence;
use std::fs;
use std::path::{Path, PathBuf};

/// Files whose mistake lies in the settings that they are loaded with.
const SETTINGS: [(&str, &str, &str); 2] = [
    ("set-unknown-parameter", "radius", "1"),
    ("set-bad-formula", "b", "1 + sqr(a)"),
];

/// Least number of mistakes that are kept here.
const LEAST: usize = 80;

fn folder() -> &'static Path {
    // Tests run in the folder of the package; the messages show this relative path.
    Path::new("tests/wrong")
}

fn error_of(path: &Path) -> SystemError {
    let stem = path.file_stem().expect("a file name").to_string_lossy();
    let settings: Vec<(String, String)> = SETTINGS
        .iter()
        .filter(|(file, _, _)| *file == stem)
        .map(|&(_, name, value)| (name.to_owned(), value.to_owned()))
        .collect();
    match load(path, &settings) {
        Ok(_) => panic!("{} was accepted", path.display()),
        Err(error) => error,
    }
}

fn wrong_files() -> Vec<PathBuf> {
    let mut files: Vec<PathBuf> = fs::read_dir(folder())
        .expect("folder of wrong files")
        .map(|entry| entry.expect("entry").path())
        .filter(|path| path.extension().is_some_and(|ending| ending == "toml"))
        .collect();
    files.sort();
    files
}

#[test]
fn every_wrong_file_has_its_message() {
    let files = wrong_files();
    assert!(files.len() >= LEAST, "{} files", files.len());
    let mut different = Vec::new();
    for path in files {
        let message = error_of(&path).render() + "\n";
        let kept = path.with_extension("txt");
        if std::env::var_os("ORBITSUM_WRITE_MESSAGES").is_some() {
            fs::write(&kept, &message).expect("writing a message");
        }
        let expected = fs::read_to_string(&kept).unwrap_or_default();
        if message != expected {
            different.push(format!(
                "{}:\n{message}instead of\n{expected}",
                path.display()
            ));
        }
    }
    assert!(different.is_empty(), "{}", different.join("\n"));
}

/// The message shows the line that has the mistake, and where it is.
#[test]
fn every_message_shows_file_line_and_column() {
    for path in wrong_files() {
        let error = error_of(&path);
        let message = error.render();
        let (line, column) = error.position().expect("a position");
        assert!(
            message.contains(&format!(":{line}:{column}")),
            "{}: {line}:{column} is not in\n{message}",
            path.display()
        );
        assert!(!message.contains('\u{1b}'), "no colour unless asked for");
        assert!(!error.to_string().is_empty());
    }
}

/// Line and column of some mistakes, counted by hand in the files.
#[test]
fn places_are_right() {
    for (file, place) in [
        ("formula-unknown-name", (3, 12)),
        ("formula-division-by-zero", (3, 6)),
        ("formula-missing-operator", (3, 7)),
        ("unknown-key-outline", (3, 1)),
        ("open-outline", (6, 3)),
        ("clockwise-outline", (4, 3)),
        ("zero-length-wall", (9, 3)),
        ("negative-radius", (5, 21)),
        ("points-bad-row", (5, 1)),
        ("set-bad-formula", (1, 7)),
    ] {
        let error = error_of(&folder().join(file).with_extension("toml"));
        assert_eq!(error.position(), Some(place), "{file}:\n{}", error.render());
    }
}

#[test]
fn files_that_cannot_be_read_are_refused() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let missing = folder.path().join("missing.toml");
    let error = load(&missing, &[]).expect_err("no such file");
    assert!(matches!(error.problem(), Problem::Unreadable { .. }));
    assert!(error.render().contains("missing.toml"));

    let error = load(folder.path(), &[]).expect_err("a folder");
    assert!(matches!(error.problem(), Problem::Unreadable { .. }));

    let huge = folder.path().join("huge.toml");
    fs::write(&huge, vec![b'#'; LARGEST_FILE as usize + 1]).expect("writing");
    let error = load(&huge, &[]).expect_err("a huge file");
    assert!(matches!(error.problem(), Problem::TooLarge { .. }));
    assert!(error.render().contains("1048576"));

    let binary = folder.path().join("binary.toml");
    fs::write(&binary, [b'a', b'=', 0xff, 0xfe]).expect("writing");
    let error = load(&binary, &[]).expect_err("not text");
    assert_eq!(error.problem(), &Problem::NotText { byte: 2 });
}

/// Nested lists and tables deeper than any stack.
#[test]
fn deeply_nested_values_are_refused() {
    for text in [
        format!("a = {}{}", "[".repeat(100_000), "]".repeat(100_000)),
        "a.".repeat(100_000) + "b = 1",
        "a = {b=".repeat(50_000),
    ] {
        let error = parse(&text, Path::new("nested.toml"), &[]).expect_err("nested");
        assert!(!error.render().is_empty());
    }
}

fn shipped() -> Vec<String> {
    let mut files: Vec<PathBuf> = fs::read_dir("billiards")
        .expect("folder billiards")
        .map(|entry| entry.expect("entry").path())
        .collect();
    files.sort();
    files
        .iter()
        .map(|path| fs::read_to_string(path).expect("a shipped file"))
        .collect()
}

/// One change of a text: take out, double or replace a stretch, or put a word of the language somewhere.
#[derive(Clone, Debug)]
enum Change {
    Remove(usize, usize),
    Double(usize, usize),
    Insert(usize, &'static str),
}

const WORDS: [&str; 28] = [
    "\"",
    "[",
    "]",
    "{",
    "}",
    "=",
    ",",
    "-",
    "*",
    "/",
    "^",
    "(",
    ")",
    "0",
    "1e300",
    "1e-300",
    "nan",
    "pi",
    "t",
    "sqrt(",
    "\n",
    "#",
    "[[hole]]\n",
    "[[slit]]\n",
    "é",
    "\\u0007",
    "abs(t)",
    ".",
];

fn changes() -> impl Strategy<Value = Vec<Change>> {
    let change = prop_oneof![
        (0..2000usize, 1..30usize).prop_map(|(at, length)| Change::Remove(at, length)),
        (0..2000usize, 1..30usize).prop_map(|(at, length)| Change::Double(at, length)),
        (0..2000usize, prop::sample::select(&WORDS[..]))
            .prop_map(|(at, word)| Change::Insert(at, word)),
    ];
    prop::collection::vec(change, 1..4)
}

fn apply(text: &str, changes: &[Change]) -> String {
    let mut letters: Vec<char> = text.chars().collect();
    for change in changes {
        let count = letters.len().max(1);
        let range = |at: usize, length: usize| {
            let at = at % count;
            at.min(letters.len())..(at + length).min(letters.len())
        };
        match *change {
            Change::Remove(at, length) => {
                letters.drain(range(at, length));
            }
            Change::Double(at, length) => {
                let range = range(at, length);
                let stretch = letters[range.clone()].to_vec();
                letters.splice(range.start..range.start, stretch);
            }
            Change::Insert(at, word) => {
                let range = range(at, 0);
                letters.splice(range, word.chars());
            }
        }
    }
    letters.into_iter().collect()
}

proptest! {
    #![proptest_config(ProptestConfig {
        cases: 2000,
        failure_persistence: Some(Box::new(FileFailurePersistence::WithSource("regressions"))),
        ..ProptestConfig::default()
    })]

    /// Whatever is done to a shipped file, it is read or refused with a message that has a place.
    #[test]
    fn changed_files_never_panic(file in 0..19usize, changes in changes()) {
        let text = apply(&shipped()[file], &changes);
        match parse(&text, Path::new("changed.toml"), &[]) {
            Ok(system) => prop_assert!(system.domain.area > 0.0),
            Err(error) => {
                prop_assert!(error.render().contains("changed.toml"));
                prop_assert!(error.position().is_some());
            }
        }
    }
}
