//! How the parts of a note are drawn: headings, tables, names in a row.

use super::words::{labelled, listed};
use crate::model::escape::Markdown;
use crate::model::{Model, Name};

/// The most rows of any table; the rest are counted.
pub(super) const ROWS: usize = 15;

/// The most names told in a row.
const NAMES: usize = 6;

/// The name of an activity with its label.
pub(super) fn name_of_activity(model: Option<&Model>, name: &Name) -> String {
    labelled(name, model.and_then(|model| model.activities.get(name)?.label.as_deref()))
}

/// Names in a row, each with what is to be said of it; the first of them where there are many.
pub(super) fn few(names: &[Name], of_each: impl Fn(&Name) -> String) -> String {
    let one = |name: &Name| format!("{}{}", Markdown(name.as_str()), of_each(name));
    let mut told: Vec<String> = names.iter().take(NAMES).map(one).collect();
    if names.len() > NAMES {
        told.push(format!("{} more", names.len() - NAMES));
    }
    listed(&told)
}

/// A part of a note under its heading; empty without a body.
pub(super) fn section(title: &str, body: &str) -> String {
    if body.is_empty() { String::new() } else { format!("\n## {title}\n\n{}\n", body.trim_matches('\n')) }
}

/// A table of at most [`ROWS`] rows, then how many there are beyond; empty without rows. The first column is text,
/// then come `numbers` columns of numbers, then text again.
pub(super) fn table(header: &[&str], numbers: usize, rows: &[Vec<String>], beyond: &str) -> String {
    if rows.is_empty() {
        return String::new();
    }
    let rule = |column: usize| if (1..=numbers).contains(&column) { " ---: |" } else { " --- |" };
    let rules: String = (0..header.len()).map(rule).collect();
    let mut out = format!("| {} |\n|{rules}\n", header.join(" | "));
    for row in rows.iter().take(ROWS) {
        out.push_str(&format!("| {} |\n", row.join(" | ")));
    }
    if rows.len() > ROWS {
        let more = rows.len() - ROWS;
        out.push_str(&format!("\n… and {more} {beyond}.\n"));
    }
    out
}
