//! What a note says of other plans that are as good.

use super::tables::{heaviest_first, weight};
use super::words::{amount, amounts, count, listed, unit_of_activity, with_unit};
use crate::model::escape::Markdown;
use crate::model::{Model, Name};
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
    let ends = plan.activities.iter().filter_map(|planned| Some((&planned.name, planned.may_vary?)));
    let weighed = ends.map(|(name, ends)| (weight(model, name, ends.1 - ends.0), name, (name, ends)));
    let ordered = heaviest_first(weighed.collect());
    let named = ordered.iter().take(NAMED).enumerate();
    let mut told: Vec<String> = named.map(|(at, &(name, ends))| one(name, ends, model, at == 0)).collect();
    if ordered.len() > NAMED {
        told.push(count(ordered.len() - NAMED, "other level"));
    }
    told
}

/// `floor_tile may be anything from 0 to 40 m2`.
fn one(name: &Name, (least, most): (f64, f64), model: Option<&Model>, first: bool) -> String {
    let united = |amount: &str| with_unit(amount, unit_of_activity(model, name));
    let anything = match (least.is_finite(), most.is_finite()) {
        (true, true) => {
            let (least, most) = amounts(least, most);
            format!("anything from {least} to {}", united(&most))
        }
        (true, false) => format!("anything from {} up", united(&amount(least))),
        (false, true) => format!("anything up to {}", united(&amount(most))),
        (false, false) => "anything".to_owned(),
    };
    let may_be = if first { " may be" } else { "" };
    format!("{}{may_be} {anything}", Markdown(name.as_str()))
}
