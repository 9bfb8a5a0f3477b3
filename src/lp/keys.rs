//! The keys of the columns and rows that a model stands for.
//!
//! A key is the address of what it stands for, the period last; where the horizon is a single nameless one, without a period.

use super::program::Key;
use crate::model::{Flow, Horizon, Name, Period};

/// What the key of an activity's level begins with.
const ACTIVITIES: &str = "activities";

/// The key of an activity's level in a period.
#[must_use]
pub fn activity_key(name: &Name, horizon: &Horizon, period: Period) -> Key {
    key(ACTIVITIES, name, None, horizon.label(period))
}

/// Whether `key` is the [key of an activity's level](activity_key) in a period, without making that.
#[must_use]
pub fn is_activity_key(key: &Key, name: &Name, horizon: &Horizon, period: Period) -> bool {
    let rest = key.as_str().strip_prefix(ACTIVITIES).and_then(|rest| rest.strip_prefix('.'));
    let rest = rest.and_then(|rest| rest.strip_prefix(name.as_str()));
    match horizon.label(period) {
        None => rest == Some(""),
        Some(label) => rest.and_then(|rest| rest.strip_prefix('.')) == Some(label),
    }
}

/// The key of a resource's row in a period.
#[must_use]
pub fn resource_key(name: &Name, horizon: &Horizon, period: Period) -> Key {
    key("resources", name, None, horizon.label(period))
}

/// The key of a limit's row in a period; `side` tells the two rows of a limit with `per` apart.
#[must_use]
pub fn limit_key(name: &Name, side: Option<&str>, horizon: &Horizon, period: Period) -> Key {
    key("limits", name, side, horizon.label(period))
}

/// The key of the row of a limit over several periods together; `side` as in [`limit_key`].
#[must_use]
pub fn limit_over_key(name: &Name, side: Option<&str>) -> Key {
    key("limits", name, side, None)
}

/// The key of a tier of extra capacity, counted from 1, in a period.
#[must_use]
pub fn surge_key(name: &Name, tier: usize, horizon: &Horizon, period: Period) -> Key {
    key("resources", name, Some(&format!("surge.{tier}")), horizon.label(period))
}

/// The key of the balance of a material in a period.
#[must_use]
pub fn balance_key(name: &Name, horizon: &Horizon, period: Period) -> Key {
    key("materials", name, None, horizon.label(period))
}

/// The key of one way in which a material comes, goes or waits in a period: purchases, sales and what is late have a tier.
#[must_use]
pub fn flow_key(name: &Name, flow: Flow, horizon: &Horizon, period: Period) -> Key {
    key("materials", name, Some(&flow.to_string()), horizon.label(period))
}

/// The key of the row that keeps the sales of a tier within what can be sold of a period, where they may be late.
#[must_use]
pub fn demand_key(name: &Name, tier: usize, horizon: &Horizon, period: Period) -> Key {
    key("materials", name, Some(&format!("sale.{tier}.demand")), horizon.label(period))
}

/// The key of the row that bounds the change of an activity's level from the period before.
#[must_use]
pub fn change_key(name: &Name, horizon: &Horizon, period: Period) -> Key {
    key(ACTIVITIES, name, Some("change"), horizon.label(period))
}

fn key(table: &str, name: &Name, side: Option<&str>, period: Option<&str>) -> Key {
    let longer = [side, period].into_iter().flatten();
    let length = table.len() + 1 + name.as_str().len() + longer.clone().map(|part| 1 + part.len()).sum::<usize>();
    let mut text = String::with_capacity(length);
    text.push_str(table);
    text.push('.');
    text.push_str(name.as_str());
    for part in longer {
        text.push('.');
        text.push_str(part);
    }
    Key::new(&text)
}
