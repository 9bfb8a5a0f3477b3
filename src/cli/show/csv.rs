//! The plan as CSV (RFC 4180), one row for each thing planned, safe to open in a spreadsheet.

use csv::{Terminator, WriterBuilder};

use super::super::exit::Error;
use super::Shown;
use crate::model::Value;
use crate::plan::number;

const HEADS: [&str; 17] = [
    "kind",
    "name",
    "label",
    "unit",
    "state",
    "level",
    "spare",
    "worth_of_more",
    "loss_of_less",
    "holds_from",
    "holds_to",
    "price_from",
    "price_to",
    "break_even",
    "loses",
    "level_from",
    "level_to",
];

/// The bytes of the table. `level` is the level of an activity, what is used of a resource, and the value of a
/// limit; `level_from` and `level_to` are between which levels an activity may be without loss.
pub(super) fn of(shown: &Shown) -> Result<Vec<u8>, Error> {
    let rows = rows(shown);
    let mut writer = WriterBuilder::new().terminator(Terminator::CRLF).from_writer(Vec::new());
    let failed =
        |error: &dyn std::fmt::Display| Error::failure(format_args!("cannot write the plan as CSV: {error}"), "");
    writer.write_record(HEADS).map_err(|error| failed(&error))?;
    for row in rows {
        writer.write_record(row).map_err(|error| failed(&error))?;
    }
    writer.into_inner().map_err(|error| failed(&error))
}

type Row = [String; HEADS.len()];

fn rows(shown: &Shown) -> Vec<Row> {
    let model = shown.model.as_ref();
    let mut rows: Vec<Row> = Vec::new();
    for activity in &shown.plan.activities {
        let known = model.and_then(|model| model.activities.get(&activity.name));
        let mut row = row("activity", activity.name.as_str(), known.and_then(|known| known.label.as_deref()));
        row[3] = text(known.and_then(|known| known.unit.as_deref()));
        row[4] = activity.state.words().to_owned();
        row[5] = value(Some(&activity.level));
        [row[11], row[12]] = ends(activity.price_range);
        row[13] = cell(activity.break_even);
        row[14] = cell(activity.loses);
        [row[15], row[16]] = ends(activity.may_vary);
        rows.push(row);
    }
    for resource in &shown.plan.resources {
        let known = model.and_then(|model| model.resources.get(&resource.name));
        let mut row = row("resource", resource.name.as_str(), known.and_then(|known| known.label.as_deref()));
        row[3] = text(known.and_then(|known| known.unit.as_deref()));
        row[5] = value(Some(&resource.used));
        row[6] = value(resource.spare.as_ref());
        row[7] = cell(resource.worth_of_more);
        row[8] = cell(resource.loss_of_less);
        [row[9], row[10]] = ends(resource.holds_between);
        rows.push(row);
    }
    for limit in &shown.plan.limits {
        let known = model.and_then(|model| model.limits.get(&limit.name));
        let mut row = row("limit", limit.name.as_str(), known.and_then(|known| known.label.as_deref()));
        row[5] = value(limit.value.as_ref());
        row[6] = value(limit.spare.as_ref());
        row[7] = cell(limit.worth_of_more);
        row[8] = cell(limit.loss_of_less);
        [row[9], row[10]] = ends(limit.holds_between);
        rows.push(row);
    }
    rows
}

fn row(kind: &str, name: &str, label: Option<&str>) -> Row {
    let mut row = Row::default();
    row[0] = kind.to_owned();
    row[1] = text(Some(name));
    row[2] = text(label);
    row
}

/// A text that no spreadsheet takes for a formula: one that could be gets an apostrophe before it.
fn text(given: Option<&str>) -> String {
    let given = given.unwrap_or_default();
    let formula = given.trim_start().starts_with(['=', '+', '-', '@', '＝', '＋', '－', '＠'])
        || given.starts_with(['\t', '\r', '\n']);
    if formula { format!("'{given}") } else { given.to_owned() }
}

fn cell(given: Option<f64>) -> String {
    let mut text = String::new();
    if let Some(given) = given {
        number::push(&mut text, given);
    }
    text
}

fn value(given: Option<&Value>) -> String {
    let numbers = given.map_or(&[][..], Value::numbers);
    numbers.iter().map(|&number| cell(Some(number))).collect::<Vec<_>>().join(" ")
}

fn ends(range: Option<(f64, f64)>) -> [String; 2] {
    range.map_or_else(Default::default, |(least, most)| [cell(Some(least)), cell(Some(most))])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn no_text_can_become_a_formula() {
        for hostile in ["=1+1", "+1", "-1", "@SUM(A1)", "\t=1", "\r=1", "  =1", "＝1"] {
            assert!(text(Some(hostile)).starts_with('\''), "{hostile:?}");
        }
        assert_eq!(text(Some("Floor tile 30x30")), "Floor tile 30x30");
        assert_eq!(cell(Some(-2.5)), "-2.5");
    }
}
