//! Writing a plan.

use std::fmt::Write as _;

use super::{HEADER, seal_for};
use crate::model::Value;
use crate::model::escape::Toml;
use crate::plan::number;
use crate::plan::types::{FORMAT, Plan, PlannedActivity, PlannedLimit, PlannedResource, RULES, Standing};

/// Bytes that one entry takes, more or less.
const ENTRY: usize = 192;

/// The text of `plan`, sealed, in byte order of names.
#[must_use]
pub fn write(plan: &Plan) -> String {
    let entries = plan.activities.len() + plan.resources.len() + plan.limits.len();
    let mut out = String::with_capacity(512 + ENTRY * entries);
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

fn activity(out: &mut String, planned: &PlannedActivity, minimise: bool) {
    out.push_str("\n[[activities]]\n");
    line(out, "name       ", |out| quoted(out, planned.name.as_str()));
    line(out, "level      ", |out| value(out, &planned.level));
    line(out, "state      ", |out| quoted(out, planned.state.words()));
    pair(out, "may_vary   ", planned.may_vary);
    pair(out, if minimise { "cost_range " } else { "price_range" }, planned.price_range);
    single(out, "break_even ", planned.break_even);
    single(out, "loses      ", planned.loses);
}

fn resource(out: &mut String, planned: &PlannedResource) {
    out.push_str("\n[[resources]]\n");
    line(out, "name         ", |out| quoted(out, planned.name.as_str()));
    line(out, "used         ", |out| value(out, &planned.used));
    if let Some(spare) = &planned.spare {
        line(out, "spare        ", |out| value(out, spare));
    }
    single(out, "worth_of_more", planned.worth_of_more);
    single(out, "loss_of_less ", planned.loss_of_less);
    pair(out, "holds_between", planned.holds_between);
}

fn limit(out: &mut String, planned: &PlannedLimit) {
    out.push_str("\n[[limits]]\n");
    line(out, "name         ", |out| quoted(out, planned.name.as_str()));
    if let Some(numbers) = &planned.value {
        line(out, "value        ", |out| value(out, numbers));
    }
    if let Some(spare) = &planned.spare {
        line(out, "spare        ", |out| value(out, spare));
    }
    single(out, "worth_of_more", planned.worth_of_more);
    single(out, "loss_of_less ", planned.loss_of_less);
    pair(out, "holds_between", planned.holds_between);
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

fn single(out: &mut String, key: &str, number: Option<f64>) {
    if let Some(number) = number {
        line(out, key, |out| number::push(out, number));
    }
}

fn pair(out: &mut String, key: &str, range: Option<(f64, f64)>) {
    if let Some((least, most)) = range {
        line(out, key, |out| list(out, &[least, most]));
    }
}

/// A number, or a list of one per period.
pub(in crate::plan) fn value(out: &mut String, value: &Value) {
    match value {
        Value::Every(number) => number::push(out, *number),
        Value::Listed(numbers) => list(out, numbers),
    }
}

fn list(out: &mut String, numbers: &[f64]) {
    out.push('[');
    for (position, &number) in numbers.iter().enumerate() {
        if position > 0 {
            out.push_str(", ");
        }
        number::push(out, number);
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
