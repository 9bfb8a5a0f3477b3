//! The texts of a model's parts, laid one behind the other, so that a place in any of them is one number.

use std::path::{Path, PathBuf};

use crate::model::fault::{Fault, Faults, MOST_REPORTED};
use crate::model::read::csv;
use crate::model::read::findings::Span;
use crate::model::read::source::{Places, Source};

/// The text of one part.
#[derive(Debug)]
pub(super) struct Sheet<'a> {
    /// The part's file.
    path: PathBuf,
    /// Its text, without byte order mark.
    pub(super) text: &'a str,
    /// Where its first byte lies.
    pub(super) base: usize,
    /// What it holds if it is CSV; else it is TOML.
    pub(super) csv: Option<csv::Kind>,
}

impl Sheet<'_> {
    pub(super) fn source(&self) -> Source<'_> {
        Source { path: &self.path, text: self.text }
    }

    /// The part's name.
    pub(super) fn name(&self) -> String {
        self.path.file_name().unwrap_or_default().to_string_lossy().into_owned()
    }
}

/// The parts of one model, in the order of their names.
#[derive(Debug)]
pub(super) struct Sheets<'a> {
    /// The folder.
    path: &'a Path,
    sheets: Vec<Sheet<'a>>,
    /// Where the next part would begin. A fault of the folder as a whole stands at 0, before all parts.
    end: usize,
}

impl<'a> Sheets<'a> {
    /// No parts yet of the model in the folder `path`.
    pub(super) fn of(path: &'a Path) -> Self {
        Self { path, sheets: Vec::new(), end: 1 }
    }

    /// Lays a part behind those that are there.
    pub(super) fn push(&mut self, path: PathBuf, text: &'a str, csv: Option<csv::Kind>) {
        let base = self.end;
        // The place behind the last byte belongs to a part too.
        self.end += text.len() + 1;
        self.sheets.push(Sheet { path, text, base, csv });
    }

    pub(super) fn iter(&self) -> impl Iterator<Item = &Sheet<'a>> {
        self.sheets.iter()
    }

    /// The part in which a place lies, and the place within it; `None` for the folder as a whole.
    pub(super) fn at(&self, place: usize) -> Option<(&Sheet<'a>, usize)> {
        let after = self.sheets.partition_point(|sheet| sheet.base <= place);
        let sheet = self.sheets.get(after.checked_sub(1)?)?;
        Some((sheet, place - sheet.base))
    }

    /// A place in words: `prices.toml on line 3`.
    pub(super) fn told(&self, place: usize) -> String {
        match self.at(place) {
            Some((sheet, at)) => format!("in {} on line {}", sheet.name(), sheet.source().line(at)),
            None => "here".to_owned(),
        }
    }
}

impl Places for &Sheets<'_> {
    fn fault(&self, span: Span, code: &'static str, message: String, help: String) -> Fault {
        let Some((sheet, at)) = self.at(span.start) else {
            return self.whole(code, message, &help);
        };
        // Whoever wrote it in a spreadsheet knows cells, not lines.
        let message = match sheet.csv.and_then(|_| csv::called(sheet.text, at)) {
            Some(cell) => format!("cell {cell}: {message}"),
            None => message,
        };
        sheet.source().fault(at..at + span.len(), code, message, help)
    }

    fn whole(&self, code: &'static str, message: String, help: &str) -> Fault {
        Fault { path: self.path.to_owned(), place: None, code, message, help: help.to_owned() }
    }
}

/// The faults of several parts as those of one model: the first of them are told, and the others counted.
pub(super) fn together(all: impl IntoIterator<Item = Faults>) -> Faults {
    let mut faults = Faults::default();
    for Faults { reported, more } in all {
        faults.reported.extend(reported);
        faults.more += more;
    }
    faults.more += faults.reported.len().saturating_sub(MOST_REPORTED);
    faults.reported.truncate(MOST_REPORTED);
    faults
}
