//! Whole things in a few words, for edits that bring or take them.

use super::values::{bound_shown, bounds, same, shown};
use crate::model::{Activity, Closing, Late, Limit, Material, Purchase, Resource, Sale, Stock, Surge, Value};

pub(super) fn resource(resource: &Resource) -> String {
    let tiers = tiers(resource.surge.len(), "surge");
    joined(bound("at least", &resource.at_least).into_iter().chain(bound("capacity", &resource.capacity)).chain(tiers))
}

pub(super) fn activity(activity: &Activity) -> String {
    let numbers = [nonzero("price", &activity.price), nonzero("cost", &activity.cost)];
    joined(numbers.into_iter().flatten().chain(activity.prospect.then(|| "prospect".to_owned())))
}

pub(super) fn material(material: &Material) -> String {
    let opening = (!same(material.opening, 0.0)).then(|| format!("opening {}", material.opening));
    let counts = [tiers(material.purchase.len(), "purchase"), tiers(material.sale.len(), "sale")];
    let flags = [(material.stock.is_some(), "stock"), (material.closing.is_some(), "closing")];
    let flags = flags.into_iter().filter(|flag| flag.0).map(|flag| flag.1.to_owned());
    joined(opening.into_iter().chain(counts.into_iter().flatten()).chain(flags))
}

pub(super) fn limit(limit: &Limit) -> String {
    joined(bounds(&limit.bound).into_iter().filter_map(|(word, value)| bound(&word.replace('_', " "), &value)))
}

pub(super) fn surge(surge: &Surge) -> String {
    joined(bound("at most", &surge.at_most).into_iter().chain([format!("cost {}", shown(&surge.cost))]))
}

pub(super) fn purchase(purchase: &Purchase) -> String {
    let Purchase { price, at_least, at_most } = purchase;
    joined(
        [format!("price {}", shown(price))]
            .into_iter()
            .chain(nonzero("at least", at_least))
            .chain(bound("at most", at_most)),
    )
}

pub(super) fn sale(sale: &Sale) -> String {
    let Sale { price, at_least, at_most, late } = sale;
    let parts = [format!("price {}", shown(price))].into_iter();
    let parts = parts.chain(nonzero("at least", at_least)).chain(bound("at most", at_most));
    joined(parts.chain(late.as_ref().map(|_| "may be late".to_owned())))
}

pub(super) fn late(late: &Late) -> String {
    joined([format!("cost {}", shown(&late.cost))].into_iter().chain(bound("at most", &late.at_most)))
}

pub(super) fn stock(stock: &Stock) -> String {
    let Stock { cost, at_least, at_most } = stock;
    joined([nonzero("cost", cost), nonzero("at least", at_least), bound("at most", at_most)].into_iter().flatten())
}

pub(super) fn closing(closing: &Closing) -> String {
    let numbers = [("at least", closing.at_least), ("worth", closing.worth)];
    joined(
        numbers.into_iter().filter(|&(_, number)| !same(number, 0.0)).map(|(word, number)| format!("{word} {number}")),
    )
}

fn bound(word: &str, value: &Value) -> Option<String> {
    Some(format!("{word} {}", bound_shown(value)?))
}

fn nonzero(word: &str, value: &Value) -> Option<String> {
    value.numbers().iter().any(|number| !same(*number, 0.0)).then(|| format!("{word} {}", shown(value)))
}

fn tiers(count: usize, word: &str) -> Option<String> {
    match count {
        0 => None,
        1 => Some(word.to_owned()),
        _ => Some(format!("{count} tiers of {word}")),
    }
}

fn joined(parts: impl Iterator<Item = String>) -> String {
    let text = parts.collect::<Vec<_>>().join(", ");
    if text.is_empty() { "as written".to_owned() } else { text }
}
