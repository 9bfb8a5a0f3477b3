//! The cells of a CSV text (RFC 4180) and where they lie.

use std::borrow::Cow;

use csv_core::{ReadFieldResult, Reader};

use crate::model::read::findings::{Findings, Span};

/// One cell.
#[derive(Clone, Debug)]
pub(super) struct Cell<'a> {
    /// Where it lies, its quotes included.
    pub(super) span: Span,
    /// What it says: without its quotes, or without the blanks around it where it has none.
    pub(super) text: Cow<'a, str>,
}

/// Reads cells one after the other. The state machine is that of the `csv` crate, which by itself says where a record begins and not where
/// a cell does.
pub(super) struct Cells<'a> {
    text: &'a str,
    /// Added to every span.
    base: usize,
    reader: Reader,
    at: usize,
    room: Vec<u8>,
}

impl<'a> Cells<'a> {
    /// The cells of `text`, whose first byte lies at `base`.
    pub(super) fn of(text: &'a str, base: usize) -> Self {
        Self { text, base, reader: Reader::new(), at: 0, room: vec![0; 256] }
    }

    /// Reads the next record into `cells`; lines with nothing on them are passed over. Answers whether there was one.
    pub(super) fn record(&mut self, cells: &mut Vec<Cell<'a>>) -> bool {
        cells.clear();
        let line_ends = self.text.as_bytes()[self.at..].iter().take_while(|byte| matches!(byte, b'\r' | b'\n'));
        let mut start = self.at + line_ends.count();
        while let Some(Field { end, written, last }) = self.field() {
            cells.push(self.cell(start, end, written));
            start = self.at;
            if last {
                return true;
            }
        }
        false
    }

    fn field(&mut self) -> Option<Field> {
        let mut written = 0;
        loop {
            let rest = &self.text.as_bytes()[self.at..];
            let (result, read, more) = self.reader.read_field(rest, &mut self.room[written..]);
            self.at += read;
            written += more;
            match result {
                // What is asked for next is the empty rest, which tells the reader that the text ends here.
                ReadFieldResult::InputEmpty => {}
                ReadFieldResult::OutputFull => self.room.resize(2 * self.room.len(), 0),
                ReadFieldResult::Field { record_end } => {
                    // The comma or line end behind a cell was read with it.
                    let end = if rest.is_empty() { self.at } else { self.at - 1 };
                    return Some(Field { end, written, last: record_end });
                }
                ReadFieldResult::End => return None,
            }
        }
    }

    fn cell(&self, start: usize, end: usize, written: usize) -> Cell<'a> {
        let raw = self.text.get(start..end).unwrap_or_default();
        let span = self.base + start..self.base + end;
        if raw.starts_with('"') {
            let told = &self.room[..written];
            let text = match raw.get(1..=written).filter(|inside| inside.as_bytes() == told) {
                Some(inside) => Cow::Borrowed(inside),
                // It holds doubled quotes.
                None => Cow::Owned(String::from_utf8_lossy(told).into_owned()),
            };
            return Cell { span, text };
        }
        let text = raw.trim_matches([' ', '\t']);
        let before = raw.len() - raw.trim_start_matches([' ', '\t']).len();
        let start = span.start + before;
        Cell { span: start..start + text.len(), text: Cow::Borrowed(text) }
    }
}

struct Field {
    end: usize,
    written: usize,
    last: bool,
}

/// Adds a fault where the quotes of a cell are not those of RFC 4180; `raw` is the cell as it is written. Answers whether there is one.
pub(super) fn misquoted(raw: &str, cell: &Cell<'_>, findings: &mut Findings) -> bool {
    if !raw.contains('"') {
        return false;
    }
    let Some(rest) = raw.strip_prefix('"') else {
        let message = "a quote stands inside a cell that does not begin with one".to_owned();
        findings.add(
            &cell.span,
            "bad-quotes",
            message,
            "put the whole cell in double quotes, and double those inside it",
        );
        return true;
    };
    if rest.strip_suffix('"').is_some_and(all_doubled) {
        return false;
    }
    let (message, cure) = if all_doubled(rest) {
        ("a cell that begins with a quote is not closed", "close it with a double quote")
    } else {
        ("something stands behind the closing quote of a cell", "double the quotes inside the cell")
    };
    // The first line of it is enough to point at.
    let end = cell.span.start + raw.find(['\r', '\n']).unwrap_or(raw.len());
    findings.add(&(cell.span.start..end), "bad-quotes", message.to_owned(), cure);
    true
}

