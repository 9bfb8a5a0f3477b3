//! A resource or a limit: who takes how much of it, and what more of it would be worth.

use serde_json::json;

use super::super::super::screen::{HEAD, Screen};
use super::super::number::{range, short};
use super::super::object::number;
use super::super::table::Sheet;
use super::{Subject, sum, titled, unit_or, with_unit};
use crate::model::{Bound, Name, Period};
use crate::plan::{PlannedActivity, PlannedLimit, PlannedResource};

/// What one activity takes.
struct Share<'a> {
    name: &'a Name,
    rate: f64,
    level: f64,
}

impl Share<'_> {
    fn taken(&self) -> f64 {
        self.rate * self.level
    }
}

/// Who takes how much, most first; those that would take some, if they were made, last.
fn shares<'a>(subject: &'a Subject<'_>, period: Period, rate: impl Fn(&'a PlannedActivity) -> f64) -> Vec<Share<'a>> {
    let planned = subject.shown.plan.activities.iter();
    let shares =
        planned.map(|planned| Share { name: &planned.name, rate: rate(planned), level: planned.level.at(period) });
    let mut shares: Vec<_> = shares.filter(|share| share.rate != 0.0).collect();
    shares.sort_by(|a, b| b.taken().abs().total_cmp(&a.taken().abs()).then_with(|| a.name.cmp(b.name)));
    shares
}

