//! Reading one activity.

use std::collections::BTreeMap;

use super::bounds::{self, above_nothing, below_nothing};
use super::fields::{Fields, Given};
use super::findings::{Among, Cure, shown};
use super::known::{Known, Supplies};
use super::number::Role;
use crate::model::name::Name;
use crate::model::types::{Activity, Aim, Material, Resource};
use crate::model::value::Value;

/// The activity in a table.
pub(super) fn read(fields: &mut Fields<'_, '_>, aim: Aim, supplies: &Supplies<'_, '_>) -> Activity {
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
        price: fields.value_or("price", Role::Amount, 0.0),
        cost: fields.value_or("cost", Role::Amount, 0.0),
        uses: uses(fields, &supplies.resources),
        draws: taken(fields, "draws", &supplies.materials),
        makes: taken(fields, "makes", &supplies.materials),
        lead: fields.periods("lead"),
        at_least: at_least.map_or(Value::Every(0.0), |given| given.value),
        at_most: at_most.map_or(Value::Every(f64::INFINITY), |given| given.value),
        change_at_most: fields.value_or("change_at_most", Role::Room, f64::INFINITY),
        tags: fields.names("tags").into_iter().collect(),
        prospect,
    }
}

fn check_bounds(fields: &mut Fields<'_, '_>, least: Option<&Given>, most: Option<&Given>, prospect: bool) {
    let left_out = fields.key_span("at_least").is_none();
    match (least, most) {
        (Some(least), Some(most)) => bounds::ordered(("at_least", least), ("at_most", most), fields),
        (None, Some(most)) if left_out && below_nothing(&most.value) => {
            let message = "`at_most` is below 0, but a level is at least 0 where `at_least` is left out".to_owned();
            let help = "raise it, or give an `at_least` below it (-inf for none)";
            fields.findings().add(&most.span, "bounds-crossed", message, help);
        }
        _ => {}
    }
    if !prospect {
        return;
    }
    let findings = fields.findings();
    if let Some(least) = least.filter(|least| above_nothing(&least.value)) {
        let message = "a prospect is never made, so its `at_least` cannot be above 0".to_owned();
        findings.add(&least.span, "prospect-committed", message, "take `at_least` out, or take `prospect` out");
    }
    if let Some(most) = most.filter(|most| least.is_some() && below_nothing(&most.value)) {
        let message = "a prospect is never made, so its `at_most` cannot be below 0".to_owned();
        findings.add(&most.span, "prospect-committed", message, "take `at_most` out, or take `prospect` out");
    }
}

fn uses(fields: &mut Fields<'_, '_>, resources: &Known<'_, '_, Resource>) -> BTreeMap<Name, Value> {
    fields.rates("uses", "uses = { kiln = 0.02 }", |key, findings| {
        let found = resources.find(key.get_ref());
        if found.is_none() && !resources.declares(key.get_ref()) {
            let message = format!("no resource `{}`", shown(key.get_ref()));
            let cure = Cure::Nearest(shown(key.get_ref()), Among::Resources);
            findings.add(&key.span(), "unknown-resource", message, cure);
        }
        found
    })
}

fn taken(fields: &mut Fields<'_, '_>, key: &str, materials: &Known<'_, '_, Material>) -> BTreeMap<Name, Value> {
    fields.rates(key, &format!("{key} = {{ slip = 0.022 }}"), |key, findings| {
        let found = materials.find(key.get_ref());
        if found.is_none() && !materials.declares(key.get_ref()) {
            let message = format!("no material `{}`", shown(key.get_ref()));
            let cure = Cure::Nearest(shown(key.get_ref()), Among::Materials);
            findings.add(&key.span(), "unknown-material", message, cure);
        }
        found
    })
}
