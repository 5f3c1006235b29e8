//! Every command that the README prints runs, and prints what the README quotes.
//!
//! `sh` blocks hold commands alone, `console` blocks commands after `$ ` with quoted output below them. A quoted line stands
//! for a line of the output with the same words, numbers within one unit of the last digit quoted; `...` stands for anything.

use std::path::Path;
use std::process::Command;

const README: &str = include_str!("../README.md");
/// Commands that are known and not run here: the second is what runs this test.
const NOT_RUN: [&str; 1] = ["cargo test"];
/// Options that name a folder that files are written into; a call has one of them at most.
const FOLDERS: [&str; 2] = ["--out", "--vectors"];
/// How a built binary is called in the README.
const CALLS: [&str; 2] = ["cargo run --release -- ", "orbitsum "];

/// A command with the lines that the README quotes from its output.
#[derive(Debug, PartialEq)]
struct Example<'a> {
    command: &'a str,
    quoted: Vec<&'a str>,
}

/// The examples of a Markdown text, in order.
fn examples(text: &str) -> Vec<Example<'_>> {
    let mut found: Vec<Example<'_>> = Vec::new();
    let mut block: Option<&str> = None;
    for line in text.lines() {
        if let Some(language) = line.strip_prefix("```") {
            block = if block.is_some() {
                None
            } else {
                Some(language)
            };
            continue;
        }
        let command = match block {
            Some("sh") if !line.trim().is_empty() => Some(line),
            Some("console") => line.strip_prefix("$ "),
            _ => None,
        };
        if let Some(command) = command {
            found.push(Example {
                command,
                quoted: Vec::new(),
            });
        } else if block == Some("console") && line.trim() != "..." {
            let example = found.last_mut().expect("output follows a command");
            example.quoted.push(line);
        }
    }
    found
}

/// Arguments of a call of the program, none for a command of another kind.
fn arguments(command: &str) -> Option<Vec<&str>> {
    let rest = CALLS.iter().find_map(|call| command.strip_prefix(call))?;
    Some(rest.split_whitespace().collect())
}

/// One unit of the last digit of a number as it is written.
fn last_digit(number: &str) -> f64 {
    let (mantissa, exponent) = number.split_once('e').unwrap_or((number, "0"));
    let decimals = mantissa
        .split_once('.')
        .map_or(0, |(_, digits)| digits.len());
    let exponent: i32 = exponent.parse().unwrap_or(0);
    10f64.powi(exponent - i32::try_from(decimals).unwrap_or(0))
}

/// Is one word of the output what is quoted?
fn same_word(quoted: &str, printed: &str) -> bool {
    if quoted == printed {
        return true;
    }
    match (quoted.parse::<f64>(), printed.parse::<f64>()) {
        // A whole number counts something: it is quoted exactly.
        (Ok(a), Ok(b)) if quoted.contains('.') => (a - b).abs() <= 1.001 * last_digit(quoted),
        _ => false,
    }
}

fn same_line(quoted: &str, printed: &str) -> bool {
    let quoted: Vec<&str> = quoted.split_whitespace().collect();
    let printed: Vec<&str> = printed.split_whitespace().collect();
    quoted.len() == printed.len() && quoted.iter().zip(&printed).all(|(a, b)| same_word(a, b))
}

/// Runs a call in the root of the repository, with the folder that it writes into replaced by a temporary one.
fn run(arguments: &[&str], folder: &Path) -> String {
    let folder = folder.to_str().expect("a folder with a name in UTF-8");
    let mut arguments: Vec<String> = arguments.iter().map(ToString::to_string).collect();
    let named = arguments
        .iter()
        .position(|argument| FOLDERS.contains(&argument.as_str()))
        .map(|index| std::mem::replace(&mut arguments[index + 1], folder.to_owned()));
    let output = Command::new(env!("CARGO_BIN_EXE_orbitsum"))
        .args(&arguments)
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .output()
        .expect("the program starts");
    let text = String::from_utf8_lossy(&output.stdout).into_owned()
        + &String::from_utf8_lossy(&output.stderr);
    assert_eq!(output.status.code(), Some(0), "{arguments:?}\n{text}");
    match named {
        Some(named) => text.replace(folder, &named),
        None => text,
    }
}

