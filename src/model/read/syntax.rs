//! From text to tables: the TOML parser, and its complaints in plain words.

use toml::Spanned;
use toml::de::{DeTable, Error};

use super::duplicate;
use super::findings::{Findings, Span, shown};
use super::source::Source;
use super::toml_types::Table;
use crate::model::fault::{Faults, MOST_REPORTED};
use crate::model::types::Model;

/// The largest text in which the parser looks for more than one fault: recovering takes it many times the memory.
const MOST_RECOVERED: usize = 1024 * 1024;
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
    let mut placed: Vec<(Span, &Error)> = errors.iter().map(|error| (span(source, error), error)).collect();
    placed.sort_by_key(|(span, _)| span.start);
    // What follows on the same line is mostly the first fault again.
    let mut line_end = 0;
    placed.retain(|(span, _)| {
        let first = span.start >= line_end;
        if first {
            let (start, line) = source.line_at(span.start);
            line_end = start + line.len() + 1;
        }
        first
    });
    let mut findings = Findings::default();
    findings.pass_over(placed.len().saturating_sub(MOST_REPORTED));
    for (span, error) in placed.into_iter().take(MOST_REPORTED) {
        tell(source, &span, error.message(), &mut findings);
    }
    findings.finish(source, &Model::default())
}

/// The fault that two versions were merged and not reconciled.
fn conflict(source: Source<'_>) -> Option<Faults> {
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
    if told == "duplicate key" {
        return duplicate::tell(source, span, findings);
    }
    if decimal_comma(source.text, span) {
        let message = "a number is written with a decimal point, not a comma".to_owned();
        return findings.add(span, "syntax", message, "write 0.02, not 0,02");
    }
    let (code, message, help) = plain(told);
    findings.add(span, code, message.unwrap_or_else(|| shown(told)), help);
}

/// Whether a comma between two digits is what the parser stumbled over, just before the span or in it.
fn decimal_comma(text: &str, span: &Span) -> bool {
    let bytes = text.as_bytes();
    let digit = |at: Option<usize>| at.and_then(|at| bytes.get(at)).is_some_and(u8::is_ascii_digit);
    let comma = |at: usize| bytes.get(at) == Some(&b',') && digit(at.checked_sub(1)) && digit(Some(at + 1));
    let before = bytes[..span.start.min(bytes.len())].iter().rev().take_while(|byte| byte.is_ascii_digit()).count();
    comma(span.start) || span.start.checked_sub(before + 1).is_some_and(comma)
}

/// The parser's complaint in plain words, with its code and cure.
fn plain(told: &str) -> (&'static str, Option<String>, &'static str) {
    let words = |code, message: &str, help| (code, Some(message.to_owned()), help);
    let begins = |start: &str| told.starts_with(start);
    if begins("cannot recurse further") || begins("recursion limit") {
        return words("too-deep", "tables or keys are nested too deeply", "a model nests at most a few levels");
    }
    if begins("string values must be quoted") {
        return words("syntax", "a text must stand in double quotes", "numbers and true or false stand without");
    }
    if begins("key with no value") {
        return words("syntax", "a key without `=`", "write KEY = VALUE, or begin a comment with #");
    }
    if begins("missing value") {
        return words("syntax", "nothing stands behind `=`", "write a value there, or take the line out");
    }
    if begins("unexpected key or value") {
        return words(
            "syntax",
            "something follows the value on the same line",
            "begin a new line, or a comment with #",
        );
    }
    if begins("unclosed table") || begins("unclosed array table") {
        return words("syntax", "a table's name is not closed", "close it with `]`");
    }
    if begins("unclosed array") {
        return words("syntax", "a list is not closed", "close it with `]`");
    }
    if begins("unclosed inline table") {
        return words("syntax", "a table is not closed", "close it with `}`");
    }
    if begins("missing comma") {
        return words("syntax", "a comma is missing", "put a comma between any two entries");
    }
    if begins("extra comma") {
        return words("syntax", "a comma too many", "take it out");
    }
    if begins("extra `=`") {
        return words("syntax", "`=` stands twice", "take one out");
    }
    if begins("missing assignment") || begins("missing key for inline table") || begins("invalid inline table") {
        return words("syntax", "an entry of a table must be KEY = VALUE", "write for example { kiln = 0.02 }");
    }
    if begins("invalid unquoted key") {
        return words("syntax", "a sign that a key holds only in quotes", "put the key in double quotes");
    }
    if told.contains("string") {
        return words("syntax", "a text is not closed, or holds a sign it cannot", "close it with a double quote");
    }
    if begins("unexpected leading zero") {
        return words("syntax", "a number does not begin with 0", "take the leading 0 out");
    }
    if begins("cannot extend value") {
        return words("syntax", "this name already stands for a value, not a table", "rename one of the two");
    }
    if told.contains("float") || told.contains("integer") || told.contains("digit") {
        return words("syntax", "this is not a number", "write for example 168, 0.02 or 1e6");
    }
    ("syntax", None, "")
}
