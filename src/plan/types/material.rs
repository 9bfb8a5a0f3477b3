//! What a plan says of a material.

use crate::model::{Name, Value};

/// One material of a plan: what comes in, what goes out and what is left, summed over tiers, in its unit.
///
/// In each period: what was left before, `purchase` and `made` together are `drawn`, `sale`, `discard` and `stock` together.
#[derive(Clone, Debug, PartialEq)]
pub struct PlannedMaterial {
    /// Its name.
    pub name: Name,
    /// How much is bought; `None` where none can be.
    pub purchase: Option<Value>,
    /// How much is delivered to who buys it; `None` where none can be.
    pub sale: Option<Value>,
    /// How much of the firm sales is not delivered yet at the end; `None` where none may be late.
    pub late: Option<Value>,
    /// How much is left at the end; `None` where nothing is carried.
    pub stock: Option<Value>,
    /// How much is thrown away; `None` where none may be.
    pub discard: Option<Value>,
    /// How much of what activities make arrives.
    pub made: Value,
    /// How much activities draw.
    pub drawn: Value,
    /// What one unit more at hand would add to the aim, as a rate (positive is better, under either aim).
    pub worth_of_more: Option<Value>,
    /// What one unit less at hand would take away.
    pub loss_of_less: Option<Value>,
}
