//! One thing over all periods: a row for each, where none was asked for.

use super::super::super::screen::{HEAD, HINT, Screen};
use super::super::Shown;
use super::super::number::{range, short};
use super::super::table::Sheet;
use super::{Thing, titled};
use crate::model::escape::Plain;
use crate::model::{Model, Name, Value};
use crate::plan::{Each, PlannedActivity, PlannedLimit, PlannedMaterial, PlannedResource, Span, State};

pub(super) fn tell(screen: &mut Screen, shown: &Shown, model: &Model, thing: &Thing<'_>) {
    if let Some(planned) = thing.activity {
        let label = model.activities.get(&planned.name).and_then(|known| known.label.as_deref());
        say(screen, &planned.name, label, &planned.state.words(), &activity(shown, planned));
    }
    if let Some(planned) = thing.resource {
        let known = model.resources.get(&planned.name);
        let capacity = known.map(|known| &known.capacity);
        let label = known.and_then(|known| known.label.as_deref());
        say(screen, &planned.name, label, "resource", &resource(shown, planned, capacity));
    }
    if let Some(planned) = thing.limit {
        let label = model.limits.get(&planned.name).and_then(|known| known.label.as_deref());
        say(screen, &planned.name, label, "limit", &limit(shown, planned));
    }
    if let Some(planned) = thing.material {
        let label = model.materials.get(&planned.name).and_then(|known| known.label.as_deref());
        say(screen, &planned.name, label, "material", &material(shown, planned));
    }
    if let Some(first) = shown.plan.periods.first() {
        screen.say(format_args!("{HINT}--why {}.{first} adds it up for one period{HINT:#}", Plain(thing.name)));
    }
}

fn say(screen: &mut Screen, name: &Name, label: Option<&str>, what: &str, table: &str) {
    screen.say(format_args!("{HEAD}{}{HEAD:#}: {what}\n\n{table}\n", titled(name, label)));
}

/// A column: its head, and what it says in each period.
type Column = (&'static str, Vec<String>, bool);

fn sheet(shown: &Shown, columns: Vec<Column>) -> String {
    let heads: Vec<(&str, bool)> =
        std::iter::once(("period", false)).chain(columns.iter().map(|(head, _, number)| (*head, *number))).collect();
    let mut sheet = Sheet::new(&heads);
    for (place, period) in shown.plan.periods.iter().enumerate() {
        let cells = columns.iter().map(|(_, cells, _)| cells.get(place).cloned().unwrap_or_default());
        sheet.rows.push(std::iter::once(Plain(period.as_str()).to_string()).chain(cells).collect());
    }
    sheet.text()
}

fn activity(shown: &Shown, planned: &PlannedActivity) -> String {
    let horizon = shown.plan.horizon();
    let states = horizon.periods().filter_map(|period| planned.state.at(period));
    let ranges =
        |spans: &Each<Span>| horizon.periods().filter_map(|period| spans.at(period)).map(range).collect::<Vec<_>>();
    let (range_head, even_head) =
        if shown.plan.minimise { ("cost may be", "pays below") } else { ("price may be", "pays above") };
    let columns = vec![
        numbers(shown, "level", Some(&planned.level)),
        ("state", states.map(State::words).map(str::to_owned).collect(), false),
        ("level may be", planned.may_vary.as_ref().map(ranges).unwrap_or_default(), false),
        (range_head, planned.price_range.as_ref().map(ranges).unwrap_or_default(), false),
        numbers(shown, even_head, planned.break_even.as_ref()),
        numbers(shown, "loses", planned.loses.as_ref()),
    ];
    sheet(shown, columns)
}

fn resource(shown: &Shown, planned: &PlannedResource, capacity: Option<&Value>) -> String {
    let columns = vec![
        numbers(shown, "used", Some(&planned.used)),
        numbers(shown, "capacity", capacity),
        numbers(shown, "extra", planned.surge.as_ref()),
        numbers(shown, "spare", planned.spare.as_ref()),
        numbers(shown, "one more is worth", planned.worth_of_more.as_ref()),
    ];
    sheet(shown, columns)
}

fn limit(shown: &Shown, planned: &PlannedLimit) -> String {
    let columns = vec![
        numbers(shown, "comes to", planned.value.as_ref()),
        numbers(shown, "spare", planned.spare.as_ref()),
        numbers(shown, "one more is worth", planned.worth_of_more.as_ref()),
    ];
    sheet(shown, columns)
}

fn material(shown: &Shown, planned: &PlannedMaterial) -> String {
    let columns = vec![
        numbers(shown, "bought", planned.purchase.as_ref()),
        numbers(shown, "made", Some(&planned.made)),
        numbers(shown, "drawn", Some(&planned.drawn)),
        numbers(shown, "sold", planned.sale.as_ref()),
        numbers(shown, "late", planned.late.as_ref()),
        numbers(shown, "thrown away", planned.discard.as_ref()),
        numbers(shown, "left", planned.stock.as_ref()),
        numbers(shown, "one more is worth", planned.worth_of_more.as_ref()),
    ];
    sheet(shown, columns)
}

fn numbers(shown: &Shown, head: &'static str, value: Option<&Value>) -> Column {
    let horizon = shown.plan.horizon();
    let cells = value.map(|value| horizon.periods().map(|period| short(value.at(period))).collect());
    (head, cells.unwrap_or_default(), true)
}
