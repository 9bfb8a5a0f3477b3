//! CSV parts: rows become the tables that the same entries would be in TOML, every key and value placed at its cell.

mod cells;
mod columns;
mod header;
mod value;

pub(super) use cells::called;
pub(super) use columns::{KINDS, Kind};
pub(super) use header::Periods;

use std::borrow::Cow;
use std::path::Path;

use toml::Spanned;
use toml::de::DeValue;

use self::cells::{Cell, Cells};
use self::columns::Holds;
use self::header::{Column, Header};
use super::calendar::EACH;
use super::findings::{Findings, Span, shown};
use super::source::Source;
use super::toml_types::{Node, Table};
use crate::model::name::Name;

/// A CSV part, placed among the other parts.
#[derive(Clone, Copy, Debug)]
pub(super) struct Part<'a> {
    /// Its text.
    pub(super) text: &'a str,
    /// What every place in it is moved by.
    pub(super) base: usize,
    /// What it holds.
    pub(super) kind: Kind,
}

/// The entries of a part, or what each activity uses, draws or makes by it: a table for each name. `None`, with a fault added, where the first
/// row does not say what the others hold.
pub(super) fn table<'a>(part: Part<'a>, periods: &Periods<'_>, findings: &mut Findings) -> Option<Table<'a>> {
    let mut table = Table::new();
    let (mut reader, mut cells) = (Cells::of(part.text, part.base), Vec::new());
    // A text of blank lines is an empty one, which is told before.
    if !reader.record(&mut cells) {
        return Some(table);
    }
    let header = Header::read(part, &cells, periods, findings)?;
    while reader.record(&mut cells) {
        if cells.iter().all(|cell| cell.text.is_empty()) {
            continue;
        }
        let row = Row { part, header: &header, cells: &cells };
        if row.is_sound(findings) {
            row.put(&mut table, findings);
        } else {
            row.declare(&mut table);
        }
    }
    Some(table)
}

/// Where the rows of a part begin that say something, each with its name: what lets an edited part be read by its edited rows alone. `None`
/// where a row has no name.
pub(super) fn rows(text: &str, kind: Kind) -> Option<Vec<(usize, Name)>> {
    let (mut reader, mut cells) = (Cells::of(text, 0), Vec::new());
    reader.record(&mut cells);
    let named = cells.iter().position(|cell| kind.column(&cell.text) == Some(Holds::Name))?;
    let mut rows: Vec<(usize, Name)> = Vec::new();
    while reader.record(&mut cells) {
        if cells.iter().all(|cell| cell.text.is_empty()) {
            continue;
        }
        // A cell's place leaves out the blanks before it; the row begins with its line.
        let first = cells.first()?.span.start;
        let start = text.get(..first)?.rfind('\n').map_or(0, |end| end + 1);
        let text = &cells.get(named)?.text;
        // Rows of one name mostly follow each other.
        let name = match rows.last().filter(|(_, last)| last.as_str() == text) {
            Some((_, last)) => last.clone(),
            None => Name::new(text).ok()?,
        };
        rows.push((start, name));
    }
    Some(rows)
}

/// One row that says something.
struct Row<'r, 'a> {
    part: Part<'a>,
    header: &'r Header<'a>,
    cells: &'r [Cell<'a>],
}

