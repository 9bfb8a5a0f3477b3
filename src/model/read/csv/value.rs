//! What a cell says, as a TOML value.

use std::borrow::Cow;

use toml::de::DeValue;

use super::cells::Cell;
use super::columns::Holds;
use super::header::Column;
use crate::model::read::findings::{Findings, shown};

/// The key and the value in a cell that is not empty; `None` where it holds a name, or, with a fault added, nothing that can be meant.
pub(super) fn of<'a>(
    column: &Column<'a>,
    cell: &Cell<'a>,
    findings: &mut Findings,
) -> Option<(&'static str, DeValue<'a>)> {
    match column.holds {
        Some(Holds::Text(key)) => Some((key, DeValue::String(cell.text.clone()))),
        Some(Holds::Flag(key)) => flag(key, cell, findings).map(|flag| (key, DeValue::Boolean(flag))),
        Some(Holds::Value(key) | Holds::Number(key)) => number(key, cell, findings).map(|number| (key, number)),
        Some(Holds::Name | Holds::Other) => None,
        None if column.word.is_empty() => {
            let message = "this cell stands in a column without a name".to_owned();
            findings.add(&cell.span, "no-column", message, "name the column in the first row, or empty the cell");
            None
        }
        None => None,
    }
}

fn flag(key: &str, cell: &Cell<'_>, findings: &mut Findings) -> Option<bool> {
    // Spreadsheets write them in capitals.
    let found =
        [true, false].into_iter().find(|flag| cell.text.eq_ignore_ascii_case(if *flag { "true" } else { "false" }));
    if found.is_none() {
        let message = format!("`{key}` must be true or false, not `{}`", shown(&cell.text));
        findings.add(&cell.span, "wrong-type", message, "write true, or leave the cell empty");
    }
    found
}

fn number<'a>(key: &str, cell: &Cell<'a>, findings: &mut Findings) -> Option<DeValue<'a>> {
    let parsed = match &cell.text {
        Cow::Borrowed(text) => parsed(text),
        // It holds a quote.
        Cow::Owned(_) => None,
    };
    if parsed.is_none() {
        let message = format!("`{key}` must be a number, not `{}`", shown(&cell.text));
        findings.add(&cell.span, "wrong-type", message, cure(&cell.text));
    }
    parsed
}

/// The number that a text spells as TOML spells numbers.
fn parsed(text: &str) -> Option<DeValue<'_>> {
    let begins = text.starts_with(|first: char| first.is_ascii_digit() || matches!(first, '+' | '-' | 'i' | 'n'));
    let value = begins.then(|| DeValue::parse(text).ok())??.into_inner();
    matches!(value, DeValue::Integer(_) | DeValue::Float(_)).then_some(value)
}

/// What would make a number of a text.
fn cure(text: &str) -> String {
    let bare: String = text.chars().filter(|sign| !sign.is_whitespace() && !matches!(sign, '\'' | '_')).collect();
    let candidate = match bare.matches(',').count() {
        0 if bare.starts_with('.') => format!("0{bare}"),
        0 if bare.starts_with('0') => bare.trim_start_matches('0').to_owned(),
        0 => bare,
        // One comma is a decimal one, or marks thousands: only the writer knows. Several mark thousands.
        1 => bare.replace(',', "."),
        _ => bare.replace(',', ""),
    };
    match Some(candidate).filter(|candidate| parsed(candidate).is_some()) {
        Some(candidate) => format!("write {}: a decimal point, and no marks or blanks within", shown(&candidate)),
        None => "a number stands without its unit, such as 168 or 0.02".to_owned(),
    }
}
