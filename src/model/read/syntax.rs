//! From text to tables: the TOML parser, and its complaints in plain words.

use toml::Spanned;
use toml::de::{DeTable, Error};

use super::findings::{Findings, Span, shown};
use super::source::Source;
use super::toml_types::Table;
use super::{complaints, duplicate};
use crate::model::fault::{Faults, MOST_REPORTED};
use crate::model::name::Name;
use crate::model::types::Model;

/// The largest text in which the parser looks for more than one fault: recovering takes it many times the memory.
const MOST_RECOVERED: usize = 1024 * 1024;
/// The parser's words for a key given twice.
const DUPLICATE: &str = "duplicate key";
/// The deepest nesting that the parser follows.
const DEEPEST: usize = 80;

/// The tables of a document.
///
/// # Errors
/// What keeps the text from being TOML: one fault a line, or a single one for a merge conflict.
pub(super) fn parse(source: Source<'_>) -> Result<Spanned<Table<'_>>, Faults> {
    match DeTable::parse(source.text) {
        Ok(root) => Ok(root),
        Err(error) => Err(faults(source, error)),
    }
}

fn faults(source: Source<'_>, first: Error) -> Faults {
    if let Some(faults) = conflict(source) {
        return faults;
    }
    let errors =
        if source.text.len() <= MOST_RECOVERED { DeTable::parse_recoverable(source.text).1 } else { vec![first] };
    let mut placed: Vec<(Span, &str)> = errors.iter().map(|error| (span(source, error), error.message())).collect();
    placed.sort_by_key(|(span, _)| span.start);
    let mut echo = Echo::default();
    placed.retain(|(span, told)| !echo.is_one(source, span, told));
    let mut findings = Findings::default();
    findings.pass_over(placed.len().saturating_sub(MOST_REPORTED));
    for (span, told) in placed.into_iter().take(MOST_REPORTED) {
        tell(source, &span, told, &mut findings);
    }
    findings.finish(source, &Model::default())
}

/// Knows complaints that are only echoes of an earlier one.
#[derive(Default)]
struct Echo {
    /// Where the line of the last complaint ends.
    line_end: usize,
    /// Whether a complaint other than a key given twice has been seen: tables may have run together from there.
    garbled: bool,
    /// Whether something was left open: all that follows is guesswork.
    open: bool,
    /// Where the table given twice ends: its keys are all given twice.
    table_end: usize,
}

impl Echo {
    fn is_one(&mut self, source: Source<'_>, span: &Span, told: &str) -> bool {
        let twice = told == DUPLICATE;
        if self.open || span.start < self.line_end || (twice && (self.garbled || span.start < self.table_end)) {
            return true;
        }
        let (start, line) = source.line_at(span.start);
        self.line_end = start + line.len() + 1;
        self.garbled |= !twice;
        self.open = left_open(source, span, told);
        if twice && line.trim_start().starts_with('[') {
            let from = start + line.len();
            let rest = source.text.get(from..).unwrap_or_default();
            self.table_end = from + rest.find("\n[").unwrap_or(rest.len());
        }
        false
    }
}

/// Whether the parser, still inside a list or a table, stumbled over a line that reads as one of its own.
fn left_open(source: Source<'_>, span: &Span, told: &str) -> bool {
    let inside =
        ["missing comma", "missing assignment", "missing key for inline", "invalid inline", "unexpected `=` in"];
    let (start, line) = source.line_at(span.start);
    let first = line.len() - line.trim_start().len() + start == span.start;
    let key = line.split_once('=').is_some_and(|(key, _)| Name::new(key.trim()).is_ok());
    first && (key || line.trim_start().starts_with('[')) && inside.iter().any(|start| told.starts_with(start))
}

/// The fault that two versions were merged and not reconciled.
pub(super) fn conflict(source: Source<'_>) -> Option<Faults> {
    let mark = |line: &str| line.starts_with("<<<<<<< ") || line.starts_with(">>>>>>> ");
    let at = if source.text.starts_with("<<<<<<< ") {
        0
    } else {
        let found = source.text.match_indices('\n').find(|(at, _)| mark(&source.text[at + 1..]))?;
        found.0 + 1
    };
    let message = format!("merge conflict at line {}", source.line(at));
    let help = "choose one of the two versions, and take the conflict marks out";
    let mut findings = Findings::default();
    findings.add(&(at..at + 7), "merge-conflict", message, help);
    Some(findings.finish(source, &Model::default()))
}

/// Where an error stands. A key of too many parts has no place of its own: it stands on the first line with that many dots.
fn span(source: Source<'_>, error: &Error) -> Span {
    if let Some(span) = error.span() {
        return span;
    }
    let mut start = 0;
    for line in source.text.split_inclusive('\n') {
        if line.bytes().filter(|&byte| byte == b'.').count() >= DEEPEST {
            break;
        }
        start += line.len();
    }
    start..start
}

fn tell(source: Source<'_>, span: &Span, told: &str, findings: &mut Findings) {
    if told == DUPLICATE {
        return duplicate::tell(source, span, findings);
    }
    if left_open(source, span, told) {
        let end = source.text[..span.start].trim_end().len();
        let message = "a comma, or a closing `]` or `}`, is missing at the end of this line".to_owned();
        return findings.add(&(end..end), "syntax", message, "close what was opened in this line or above it");
    }
    if told.starts_with("invalid multi-line") && span.start >= source.text.len() {
        let quotes = source.text.rfind("\"\"\"").max(source.text.rfind("'''")).unwrap_or(span.start);
        let message = "a text in triple quotes is not closed".to_owned();
        return findings.add(&(quotes..quotes + 3), "syntax", message, "close it with the same three quotes");
    }
    if decimal_comma(source.text, span) {
        let message = "a number is written with a decimal point, not a comma".to_owned();
        return findings.add(span, "syntax", message, "write 0.02, not 0,02");
    }
    let here = source.text.get(span.clone()).unwrap_or_default();
    let next = source.text.get(span.start..).and_then(|rest| rest.chars().next());
    if told.starts_with("string values must be quoted") {
        let (message, help) = not_a_value(here);
        return findings.add(span, "syntax", message, help);
    }
    if next == Some(':') {
        return findings.add(span, "syntax", "`:` stands where `=` is meant".to_owned(), "write KEY = VALUE");
    }
    let (code, message, help) = complaints::plain(told);
    findings.add(span, code, message.map_or_else(|| shown(told), str::to_owned), help);
}

/// What to say of words that stand where a value is meant.
fn not_a_value(words: &str) -> (String, String) {
    let words = words.trim();
    if words.is_empty() {
        let message = "nothing stands behind `=`".to_owned();
        return (message, "write a value there, or take the line out".to_owned());
    }
    let message = format!("`{}` is neither a number nor a text", shown(words));
    if words.starts_with(|first: char| first.is_ascii_digit()) {
        return (message, "a number stands without its unit, and a comma between any two entries".to_owned());
    }
    (message, format!("put a text in double quotes: \"{}\"", shown(words)))
}

/// Whether a comma between two digits is what the parser stumbled over, just before the span or in it.
fn decimal_comma(text: &str, span: &Span) -> bool {
    let bytes = text.as_bytes();
    let digit = |at: Option<usize>| at.and_then(|at| bytes.get(at)).is_some_and(u8::is_ascii_digit);
    let comma = |at: usize| bytes.get(at) == Some(&b',') && digit(at.checked_sub(1)) && digit(Some(at + 1));
    let before = bytes[..span.start.min(bytes.len())].iter().rev().take_while(|byte| byte.is_ascii_digit()).count();
    comma(span.start) || span.start.checked_sub(before + 1).is_some_and(comma)
}
