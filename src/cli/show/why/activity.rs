//! An activity, as a sum that adds up.

use serde_json::{Value as Json, json};

use super::super::super::screen::{HEAD, Screen};
use super::super::number::short;
use super::super::object::{self, number};
use super::sum::{self, Line, NoSum, Sum, Untold, What};
use super::{Subject, account, titled, unit_or, with_unit};
use crate::model::Name;
use crate::model::escape::Plain;
use crate::plan::{PlannedActivity, State};

pub(super) fn tell(screen: &mut Screen, subject: &Subject<'_>, planned: &PlannedActivity) {
    let Some(activity) = subject.model.activities.get(&planned.name) else { return };
    let Some(state) = planned.state.at(subject.period) else { return };
    let sum = sum::of(subject.model, &subject.shown.plan, planned, activity, subject.period);
    if screen.json() {
        screen.object(&object(subject, planned, state, &sum));
        return;
    }
    let unit = unit_or(activity.unit.as_deref(), "unit");
    let level = short(planned.level.at(subject.period));
    let level = activity.unit.as_deref().map_or_else(|| level.clone(), |unit| format!("{level} {}", Plain(unit)));
    let title = titled(&planned.name, activity.label.as_deref());
    screen.say(format_args!("{HEAD}{title}{HEAD:#}{}: {}, {level}", subject.in_period(), state.words()));
    match sum {
        Ok(sum) => {
            screen.say(format_args!("\nWhat one {unit} earns and takes{}:\n", in_currency(subject.currency)));
            screen.say(lines(subject, &sum, &unit));
            screen.say(format_args!("\n{}", meaning(subject, planned, state, &sum, &unit)));
        }
        Err(reason) => screen.say(format_args!("\n{}", without(&reason))),
    }
    let varies = planned.may_vary.as_ref().and_then(|spans| spans.at(subject.period));
    if let Some(ends) = varies.filter(|(least, most)| least < most) {
        screen.say(format_args!("\n{}", elsewhere(subject, ends, activity.unit.as_deref())));
    }
}

/// Where plans that are as good have the level.
fn elsewhere(subject: &Subject<'_>, ends: (f64, f64), unit: Option<&str>) -> String {
    let as_good = if subject.shown.plan.minimise { "cost as little" } else { "earn as much" };
    let unit = unit.map(|unit| format!(" {}", Plain(unit))).unwrap_or_default();
    let anything = match (ends.0.is_finite(), ends.1.is_finite()) {
        (true, true) => format!("anything from {} to {}{unit}", short(ends.0), short(ends.1)),
        (true, false) => format!("anything from {}{unit} up", short(ends.0)),
        (false, true) => format!("anything up to {}{unit}", short(ends.1)),
        (false, false) => "anything".to_owned(),
    };
    format!("Other plans {as_good}: its level may be {anything}, as the others allow.")
}

fn in_currency(currency: &str) -> String {
    if currency.is_empty() { String::new() } else { format!(", in {}", Plain(currency)) }
}

/// The lines, a rule and the total, with amounts flush right.
fn lines(subject: &Subject<'_>, sum: &Sum, unit: &str) -> String {
    let total = match sum.gain {
        gain if gain > 0.0 => format!("one {unit} more gains"),
        gain if gain < 0.0 => format!("one {unit} more loses"),
        _ => format!("one {unit} more makes no difference"),
    };
    let lines = sum.lines.iter().map(|line| (line_name(&line.what), line_sum(subject, line), line.amount));
    account::drawn(lines.collect(), (total, sum.gain))
}

fn line_name(what: &What) -> String {
    match what {
        What::Price => "price".to_owned(),
        What::Cost => "cost".to_owned(),
        What::Resource { name, .. } | What::Limit { name, .. } => name.to_string(),
        What::Draws { name, .. } => format!("draws {name}"),
        What::Makes { name, .. } => format!("makes {name}"),
        What::Left(bounds) => {
            let loads: Vec<&str> = bounds.iter().filter_map(load).map(Name::as_str).collect();
            let mut told = Vec::new();
            if !loads.is_empty() {
                told.push(format!("minimum load of {}", loads.join(", ")));
            }
            if loads.len() < bounds.len() {
                told.push("how far the level may change".to_owned());
            }
            told.join(" and ")
        }
    }
}

fn load(bound: &Untold) -> Option<&Name> {
    if let Untold::Load(name) = bound { Some(name) } else { None }
}

/// How the amount of a line comes about.
fn line_sum(subject: &Subject<'_>, line: &Line) -> String {
    match &line.what {
        What::Price | What::Cost | What::Left(_) => String::new(),
        What::Draws { name, rate, worth } => at_worth(subject, name, 0.0 - *rate, *worth, ""),
        What::Makes { arrives: None, .. } => "there after the last period, so it is lost".to_owned(),
        What::Makes { name, rate, worth, arrives: Some(period) } => {
            let label = subject.model.horizon.label(*period).filter(|_| *period != subject.period);
            let there = label.map(|label| format!(" in {}", Plain(label))).unwrap_or_default();
            at_worth(subject, name, *rate, *worth, &there)
        }
        What::Resource { name, rate, worth, cost } => {
            let unit = subject.model.resources.get(name).and_then(|resource| resource.unit.as_deref());
            if *worth == 0.0 && *cost == 0.0 {
                return format!("{}; more would be worth nothing", with_unit(*rate, unit));
            }
            // With its sign, so that what stands here comes to the amount.
            let used = with_unit(0.0 - *rate, unit);
            match (*worth != 0.0, *cost != 0.0) {
                (true, true) => format!("{used} x ({} worth + {} cost)", short(*worth), short(*cost)),
                (true, false) => format!("{used} x {} worth", short(*worth)),
                (false, _) => format!("{used} x {} cost; more would be worth nothing", short(*cost)),
            }
        }
        What::Limit { worth, .. } if *worth == 0.0 => "does not bind".to_owned(),
        What::Limit { rate, worth, .. } => format!("{} x {} worth", short(0.0 - *rate), short(*worth)),
    }
}

