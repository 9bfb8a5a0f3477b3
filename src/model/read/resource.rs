//! Reading one resource.

use super::bounds;
use super::fields::Fields;
use super::keys;
use super::number::Role;
use super::tiers::{self, Order, Price};
use crate::model::types::{Resource, Surge};
use crate::model::value::Value;

/// The resource in a table.
pub(super) fn read(fields: &mut Fields<'_, '_>) -> Resource {
    let default = Resource::default();
    let capacity = fields.value("capacity", Role::Most);
    let at_least = fields.value("at_least", Role::Least);
    if let (Some(least), Some(most)) = (&at_least, &capacity) {
        bounds::ordered(("at_least", least), ("capacity", most), fields);
    }
    Resource {
        label: fields.text("label"),
        unit: fields.text("unit"),
        capacity: capacity.map_or(default.capacity, |given| given.value),
        at_least: at_least.map_or(default.at_least, |given| given.value),
        cost: fields.value_or("cost", Role::Amount, 0.0),
        surge: tiers::read(fields, "surge", &keys::SURGE, Order::Dearer, surge),
    }
}

fn surge(fields: &mut Fields<'_, '_>) -> (Surge, Price) {
    let cost = fields.value("cost", Role::Amount);
    let at_most = fields.value_or("at_most", Role::Room, f64::INFINITY);
    (
        Surge { at_most, cost: cost.clone().map_or(Value::Every(0.0), |given| given.value) },
        Price::of(fields, "cost", cost),
    )
}
