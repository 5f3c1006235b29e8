//! What a command found out, ready to be written.

use super::arguments::Format;
use super::error::CommandError;
use super::note::Note;
use super::options::Options;
use super::output;
use super::table::Table;
use serde_json::{Map, Value};
use std::path::PathBuf;

/// The result of a command.
#[derive(Debug)]
pub(super) struct Answer {
    /// Name of the command and of its files.
    pub(super) name: &'static str,
    /// For people: what comes before the table.
    pub(super) summary: String,
    /// For people: the table, or the part of it that fits on a page.
    pub(super) shown: Table,
    /// All rows.
    pub(super) table: Table,
    /// Further tables, each with the word that its file's name ends in.
    pub(super) more_tables: Vec<(&'static str, Table)>,
    /// What the rows depend on.
    pub(super) metadata: Map<String, Value>,
    /// What the user should know.
    pub(super) notes: Vec<Note>,
    /// Pictures: name of the file and content.
    pub(super) pictures: Vec<(String, String)>,
    /// A file that is of no use any more once the files of this answer are written.
    pub(super) obsolete: Option<PathBuf>,
    /// What is wrong with the result, where something is: it is delivered all the same.
    pub(super) failure: Option<CommandError>,
}

impl Answer {
    /// Writes files, then standard output, then reports what is wrong.
    pub(super) fn deliver(self, options: &Options) -> Result<(), CommandError> {
        self.write(options)?;
        self.failure.map_or(Ok(()), Err)
    }

    fn write(&self, options: &Options) -> Result<(), CommandError> {
        let mut written = Vec::new();
        if let Some(folder) = &options.folder {
            written.push(folder.write(&format!("{}.csv", self.name), &self.table.csv())?);
            for (word, table) in &self.more_tables {
                let name = format!("{}-{word}.csv", self.name);
                written.push(folder.write(&name, &table.csv())?);
            }
            written.push(folder.write(&format!("{}.json", self.name), &self.json())?);
            for (name, content) in &self.pictures {
                written.push(folder.write(name, content)?);
            }
        }
        if let Some(path) = &self.obsolete {
            // One that stays is of no harm: it is found to be complete the next time.
            let _ = std::fs::remove_file(path);
        }
        match options.format {
            Format::Table => {
                let mut text = self.for_people();
                for path in written {
                    text += &format!("written: {}\n", path.display());
                }
                output::print(&text)
            }
            Format::Csv | Format::Json => {
                if !options.quiet {
                    for note in &self.notes {
                        output::remark(&note.line());
                    }
                }
                let text = if options.format == Format::Csv {
                    self.table.csv()
                } else {
                    self.json()
                };
                output::print(&text)
            }
        }
    }

    fn for_people(&self) -> String {
        let mut text = self.summary.clone();
        if !self.shown.rows.is_empty() {
            text += &format!("\n{}", self.shown.aligned());
        }
        if !self.notes.is_empty() {
            text.push('\n');
            for note in &self.notes {
                text += &note.line();
                text.push('\n');
            }
        }
        text
    }

    fn json(&self) -> String {
        let mut object = self.metadata.clone();
        let notes = self.notes.iter().map(|note| Value::from(note.to_string()));
        object.insert("notes".into(), notes.collect());
        object.insert("rows".into(), self.table.json());
        format!("{:#}\n", Value::Object(object))
    }
}
