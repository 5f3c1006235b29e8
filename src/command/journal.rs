//! The journal of a long computation: finished windows, one a line, so that an interruption loses only the windows at work.
//!
//! The first line says what is computed. Every further line holds one window: numbers as the hexadecimal digits of their bits
//! (so that they come back exactly), and a checksum at its end. A line that was not written to its end does not count.

use super::direct::Task;
use super::error::CommandError;
use super::subject::Subject;
use orbitsum::solver::{Level, Window, WindowLevels};
use serde_json::{Map, Value, json};
use std::fs::{File, OpenOptions};
use std::io::{self, Seek, SeekFrom, Write};
use std::path::{Path, PathBuf};

/// Points per wall that tell one shape from another: more than enough, since parameters and name are compared as well.
const POINTS_PER_WALL: usize = 64;

/// What was found where the journal is kept.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) enum Opened {
    /// No journal, or one without a finished window.
    New,
    /// One of the same computation.
    GoesOn {
        /// Windows in it.
        windows: usize,
    },
    /// One of another computation.
    Replaced {
        /// What is different.
        differing: Vec<String>,
    },
}

/// A journal that windows are added to.
#[derive(Debug)]
pub(super) struct Journal {
    path: PathBuf,
    file: File,
    /// What was found.
    pub(super) opened: Opened,
    finished: Vec<WindowLevels>,
}

/// What levels depend on, as one line of text.
pub(super) fn fingerprint(subject: &Subject, task: &Task) -> String {
    let system = &subject.system;
    let parameters: Map<String, Value> = system
        .parameters
        .iter()
        .map(|(name, value)| (name.clone(), json!(value)))
        .collect();
    let mut shape = Checksum::default();
    for wall in &system.domain.walls {
        shape.add(format!("{:?}{:?}", wall.condition, wall.twin).as_bytes());
        for index in 0..=POINTS_PER_WALL {
            let point = wall.point(wall.extent() * index as f64 / POINTS_PER_WALL as f64);
            shape.add(&point.x.to_bits().to_le_bytes());
            shape.add(&point.y.to_bits().to_le_bytes());
        }
    }
    json!({
        "version": env!("CARGO_PKG_VERSION"),
        "system": system.name,
        "parameters": parameters,
        "shape": shape.text(),
        "symmetry": subject.symmetry.name,
        "class": subject.class.as_ref().map(|irrep| irrep.name.as_str()),
        "window": [task.window.from, task.window.to],
        "accuracy": task.accuracy,
    })
    .to_string()
}

impl Journal {
    /// Opens the journal at `path` for a computation in the given windows, and reads what of it is finished.
    pub(super) fn open(
        path: &Path,
        fingerprint: &str,
        windows: &[Window],
    ) -> Result<Self, CommandError> {
        let wrong = |source| CommandError::Write {
            path: path.to_owned(),
            source,
        };
        let bytes = match std::fs::read(path) {
            Err(error) if error.kind() == io::ErrorKind::NotFound => Vec::new(),
            read => read.map_err(wrong)?,
        };
        let text = String::from_utf8_lossy(&bytes);
        let mut finished = Vec::new();
        let mut kept = 0;
        let opened = match text.split_once('\n') {
            None => Opened::New,
            Some((first, rest)) if first == fingerprint => {
                kept = first.len() + 1;
                for (line, window) in rest.split_inclusive('\n').zip(windows) {
                    let Some(levels) = line
                        .strip_suffix('\n')
                        .and_then(|line| read_line(line, *window))
                    else {
                        break;
                    };
                    kept += line.len();
                    finished.push(levels);
                }
                match finished.len() {
                    0 => Opened::New,
                    windows => Opened::GoesOn { windows },
                }
            }
            Some((first, _)) => Opened::Replaced {
                differing: differing(first, fingerprint),
            },
        };
        let mut file = OpenOptions::new()
            .create(true)
            .truncate(false)
            .write(true)
            .open(path)
            .map_err(wrong)?;
        file.set_len(kept as u64).map_err(wrong)?;
        file.seek(SeekFrom::Start(kept as u64)).map_err(wrong)?;
        if kept == 0 {
            file.write_all(format!("{fingerprint}\n").as_bytes())
                .map_err(wrong)?;
        }
        Ok(Self {
            path: path.to_owned(),
            file,
            opened,
            finished,
        })
    }

    /// The windows that were in the journal when it was opened.
    pub(super) fn finished(&mut self) -> Vec<WindowLevels> {
        std::mem::take(&mut self.finished)
    }

    /// Adds the next window.
    pub(super) fn add(&mut self, window: &WindowLevels) -> Result<(), CommandError> {
        self.file
            .write_all(line(window).as_bytes())
            .and_then(|()| self.file.flush())
            .map_err(|source| CommandError::Write {
                path: self.path.clone(),
                source,
            })
    }
}

/// Names of what is different in two fingerprints.
fn differing(found: &str, wanted: &str) -> Vec<String> {
    let read =
        |text: &str| -> Map<String, Value> { serde_json::from_str(text).unwrap_or_default() };
    let (found, wanted) = (read(found), read(wanted));
    let names: Vec<String> = wanted
        .iter()
        .filter(|&(name, value)| found.get(name) != Some(value))
        .map(|(name, _)| name.clone())
        .collect();
    if found.is_empty() || names.is_empty() {
        vec!["kind".to_owned()]
    } else {
        names
    }
}

