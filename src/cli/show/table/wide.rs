//! The tables of a plan with named periods, a column for each: where they fit.

use super::super::Shown;
use super::super::number::short;
use super::{Sheet, plain};
use crate::model::{Name, Value};
use crate::plan::State;

pub(super) fn sheets(shown: &Shown) -> [(&'static str, Sheet); 4] {
    [
        ("Activities", activities(shown)),
        ("Resources", resources(shown)),
        ("Limits", limits(shown)),
        ("Materials", materials(shown)),
    ]
}

/// A sheet with a column for each period between others.
fn sheet(shown: &Shown, first: &[(&str, bool)], last: &[(&str, bool)]) -> Sheet {
    let periods = shown.plan.periods.iter().map(|name| (name.as_str(), true));
    let columns: Vec<(&str, bool)> = first.iter().copied().chain(periods).chain(last.iter().copied()).collect();
    Sheet::new(&columns)
}

fn activities(shown: &Shown) -> Sheet {
    let mut sheet = sheet(shown, &[("name", false)], &[("in all", true), ("unit", false), ("state", false)]);
    for activity in &shown.plan.activities {
        let known = shown.model.as_ref().and_then(|model| model.activities.get(&activity.name));
        let mut row = vec![activity.name.to_string()];
        row.extend(numbers(shown, &activity.level));
        row.extend([
            short(sum(&activity.level)),
            plain(known.and_then(|known| known.unit.as_deref())),
            activity.state.one().map_or("differs", State::words).to_owned(),
        ]);
        sheet.rows.push(row);
    }
    sheet
}

/// One line of several about one thing: what it tells, its numbers, and whether these can be added up.
type Line<'a> = (&'static str, Option<&'a Value>, bool);

fn resources(shown: &Shown) -> Sheet {
    let mut sheet = lines(shown);
    for resource in &shown.plan.resources {
        let known = shown.model.as_ref().and_then(|model| model.resources.get(&resource.name));
        let told: [Line<'_>; 4] = [
            ("used", Some(&resource.used), true),
            ("extra", resource.surge.as_ref(), true),
            ("spare", resource.spare.as_ref(), true),
            ("one more is worth", resource.worth_of_more.as_ref(), false),
        ];
        add(shown, &mut sheet, &resource.name, known.and_then(|known| known.unit.as_deref()), &told);
    }
    sheet
}

fn limits(shown: &Shown) -> Sheet {
    let mut sheet = lines(shown);
    for limit in &shown.plan.limits {
        let told: [Line<'_>; 3] = [
            ("comes to", limit.value.as_ref(), false),
            ("spare", limit.spare.as_ref(), false),
            ("one more is worth", limit.worth_of_more.as_ref(), false),
        ];
        add(shown, &mut sheet, &limit.name, None, &told);
    }
    sheet
}

fn materials(shown: &Shown) -> Sheet {
    let mut sheet = lines(shown);
    for material in &shown.plan.materials {
        let known = shown.model.as_ref().and_then(|model| model.materials.get(&material.name));
        let told: [Line<'_>; 8] = [
            ("bought", material.purchase.as_ref(), true),
            ("made", Some(&material.made).filter(|made| any(made)), true),
            ("drawn", Some(&material.drawn).filter(|drawn| any(drawn)), true),
            ("sold", material.sale.as_ref(), true),
            ("late", material.late.as_ref(), false),
            ("thrown away", material.discard.as_ref().filter(|discard| any(discard)), true),
            ("left", material.stock.as_ref(), false),
            ("one more is worth", material.worth_of_more.as_ref(), false),
        ];
        add(shown, &mut sheet, &material.name, known.and_then(|known| known.unit.as_deref()), &told);
    }
    sheet
}

fn lines(shown: &Shown) -> Sheet {
    sheet(shown, &[("name", false), ("", false)], &[("in all", true), ("unit", false)])
}

/// Adds the lines that say something; the name stands before the first. What is one number for several periods together stands under
/// "in all".
fn add(shown: &Shown, sheet: &mut Sheet, name: &Name, unit: Option<&str>, told: &[Line<'_>]) {
    let mut first = true;
    for &(what, value, adds) in told {
        let Some(value) = value else { continue };
        let mut row = vec![if first { name.to_string() } else { String::new() }, what.to_owned()];
        let together = match value {
            Value::Every(number) => Some(*number),
            Value::Listed(_) if adds => Some(sum(value)),
            Value::Listed(_) => None,
        };
        row.extend(numbers(shown, value));
        row.push(together.map(short).unwrap_or_default());
        row.push(if first { plain(unit) } else { String::new() });
        sheet.rows.push(row);
        first = false;
    }
}

/// A number for each period; nothing where there is one for several together.
fn numbers(shown: &Shown, value: &Value) -> Vec<String> {
    match value {
        Value::Every(_) => vec![String::new(); shown.plan.periods.len()],
        Value::Listed(list) => list.iter().map(|&number| short(number)).collect(),
    }
}

fn sum(value: &Value) -> f64 {
    value.numbers().iter().sum()
}

fn any(value: &Value) -> bool {
    value.numbers().iter().any(|number| number.abs() > 0.0)
}
