//! The plan as CSV (RFC 4180), one row for each thing planned (and period), safe to open in a spreadsheet.

use csv::{Terminator, WriterBuilder};

use super::super::exit::Error;
use super::Shown;
use crate::model::{Period, Value};
use crate::plan::{Each, Plan, PlannedActivity, PlannedLimit, PlannedMaterial, PlannedResource, Span, State, number};

/// All columns there can be, in order.
const HEADS: [&str; 26] = [
    "kind",
    "name",
    "period",
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
    "surge",
    "purchase",
    "sale",
    "late",
    "stock",
    "discard",
    "made",
    "drawn",
];

/// The bytes of the table. `level` is the level of an activity, what is used of a resource, and the value of a
/// limit; `level_from` and `level_to` are between which levels an activity may be without loss. Where the periods have names there is
/// a row for each of them; what a limit comes to over several together has an empty one.
pub(super) fn of(shown: &Shown) -> Result<Vec<u8>, Error> {
    let told = columns(&shown.plan);
    let mut writer = WriterBuilder::new().terminator(Terminator::CRLF).from_writer(Vec::new());
    let failed =
        |error: &dyn std::fmt::Display| Error::failure(format_args!("cannot write the plan as CSV: {error}"), "");
    writer.write_record(told.iter().map(|&column| HEADS[column])).map_err(|error| failed(&error))?;
    for row in rows(shown) {
        writer.write_record(told.iter().map(|&column| &row[column])).map_err(|error| failed(&error))?;
    }
    writer.into_inner().map_err(|error| failed(&error))
}

/// The columns that a plan needs: those of periods, extra capacity and materials only where it has any.
fn columns(plan: &Plan) -> Vec<usize> {
    let needed = |head: &str| match head {
        "period" => !plan.periods.is_empty(),
        "surge" => plan.resources.iter().any(|resource| resource.surge.is_some()),
        "purchase" | "sale" | "late" | "stock" | "discard" | "made" | "drawn" => !plan.materials.is_empty(),
        _ => true,
    };
    (0..HEADS.len()).filter(|&column| needed(HEADS[column])).collect()
}

type Row = [String; HEADS.len()];

fn rows(shown: &Shown) -> Vec<Row> {
    let mut rows: Vec<Row> = Vec::new();
    for activity in &shown.plan.activities {
        each_period(shown, &mut rows, |period| of_activity(shown, activity, period));
    }
    for resource in &shown.plan.resources {
        each_period(shown, &mut rows, |period| of_resource(shown, resource, period));
    }
    for limit in &shown.plan.limits {
        let numbers = [&limit.value, &limit.spare, &limit.worth_of_more];
        let listed = numbers.into_iter().flatten().any(|value| matches!(value, Value::Listed(_)));
        match shown.plan.horizon().periods().next() {
            Some(first) if !listed => rows.push(of_limit(shown, limit, first)),
            _ => each_period(shown, &mut rows, |period| of_limit(shown, limit, period)),
        }
    }
    for material in &shown.plan.materials {
        each_period(shown, &mut rows, |period| of_material(shown, material, period));
    }
    rows
}

fn each_period(shown: &Shown, rows: &mut Vec<Row>, of: impl Fn(Period) -> Row) {
    let horizon = shown.plan.horizon();
    for period in horizon.periods() {
        let mut row = of(period);
        row[2] = text(horizon.label(period));
        rows.push(row);
    }
}

fn of_activity(shown: &Shown, activity: &PlannedActivity, period: Period) -> Row {
    let known = shown.model.as_ref().and_then(|model| model.activities.get(&activity.name));
    let mut row = row("activity", activity.name.as_str(), known.and_then(|known| known.label.as_deref()));
    row[4] = text(known.and_then(|known| known.unit.as_deref()));
    row[5] = activity.state.at(period).map(State::words).unwrap_or_default().to_owned();
    row[6] = value(Some(&activity.level), period);
    [row[12], row[13]] = ends(activity.price_range.as_ref(), period);
    row[14] = value(activity.break_even.as_ref(), period);
    row[15] = value(activity.loses.as_ref(), period);
    [row[16], row[17]] = ends(activity.may_vary.as_ref(), period);
    row
}

fn of_resource(shown: &Shown, resource: &PlannedResource, period: Period) -> Row {
    let known = shown.model.as_ref().and_then(|model| model.resources.get(&resource.name));
    let mut row = row("resource", resource.name.as_str(), known.and_then(|known| known.label.as_deref()));
    row[4] = text(known.and_then(|known| known.unit.as_deref()));
    row[6] = value(Some(&resource.used), period);
    row[7] = value(resource.spare.as_ref(), period);
    row[8] = value(resource.worth_of_more.as_ref(), period);
    row[9] = value(resource.loss_of_less.as_ref(), period);
    [row[10], row[11]] = ends(resource.holds_between.as_ref(), period);
    row[18] = value(resource.surge.as_ref(), period);
    row
}

fn of_limit(shown: &Shown, limit: &PlannedLimit, period: Period) -> Row {
    let known = shown.model.as_ref().and_then(|model| model.limits.get(&limit.name));
    let mut row = row("limit", limit.name.as_str(), known.and_then(|known| known.label.as_deref()));
    row[6] = value(limit.value.as_ref(), period);
    row[7] = value(limit.spare.as_ref(), period);
    row[8] = value(limit.worth_of_more.as_ref(), period);
    row[9] = value(limit.loss_of_less.as_ref(), period);
    [row[10], row[11]] = ends(limit.holds_between.as_ref(), period);
    row
}

fn of_material(shown: &Shown, material: &PlannedMaterial, period: Period) -> Row {
    let known = shown.model.as_ref().and_then(|model| model.materials.get(&material.name));
    let mut row = row("material", material.name.as_str(), known.and_then(|known| known.label.as_deref()));
    row[4] = text(known.and_then(|known| known.unit.as_deref()));
    row[8] = value(material.worth_of_more.as_ref(), period);
    row[9] = value(material.loss_of_less.as_ref(), period);
    row[19] = value(material.purchase.as_ref(), period);
    row[20] = value(material.sale.as_ref(), period);
    row[21] = value(material.late.as_ref(), period);
    row[22] = value(material.stock.as_ref(), period);
    row[23] = value(material.discard.as_ref(), period);
    row[24] = value(Some(&material.made), period);
    row[25] = value(Some(&material.drawn), period);
    row
}

fn row(kind: &str, name: &str, label: Option<&str>) -> Row {
    let mut row = Row::default();
    row[0] = kind.to_owned();
    row[1] = text(Some(name));
    row[3] = text(label);
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

fn value(given: Option<&Value>, period: Period) -> String {
    cell(given.map(|value| value.at(period)))
}

fn ends(spans: Option<&Each<Span>>, period: Period) -> [String; 2] {
    let span = spans.and_then(|spans| spans.at(period));
    span.map_or_else(Default::default, |(least, most)| [cell(Some(least)), cell(Some(most))])
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