/// One window as a line.
fn line(window: &WindowLevels) -> String {
    let mut fields = vec![
        bits(window.window.from),
        bits(window.window.to),
        window.below.to_string(),
        window.counted.to_string(),
        usize::from(window.complete).to_string(),
        window.levels.len().to_string(),
    ];
    for level in &window.levels {
        fields.extend([
            bits(level.k),
            bits(level.error),
            level.multiplicity.to_string(),
            level.forced.to_string(),
        ]);
    }
    let text = fields.join(" ");
    format!("{text} {}\n", Checksum::of(text.as_bytes()).text())
}

/// A window back from its line; nothing if the line is damaged or of another window.
fn read_line(line: &str, window: Window) -> Option<WindowLevels> {
    let (text, sum) = line.rsplit_once(' ')?;
    if Checksum::of(text.as_bytes()).text() != sum {
        return None;
    }
    let mut fields = text.split(' ');
    let found = Window {
        from: number(fields.next()?)?,
        to: number(fields.next()?)?,
    };
    if found != window {
        return None;
    }
    let mut count = || fields.next()?.parse::<usize>().ok();
    let (below, counted, complete, levels) = (count()?, count()?, count()? == 1, count()?);
    let levels: Option<Vec<Level>> = (0..levels)
        .map(|_| {
            Some(Level {
                k: number(fields.next()?)?,
                error: number(fields.next()?)?,
                multiplicity: fields.next()?.parse().ok()?,
                forced: fields.next()?.parse().ok()?,
            })
        })
        .collect();
    Some(WindowLevels {
        window,
        levels: levels?,
        below,
        counted,
        complete,
    })
}

fn bits(value: f64) -> String {
    format!("{:016x}", value.to_bits())
}

fn number(text: &str) -> Option<f64> {
    u64::from_str_radix(text, 16).ok().map(f64::from_bits)
}

/// A 64-bit checksum that is the same on every machine: FNV-1a (Fowler, Noll & Vo; constants from memory).
#[derive(Clone, Copy, Debug)]
struct Checksum(u64);

impl Default for Checksum {
    fn default() -> Self {
        Self(0xcbf2_9ce4_8422_2325)
    }
}

impl Checksum {
    fn of(bytes: &[u8]) -> Self {
        let mut sum = Self::default();
        sum.add(bytes);
        sum
    }

    fn add(&mut self, bytes: &[u8]) {
        for byte in bytes {
            self.0 = (self.0 ^ u64::from(*byte)).wrapping_mul(0x0000_0100_0000_01b3);
        }
    }

    fn text(self) -> String {
        format!("{:016x}", self.0)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn windows() -> Vec<Window> {
        [0.0, 0.1 + 0.2, 7.0, 1e3 / 3.0]
            .windows(2)
            .map(|pair| Window {
                from: pair[0],
                to: pair[1],
            })
            .collect()
    }

    fn levels(window: Window) -> WindowLevels {
        let level = |share: f64| Level {
            k: window.from + share * (window.to - window.from),
            error: 1e-13 * share,
            multiplicity: 2,
            forced: 1,
        };
        WindowLevels {
            window,
            levels: vec![level(1.0 / 3.0), level(0.7)],
            below: 17,
            counted: 4,
            complete: true,
        }
    }

    #[test]
    fn windows_come_back_exactly() {
        for window in windows() {
            let written = line(&levels(window));
            let back = read_line(written.trim_end(), window);
            assert_eq!(back, Some(levels(window)));
        }
    }

    #[test]
    fn a_journal_cut_anywhere_goes_on_to_the_same_end() {
        let folder = tempfile::tempdir().expect("a temporary folder");
        let path = folder.path().join("levels.partial");
        let complete = |expected: &dyn Fn(&Opened) -> bool| {
            let mut journal = Journal::open(&path, "{\"a\":1}", &windows()).expect("opens");
            assert!(expected(&journal.opened), "{:?}", journal.opened);
            let finished = journal.finished();
            for (window, kept) in windows().iter().zip(&finished) {
                assert_eq!(*kept, levels(*window));
            }
            for window in &windows()[finished.len()..] {
                journal.add(&levels(*window)).expect("written");
            }
            std::fs::read(&path).expect("readable")
        };
        let whole = complete(&|opened| *opened == Opened::New);
        for length in 0..=whole.len() {
            std::fs::write(&path, &whole[..length]).expect("written");
            assert!(complete(&|opened| !matches!(opened, Opened::Replaced { .. })) == whole);
        }
        // A damaged byte ends what counts.
        let mut damaged = whole.clone();
        let place = whole.len() - 30;
        damaged[place] ^= 1;
        std::fs::write(&path, &damaged).expect("written");
        assert!(complete(&|opened| *opened == Opened::GoesOn { windows: 2 }) == whole);
    }

    #[test]
    fn another_computation_is_told_by_what_differs() {
        let folder = tempfile::tempdir().expect("a temporary folder");
        let path = folder.path().join("levels.partial");
        let open = |text: &str| {
            Journal::open(&path, text, &windows())
                .expect("opens")
                .opened
        };
        assert_eq!(open("{\"a\":1,\"b\":2}"), Opened::New);
        assert_eq!(
            open("{\"a\":1,\"b\":3}"),
            Opened::Replaced {
                differing: vec!["b".to_owned()]
            }
        );
        std::fs::write(&path, "something else\n").expect("written");
        assert_eq!(
            open("{\"a\":1}"),
            Opened::Replaced {
                differing: vec!["kind".to_owned()]
            }
        );
    }
}