fn sheet(shares: &[Share<'_>], rate: &'static str, taken: &'static str, whole: f64) -> String {
    let mut sheet = Sheet::new(&[("name", false), ("level", true), (rate, true), (taken, true), ("share", true)]);
    for share in shares {
        let part = if whole > 0.0 { format!("{:.1} %", 100.0 * share.taken() / whole) } else { String::new() };
        sheet.rows.push(vec![
            share.name.to_string(),
            short(share.level),
            short(share.rate),
            short(share.taken()),
            part,
        ]);
    }
    sheet.text()
}

fn objects(shares: &[Share<'_>]) -> Vec<serde_json::Value> {
    let object = |share: &Share<'_>| json!({ "name": share.name.as_str(), "rate": share.rate, "level": share.level, "takes": share.taken() });
    shares.iter().map(object).collect()
}

pub(super) fn of_resource(screen: &mut Screen, subject: &Subject<'_>, planned: &PlannedResource) {
    let (Some(resource), Some(period)) =
        (subject.model.resources.get(&planned.name), subject.model.horizon.periods().next())
    else {
        return;
    };
    let rate = |activity: &PlannedActivity| {
        let known = subject.model.activities.get(&activity.name);
        known.and_then(|known| known.uses.get(&planned.name)).map_or(0.0, |rate| rate.at(period))
    };
    let shares = shares(subject, period, rate);
    let (used, capacity) = (planned.used.at(period), resource.capacity.at(period));
    if screen.json() {
        screen.object(&json!({
            "model": subject.shown.name, "standing": subject.shown.standing.key(), "kind": "resource", "name": planned.name.as_str(),
            "used": used, "capacity": number(capacity), "users": objects(&shares),
            "worth_of_more": planned.worth_of_more.map(number),
            "holds_between": planned.holds_between.map(|(least, most)| [number(least), number(most)]),
        }));
        return;
    }
    let unit = resource.unit.as_deref();
    let of = if capacity.is_finite() {
        format!("{} of {}", short(used), with_unit(capacity, unit))
    } else {
        with_unit(used, unit)
    };
    screen.say(format_args!("{HEAD}{}{HEAD:#}: {of} used", titled(&planned.name, resource.label.as_deref())));
    screen.say(format_args!("\n{}", sheet(&shares, "uses per unit", "uses", used)));
    screen.say(format_args!("\n{}", worth_of_capacity(subject, planned, unit, capacity)));
}

fn worth_of_capacity(subject: &Subject<'_>, planned: &PlannedResource, unit: Option<&str>, capacity: f64) -> String {
    let one = unit_or(unit, "unit");
    let within = planned.holds_between.map(|between| format!(", for capacities {}", span(between))).unwrap_or_default();
    match planned.worth_of_more {
        _ if capacity.is_infinite() => "It has no limit, so more of it is worth nothing.".to_owned(),
        None => "What more of it would be worth is left out: several answers are equally good.".to_owned(),
        Some(0.0) => format!("More of it would be worth nothing{within}."),
        Some(worth) => {
            let less = planned.loss_of_less.filter(|&less| Some(less) != planned.worth_of_more);
            let less = match less {
                Some(less) if less.is_infinite() => "; with less there would be no plan".to_owned(),
                Some(less) => format!("; one {one} less takes {} away", subject.money(less)),
                None => ", and one less takes as much away".to_owned(),
            };
            format!("One {one} more adds {}{less}{within}.", subject.money(worth))
        }
    }
}

/// `of 141 to 203.5`, `from 141 on`, `up to 203.5`.
fn span(between: (f64, f64)) -> String {
    match between {
        (least, most) if least.is_finite() && most.is_finite() => format!("of {}", range(between)),
        (least, _) if least.is_finite() => format!("from {} on", short(least)),
        _ => range(between),
    }
}

pub(super) fn of_limit(screen: &mut Screen, subject: &Subject<'_>, planned: &PlannedLimit) {
    let (Some(limit), Some(period)) = (subject.model.limits.get(&planned.name), subject.model.horizon.periods().next())
    else {
        return;
    };
    let rate = |terms: &std::collections::BTreeMap<_, _>, activity: &PlannedActivity| {
        let known = subject.model.activities.get(&activity.name);
        known.map_or(0.0, |known| sum::total(terms, &activity.name, known, period))
    };
    let terms = shares(subject, period, |activity| rate(&limit.terms, activity));
    let per = limit.per.as_ref().map(|per| shares(subject, period, |activity| rate(per, activity)));
    let taken: f64 = terms.iter().map(Share::taken).sum();
    if screen.json() {
        screen.object(&json!({
            "model": subject.shown.name, "standing": subject.shown.standing.key(), "kind": "limit", "name": planned.name.as_str(),
            "terms": objects(&terms), "per": per.as_deref().map(objects),
            "value": planned.value.as_ref().map(|value| value.at(period)),
            "worth_of_more": planned.worth_of_more.map(number),
        }));
        return;
    }
    let value =
        planned.value.as_ref().map_or_else(|| "nothing to divide by".to_owned(), |value| short(value.at(period)));
    let title = titled(&planned.name, limit.label.as_deref());
    screen.say(format_args!("{HEAD}{title}{HEAD:#}: {value}, {}", wanted(&limit.bound, period)));
    screen.say(format_args!("\n{}", sheet(&terms, "counts", "terms", taken)));
    if let Some(per) = &per {
        let whole: f64 = per.iter().map(Share::taken).sum();
        screen.say(format_args!(
            "\n{}\n\n{} / {} = {value}",
            sheet(per, "counts", "per", whole),
            short(taken),
            short(whole)
        ));
    }
    screen.say(format_args!("\n{}", worth_of_bound(subject, planned, per.is_some())));
}

fn wanted(bound: &Bound, period: Period) -> String {
    match bound {
        Bound::Equals(value) => format!("which must be {}", short(value.at(period))),
        Bound::Between(least, most) => match (least.at(period), most.at(period)) {
            (least, most) if least.is_infinite() => format!("at most {}", short(most)),
            (least, most) if most.is_infinite() => format!("at least {}", short(least)),
            (least, most) => format!("at least {}, at most {}", short(least), short(most)),
        },
    }
}

fn worth_of_bound(subject: &Subject<'_>, planned: &PlannedLimit, shared: bool) -> String {
    let within = planned.holds_between.map(|between| format!(", for bounds {}", span(between))).unwrap_or_default();
    let one = if shared { "One unit of the terms more than the share allows" } else { "A bound larger by one" };
    match planned.worth_of_more {
        None => "What moving its bound would be worth is left out: several answers are equally good.".to_owned(),
        Some(0.0) => format!("It does not bind{within}."),
        Some(worth) if worth > 0.0 => format!("{one} adds {}{within}.", subject.money(worth)),
        Some(worth) if shared => {
            format!("One unit of the terms less than the share asks for adds {}.", subject.money(0.0 - worth))
        }
        Some(worth) => format!("{one} takes {} away{within}.", subject.money(0.0 - worth)),
    }
}