#[test]
fn commands_of_the_readme_run_and_print_what_it_quotes() {
    let found = examples(README);
    for command in NOT_RUN {
        assert!(
            found.iter().any(|example| example.command == command),
            "the README does not print `{command}`"
        );
    }
    let mut calls = 0;
    for example in &found {
        if NOT_RUN.contains(&example.command) {
            continue;
        }
        let arguments = arguments(example.command)
            .unwrap_or_else(|| panic!("`{}` cannot be checked", example.command));
        let folder = tempfile::tempdir().expect("a temporary folder");
        let text = run(&arguments, folder.path());
        for quoted in &example.quoted {
            assert!(
                text.lines().any(|printed| same_line(quoted, printed)),
                "`{}` does not print\n{quoted}\nbut\n{text}",
                example.command
            );
        }
        calls += 1;
    }
    assert!(calls > 0, "the README prints no call of the program");
    assert!(
        found
            .iter()
            .any(|example| example.command.starts_with(CALLS[0])),
        "the README does not say how to run the program without installing it"
    );
}

#[test]
fn files_that_the_readme_names_exist() {
    let names: Vec<&str> = README
        .split(['"', '(', ')', '`', ' ', '\n'])
        .filter(|word| {
            ["data/", "billiards/", "LICENSE", "DEVELOPERS"]
                .iter()
                .any(|start| word.starts_with(start))
        })
        .collect();
    assert!(names.len() > 4, "only {names:?}");
    for name in names {
        let name = name.trim_end_matches([',', '.', ';', ']']);
        let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(name);
        assert!(path.exists(), "{name} is named in the README");
    }
}

#[test]
fn system_files_of_the_readme_are_right() {
    let blocks: Vec<&str> = README
        .split("```toml\n")
        .skip(1)
        .filter_map(|rest| rest.split("```").next())
        .collect();
    assert!(!blocks.is_empty(), "the README shows no system file");
    for block in blocks {
        if let Err(error) = orbitsum::system::parse(block, Path::new("README.md"), &[]) {
            panic!("{}", error.render());
        }
    }
}

/// The README's claim about the example cavity: level 150 of data/quarter-stadium.csv, at k R = 34.026 or 13.53 GHz, is not in
/// its list.
#[test]
fn a_missing_level_shows_where_it_is() {
    let call =
        "density data/example-cavity.toml --levels data/example-cavity.csv --format csv --quiet";
    let arguments: Vec<&str> = call.split_whitespace().collect();
    let text = run(&arguments, Path::new("."));
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    let headers = reader.headers().expect("a first line").clone();
    let column = |name: &str| {
        headers
            .iter()
            .position(|header| header == name)
            .expect("a column")
    };
    let (frequency, residual) = (column("frequency"), column("residual"));
    let mut checked = [0, 0];
    for record in reader.records() {
        let record = record.expect("a row");
        let at: f64 = record[frequency].parse().expect("a frequency");
        // Rows beyond the end of the list have no residual. A tenth of a level is ten rms residuals; the step is
        // smeared over three standard deviations of the Gaussian, 0.132 GHz each, on both sides.
        let Ok(residual) = record[residual].parse::<f64>() else {
            continue;
        };
        let (side, expected) = match at {
            at if at < 13.53 - 0.4 => (0, 0.0),
            at if at > 13.53 + 0.4 => (1, -1.0),
            _ => continue,
        };
        assert!((residual - expected).abs() < 0.1, "{residual} at {at} GHz");
        checked[side] += 1;
    }
    assert!(checked.iter().all(|&rows| rows > 50), "{checked:?}");
}

#[test]
fn examples_are_read_from_their_blocks() {
    let text =
        "```sh\na b\n```\n$ no\n```console\n$ c\n...\nx 1.0\n$ d\n```\n```toml\ne = 1\n```\n";
    let example = |command, quoted| Example { command, quoted };
    assert_eq!(
        examples(text),
        [
            example("a b", vec![]),
            example("c", vec!["x 1.0"]),
            example("d", vec![])
        ]
    );
    assert_eq!(arguments("cargo test"), None);
    assert_eq!(arguments("orbitsum show x"), Some(vec!["show", "x"]));
}

#[test]
fn lines_are_compared_to_the_digits_quoted() {
    assert!(same_line("rms  0.011 level", "rms 0.012   level"));
    assert!(!same_line("rms 0.011 level", "rms 0.013 level"));
    assert!(!same_line("rms 0.011 level", "rms 0.011 level each"));
    assert!(!same_line("9 orbits", "10 orbits"));
    assert!(same_line("1.5e-3", "0.0016"));
}