impl<'a> Row<'_, 'a> {
    /// Whether it has the cells it should, each written as it should be.
    fn is_sound(&self, findings: &mut Findings) -> bool {
        let Self { part, header, cells } = self;
        let mut sound = true;
        for cell in *cells {
            let raw = part.text.get(cell.span.start - part.base..cell.span.end - part.base);
            sound &= !cells::misquoted(raw.unwrap_or_default(), cell, findings);
        }
        if !sound {
            return false;
        }
        let width = header.columns.len();
        let beyond = cells.iter().skip(width).find(|cell| !cell.text.is_empty());
        if cells.len() < width || beyond.is_some() {
            let place = beyond.or(cells.last()).map(|cell| cell.span.clone()).unwrap_or_default();
            let message = format!("this row has {} cells, and the first row has {width}", cells.len());
            let cure = if beyond.is_some() {
                "write numbers with a decimal point, and a text that holds a comma in double quotes"
            } else {
                "give it a comma for every cell that is left empty"
            };
            findings.add(&place, "row-length", message, cure);
            return false;
        }
        true
    }

    /// Puts what the row says into the table of its name.
    fn put(&self, table: &mut Table<'a>, findings: &mut Findings) {
        let Some(name) = self.named(Holds::Name, findings) else { return };
        match self.part.kind {
            Kind::Entries(_) => {
                if let Some((first, _)) = table.get_key_value(name.text.as_ref()) {
                    return self.twice(&shown(&name.text), first.span().start, name, findings);
                }
                let entry = self.entry(findings);
                table.insert(key(name), node(name, DeValue::Table(entry)));
            }
            Kind::Rates(_) => self.put_rate(name, table, findings),
        }
    }

    /// Has it that there is an entry of the row's name, though what the row says of it cannot be read.
    fn declare(&self, table: &mut Table<'a>) {
        let name = self.header.cells(self.cells, Holds::Name).next().filter(|name| !name.text.is_empty());
        if let (Kind::Entries(_), Some(name)) = (self.part.kind, name) {
            table.entry(key(name)).or_insert_with(|| node(name, DeValue::Table(Table::new())));
        }
    }

    fn put_rate(&self, activity: &Cell<'a>, table: &mut Table<'a>, findings: &mut Findings) {
        let Some(other) = self.named(Holds::Other, findings) else { return };
        let rates = table.entry(key(activity)).or_insert_with(|| node(activity, DeValue::Table(Table::new())));
        let DeValue::Table(rates) = rates.get_mut() else { return };
        if let Some((first, _)) = rates.get_key_value(other.text.as_ref()) {
            let what = format!("{}` of `{}", shown(&other.text), shown(&activity.text));
            return self.twice(&what, first.span().start, other, findings);
        }
        let mut rate = None;
        for (column, cell) in self.given() {
            if let Some((_, value)) = value::of(column, cell, findings) {
                rate = Some(joined(rate, column, cell, node(cell, value)));
            }
        }
        match rate {
            Some(rate) => drop(rates.insert(key(other), rate)),
            // A cell that could not be read is told already.
            None if self.header.cells(self.cells, Holds::Value(columns::RATE)).all(|cell| cell.text.is_empty()) => {
                let message = format!("this row gives no rate for `{}`", shown(&other.text));
                findings.add(&other.span, "no-rate", message, "give a number, or take the row out");
            }
            None => {}
        }
    }

    /// The cell with the name of what the row is about.
    fn named(&self, holds: Holds, findings: &mut Findings) -> Option<&Cell<'a>> {
        let cell = self.header.cells(self.cells, holds).next()?;
        if cell.text.is_empty() {
            let word = self.header.columns.iter().find(|column| column.holds == Some(holds));
            let message =
                format!("`{}` is empty in this row", word.map(|column| column.word.as_ref()).unwrap_or_default());
            findings.add(&cell.span, "no-name", message, "give a name, or take the row out");
            return None;
        }
        Some(cell)
    }

    /// The cells of the row as a table.
    fn entry(&self, findings: &mut Findings) -> Table<'a> {
        let mut entry = Table::new();
        for (column, cell) in self.given() {
            let Some((word, value)) = value::of(column, cell, findings) else { continue };
            let value = node(cell, value);
            match entry.get_mut(word) {
                Some(given) => {
                    let span = given.span();
                    let before = std::mem::replace(given, Spanned::new(span, DeValue::Boolean(false)));
                    *given = joined(Some(before), column, cell, value);
                }
                None => {
                    let word = Spanned::new(cell.span.clone(), Cow::Borrowed(word));
                    entry.insert(word, joined(None, column, cell, value));
                }
            }
        }
        entry
    }

    /// The cells that hold something, with their columns. An empty cell is a key left out.
    fn given(&self) -> impl Iterator<Item = (&Column<'a>, &Cell<'a>)> {
        // Where a column cannot be told, numbers by period may seem incomplete that are not.
        let told = |column: &Column<'_>| column.period.is_none() || !self.header.has_untold;
        let given = move |(column, cell): &(&Column<'_>, &Cell<'_>)| !cell.text.is_empty() && told(column);
        self.header.columns.iter().zip(self.cells).filter(given)
    }

    fn twice(&self, what: &str, first: usize, second: &Cell<'_>, findings: &mut Findings) {
        let source = Source { path: Path::new(""), text: self.part.text };
        let line = |at: usize| source.line(at - self.part.base);
        let lines = (line(first), line(second.span.start));
        let message = format!("`{what}` is given twice: on line {} and on line {}", lines.0, lines.1);
        findings.add(&second.span, "duplicate-key", message, "keep one of the two");
    }
}

/// What a key stands for once another of its cells is read: a number for every period, or a table of those for some.
fn joined<'a>(given: Option<Node<'a>>, column: &Column<'a>, cell: &Cell<'a>, value: Node<'a>) -> Node<'a> {
    let spelt = |span: &Span, period: &Cow<'a, str>| Spanned::new(span.clone(), period.clone());
    let each = Cow::Borrowed(EACH);
    let (mut list, span) = match (given, &column.period) {
        (None, None) => return value,
        (None, Some(_)) => (Table::new(), cell.span.clone()),
        (Some(given), _) => {
            let span = given.span();
            match given.into_inner() {
                DeValue::Table(list) => (list, span),
                number => (Table::from_iter([(spelt(&span, &each), Spanned::new(span.clone(), number))]), span),
            }
        }
    };
    list.insert(spelt(&cell.span, column.period.as_ref().unwrap_or(&each)), value);
    Spanned::new(span, DeValue::Table(list))
}

fn key<'a>(cell: &Cell<'a>) -> Spanned<Cow<'a, str>> {
    Spanned::new(cell.span.clone(), cell.text.clone())
}

fn node<'a>(cell: &Cell<'_>, value: DeValue<'a>) -> Node<'a> {
    Spanned::new(cell.span.clone(), value)
}
