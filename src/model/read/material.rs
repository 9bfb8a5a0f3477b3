//! Reading one material.

use super::bounds;
use super::fields::{Fields, Given};
use super::keys;
use super::number::{self, Role};
use super::tiers::{self, Order, Price};
use crate::model::types::{Closing, Discard, Late, Material, Purchase, Sale, Stock};
use crate::model::value::Value;

/// The material in a table.
pub(super) fn read(fields: &mut Fields<'_, '_>) -> Material {
    let stock = stock(fields);
    let closing = closing(fields);
    if let (Some((_, Some(most))), Some((_, Some(least)))) = (&stock, &closing) {
        enough_room(fields, least, most);
    }
    let (stock, closing) = (stock.map(|(stock, _)| stock), closing.map(|(closing, _)| closing));
    Material {
        label: fields.text("label"),
        unit: fields.text("unit"),
        opening: fields.number("opening", Role::Floor).unwrap_or(0.0),
        purchase: tiers::read(fields, "purchase", &keys::PURCHASE, Order::Dearer, purchase),
        sale: tiers::read(fields, "sale", &keys::SALE, Order::Cheaper, sale),
        // Where a stock is left in any case, a closing that asks for nothing says nothing.
        closing: closing.filter(|closing| stock.is_none() || *closing != Closing::default()),
        stock,
        discard: discard(fields),
    }
}

fn purchase(fields: &mut Fields<'_, '_>) -> (Purchase, Price) {
    let price = fields.value("price", Role::Amount);
    let (at_least, at_most) = between(fields);
    (Purchase { price: or(price.clone(), 0.0), at_least, at_most }, Price::of(fields, "price", price))
}

fn sale(fields: &mut Fields<'_, '_>) -> (Sale, Price) {
    let price = fields.value("price", Role::Amount);
    let (at_least, at_most) = between(fields);
    (Sale { price: or(price.clone(), 0.0), at_least, at_most, late: late(fields) }, Price::of(fields, "price", price))
}

fn late(fields: &mut Fields<'_, '_>) -> Option<Late> {
    let (table, span) = fields.inner("late", &keys::LATE)?;
    let mut late = fields.within(table, span, &keys::LATE);
    Some(Late {
        cost: late.value_or("cost", Role::Amount, 0.0),
        at_most: late.value_or("at_most", Role::Room, f64::INFINITY),
    })
}

/// The stock, and its upper bound as it was given.
fn stock(fields: &mut Fields<'_, '_>) -> Option<(Stock, Option<Given>)> {
    let (table, span) = fields.inner("stock", &keys::STOCK)?;
    let mut stock = fields.within(table, span, &keys::STOCK);
    let cost = stock.value_or("cost", Role::Amount, 0.0);
    let at_least = stock.value("at_least", Role::Floor);
    let at_most = stock.value("at_most", Role::Room);
    ordered(&mut stock, at_least.as_ref(), at_most.as_ref());
    Some((Stock { cost, at_least: or(at_least, 0.0), at_most: or(at_most.clone(), f64::INFINITY) }, at_most))
}

/// The closing, and its lower bound as it was given: a number alone is that bound.
fn closing(fields: &mut Fields<'_, '_>) -> Option<(Closing, Option<Given>)> {
    let node = fields.node("closing")?;
    let given = |number| Given { value: Value::Every(number), span: node.span() };
    if node.get_ref().is_array() {
        let message = "`closing` must be a number or a table, not a list".to_owned();
        let help = "it is what is left after the last period: one number";
        fields.findings().add(&node.span(), "wrong-type", message, help);
        return None;
    }
    if !node.get_ref().is_table() {
        let at_least = number::number("closing", node, Role::Floor, fields.findings())?;
        return Some((Closing { at_least, worth: 0.0 }, Some(given(at_least))));
    }
    let (table, span) = fields.inner("closing", &keys::CLOSING)?;
    let mut closing = fields.within(table, span, &keys::CLOSING);
    let at_least = closing.number("at_least", Role::Floor);
    let worth = closing.number("worth", Role::Amount).unwrap_or(0.0);
    Some((Closing { at_least: at_least.unwrap_or(0.0), worth }, at_least.map(given)))
}

/// Adds a fault where more must be left at the end than can be.
fn enough_room(fields: &mut Fields<'_, '_>, least: &Given, most: &Given) {
    let Some(last) = fields.calendar().horizon().periods().last() else { return };
    let (low, high) = (least.value.at(last), most.value.at(last));
    if low > high {
        let place = fields.calendar().place(last, &[&most.value]);
        let message = format!("`closing` {low} is above the `at_most` {high} of `stock`{place}");
        fields.findings().add(&least.span, "bounds-crossed", message, "raise the one or lower the other");
    }
}

fn discard(fields: &mut Fields<'_, '_>) -> Discard {
    let Some((table, span)) = fields.inner("discard", &keys::DISCARD) else { return Discard::default() };
    let mut discard = fields.within(table, span, &keys::DISCARD);
    Discard {
        cost: discard.value_or("cost", Role::Amount, 0.0),
        at_most: discard.value_or("at_most", Role::Room, f64::INFINITY),
    }
}

/// `at_least` and `at_most` of an amount that is never below 0.
fn between(fields: &mut Fields<'_, '_>) -> (Value, Value) {
    let at_least = fields.value("at_least", Role::Floor);
    let at_most = fields.value("at_most", Role::Room);
    ordered(fields, at_least.as_ref(), at_most.as_ref());
    (or(at_least, 0.0), or(at_most, f64::INFINITY))
}

fn ordered(fields: &mut Fields<'_, '_>, least: Option<&Given>, most: Option<&Given>) {
    if let (Some(least), Some(most)) = (least, most) {
        bounds::ordered(("at_least", least), ("at_most", most), fields);
    }
}

fn or(given: Option<Given>, default: f64) -> Value {
    given.map_or(Value::Every(default), |given| given.value)
}
