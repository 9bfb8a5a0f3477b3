//! Writing a model as TOML text that reads back to the same model.

mod toml;

use std::fmt::{self, Write as _};

use super::escape::Toml;
use super::name::Name;
use super::types::{
    Activity, Aim, Bound, Closing, Discard, Late, Limit, Material, Model, Over, Purchase, Resource, Sale, Stock, Surge,
};
use super::value::{Horizon, Value};
use toml::{Inline, Key, Keys, Written, is_every};

/// The text of a model, laid out as people write one. What is left at its default is left out.
#[must_use]
pub fn model(model: &Model) -> String {
    let mut text = String::new();
    // Writing to a string does not fail.
    let _ = document(&mut text, model);
    text
}

fn document(text: &mut String, model: &Model) -> fmt::Result {
    let mut keys = Keys::default();
    keys.add("format", 1);
    keys.text("title", model.title.as_deref());
    keys.text("currency", model.currency.as_deref());
    if model.aim != Aim::default() {
        keys.add("aim", Toml(model.aim.word()));
    }
    keys.value("constant", &Value::Every(model.constant), 0.0);
    let horizon = &model.horizon;
    keys.names("periods", horizon.periods().filter_map(|period| horizon.label(period)));
    keys.write(text)?;
    for (name, resource) in &model.resources {
        write!(text, "\n[resources.{}]\n", Key(name.as_str()))?;
        resource_keys(resource).write(text)?;
    }
    for (name, activity) in &model.activities {
        write!(text, "\n[activities.{}]\n", Key(name.as_str()))?;
        activity_keys(activity).write(text)?;
    }
    for (name, material) in &model.materials {
        write!(text, "\n[materials.{}]\n", Key(name.as_str()))?;
        material_keys(material).write(text)?;
    }
    for (name, limit) in &model.limits {
        write!(text, "\n[limits.{}]\n", Key(name.as_str()))?;
        limit_keys(limit, &model.horizon).write(text)?;
    }
    Ok(())
}

fn resource_keys(resource: &Resource) -> Keys {
    let Resource { label, unit, capacity, at_least, cost, surge } = resource;
    let mut keys = Keys::default();
    keys.text("label", label.as_deref());
    keys.text("unit", unit.as_deref());
    keys.value("capacity", capacity, f64::INFINITY);
    keys.value("at_least", at_least, f64::NEG_INFINITY);
    keys.value("cost", cost, 0.0);
    keys.tiers("surge", surge, |Surge { at_most, cost }| {
        let mut keys = Keys::default();
        keys.value("at_most", at_most, f64::INFINITY);
        keys.value("cost", cost, 0.0);
        keys
    });
    keys
}

fn activity_keys(activity: &Activity) -> Keys {
    let Activity { label, unit, price, cost, uses, draws, makes, lead, .. } = activity;
    let Activity { at_least, at_most, change_at_most, tags, prospect, .. } = activity;
    let mut keys = Keys::default();
    keys.text("label", label.as_deref());
    keys.text("unit", unit.as_deref());
    if *prospect {
        keys.add("prospect", true);
    }
    keys.value("price", price, 0.0);
    keys.value("cost", cost, 0.0);
    keys.rates("uses", uses);
    keys.rates("draws", draws);
    keys.rates("makes", makes);
    if *lead > 0 {
        keys.add("lead", lead);
    }
    keys.value("at_least", at_least, 0.0);
    keys.value("at_most", at_most, f64::INFINITY);
    keys.value("change_at_most", change_at_most, f64::INFINITY);
    keys.names("tags", tags.iter().map(Name::as_str));
    keys
}

fn material_keys(material: &Material) -> Keys {
    let Material { label, unit, opening, purchase, sale, stock, closing, discard } = material;
    let mut keys = Keys::default();
    keys.text("label", label.as_deref());
    keys.text("unit", unit.as_deref());
    keys.value("opening", &Value::Every(*opening), 0.0);
    keys.tiers("purchase", purchase, |Purchase { price, at_least, at_most }| traded(price, at_least, at_most));
    keys.tiers("sale", sale, |Sale { price, at_least, at_most, late }| {
        let mut keys = traded(price, at_least, at_most);
        if let Some(Late { cost, at_most }) = late {
            keys.add("late", spent(cost, at_most).inline());
        }
        keys
    });
    if let Some(Stock { cost, at_least, at_most }) = stock {
        let mut stock = Keys::default();
        stock.value("cost", cost, 0.0);
        stock.value("at_least", at_least, 0.0);
        stock.value("at_most", at_most, f64::INFINITY);
        keys.add("stock", stock.inline());
    }
    match closing.map(|Closing { at_least, worth }| (Value::Every(at_least), Value::Every(worth))) {
        Some((at_least, worth)) if is_every(&worth, 0.0) => keys.add("closing", Written(&at_least)),
        Some((at_least, worth)) => {
            let mut closing = Keys::default();
            closing.value("at_least", &at_least, 0.0);
            closing.value("worth", &worth, 0.0);
            keys.add("closing", closing.inline());
        }
        None => {}
    }
    if *discard != Discard::default() {
        keys.add("discard", spent(&discard.cost, &discard.at_most).inline());
    }
    keys
}

fn traded(price: &Value, at_least: &Value, at_most: &Value) -> Keys {
    let mut keys = Keys::default();
    keys.value("price", price, 0.0);
    keys.value("at_least", at_least, 0.0);
    keys.value("at_most", at_most, f64::INFINITY);
    keys
}

fn spent(cost: &Value, at_most: &Value) -> Keys {
    let mut keys = Keys::default();
    keys.value("cost", cost, 0.0);
    keys.value("at_most", at_most, f64::INFINITY);
    keys
}

fn limit_keys(limit: &Limit, horizon: &Horizon) -> Keys {
    let Limit { label, terms, per, bound, over } = limit;
    let mut keys = Keys::default();
    keys.text("label", label.as_deref());
    keys.add("terms", Inline(terms));
    if let Some(per) = per {
        keys.add("per", Inline(per));
    }
    match bound {
        Bound::Equals(value) => keys.add("equals", Written(value)),
        Bound::Between(least, most) => {
            keys.value("at_least", least, f64::NEG_INFINITY);
            // A limit has a bound, even where it is no limit.
            let needed = is_every(least, f64::NEG_INFINITY);
            keys.value("at_most", most, if needed { f64::NAN } else { f64::INFINITY });
        }
    }
    match over {
        Over::Each => {}
        Over::All => keys.add("over", Toml("all")),
        Over::Some(periods) => keys.names("over", periods.iter().filter_map(|&period| horizon.label(period))),
    }
    keys
}
