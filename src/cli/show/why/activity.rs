//! An activity, as a sum that adds up.

use serde_json::{Value as Json, json};

use super::super::super::screen::{HEAD, Screen};
use super::super::number::{align, short, signed, value};
use super::super::object::{self, number};
use super::sum::{self, Line, NoSum, Sum, What};
use super::{Subject, titled, unit_or, with_unit};
use crate::model::escape::Plain;
use crate::plan::{PlannedActivity, State};

pub(super) fn tell(screen: &mut Screen, subject: &Subject<'_>, planned: &PlannedActivity) {
    let Some(activity) = subject.model.activities.get(&planned.name) else { return };
    let sum = sum::of(subject.model, &subject.shown.plan, planned, activity);
    if screen.json() {
        screen.object(&object(subject, planned, &sum));
        return;
    }
    let unit = unit_or(activity.unit.as_deref(), "unit");
    let level = activity
        .unit
        .as_deref()
        .map_or_else(|| value(&planned.level), |unit| format!("{} {}", value(&planned.level), Plain(unit)));
    let title = titled(&planned.name, activity.label.as_deref());
    screen.say(format_args!("{HEAD}{title}{HEAD:#}: {}, {level}", planned.state.words()));
    match sum {
        Ok(sum) => {
            screen.say(format_args!("\nWhat one {unit} earns and takes{}:\n", in_currency(subject.currency)));
            screen.say(lines(subject, &sum, &unit));
            screen.say(format_args!("\n{}", meaning(subject, planned, &sum, &unit)));
        }
        Err(reason) => screen.say(format_args!("\n{}", without(&reason))),
    }
    if let Some(ends) = planned.may_vary {
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
    let mut rows: Vec<(String, String)> =
        sum.lines.iter().map(|line| (line_name(&line.what), line_sum(subject, line))).collect();
    let total = match sum.gain {
        gain if gain > 0.0 => format!("one {unit} more gains"),
        gain if gain < 0.0 => format!("one {unit} more loses"),
        _ => format!("one {unit} more makes no difference"),
    };
    let mut amounts: Vec<String> = sum.lines.iter().map(|line| signed(line.amount)).collect();
    amounts.push(signed(sum.gain));
    align(&mut amounts);
    rows.push((total, String::new()));

    let names = rows[..rows.len() - 1].iter().map(|(name, _)| width(name)).max().unwrap_or(0);
    let texts: Vec<String> = rows
        .into_iter()
        .map(
            |(name, sum)| {
                if sum.is_empty() { name } else { format!("{name}{}  {sum}", " ".repeat(names - width(&name))) }
            },
        )
        .collect();
    let (left, right) = (longest(&texts), longest(&amounts));
    let mut out = String::new();
    for (at, (text, amount)) in texts.iter().zip(&amounts).enumerate() {
        if at + 1 == texts.len() {
            out.push_str(&format!("  {}\n", "-".repeat(left + 2 + right)));
        }
        let gap = " ".repeat(left - width(text) + 2 + right - width(amount));
        out.push_str(&format!("  {text}{gap}{}\n", amount));
    }
    out.lines().map(str::trim_end).collect::<Vec<_>>().join("\n")
}

fn width(text: &str) -> usize {
    unicode_width::UnicodeWidthStr::width(text)
}

fn longest(texts: &[String]) -> usize {
    texts.iter().map(|text| width(text)).max().unwrap_or(0)
}

fn line_name(what: &What) -> String {
    match what {
        What::Price => "price".to_owned(),
        What::Cost => "cost".to_owned(),
        What::Resource { name, .. } | What::Limit { name, .. } => name.to_string(),
        What::Loads { names } => {
            let names: Vec<_> = names.iter().map(ToString::to_string).collect();
            format!("minimum load of {}", names.join(", "))
        }
    }
}

/// How the amount of a line comes about.
fn line_sum(subject: &Subject<'_>, line: &Line) -> String {
    match &line.what {
        What::Price | What::Cost | What::Loads { .. } => String::new(),
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

/// What the sum says of the state.
fn meaning(subject: &Subject<'_>, planned: &PlannedActivity, sum: &Sum, unit: &str) -> String {
    let minimise = subject.shown.plan.minimise;
    let size = subject.money(sum.gain.abs());
    match planned.state {
        State::InTheMix => "It earns exactly what it takes of scarce things, so its level stands between its bounds."
            .replacen("earns", if minimise { "saves" } else { "earns" }, 1),
        State::AtItsMost => format!("Every {unit} allowed above its at_most would gain {size}, as a rate."),
        State::AtItsLeast => format!("Every {unit} of its at_least costs {size}, as a rate."),
        State::Fixed if sum.gain < 0.0 => {
            format!("Its bounds leave one level only; one {unit} less would gain {size}.")
        }
        State::Fixed => format!("Its bounds leave one level only; one {unit} more would gain {size}."),
        State::Idle | State::Prospect => match planned.break_even {
            Some(even) if sum.gain > 0.0 => pays(planned, even, minimise, subject),
            Some(even) if minimise => format!("It would enter at a cost below {}.", subject.money(even)),
            Some(even) => format!("It would enter at a price above {}.", subject.money(even)),
            None => format!("Making one {unit} would lose {size}."),
        },
    }
}

fn pays(planned: &PlannedActivity, even: f64, minimise: bool, subject: &Subject<'_>) -> String {
    let (side, what) = if minimise { ("below", "cost") } else { ("above", "price") };
    let even = subject.money(even);
    match planned.state {
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
        NoSum::Load(name) => {
            format!(
                "There is no sum to show: the minimum load of {name} binds, and the plan does not say what that is worth."
            )
        }
        NoSum::Periods => "There is no sum to show: the plan has several periods.".to_owned(),
    }
}

fn object(subject: &Subject<'_>, planned: &PlannedActivity, sum: &Result<Sum, NoSum>) -> Json {
    let lines: Vec<Json> = sum.iter().flat_map(|sum| &sum.lines).map(line_object).collect();
    json!({
        "model": subject.shown.name,
        "standing": subject.shown.standing.key(),
        "kind": "activity",
        "name": planned.name.as_str(),
        "state": planned.state.words(),
        "may_vary": planned.may_vary.map(object::range),
        "lines": lines,
        "gain": sum.as_ref().ok().map(|sum| sum.gain),
        "break_even": planned.break_even.map(number),
    })
}

fn line_object(line: &Line) -> Json {
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
        What::Loads { names } => {
            let names: Vec<_> = names.iter().map(crate::model::Name::as_str).collect();
            json!({ "what": "minimum load", "names": names, "amount": amount })
        }
    }
}
