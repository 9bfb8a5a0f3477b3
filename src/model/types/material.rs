//! Materials: stocks, purchases, intermediates, by-products and finished goods.

use crate::model::value::Value;

/// What is stocked, bought, sold, or made by one activity and drawn by another.
///
/// In each period: what was there before, purchases and what is made come in; what is drawn, sales, what is discarded and what is left
/// at the end go out; the two are equal.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Material {
    /// Shown beside the name; decides nothing.
    pub label: Option<String>,
    /// What amounts are counted in; a label.
    pub unit: Option<String>,
    /// What is there before the first period, in `unit`.
    pub opening: f64,
    /// How it can be bought, dearer by tier.
    pub purchase: Vec<Purchase>,
    /// How it can be sold, cheaper by tier.
    pub sale: Vec<Sale>,
    /// How it is carried from a period to the next; `None` where nothing is.
    pub stock: Option<Stock>,
    /// What must be left at the end of the last period, and what that is worth; `None` where nothing can be, but for `stock`.
    pub closing: Option<Closing>,
    /// What becomes of a surplus.
    pub discard: Discard,
}

/// One tier of purchases.
#[derive(Clone, Debug, PartialEq)]
pub struct Purchase {
    /// Spent per unit, in currency.
    pub price: Value,
    /// The least that is bought.
    pub at_least: Value,
    /// The most that can be bought; infinite where there is no limit.
    pub at_most: Value,
}

/// One tier of sales.
#[derive(Clone, Debug, PartialEq)]
pub struct Sale {
    /// Earned per unit, in currency, when it is delivered.
    pub price: Value,
    /// Firm sales of the period.
    pub at_least: Value,
    /// The most that can be sold of the period; infinite where there is no limit.
    pub at_most: Value,
    /// Whether firm sales may be delivered later; `None` where they may not.
    pub late: Option<Late>,
}

/// Firm sales that are delivered in a later period of the horizon.
#[derive(Clone, Debug, PartialEq)]
pub struct Late {
    /// Spent per unit and period that it is late, in currency.
    pub cost: Value,
    /// The most that may be late at the end of a period; infinite where there is no limit.
    pub at_most: Value,
}

/// What is carried from a period to the next.
#[derive(Clone, Debug, PartialEq)]
pub struct Stock {
    /// Spent per unit left at the end of a period, in currency.
    pub cost: Value,
    /// Safety stock: the least that is left at the end of a period.
    pub at_least: Value,
    /// The most that can be left; infinite where there is no limit.
    pub at_most: Value,
}

/// What is left at the end of the last period.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Closing {
    /// The least that is left.
    pub at_least: f64,
    /// Worth of a unit left, in currency.
    pub worth: f64,
}

/// What is thrown away.
#[derive(Clone, Debug, PartialEq)]
pub struct Discard {
    /// Spent per unit, in currency.
    pub cost: Value,
    /// The most that can be thrown away; infinite where there is no limit.
    pub at_most: Value,
}

impl Default for Discard {
    /// A surplus goes free.
    fn default() -> Self {
        Self { cost: Value::Every(0.0), at_most: Value::Every(f64::INFINITY) }
    }
}
