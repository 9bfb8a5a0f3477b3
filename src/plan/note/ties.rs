//! What a note says of other plans that are as good.

use super::moves::{heaviest_first, weight};
use super::periods;
use super::words::{amount, amounts, count, listed, unit_of_activity, with_unit};
use crate::model::escape::Markdown;
use crate::model::{Model, Name, Value};
use crate::plan::each::{Each, Span};
use crate::plan::types::Plan;

/// The most activities told by name.
const NAMED: usize = 6;

/// A sentence or two; empty where no other plan is as good.
pub(super) fn told(plan: &Plan, model: Option<&Model>) -> String {
    if !plan.ties {
        return String::new();
    }
    let as_good = if plan.minimise { "Other plans cost as little" } else { "Other plans earn as much" };
    let varying = varying(plan, model);
    let how_far = match varying.as_slice() {
        [] => String::new(),
        [only] => format!(": {only}"),
        several => format!(": {}, each as the others allow", listed(several)),
    };
    let this_one = if plan.exact {
        "the one shown is always the same for the same model"
    } else {
        // What a tolerance has decided is proven good, but not to be the only answer.
        "the one shown is one of them"
    };
    let left_out = match plan.may_vary_left_out {
        0 => String::new(),
        many => format!(" How far {} may differ is not worked out for a model of this size.", count(many, "level")),
    };
    format!("{as_good}{how_far}; {this_one}.{left_out}")
}

/// How far levels may go, those first where that weighs most in the aim.
fn varying(plan: &Plan, model: Option<&Model>) -> Vec<String> {
    let spans = plan.activities.iter().filter_map(|planned| Some((&planned.name, planned.may_vary.as_ref()?)));
    let widths = |spans: &Each<Span>| Value::Listed(spans.all().iter().map(|(least, most)| most - least).collect());
    let weighed = spans.map(|(name, spans)| (weight(model, name, &widths(spans)), name, (name, spans)));
    let ordered = heaviest_first(weighed.collect());
    let named = ordered.iter().take(NAMED).enumerate();
    let mut told: Vec<String> = named.map(|(at, &(name, spans))| one(name, spans, plan, model, at == 0)).collect();
    if ordered.len() > NAMED {
        told.push(count(ordered.len() - NAMED, "other level"));
    }
    told
}

/// `floor_tile may be anything from 0 to 40 m2`; over several periods, in the one where it may go farthest.
fn one(name: &Name, spans: &Each<Span>, plan: &Plan, model: Option<&Model>, first: bool) -> String {
    let united = |amount: &str| with_unit(amount, unit_of_activity(model, name));
    let width = |span: &Span| span.1 - span.0;
    let widest = spans.all().iter().enumerate().rev().max_by(|a, b| width(a.1).total_cmp(&width(b.1)));
    let (place, (least, most)) = widest.map_or((0, (0.0, 0.0)), |(place, &span)| (place, span));
    let anything = match (least.is_finite(), most.is_finite()) {
        (true, true) => {
            let (least, most) = amounts(least, most);
            format!("anything from {least} to {}", united(&most))
        }
        (true, false) => format!("anything from {} up", united(&amount(least))),
        (false, true) => format!("anything up to {}", united(&amount(most))),
        (false, false) => "anything".to_owned(),
    };
    let others = spans.all().iter().filter(|span| width(span) > 0.0).count().saturating_sub(1);
    let others = if others > 0 { format!(" and differ in {}", count(others, "other period")) } else { String::new() };
    let period = match plan.periods.len() {
        0 | 1 => String::new(),
        _ => format!(" in {}{others}", periods::name(place, &plan.periods)),
    };
    let may_be = if first { " may be" } else { "" };
    format!("{}{may_be} {anything}{period}", Markdown(name.as_str()))
}
