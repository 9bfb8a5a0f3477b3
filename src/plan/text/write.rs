//! Writing a plan.

use std::fmt::Write as _;

use super::{HEADER, seal_for};
use crate::model::escape::Toml;
use crate::model::{Name, Value};
use crate::plan::each::{Each, Span};
use crate::plan::number;
use crate::plan::types::{
    FORMAT, Plan, PlannedActivity, PlannedLimit, PlannedMaterial, PlannedResource, RULES, Standing, State,
};

/// Bytes that one entry takes, more or less, and each of its periods beyond the first.
const ENTRY: usize = 192;
const PERIOD: usize = 48;

/// The text of `plan`, sealed, in byte order of names.
#[must_use]
pub fn write(plan: &Plan) -> String {
    let entries = plan.activities.len() + plan.resources.len() + plan.limits.len() + plan.materials.len();
    let mut out = String::with_capacity(512 + (ENTRY + PERIOD * plan.periods.len()) * entries);
    out.push_str(HEADER);
    out.push('\n');
    line(&mut out, "format  ", |out| number::push(out, f64::from(FORMAT)));
    line(&mut out, "rules   ", |out| number::push(out, f64::from(RULES)));
    line(&mut out, "answers ", |out| quoted(out, &plan.answers.to_string()));
    let sealed_from = out.len();
    standing(&mut out, &plan.standing);
    line(&mut out, "aim     ", |out| number::push(out, plan.aim));
    if plan.minimise {
        flag(&mut out, "minimise", true);
    }
    if let Some(currency) = &plan.currency {
        line(&mut out, "currency", |out| quoted(out, currency));
    }
    periods(&mut out, &plan.periods);
    flag(&mut out, "exact   ", plan.exact);
    flag(&mut out, "ties    ", plan.ties);
    if plan.may_vary_left_out > 0 {
        line(&mut out, "may_vary_left_out", |out| out.push_str(&plan.may_vary_left_out.to_string()));
    }
    flag(&mut out, "complete", plan.complete);
    for planned in &plan.activities {
        activity(&mut out, planned, plan.minimise);
    }
    for planned in &plan.resources {
        resource(&mut out, planned);
    }
    for planned in &plan.limits {
        limit(&mut out, planned);
    }
    for planned in &plan.materials {
        material(&mut out, planned);
    }
    let seal = seal_line(&seal_for(&out));
    out.insert_str(sealed_from, &seal);
    out
}

/// The line that carries a seal.
pub(in crate::plan) fn seal_line(seal: &str) -> String {
    format!("seal     = \"{seal}\"\n")
}

/// The line or two that say a standing.
pub(super) fn standing(out: &mut String, standing: &Standing) {
    line(out, "standing", |out| quoted(out, standing.word()));
    if let Standing::Held(reason) = standing {
        line(out, "held    ", |out| quoted(out, reason));
    }
}

/// The line that names the periods, where they have names.
pub(in crate::plan) fn periods(out: &mut String, periods: &[Name]) {
    if !periods.is_empty() {
        line(out, "periods ", |out| list(out, periods, |out, name| quoted(out, name.as_str())));
    }
}

fn activity(out: &mut String, planned: &PlannedActivity, minimise: bool) {
    out.push_str("\n[[activities]]\n");
    line(out, "name       ", |out| quoted(out, planned.name.as_str()));
    line(out, "level      ", |out| value(out, &planned.level));
    line(out, "state      ", |out| state(out, &planned.state));
    spans(out, "may_vary   ", planned.may_vary.as_ref());
    spans(out, if minimise { "cost_range " } else { "price_range" }, planned.price_range.as_ref());
    values(out, "break_even ", planned.break_even.as_ref());
    values(out, "loses      ", planned.loses.as_ref());
}

