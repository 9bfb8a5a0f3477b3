//! Tiers: what is had at a price up to some amount, and more of it at another price.

use toml::de::DeValue;

use super::fields::{Fields, Given};
use super::keys::Keys;
use super::toml_types::kind;
use crate::model::value::Value;

/// Which way prices go from tier to tier.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Order {
    /// Each tier costs as much as the one before, or more.
    Dearer,
    /// Each tier earns as much as the one before, or less.
    Cheaper,
}

/// The price of a tier as it was written.
pub(super) enum Price {
    /// Not at all, so it is 0.
    LeftOut,
    Given(Given),
    /// Its own fault says enough.
    Faulty,
}

impl Price {
    /// What was read under `key`.
    pub(super) fn of(fields: &Fields<'_, '_>, key: &str, given: Option<Given>) -> Self {
        match given {
            Some(given) => Self::Given(given),
            None if fields.node(key).is_some() => Self::Faulty,
            None => Self::LeftOut,
        }
    }
}

/// The tiers under `key`: a table, or a list of tables. `read` reads one and tells its price as it was given.
pub(super) fn read<T>(
    fields: &mut Fields<'_, '_>,
    key: &str,
    keys: &'static Keys,
    order: Order,
    read: impl Fn(&mut Fields<'_, '_>) -> (T, Price),
) -> Vec<T> {
    let Some(node) = fields.node(key) else { return Vec::new() };
    let nodes = match node.get_ref() {
        DeValue::Array(list) => list.iter().collect(),
        _ => vec![node],
    };
    let (mut tiers, mut prices) = (Vec::with_capacity(nodes.len()), Vec::with_capacity(nodes.len()));
    for node in nodes {
        let Some(table) = node.get_ref().as_table() else {
            let message = format!("`{key}` must be a table, or a list of tables, not {}", kind(node));
            let help = format!("write it as {key} = {}", keys.example());
            fields.findings().add(&node.span(), "wrong-type", message, help);
            continue;
        };
        let (tier, price) = read(&mut fields.within(table, node.span(), keys));
        tiers.push(tier);
        prices.push(match price {
            Price::LeftOut => Some(Given { value: Value::Every(0.0), span: node.span() }),
            Price::Given(given) => Some(given),
            Price::Faulty => None,
        });
    }
    for (at, pair) in prices.windows(2).enumerate() {
        if let [Some(price), Some(next)] = pair {
            in_order(fields, key, at + 1, &price.value, next, order);
        }
    }
    tiers
}

/// Adds a fault where the price of the tier behind tier `first` goes the wrong way.
fn in_order(fields: &mut Fields<'_, '_>, key: &str, first: usize, price: &Value, next: &Given, order: Order) {
    let Given { value: next, span } = next;
    let wrong = |(_, before, after): &(_, f64, f64)| match order {
        Order::Dearer => after < before,
        Order::Cheaper => after > before,
    };
    let Some((period, before, after)) = price.beside(next).find(wrong) else { return };
    let place = fields.calendar().place(period, &[price, next]);
    let (does, than, help) = match order {
        Order::Dearer => ("costs", "less than", CHEAPEST_FIRST),
        Order::Cheaper => ("earns", "more than", DEAREST_FIRST),
    };
    let message = format!("tier {} of `{key}` {does} {after}, {than} the {before} of tier {first}{place}", first + 1);
    fields.findings().add(span, "tier-order", message, help);
}

const CHEAPEST_FIRST: &str = "put the cheapest tier first: a plan would take it first in any case, so a cost that falls with the amount \
                              is not linear and cannot be planned";
const DEAREST_FIRST: &str = "put the dearest tier first: a plan would sell at that price first in any case, so a price that rises with \
                             the amount is not linear and cannot be planned";