/// So much of a material, at what it is worth where it is at hand.
fn at_worth(subject: &Subject<'_>, name: &Name, rate: f64, worth: f64, there: &str) -> String {
    let unit = subject.model.materials.get(name).and_then(|material| material.unit.as_deref());
    let amount = with_unit(rate, unit);
    if worth == 0.0 {
        format!("{amount}; more{there} would be worth nothing")
    } else {
        format!("{amount} x {} worth{there}", short(worth))
    }
}

/// What the sum says of the state.
fn meaning(subject: &Subject<'_>, planned: &PlannedActivity, state: State, sum: &Sum, unit: &str) -> String {
    let minimise = subject.shown.plan.minimise;
    let size = subject.money(sum.gain.abs());
    match state {
        State::InTheMix => "It earns exactly what it takes of scarce things, so its level stands between its bounds."
            .replacen("earns", if minimise { "saves" } else { "earns" }, 1),
        State::AtItsMost => format!("Every {unit} allowed above its at_most would gain {size}, as a rate."),
        State::AtItsLeast => format!("Every {unit} of its at_least costs {size}, as a rate."),
        State::Fixed if sum.gain < 0.0 => {
            format!("Its bounds leave one level only; one {unit} less would gain {size}.")
        }
        State::Fixed => format!("Its bounds leave one level only; one {unit} more would gain {size}."),
        State::Idle | State::Prospect => match planned.break_even.as_ref().map(|even| even.at(subject.period)) {
            Some(even) if sum.gain > 0.0 => pays(state, even, minimise, subject),
            Some(even) if minimise => format!("It would enter at a cost below {}.", subject.money(even)),
            Some(even) => format!("It would enter at a price above {}.", subject.money(even)),
            None => format!("Making one {unit} would lose {size}."),
        },
    }
}

fn pays(state: State, even: f64, minimise: bool, subject: &Subject<'_>) -> String {
    let (side, what) = if minimise { ("below", "cost") } else { ("above", "price") };
    let even = subject.money(even);
    match state {
        State::Prospect => format!(
            "It would pay: its {what} is {side} the break-even of {even}. Take `prospect` away to have it planned."
        ),
        _ => format!("Its {what} is {side} the break-even of {even}."),
    }
}

fn without(reason: &NoSum) -> String {
    match reason {
        NoSum::Worth(name) => format!(
            "There is no sum to show: several sets of worths are equally good here, so the plan leaves out that of {name}."
        ),
        NoSum::Untold(Untold::Load(name)) => {
            format!(
                "There is no sum to show: the minimum load of {name} binds, and the plan does not say what that is worth."
            )
        }
        NoSum::Untold(Untold::Change) => {
            "There is no sum to show: its level changes as far as it may, and the plan does not say what that is worth."
                .to_owned()
        }
    }
}

fn object(subject: &Subject<'_>, planned: &PlannedActivity, state: State, sum: &Result<Sum, NoSum>) -> Json {
    let lines: Vec<Json> = sum.iter().flat_map(|sum| &sum.lines).map(|line| line_object(subject, line)).collect();
    let mut object = json!({
        "model": subject.shown.name,
        "standing": subject.shown.standing.key(),
        "kind": "activity",
        "name": planned.name.as_str(),
        "state": state.words(),
        "may_vary": planned.may_vary.as_ref().and_then(|spans| spans.at(subject.period)).map(object::range),
        "lines": lines,
        "gain": sum.as_ref().ok().map(|sum| sum.gain),
        "break_even": planned.break_even.as_ref().map(|even| number(even.at(subject.period))),
    });
    if let Some(label) = subject.label() {
        object["period"] = json!(label);
        object["level"] = json!(planned.level.at(subject.period));
    }
    object
}

fn line_object(subject: &Subject<'_>, line: &Line) -> Json {
    let amount = line.amount;
    match &line.what {
        What::Price => json!({ "what": "price", "amount": amount }),
        What::Cost => json!({ "what": "cost", "amount": amount }),
        What::Resource { name, rate, worth, cost } => {
            json!({ "what": "resource", "name": name.as_str(), "rate": rate, "worth": worth, "cost": cost, "amount": amount })
        }
        What::Limit { name, rate, worth } => {
            json!({ "what": "limit", "name": name.as_str(), "rate": rate, "worth": worth, "amount": amount })
        }
        What::Draws { name, rate, worth } => {
            json!({ "what": "draws", "name": name.as_str(), "rate": rate, "worth": worth, "amount": amount })
        }
        What::Makes { name, rate, worth, arrives } => {
            let arrives = arrives.and_then(|period| subject.model.horizon.label(period));
            json!({ "what": "makes", "name": name.as_str(), "rate": rate, "worth": worth, "arrives": arrives, "amount": amount })
        }
        What::Left(bounds) => {
            let names: Vec<_> = bounds.iter().filter_map(load).map(Name::as_str).collect();
            let what = if names.len() < bounds.len() { "change" } else { "minimum load" };
            json!({ "what": what, "names": names, "amount": amount })
        }
    }
}
