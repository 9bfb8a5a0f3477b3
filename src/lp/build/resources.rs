//! Capacities of resources, and what can be had beyond them.

use std::collections::HashMap;

use super::frame::{Columns, Frame, Line, Part, Rows, at};
use super::limits::Limits;
use crate::lp::keys::{resource_key, surge_key};
use crate::model::{Model, Name, Resource};

/// Resources with their rows, by name.
pub(super) type Capacities<'m> = HashMap<&'m Name, (&'m Resource, Line)>;

pub(super) fn rows<'m>(frame: &Frame<'m>, rows: &mut Rows) -> Capacities<'m> {
    let Model { horizon, resources, .. } = frame.model;
    let line = |(name, resource): (&'m Name, &'m Resource)| {
        let line = rows.line(frame, |period| {
            Some((resource_key(name, horizon, period), resource.at_least.at(period), resource.capacity.at(period)))
        });
        (name, (resource, line))
    };
    resources.iter().map(line).collect()
}

pub(super) fn columns(frame: &Frame<'_>, capacities: &Capacities<'_>, limits: &Limits<'_>, columns: &mut Columns<'_>) {
    let Model { horizon, resources, .. } = frame.model;
    let mut parts = Vec::new();
    for (name, resource) in resources {
        let line = capacities.get(name).map_or(&[] as &[_], |(_, line)| line);
        for (tier, surge) in (1..).zip(&resource.surge) {
            let terms = limits.of_surge(name, tier);
            for &period in &frame.by_name {
                parts.extend(at(line, period.position()).map(|row| Part::new(row, -1.0)));
                limits.parts(&terms, period, &mut parts);
                let (most, aim) = (surge.at_most.at(period), frame.costs(surge.cost.at(period)));
                columns.push(surge_key(name, tier, horizon, period), (0.0, most), aim, &mut parts);
            }
        }
    }
}
