//! The first row of a CSV part: what its columns are.

use std::borrow::Cow;
use std::collections::HashMap;

use super::Part;
use super::cells::{self, Cell, letters};
use super::columns::{Holds, Kind};
use crate::model::near;
use crate::model::read::findings::{Findings, shown};
use crate::model::read::toml_types::Table;
use toml::de::DeValue;

/// The periods that a model names, as far as a CSV part must know them.
pub(in crate::model::read) enum Periods<'a> {
    /// None: a single period is planned.
    None,
    /// These.
    Named(Vec<&'a str>),
    /// What is written there cannot be read, which is told elsewhere.
    Untold,
}

impl<'a> Periods<'a> {
    /// Those of the model whose keys are in `root`.
    pub(in crate::model::read) fn of(root: &'a Table<'_>) -> Self {
        match root.get("periods").map(|node| node.get_ref()) {
            None => Self::None,
            Some(DeValue::Array(list)) if !list.is_empty() => {
                list.iter().map(|node| node.get_ref().as_str()).collect::<Option<_>>().map_or(Self::Untold, Self::Named)
            }
            Some(_) => Self::Untold,
        }
    }
}

/// What a column holds.
pub(super) struct Column<'a> {
    /// Its key, as written.
    pub(super) word: Cow<'a, str>,
    /// What its cells hold; `None` where it is not known, and its cells are passed over.
    pub(super) holds: Option<Holds>,
    /// The period that its numbers are for, where they are for one alone.
    pub(super) period: Option<Cow<'a, str>>,
}

/// The first row of a part.
pub(super) struct Header<'a> {
    pub(super) columns: Vec<Column<'a>>,
    /// Whether there is a column of which it is not known what it holds.
    pub(super) has_untold: bool,
}

impl<'a> Header<'a> {
    /// The header in the first row; `None`, with a fault added, where the rows cannot be read by it.
    pub(super) fn read(
        part: Part<'a>,
        cells: &[Cell<'a>],
        periods: &Periods<'_>,
        findings: &mut Findings,
    ) -> Option<Self> {
        if separated_otherwise(part, cells, findings) {
            return None;
        }
        let mut columns = Vec::with_capacity(cells.len());
        let mut seen: HashMap<&str, usize> = HashMap::new();
        for (at, cell) in cells.iter().enumerate() {
            if let Some(&first) = seen.get(cell.text.as_ref()).filter(|_| !cell.text.is_empty()) {
                let message = format!(
                    "the column `{}` is given twice: {} and {}",
                    shown(&cell.text),
                    letters(first),
                    letters(at)
                );
                findings.add(&cell.span, "duplicate-key", message, "keep one of the two");
                columns.push(Column { word: cell.text.clone(), holds: None, period: None });
                continue;
            }
            seen.insert(&cell.text, at);
            let raw = part.text.get(cell.span.start - part.base..cell.span.end - part.base);
            let sound = !cells::misquoted(raw.unwrap_or_default(), cell, findings);
            columns.push(if sound { column(part.kind, cell, periods, findings) } else { nameless() });
        }
        let has_untold = columns.iter().any(|column| column.holds.is_none() && !column.word.is_empty());
        let header = Self { columns, has_untold };
        header.has_all_needed(part, cells, findings).then_some(header)
    }

    /// The cells of a row in the columns that hold this.
    pub(super) fn cells<'r>(&'r self, row: &'r [Cell<'a>], holds: Holds) -> impl Iterator<Item = &'r Cell<'a>> {
        self.columns.iter().zip(row).filter(move |(column, _)| column.holds == Some(holds)).map(|(_, cell)| cell)
    }

    fn has_all_needed(&self, part: Part<'_>, cells: &[Cell<'_>], findings: &mut Findings) -> bool {
        let mut all = true;
        for (word, holds) in part.kind.needed() {
            // A column that is there, though not as it should be, is told already.
            let there =
                |column: &Column<'_>| column.holds == Some(holds) || column.word.split('@').next() == Some(word);
            if !self.columns.iter().any(there) {
                let place = cells.first().map(|cell| cell.span.clone()).unwrap_or_default();
                let message = format!("the column `{word}` is missing");
                findings.add(&place, "no-column", message, format!("call a column of the first row `{word}`"));
                all = false;
            }
        }
        all
    }
}

fn nameless<'a>() -> Column<'a> {
    Column { word: Cow::Borrowed(""), holds: None, period: None }
}

fn column<'a>(kind: Kind, cell: &Cell<'a>, periods: &Periods<'_>, findings: &mut Findings) -> Column<'a> {
    let (word, period) = match cell.text.split_once('@') {
        Some((word, period)) => (word.trim_end(), Some(period.trim_start())),
        None => (cell.text.as_ref(), None),
    };
    let mut column = Column { word: cell.text.clone(), holds: None, period: None };
    if word.is_empty() {
        // Spreadsheets write empty columns; what stands in one is told at its cell.
        if period.is_some() {
            kind.wordless(cell, findings);
        }
        return column;
    }
    let Some(holds) = kind.column(word) else {
        kind.unknown(word, cell, findings);
        return column;
    };
    match period {
        None => column.holds = Some(holds),
        Some(_) if !matches!(holds, Holds::Value(_)) => {
            let message = format!("`{word}` is the same in every period");
            findings.add(&cell.span, "unknown-column", message, format!("call the column `{word}`"));
        }
        Some(period) => {
            if is_period(period, cell, periods, findings) {
                column.holds = Some(holds);
                column.period = Some(match &cell.text {
                    Cow::Borrowed(text) => {
                        Cow::Borrowed(text.split_once('@').map_or("", |(_, period)| period.trim_start()))
                    }
                    Cow::Owned(_) => Cow::Owned(period.to_owned()),
                });
            }
        }
    }
    column
}

fn is_period(period: &str, cell: &Cell<'_>, periods: &Periods<'_>, findings: &mut Findings) -> bool {
    let (message, cure) = match periods {
        Periods::Untold => return true,
        Periods::Named(labels) if labels.contains(&period) => return true,
        Periods::Named(labels) if period.is_empty() => {
            let message = "a period must stand after `@`".to_owned();
            (message, format!("the periods are {}", shown(&labels.join(", "))))
        }
        Periods::Named(labels) => {
            let list = || format!("the periods are {}", shown(&labels.join(", ")));
            (format!("no period `{}`", shown(period)), near::help(period, labels.iter().copied(), list))
        }
        Periods::None => {
            let message = format!("`@{}` would be a period, but the model names none", shown(period));
            (message, format!("add periods = [\"{}\"] to a TOML part, or take `@` and what follows out", shown(period)))
        }
    };
    findings.add(&cell.span, "unknown-period", message, cure);
    false
}

/// Adds a fault where a header in one cell shows that something else than a comma stands between cells.
fn separated_otherwise(part: Part<'_>, cells: &[Cell<'_>], findings: &mut Findings) -> bool {
    let [cell] = cells else { return false };
    let Some(sign) = [';', '\t', '|'].into_iter().find(|&sign| cell.text.contains(sign)) else { return false };
    let at = part.text.find(sign).unwrap_or_default() + part.base;
    let told = if sign == '\t' { "a tab".to_owned() } else { format!("`{sign}`") };
    let message = format!("{told} stands between the cells, where a comma is meant");
    let help = "save it with commas between cells and a decimal point in numbers";
    findings.add(&(at..at + 1), "not-commas", message, help);
    true
}
