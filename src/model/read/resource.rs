//! Reading one resource.

use super::bounds;
use super::fields::Fields;
use super::number::Role;
use crate::model::types::Resource;

/// The resource in a table.
pub(super) fn read(fields: &mut Fields<'_, '_>) -> Resource {
    let default = Resource::default();
    let capacity = fields.value("capacity", Role::Most);
    let at_least = fields.value("at_least", Role::Least);
    if let (Some(least), Some(most)) = (&at_least, &capacity) {
        bounds::ordered(("at_least", least), ("capacity", most), fields.findings());
    }
    Resource {
        label: fields.text("label"),
        unit: fields.text("unit"),
        capacity: capacity.map_or(default.capacity, |given| given.value),
        at_least: at_least.map_or(default.at_least, |given| given.value),
        cost: fields.value("cost", Role::Amount).map_or(default.cost, |given| given.value),
        surge: default.surge,
    }
}
