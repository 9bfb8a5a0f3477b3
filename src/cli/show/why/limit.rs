//! A limit: what has a part in it, and what moving its bound would be worth.

use std::collections::BTreeMap;

use serde_json::json;

use super::super::super::screen::{HEAD, Screen};
use super::super::number::short;
use super::super::object::number;
use super::share::{Share, most_first, objects, sheet, span};
use super::{Subject, sum, titled};
use crate::model::{Bound, Flow, Limit, Over, Period, Term, Value};
use crate::plan::{Plan, PlannedLimit};

pub(super) fn tell(screen: &mut Screen, subject: &Subject<'_>, planned: &PlannedLimit) {
    let Some(limit) = subject.model.limits.get(&planned.name) else { return };
    let periods = periods(subject, limit);
    let terms = shares(subject, &limit.terms, &periods);
    let per = limit.per.as_ref().map(|per| shares(subject, per, &periods));
    let taken: f64 = terms.iter().map(|share| share.taken).sum();
    let value = planned.value.as_ref().map(|value| value.at(subject.period));
    if screen.json() {
        let mut object = json!({
            "model": subject.shown.name, "standing": subject.shown.standing.key(), "kind": "limit", "name": planned.name.as_str(),
            "terms": objects(&terms), "per": per.as_deref().map(objects), "value": value,
            "worth_of_more": planned.worth_of_more.as_ref().map(|worth| number(worth.at(subject.period))),
        });
        let labels = periods.iter().filter_map(|&period| subject.model.horizon.label(period));
        match limit.over {
            Over::Each => drop(subject.label().map(|label| object["period"] = json!(label))),
            _ => object["periods"] = labels.collect(),
        }
        screen.object(&object);
        return;
    }
    let value = value.map_or_else(|| "nothing to divide by".to_owned(), short);
    let title = titled(&planned.name, limit.label.as_deref());
    let place = match limit.over {
        Over::Each => subject.in_period(),
        _ => format!(" over {} periods together", periods.len()),
    };
    screen.say(format_args!("{HEAD}{title}{HEAD:#}{place}: {value}, {}", wanted(&limit.bound, subject.period)));
    screen.say(format_args!("\n{}", sheet(&terms, "counts", "terms", taken)));
    if let Some(per) = &per {
        let whole: f64 = per.iter().map(|share| share.taken).sum();
        screen.say(format_args!(
            "\n{}\n\n{} / {} = {value}",
            sheet(per, "counts", "per", whole),
            short(taken),
            short(whole)
        ));
    }
    screen.say(format_args!("\n{}", worth_of_bound(subject, planned, per.is_some())));
}

/// The periods that are summed over.
fn periods(subject: &Subject<'_>, limit: &Limit) -> Vec<Period> {
    match &limit.over {
        Over::Each => vec![subject.period],
        over => subject.model.horizon.periods().filter(|&period| sum::covers(over, period)).collect(),
    }
}

fn shares(subject: &Subject<'_>, terms: &BTreeMap<Term, Value>, periods: &[Period]) -> Vec<Share> {
    let plan = &subject.shown.plan;
    let of_activities = plan.activities.iter().filter_map(|planned| {
        let known = subject.model.activities.get(&planned.name)?;
        let rate = |period| sum::total(terms, &planned.name, known, period);
        Share::over(planned.name.to_string(), periods, rate, |period| Some(planned.level.at(period)))
    });
    let of_others = terms.iter().filter(|(term, _)| matches!(term, Term::Material(..) | Term::Surge(..)));
    let of_others = of_others.filter_map(|(term, rate)| {
        let level = |period| level(subject, plan, term, period);
        Share::over(term.to_string(), periods, |period| rate.at(period), level)
    });
    most_first(of_activities.chain(of_others).collect())
}

/// How much of a flow or of extra capacity there is; `None` where the plan tells of several tiers together.
fn level(subject: &Subject<'_>, plan: &Plan, term: &Term, period: Period) -> Option<f64> {
    let (value, tiers, tier) = match term {
        Term::Surge(name, tier) => {
            let planned = plan.resources.iter().find(|planned| planned.name == *name)?;
            (planned.surge.as_ref(), subject.model.resources.get(name)?.surge.len(), *tier)
        }
        Term::Material(name, flow) => {
            let planned = plan.materials.iter().find(|planned| planned.name == *name)?;
            let known = subject.model.materials.get(name)?;
            match *flow {
                Flow::Purchase(tier) => (planned.purchase.as_ref(), known.purchase.len(), tier),
                Flow::Sale(tier) => (planned.sale.as_ref(), known.sale.len(), tier),
                Flow::Late(tier) => (planned.late.as_ref(), known.sale.len(), tier),
                Flow::Stock => (planned.stock.as_ref(), 1, None),
                Flow::Discard => (planned.discard.as_ref(), 1, None),
            }
        }
        Term::Activity(_) | Term::Tag(_) | Term::All => return None,
    };
    // What cannot be is none.
    (tier.is_none() || tiers <= 1).then(|| value.map_or(0.0, |value| value.at(period)))
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
    let between = planned.holds_between.as_ref().and_then(|spans| spans.at(subject.period));
    let within = between.map(|between| format!(", for bounds {}", span(between))).unwrap_or_default();
    let one = if shared { "One unit of the terms more than the share allows" } else { "A bound larger by one" };
    match planned.worth_of_more.as_ref().map(|worth| worth.at(subject.period)) {
        None => "What moving its bound would be worth is left out: several answers are equally good.".to_owned(),
        Some(0.0) => format!("It does not bind{within}."),
        Some(worth) if worth > 0.0 => format!("{one} adds {}{within}.", subject.money(worth)),
        Some(worth) if shared => {
            format!("One unit of the terms less than the share asks for adds {}.", subject.money(0.0 - worth))
        }
        Some(worth) => format!("{one} takes {} away{within}.", subject.money(0.0 - worth)),
    }
}
