//! A material in a period: what comes in and what goes out, line by line, and what one more at hand would be worth.

use serde_json::{Value as Json, json};

use super::super::super::screen::{HEAD, Screen};
use super::super::number::short;
use super::super::object::number;
use super::{Subject, account, titled, unit_or, with_unit};
use crate::model::escape::Plain;
use crate::model::{Material, Period, Value};
use crate::plan::PlannedMaterial;

/// What comes in (positive) or goes out (negative).
struct Flow {
    /// The activity that makes or draws it; `None` for the others.
    activity: Option<String>,
    what: &'static str,
    /// How the amount comes about; empty where there is nothing to say.
    sum: String,
    amount: f64,
}

pub(super) fn tell(screen: &mut Screen, subject: &Subject<'_>, planned: &PlannedMaterial) {
    let Some(material) = subject.model.materials.get(&planned.name) else { return };
    let flows = flows(subject, planned, material);
    let left = at(planned.stock.as_ref(), subject.period);
    if screen.json() {
        screen.object(&object(subject, planned, &flows, left));
        return;
    }
    let title = titled(&planned.name, material.label.as_deref());
    let unit = material.unit.as_deref();
    let left_told = format!("{} left at the end", with_unit(left, unit));
    screen.say(format_args!("{HEAD}{title}{HEAD:#}{}: {left_told}", subject.in_period()));
    let lines = flows.iter().map(|flow| {
        let name = flow.activity.as_ref().map_or(flow.what.to_owned(), |name| format!("{} {name}", flow.what));
        (name, flow.sum.clone(), flow.amount)
    });
    let drawn = account::drawn(lines.collect(), ("left at the end".to_owned(), left));
    screen.say(format_args!("\nWhat comes in and goes out{}:\n\n{drawn}", in_unit(unit)));
    if let Some(late) = planned.late.as_ref().map(|late| late.at(subject.period)).filter(|&late| late > 0.0) {
        screen.say(format_args!("\nFirm sales of {} are not delivered yet.", with_unit(late, unit)));
    }
    screen.say(format_args!("\n{}", worth(subject, planned, unit)));
}

/// All that comes in, then all that goes out; only what is not nothing, and what was left before.
fn flows(subject: &Subject<'_>, planned: &PlannedMaterial, material: &Material) -> Vec<Flow> {
    let period = subject.period;
    let before = match period.before(1) {
        Some(before) => at(planned.stock.as_ref(), before),
        None => material.opening,
    };
    let one = |what, amount| Flow { activity: None, what, sum: String::new(), amount };
    let mut flows = vec![one("there before", before), one("bought", at(planned.purchase.as_ref(), period))];
    flows.extend(by_activities(subject, planned, period, true));
    flows.extend(by_activities(subject, planned, period, false));
    flows.push(one("sold", 0.0 - at(planned.sale.as_ref(), period)));
    flows.push(one("thrown away", 0.0 - at(planned.discard.as_ref(), period)));
    flows.retain(|flow| flow.what == "there before" || flow.amount.abs() > 0.0);
    flows
}

fn by_activities(subject: &Subject<'_>, material: &PlannedMaterial, period: Period, makes: bool) -> Vec<Flow> {
    let mut flows = Vec::new();
    for planned in &subject.shown.plan.activities {
        let Some(activity) = subject.model.activities.get(&planned.name) else { continue };
        let (rates, begun, sign) = if makes {
            (&activity.makes, period.before(activity.lead), 1.0)
        } else {
            (&activity.draws, Some(period), -1.0)
        };
        let (Some(rate), Some(begun)) = (rates.get(&material.name), begun) else { continue };
        let (rate, level) = (rate.at(begun), planned.level.at(begun));
        let from = subject.model.horizon.label(begun).filter(|_| begun != period);
        let from = from.map(|label| format!(", begun in {}", Plain(label))).unwrap_or_default();
        flows.push(Flow {
            activity: Some(planned.name.to_string()),
            what: if makes { "made by" } else { "drawn by" },
            sum: format!("{} x {}{from}", with_unit(level, activity.unit.as_deref()), short(rate)),
            amount: sign * rate * level,
        });
    }
    flows.sort_by(|a, b| b.amount.abs().total_cmp(&a.amount.abs()));
    flows
}

fn worth(subject: &Subject<'_>, planned: &PlannedMaterial, unit: Option<&str>) -> String {
    let one = unit_or(unit, "unit");
    match planned.worth_of_more.as_ref().map(|worth| worth.at(subject.period)) {
        None => "What more at hand would be worth is left out: several answers are equally good.".to_owned(),
        Some(0.0) => "More at hand would be worth nothing.".to_owned(),
        Some(worth) if worth > 0.0 => {
            format!("One {one} more at hand adds {}, and one less takes as much away.", subject.money(worth))
        }
        Some(worth) => {
            format!("One {one} more at hand takes {} away: it must be got rid of.", subject.money(0.0 - worth))
        }
    }
}

fn object(subject: &Subject<'_>, planned: &PlannedMaterial, flows: &[Flow], left: f64) -> Json {
    let flow = |flow: &Flow| json!({ "what": flow.what, "name": flow.activity, "amount": flow.amount });
    let worth = planned.worth_of_more.as_ref().map(|worth| number(worth.at(subject.period)));
    json!({
        "model": subject.shown.name, "standing": subject.shown.standing.key(), "kind": "material",
        "name": planned.name.as_str(), "period": subject.label(),
        "lines": flows.iter().map(flow).collect::<Json>(), "left": left,
        "late": planned.late.as_ref().map(|late| late.at(subject.period)), "worth_of_more": worth,
    })
}

fn in_unit(unit: Option<&str>) -> String {
    unit.map(|unit| format!(", in {}", Plain(unit))).unwrap_or_default()
}

fn at(value: Option<&Value>, period: Period) -> f64 {
    value.map_or(0.0, |value| value.at(period))
}
