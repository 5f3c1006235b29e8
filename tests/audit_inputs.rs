//! An audit rests on the list, the smooth count and the orbit sum alone: it reaches neither directly computed levels nor quantised
//! tori, and reads no file but those that it is given.

use std::fs;
use std::path::{Path, PathBuf};

/// Parts of the library that an audit may use.
const ALLOWED: [&str; 4] = ["baseline", "dense", "levels", "trace"];
/// Words of the ways to levels that are not in the list; `include` and `env!` reach files when the program is built.
const WAYS_TO_LEVELS: [&str; 6] = [
    "solver",
    "ebk",
    "include_str",
    "include_bytes",
    "env!",
    "quantis",
];
/// Words of the ways to files.
const WAYS_TO_FILES: [&str; 3] = ["std::fs", "File::", "levels::read"];

/// All source files below a path (a folder, or a file without its ending).
fn sources(path: &str) -> Vec<PathBuf> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join(path);
    let mut found = Vec::new();
    let file = root.with_extension("rs");
    if file.is_file() {
        found.push(file);
    }
    let mut folders = vec![root];
    while let Some(folder) = folders.pop() {
        let Ok(entries) = fs::read_dir(&folder) else {
            continue;
        };
        for entry in entries {
            let path = entry.expect("an entry").path();
            if path.is_dir() {
                folders.push(path);
            } else if path.extension().is_some_and(|end| end == "rs") {
                found.push(path);
            }
        }
    }
    found
}

/// The code of a file without its comments, in small letters.
fn code(path: &Path) -> String {
    let text = fs::read_to_string(path).expect("a source file");
    let lines = text
        .lines()
        .map(|line| line.split("//").next().unwrap_or_default());
    lines.collect::<Vec<_>>().join("\n").to_lowercase()
}

fn mentions_none(path: &Path, words: &[&str]) {
    let code = code(path);
    for word in words {
        assert!(
            !code.contains(&word.to_lowercase()),
            "{} mentions {word}",
            path.display()
        );
    }
}

#[test]
fn the_audit_reaches_no_other_levels_and_no_file() {
    let files = sources("src/levels/audit");
    assert!(files.len() >= 5, "{files:?}");
    for path in &files {
        mentions_none(path, &WAYS_TO_LEVELS);
        mentions_none(path, &WAYS_TO_FILES);
        for used in code(path).split("crate::").skip(1) {
            let end = used.find(|c: char| !c.is_alphanumeric() && c != '_');
            let part = &used[..end.unwrap_or(used.len())];
            assert!(ALLOWED.contains(&part), "{} uses {part}", path.display());
        }
    }
}

/// The command hands it no other levels.
#[test]
fn the_command_computes_no_levels() {
    let files = sources("src/command/audit");
    assert!(files.len() >= 5, "{files:?}");
    for path in &files {
        mentions_none(
            path,
            &["solver", "ebk", "direct::", "::compute", "data/levels"],
        );
    }
}

/// What the audit uses leads to no other levels either.
#[test]
fn its_parts_reach_no_other_levels() {
    for part in ["src/baseline", "src/trace", "src/dense"] {
        let files = sources(part);
        assert!(!files.is_empty(), "{part}");
        for path in &files {
            mentions_none(path, &["crate::solver", "solver::{", "ebk", "quantis"]);
        }
    }
}