fn resource(out: &mut String, planned: &PlannedResource) {
    out.push_str("\n[[resources]]\n");
    line(out, "name         ", |out| quoted(out, planned.name.as_str()));
    line(out, "used         ", |out| value(out, &planned.used));
    values(out, "surge        ", planned.surge.as_ref());
    values(out, "spare        ", planned.spare.as_ref());
    values(out, "worth_of_more", planned.worth_of_more.as_ref());
    values(out, "loss_of_less ", planned.loss_of_less.as_ref());
    spans(out, "holds_between", planned.holds_between.as_ref());
}

fn limit(out: &mut String, planned: &PlannedLimit) {
    out.push_str("\n[[limits]]\n");
    line(out, "name         ", |out| quoted(out, planned.name.as_str()));
    values(out, "value        ", planned.value.as_ref());
    values(out, "spare        ", planned.spare.as_ref());
    values(out, "worth_of_more", planned.worth_of_more.as_ref());
    values(out, "loss_of_less ", planned.loss_of_less.as_ref());
    spans(out, "holds_between", planned.holds_between.as_ref());
}

fn material(out: &mut String, planned: &PlannedMaterial) {
    out.push_str("\n[[materials]]\n");
    line(out, "name         ", |out| quoted(out, planned.name.as_str()));
    values(out, "purchase     ", planned.purchase.as_ref());
    values(out, "sale         ", planned.sale.as_ref());
    values(out, "late         ", planned.late.as_ref());
    values(out, "stock        ", planned.stock.as_ref());
    values(out, "discard      ", planned.discard.as_ref());
    values(out, "made         ", Some(&planned.made));
    values(out, "drawn        ", Some(&planned.drawn));
    values(out, "worth_of_more", planned.worth_of_more.as_ref());
    values(out, "loss_of_less ", planned.loss_of_less.as_ref());
}

/// One line: `key = value`.
pub(in crate::plan) fn line(out: &mut String, key: &str, value: impl FnOnce(&mut String)) {
    out.push_str(key);
    out.push_str(" = ");
    value(out);
    out.push('\n');
}

fn flag(out: &mut String, key: &str, holds: bool) {
    line(out, key, |out| out.push_str(if holds { "true" } else { "false" }));
}

/// A line with the numbers of a value, where there are any.
fn values(out: &mut String, key: &str, numbers: Option<&Value>) {
    if let Some(numbers) = numbers {
        line(out, key, |out| value(out, numbers));
    }
}

fn spans(out: &mut String, key: &str, told: Option<&Each<Span>>) {
    let pair = |out: &mut String, &(least, most): &Span| list(out, &[least, most], |out, &end| number::push(out, end));
    match told {
        None => {}
        Some(Each::One(span)) => line(out, key, |out| pair(out, span)),
        Some(Each::Listed(spans)) => line(out, key, |out| list(out, spans, pair)),
    }
}

/// A state, or a list of one per period.
pub(in crate::plan) fn state(out: &mut String, told: &Each<State>) {
    match told {
        Each::One(state) => quoted(out, state.words()),
        Each::Listed(states) => list(out, states, |out, state| quoted(out, state.words())),
    }
}

/// A number, or a list of one per period.
pub(in crate::plan) fn value(out: &mut String, value: &Value) {
    match value {
        Value::Every(number) => number::push(out, *number),
        Value::Listed(numbers) => list(out, numbers, |out, &number| number::push(out, number)),
    }
}

fn list<T>(out: &mut String, items: &[T], push: impl Fn(&mut String, &T)) {
    out.push('[');
    for (position, item) in items.iter().enumerate() {
        if position > 0 {
            out.push_str(", ");
        }
        push(out, item);
    }
    out.push(']');
}

/// A text as a TOML string.
pub(in crate::plan) fn quoted(out: &mut String, text: &str) {
    if text.bytes().all(|byte| byte.is_ascii_alphanumeric() || matches!(byte, b'_' | b'-' | b' ')) {
        // Most texts need no escape, and there are thousands.
        out.push('"');
        out.push_str(text);
        out.push('"');
        return;
    }
    // Writing to a string cannot fail.
    let _ = write!(out, "{}", Toml(text));
}
