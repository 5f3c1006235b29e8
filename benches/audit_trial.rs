//! The trial of the audit: faults are planted in true lists of about 300 levels of many shapes, and the audit's reports are compared
//! with them. Prints a table, one row for every shape and plan, as it goes.
//!
//! `cargo bench --bench audit_trial -- [--lists 100] [--out data/audit-trial.csv] [--plan NAME] [--remarks] [SHAPE ...]`. With
//! `--remarks` it tells which faults were lost and which reports are false. Every list has a seed of its own, so that fewer lists
//! are the first ones of the whole trial; the table does not depend on the number of threads.

#[path = "../tests/common/audit_trial.rs"]
mod audit_trial;

use audit_trial::{Plan, SHAPES, Subject, Tally, group, trial};
use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::ExitCode;
use std::time::Instant;

/// Lists of each shape unless told otherwise.
const LISTS: u64 = 100;
/// Clean lists differ by their jitter only: without, one is enough.
const CLEAN_LISTS: u64 = 1;
/// The plans, and the last group of shapes for which each is made.
const PLANS: [(Plan, usize); 9] = [
    (Plan::STANDARD, 3),
    (Plan::SMOOTH_COUNT_ALONE, 3),
    (Plan::JITTERED, 3),
    (Plan::MANY, 2),
    (Plan::RUNS, 3),
    (Plan::NEAR_DEGENERATE, 3),
    (Plan::ONE, 3),
    (Plan::CLEAN, 3),
    (Plan::CLEAN_JITTERED, 3),
];
/// The columns: places in mean spacings, of missing levels only; confidences as reports/right.
const COLUMNS: &str = "group,shape,plan,lists,planted,found,percent,told_as_shifted,lost_beyond_list,lost_where_unresolved,\
    false_reports,median_misplacement,ninety_percent,within_error,runs,runs_right,reports_below_0.5,right_below_0.5,\
    reports_0.5_to_0.9,right_0.5_to_0.9,reports_0.9_to_0.99,right_0.9_to_0.99,reports_above_0.99,right_above_0.99,\
    lists_unresolved,lists_refused,lists_with_trend,longest_orbit,terms";

/// What was asked for.
struct Asked {
    lists: u64,
    out: Option<PathBuf>,
    plan: Option<String>,
    remarks: bool,
    shapes: Vec<String>,
}

impl Asked {
    fn read(mut words: impl Iterator<Item = String>) -> Result<Self, String> {
        let mut asked = Self {
            lists: LISTS,
            out: None,
            plan: None,
            remarks: false,
            shapes: Vec::new(),
        };
        let known: Vec<&str> = SHAPES.concat();
        while let Some(word) = words.next() {
            let mut value = || words.next().ok_or(format!("{word} needs a value"));
            match word.as_str() {
                // Cargo's own.
                "--bench" => {}
                "--remarks" => asked.remarks = true,
                "--lists" => {
                    let value = value()?;
                    asked.lists = value
                        .parse()
                        .map_err(|_| format!("--lists {value}: not a number"))?;
                }
                "--out" => asked.out = Some(PathBuf::from(value()?)),
                "--plan" => {
                    let value = value()?;
                    let names = PLANS.map(|(plan, _)| plan.name);
                    if !names.contains(&value.as_str()) {
                        return Err(format!("--plan {value}: known are {}", names.join(", ")));
                    }
                    asked.plan = Some(value);
                }
                shape if known.contains(&shape) => asked.shapes.push(word),
                _ => return Err(format!("{word}: known shapes are {}", known.join(", "))),
            }
        }
        if asked.shapes.is_empty() {
            asked.shapes = known.into_iter().map(str::to_owned).collect();
        }
        Ok(asked)
    }
}

/// A row of the table.
fn row(subject: &Subject, plan: &Plan, tally: &Tally) -> String {
    let number = |value: Option<f64>| value.map_or(String::new(), |value| format!("{value:.4}"));
    let confidence = tally
        .confidence
        .map(|(told, right)| format!("{told},{right}"))
        .join(",");
    let (prediction, percent) = (&subject.prediction, 100.0 * tally.recall());
    let columns = [
        group(&subject.name).to_string(),
        subject.name.clone(),
        plan.name.to_owned(),
        tally.lists.to_string(),
        tally.planted.to_string(),
        tally.found.to_string(),
        format!("{percent:.2}"),
        tally.shifted.to_string(),
        tally.beyond.to_string(),
        tally.unseen.to_string(),
        tally.false_reports.to_string(),
        number(tally.misplacement(0.5)),
        number(tally.misplacement(0.9)),
        number(tally.coverage()),
        tally.runs.to_string(),
        tally.runs_right.to_string(),
        confidence,
        tally.unresolved.to_string(),
        tally.refused.to_string(),
        tally.trends.to_string(),
        format!("{:.2}", prediction.max_length),
        prediction.terms.len().to_string(),
    ];
    columns.join(",")
}

/// Makes the trial and returns its table.
#[allow(
    clippy::print_stdout,
    clippy::print_stderr,
    reason = "a bench tells what it measures"
)]
fn table(asked: &Asked) -> String {
    let mut table = format!("{COLUMNS}\n");
    println!("{COLUMNS}");
    for shape in &asked.shapes {
        let started = Instant::now();
        let subject = Subject::new(shape);
        eprintln!("# {shape}: orbits in {:.1?}", started.elapsed());
        for (plan, last_group) in &PLANS {
            let wanted = asked.plan.as_ref().is_none_or(|name| name == plan.name);
            if !wanted || group(shape) > *last_group {
                continue;
            }
            let lists = if *plan == Plan::CLEAN {
                CLEAN_LISTS
            } else {
                asked.lists
            };
            let started = Instant::now();
            let tally = if plan.orbits {
                trial(&subject, plan, lists)
            } else {
                trial(&subject.without_orbits(), plan, lists)
            };
            let row = row(&subject, plan, &tally);
            println!("{row}");
            eprintln!("# {lists} lists in {:.1?}", started.elapsed());
            for remark in tally.remarks.iter().filter(|_| asked.remarks) {
                eprintln!("#   {remark}");
            }
            table.push_str(&row);
            table.push('\n');
        }
    }
    table
}

/// Writes to a file beside it and renames.
fn write(path: &Path, table: &str) -> std::io::Result<()> {
    let folder = path.parent().filter(|folder| folder.is_dir());
    let mut file = tempfile::NamedTempFile::new_in(folder.unwrap_or(Path::new(".")))?;
    writeln!(
        file,
        "# computed for this project: cargo bench --bench audit_trial"
    )?;
    file.write_all(table.as_bytes())?;
    file.persist(path)?;
    Ok(())
}

#[allow(
    clippy::print_stderr,
    reason = "a bench says what is wrong with its call"
)]
fn main() -> ExitCode {
    let asked = match Asked::read(std::env::args().skip(1)) {
        Ok(asked) => asked,
        Err(message) => {
            eprintln!("{message}");
            return ExitCode::from(2);
        }
    };
    let table = table(&asked);
    if let Some(path) = &asked.out
        && let Err(error) = write(path, &table)
    {
        eprintln!("{}: {error}", path.display());
        return ExitCode::FAILURE;
    }
    ExitCode::SUCCESS
}
