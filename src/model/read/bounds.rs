//! Bounds that contradict each other.

use super::fields::Given;
use super::findings::Findings;
use crate::model::value::Value;

/// Adds a fault where the lower bound is above the upper one; it stands at the later of the two.
pub(super) fn ordered(least: (&str, &Given), most: (&str, &Given), findings: &mut Findings) {
    let Some((low, high)) = crossing(&least.1.value, &most.1.value) else { return };
    let later = if least.1.span.start > most.1.span.start { least.1 } else { most.1 };
    let message = format!("`{}` {low} is above `{}` {high}", least.0, most.0);
    findings.add(&later.span, "bounds-crossed", message, "raise the one or lower the other");
}

/// The first pair of numbers of which the lower bound is above the upper one.
pub(super) fn crossing(least: &Value, most: &Value) -> Option<(f64, f64)> {
    let pairs = least.numbers().iter().zip(most.numbers());
    pairs.map(|(&low, &high)| (low, high)).find(|(low, high)| low > high)
}
