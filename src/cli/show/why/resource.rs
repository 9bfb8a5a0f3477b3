//! A resource: who uses how much of it, and what more of it would be worth.

use serde_json::json;

use super::super::super::screen::{HEAD, Screen};
use super::super::number::short;
use super::super::object::{self, number};
use super::share::{Share, most_first, objects, sheet, span};
use super::{Subject, titled, unit_or, with_unit};
use crate::plan::PlannedResource;

pub(super) fn tell(screen: &mut Screen, subject: &Subject<'_>, planned: &PlannedResource) {
    let Some(resource) = subject.model.resources.get(&planned.name) else { return };
    let period = subject.period;
    let users = subject.shown.plan.activities.iter().filter_map(|activity| {
        let rate = subject.model.activities.get(&activity.name)?.uses.get(&planned.name)?;
        let level = |period| Some(activity.level.at(period));
        Share::over(activity.name.to_string(), &[period], |period| rate.at(period), level)
    });
    let users = most_first(users.collect());
    let (used, capacity) = (planned.used.at(period), resource.capacity.at(period));
    let surge = planned.surge.as_ref().map(|surge| surge.at(period));
    if screen.json() {
        let mut object = json!({
            "model": subject.shown.name, "standing": subject.shown.standing.key(), "kind": "resource", "name": planned.name.as_str(),
            "used": used, "capacity": number(capacity), "users": objects(&users),
            "worth_of_more": planned.worth_of_more.as_ref().map(|worth| number(worth.at(period))),
            "holds_between": planned.holds_between.as_ref().and_then(|spans| spans.at(period)).map(object::range),
        });
        if let Some(surge) = surge {
            object["surge"] = json!(surge);
        }
        if let Some(label) = subject.label() {
            object["period"] = json!(label);
        }
        screen.object(&object);
        return;
    }
    let unit = resource.unit.as_deref();
    let of = if capacity.is_finite() {
        format!("{} of {}", short(used), with_unit(capacity, unit))
    } else {
        with_unit(used, unit)
    };
    let title = titled(&planned.name, resource.label.as_deref());
    let extra = surge.filter(|&surge| surge > 0.0);
    let extra = extra.map(|surge| format!(", {} of it extra", with_unit(surge, unit))).unwrap_or_default();
    screen.say(format_args!("{HEAD}{title}{HEAD:#}{}: {of} used{extra}", subject.in_period()));
    screen.say(format_args!("\n{}", sheet(&users, "uses per unit", "uses", used)));
    screen.say(format_args!("\n{}", worth_of_capacity(subject, planned, unit, capacity)));
}

fn worth_of_capacity(subject: &Subject<'_>, planned: &PlannedResource, unit: Option<&str>, capacity: f64) -> String {
    let one = unit_or(unit, "unit");
    let between = planned.holds_between.as_ref().and_then(|spans| spans.at(subject.period));
    let within = between.map(|between| format!(", for capacities {}", span(between))).unwrap_or_default();
    let worth = planned.worth_of_more.as_ref().map(|worth| worth.at(subject.period));
    match worth {
        _ if capacity.is_infinite() => "It has no limit, so more of it is worth nothing.".to_owned(),
        None => "What more of it would be worth is left out: several answers are equally good.".to_owned(),
        Some(0.0) => format!("More of it would be worth nothing{within}."),
        Some(worth) => {
            let less = planned.loss_of_less.as_ref().map(|less| less.at(subject.period));
            let less = match less.filter(|less| less.to_bits() != worth.to_bits()) {
                Some(less) if less.is_infinite() => "; with less there would be no plan".to_owned(),
                Some(less) => format!("; one {one} less takes {} away", subject.money(less)),
                None => ", and one less takes as much away".to_owned(),
            };
            format!("One {one} more adds {}{less}{within}.", subject.money(worth))
        }
    }
}
