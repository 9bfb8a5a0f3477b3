//! Bounds that contradict each other.

use super::fields::{Fields, Given};
use crate::model::value::Value;

/// Adds a fault where the lower bound is above the upper one; it stands at the later of the two.
pub(super) fn ordered(least: (&str, &Given), most: (&str, &Given), fields: &mut Fields<'_, '_>) {
    let (low, high) = (&least.1.value, &most.1.value);
    let Some((period, low_number, high_number)) = low.beside(high).find(|(_, low, high)| low > high) else { return };
    let later = if least.1.span.start > most.1.span.start { least.1 } else { most.1 };
    let place = fields.calendar().place(period, &[low, high]);
    let message = format!("`{}` {low_number} is above `{}` {high_number}{place}", least.0, most.0);
    fields.findings().add(&later.span, "bounds-crossed", message, "raise the one or lower the other");
}

/// Whether a number of the value is above 0.
pub(super) fn above_nothing(value: &Value) -> bool {
    value.numbers().iter().any(|&number| number > 0.0)
}

/// Whether a number of the value is below 0.
pub(super) fn below_nothing(value: &Value) -> bool {
    value.numbers().iter().any(|&number| number < 0.0)
}
