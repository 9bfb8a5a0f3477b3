//! The tables of a plan with named periods where these do not fit: what they come to, and where most of it is.

use super::super::Shown;
use super::super::number::short;
use super::{Sheet, plain};
use crate::model::{Period, Value};
use crate::plan::Plan;
use crate::plan::compare::is_scarce_in;

pub(super) fn sheets(shown: &Shown) -> [(&'static str, Sheet); 4] {
    [
        ("Activities", activities(shown)),
        ("Resources", resources(shown)),
        ("Limits", limits(shown)),
        ("Materials", materials(shown)),
    ]
}

fn activities(shown: &Shown) -> Sheet {
    let mut sheet = Sheet::new(&[
        ("name", false),
        ("in all", true),
        ("unit", false),
        ("made in", true),
        ("most", true),
        ("in", false),
        ("state", false),
    ]);
    for activity in &shown.plan.activities {
        let known = shown.model.as_ref().and_then(|model| model.activities.get(&activity.name));
        let made = activity.level.numbers().iter().filter(|level| level.abs() > 0.0).count();
        let [most, most_in] = most(&shown.plan, Some(&activity.level));
        sheet.rows.push(vec![
            activity.name.to_string(),
            short(sum(&activity.level)),
            plain(known.and_then(|known| known.unit.as_deref())),
            of_all(&shown.plan, made),
            most,
            most_in,
            activity.state.words(),
        ]);
    }
    sheet
}

fn resources(shown: &Shown) -> Sheet {
    let mut sheet = Sheet::new(&[
        ("name", false),
        ("used", true),
        ("extra", true),
        ("spare", true),
        ("unit", false),
        ("binds in", true),
        ("worth of more, at most", true),
        ("in", false),
    ]);
    for resource in &shown.plan.resources {
        let known = shown.model.as_ref().and_then(|model| model.resources.get(&resource.name));
        let binds = shown.plan.horizon().periods().filter(|&period| is_scarce_in(resource, period)).count();
        let [worth, worth_in] = most(&shown.plan, resource.worth_of_more.as_ref());
        sheet.rows.push(vec![
            resource.name.to_string(),
            short(sum(&resource.used)),
            total(resource.surge.as_ref()),
            total(resource.spare.as_ref()),
            plain(known.and_then(|known| known.unit.as_deref())),
            of_all(&shown.plan, binds),
            worth,
            worth_in,
        ]);
    }
    sheet
}

fn limits(shown: &Shown) -> Sheet {
    let mut sheet = Sheet::new(&[
        ("name", false),
        ("over", false),
        ("most", true),
        ("binds in", true),
        ("worth of more, at most", true),
        ("in", false),
    ]);
    for limit in &shown.plan.limits {
        let [worth, worth_in] = most(&shown.plan, limit.worth_of_more.as_ref());
        let numbers = limit.worth_of_more.as_ref().map_or(&[][..], |worth| worth.numbers());
        let binds = numbers.iter().filter(|worth| worth.abs() > 0.0).count();
        let together = limit.value.as_ref().or(limit.worth_of_more.as_ref());
        let is_together = matches!(together, Some(Value::Every(_)));
        sheet.rows.push(vec![
            limit.name.to_string(),
            if is_together { "several" } else { "each" }.to_owned(),
            most(&shown.plan, limit.value.as_ref())[0].clone(),
            if is_together { String::new() } else { of_all(&shown.plan, binds) },
            worth,
            worth_in,
        ]);
    }
    sheet
}

fn materials(shown: &Shown) -> Sheet {
    let mut sheet = Sheet::new(&[
        ("name", false),
        ("bought", true),
        ("made", true),
        ("drawn", true),
        ("sold", true),
        ("late at most", true),
        ("left at the end", true),
        ("unit", false),
        ("worth of more, at most", true),
        ("in", false),
    ]);
    for material in &shown.plan.materials {
        let known = shown.model.as_ref().and_then(|model| model.materials.get(&material.name));
        let [worth, worth_in] = most(&shown.plan, material.worth_of_more.as_ref());
        let last = material.stock.as_ref().and_then(|stock| stock.numbers().last()).copied();
        sheet.rows.push(vec![
            material.name.to_string(),
            total(material.purchase.as_ref()),
            short(sum(&material.made)),
            short(sum(&material.drawn)),
            total(material.sale.as_ref()),
            most(&shown.plan, material.late.as_ref())[0].clone(),
            last.map(short).unwrap_or_default(),
            plain(known.and_then(|known| known.unit.as_deref())),
            worth,
            worth_in,
        ]);
    }
    sheet
}

/// The number farthest from 0, and the first period it is in; nothing there where it is 0, or one for several together.
fn most(plan: &Plan, value: Option<&Value>) -> [String; 2] {
    let periods = plan.horizon();
    let farthest = |value: &Value| {
        let all = periods.periods().map(|period| (period, value.at(period)));
        // Of several alike the first is told.
        all.reduce(|most, next| if next.1.abs() > most.1.abs() { next } else { most })
    };
    let Some((period, most)) = value.and_then(farthest) else { return Default::default() };
    let label = |period: Period| periods.label(period).unwrap_or_default().to_owned();
    let is_told = most.abs() > 0.0 && !matches!(value, Some(Value::Every(_)));
    [short(most), if is_told { plain(Some(&label(period))) } else { String::new() }]
}

/// `5 of 8`.
fn of_all(plan: &Plan, count: usize) -> String {
    format!("{count} of {}", plan.periods.len())
}

fn total(value: Option<&Value>) -> String {
    value.map(|value| short(sum(value))).unwrap_or_default()
}

fn sum(value: &Value) -> f64 {
    value.numbers().iter().sum()
}
