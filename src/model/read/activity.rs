//! Reading one activity.

use std::collections::BTreeMap;

use super::bounds;
use super::fields::{Fields, Given};
use super::findings::{Among, Cure, shown};
use super::known::Known;
use super::number::{self, Role};
use crate::model::name::Name;
use crate::model::types::{Activity, Aim, Resource};
use crate::model::value::Value;

/// The activity in a table.
pub(super) fn read(fields: &mut Fields<'_, '_>, aim: Aim, resources: &Known<'_, '_, Resource>) -> Activity {
    let default = Activity::default();
    if let (Aim::Minimise, Some(span)) = (aim, fields.key_span("price")) {
        let message = "an activity has no `price` where the aim is \"minimise\"".to_owned();
        let help = "take it out; to weigh earnings against costs, write aim = \"maximise\"";
        fields.findings().add(&span, "price-when-minimising", message, help);
    }
    let at_least = fields.value("at_least", Role::Level);
    let at_most = fields.value("at_most", Role::Most);
    let prospect = fields.flag("prospect");
    check_bounds(fields, at_least.as_ref(), at_most.as_ref(), prospect);
    Activity {
        label: fields.text("label"),
        unit: fields.text("unit"),
        price: fields.value("price", Role::Amount).map_or(default.price, |given| given.value),
        cost: fields.value("cost", Role::Amount).map_or(default.cost, |given| given.value),
        uses: uses(fields, resources),
        at_least: at_least.map_or(default.at_least, |given| given.value),
        at_most: at_most.map_or(default.at_most, |given| given.value),
        tags: fields.names("tags").into_iter().collect(),
        prospect,
        ..default
    }
}

fn check_bounds(fields: &mut Fields<'_, '_>, least: Option<&Given>, most: Option<&Given>, prospect: bool) {
    let left_out = fields.key_span("at_least").is_none();
    let findings = fields.findings();
    match (least, most) {
        (Some(least), Some(most)) => bounds::ordered(("at_least", least), ("at_most", most), findings),
        (None, Some(most)) if left_out && below_nothing(&most.value) => {
            let message = "`at_most` is below 0, but a level is at least 0 where `at_least` is left out".to_owned();
            let help = "raise it, or give an `at_least` below it (-inf for none)";
            findings.add(&most.span, "bounds-crossed", message, help);
        }
        _ => {}
    }
    if !prospect {
        return;
    }
    if let Some(least) = least.filter(|least| above_nothing(&least.value)) {
        let message = "a prospect is never made, so its `at_least` cannot be above 0".to_owned();
        findings.add(&least.span, "prospect-committed", message, "take `at_least` out, or take `prospect` out");
    }
    if let Some(most) = most.filter(|most| least.is_some() && below_nothing(&most.value)) {
        let message = "a prospect is never made, so its `at_most` cannot be below 0".to_owned();
        findings.add(&most.span, "prospect-committed", message, "take `at_most` out, or take `prospect` out");
    }
}

fn above_nothing(value: &Value) -> bool {
    value.numbers().iter().any(|&number| number > 0.0)
}

fn below_nothing(value: &Value) -> bool {
    value.numbers().iter().any(|&number| number < 0.0)
}

fn uses(fields: &mut Fields<'_, '_>, resources: &Known<'_, '_, Resource>) -> BTreeMap<Name, Value> {
    let mut uses = BTreeMap::new();
    for (key, node) in fields.table("uses", "uses = { kiln = 0.02 }").into_iter().flatten() {
        let value = number::value(key.get_ref(), node, Role::Rate, fields.findings());
        match resources.find(key.get_ref()) {
            Some(name) => drop(uses.insert(name, value.unwrap_or(Value::Every(0.0)))),
            None if resources.declares(key.get_ref()) => {}
            None => {
                let message = format!("no resource `{}`", shown(key.get_ref()));
                let cure = Cure::Nearest(shown(key.get_ref()), Among::Resources);
                fields.findings().add(&key.span(), "unknown-resource", message, cure);
            }
        }
    }
    uses
}
