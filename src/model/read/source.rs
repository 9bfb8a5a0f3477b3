//! The text of one model file, and where in it a span of bytes lies.

use std::ops::Range;
use std::path::Path;

use crate::model::fault::{Excerpt, Fault, Place};

/// Characters of a line that an excerpt shows before the place.
const SHOWN_BEFORE: usize = 40;
/// Characters of a line that an excerpt shows at most.
const SHOWN: usize = 80;

/// Where places lie: in one text, or in one of several.
pub(super) trait Places {
    /// A fault at a span.
    fn fault(&self, span: Range<usize>, code: &'static str, message: String, help: String) -> Fault;

    /// A fault of all of it.
    fn whole(&self, code: &'static str, message: String, help: &str) -> Fault;
}

/// A model file's text, without byte order mark. Spans are byte offsets into it.
#[derive(Clone, Copy, Debug)]
pub(super) struct Source<'a> {
    /// The file, as it was given.
    pub(super) path: &'a Path,
    /// What it holds.
    pub(super) text: &'a str,
}

impl Places for Source<'_> {
    fn fault(&self, span: Range<usize>, code: &'static str, message: String, help: String) -> Fault {
        Fault { path: self.path.to_owned(), place: Some(self.place(span)), code, message, help }
    }

    fn whole(&self, code: &'static str, message: String, help: &str) -> Fault {
        Fault { path: self.path.to_owned(), place: None, code, message, help: help.to_owned() }
    }
}

impl<'a> Source<'a> {
    /// The line, from 1, that holds the byte at `offset`.
    pub(super) fn line(self, offset: usize) -> usize {
        self.upto(offset).bytes().filter(|&byte| byte == b'\n').count() + 1
    }

    /// The text of the line that holds the byte at `offset`, without its line end, and where it starts.
    pub(super) fn line_at(self, offset: usize) -> (usize, &'a str) {
        let before = self.upto(offset);
        let start = before.rfind('\n').map_or(0, |at| at + 1);
        let end = self.text[before.len()..].find('\n').map_or(self.text.len(), |at| before.len() + at);
        let line = &self.text[start..end];
        (start, line.strip_suffix('\r').unwrap_or(line))
    }

    /// A place as an editor counts it. Costs a pass over the text before it, so only faults ask.
    pub(super) fn place(self, span: Range<usize>) -> Place {
        let (start, line) = self.line_at(span.start);
        let at = floor(line, self.upto(span.start).len() - start);
        let end = floor(line, span.end.saturating_sub(start)).max(at);
        Place {
            line: self.line(span.start),
            column: line[..at].chars().count() + 1,
            width: line[at..end].chars().count().max(1),
            excerpt: excerpt(line, at),
        }
    }

    fn upto(self, offset: usize) -> &'a str {
        &self.text[..floor(self.text, offset)]
    }
}

/// The last border between characters at or before `offset`.
fn floor(text: &str, offset: usize) -> usize {
    text.floor_char_boundary(offset)
}

/// The part of `line` around the byte `at`.
fn excerpt(line: &str, at: usize) -> Excerpt {
    let (left, right) = line.split_at(at);
    let shown_left = left.char_indices().rev().take(SHOWN_BEFORE).last().map_or(at, |(start, _)| start);
    let before = left[shown_left..].chars().count();
    let shown_right = right.char_indices().nth(SHOWN - before).map_or(line.len(), |(end, _)| at + end);
    Excerpt {
        text: line[shown_left..shown_right].to_owned(),
        before,
        cut_left: shown_left > 0,
        cut_right: shown_right < line.len(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn place(text: &str, span: Range<usize>) -> Place {
        Source { path: Path::new("m"), text }.place(span)
    }

    #[test]
    fn columns_count_characters_and_lines_may_end_in_crlf() {
        let text = "a = 1\r\nпечь = кiln\r\n";
        let at = text.find("кiln").unwrap();
        let found = place(text, at..at + "кiln".len());
        assert_eq!((found.line, found.column, found.width), (2, 8, 4));
        assert_eq!(found.excerpt.text, "печь = кiln");
        assert_eq!(found.excerpt.before, 7);
    }

    #[test]
    fn a_long_line_is_cut_on_both_sides() {
        let text = format!("{}X{}", "é".repeat(500), "ü".repeat(500));
        let found = place(&text, 1000..1001);
        assert_eq!(found.column, 501);
        assert_eq!(found.excerpt.text.chars().count(), SHOWN);
        assert_eq!(found.excerpt.text.chars().nth(found.excerpt.before), Some('X'));
        assert!(found.excerpt.cut_left && found.excerpt.cut_right);
    }

    #[test]
    fn a_span_over_several_lines_or_past_the_end_stays_within_its_line() {
        assert_eq!(place("ab = [\n1,\n2]", 5..12).width, 1);
        let end = place("ab", 2..9);
        assert_eq!((end.line, end.column, end.width), (1, 3, 1));
        let empty = place("", 0..0);
        assert_eq!((empty.line, empty.column, empty.width), (1, 1, 1));
    }
}