fn all_doubled(inside: &str) -> bool {
    !inside.replace("\"\"", "").contains('"')
}

/// The cell at the byte `at` of `text` as a spreadsheet calls it: `C12`.
pub(in crate::model::read) fn called(text: &str, at: usize) -> Option<String> {
    let (mut reader, mut cells) = (Cells::of(text, 0), Vec::new());
    // A spreadsheet counts rows, and a quoted cell may hold line ends.
    let mut within = 0;
    while reader.record(&mut cells) {
        let first = cells.first()?.span.start;
        if at < first {
            return None;
        }
        if let Some(column) = cells.iter().position(|cell| at <= cell.span.end) {
            let row = 1 + line_ends(text.get(..first)?) - within;
            return Some(format!("{}{row}", letters(column)));
        }
        within += cells.iter().map(|cell| text.get(cell.span.clone()).map_or(0, line_ends)).sum::<usize>();
    }
    None
}

fn line_ends(text: &str) -> usize {
    text.bytes().filter(|&byte| byte == b'\n').count()
}

/// A column as a spreadsheet calls it: A, B, … Z, AA, AB, …
pub(super) fn letters(column: usize) -> String {
    let mut letters = Vec::new();
    let mut left = column + 1;
    while left > 0 {
        let digit = u8::try_from((left - 1) % 26).unwrap_or(0);
        letters.push(char::from(b'A' + digit));
        left = (left - 1) / 26;
    }
    letters.iter().rev().collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn records(text: &str) -> Vec<Vec<(String, String)>> {
        let (mut reader, mut cells, mut all) = (Cells::of(text, 100), Vec::new(), Vec::new());
        while reader.record(&mut cells) {
            let told = |cell: &Cell<'_>| {
                (text[cell.span.start - 100..cell.span.end - 100].to_owned(), cell.text.clone().into_owned())
            };
            all.push(cells.iter().map(told).collect());
        }
        all
    }

    #[test]
    fn cells_are_found_where_they_lie() {
        let pair = |raw: &str, text: &str| (raw.to_owned(), text.to_owned());
        let text = "name,label\r\n\r\nfloor_tile, \"30\" \r\nwall_tile,\"a, \"\"b\"\"\r\nc\"\nslab,";
        assert_eq!(
            records(text),
            [
                vec![pair("name", "name"), pair("label", "label")],
                vec![pair("floor_tile", "floor_tile"), pair("\"30\"", "\"30\"")],
                vec![pair("wall_tile", "wall_tile"), pair("\"a, \"\"b\"\"\r\nc\"", "a, \"b\"\r\nc")],
                vec![pair("slab", "slab"), pair("", "")],
            ]
        );
        assert_eq!(records("a,b\n"), records("a,b"));
        assert_eq!(records("\n\n"), Vec::<Vec<_>>::new());
        assert_eq!(records(&format!("\"{}\"", "x".repeat(2000)))[0][0].1.len(), 2000);
    }

    #[test]
    fn cells_are_called_as_in_a_spreadsheet() {
        let text = "name,label\n\nfloor_tile,\"two\nlines\"\nslab,x\n";
        let at = |part: &str| called(text, text.find(part).unwrap()).unwrap();
        assert_eq!([at("name"), at("label"), at("floor"), at("lines"), at("x\n")], ["A1", "B1", "A3", "B3", "B4"]);
        assert_eq!([0, 25, 26, 51, 52, 701, 702].map(letters), ["A", "Z", "AA", "AZ", "BA", "ZZ", "AAA"]);
    }

    #[test]
    fn quotes_are_checked() {
        let told = |raw: &str| {
            let mut findings = Findings::default();
            let cell = Cell { span: 0..raw.len(), text: Cow::Borrowed(raw) };
            misquoted(raw, &cell, &mut findings)
        };
        assert!(["30\"", "\"open", "\"a\" b", "\"a\"b\"", "\""].into_iter().all(told));
        assert!(!["", "a", "\"a\"", "\"a \"\"b\"\"\"", "\"\""].into_iter().any(told));
    }
}
