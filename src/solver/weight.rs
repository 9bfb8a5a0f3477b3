//! The second aim, which picks one of several plans that earn as much: the least sum of weight times level.
//!
//! A weight is hashed from the name of its column, so that it depends on nothing else and hardly any two plans weigh the same.

use crate::lp::{Column, Program};

/// Weights have so many digits after the point: short decimals, which exact arithmetic reads as they are.
const STEPS: u64 = 1_000_000_000_000;

/// The weight of each column, from 1 up to 2; minus that for a level that has a most but no least, so that it counts by what it lacks of it.
#[must_use]
pub fn weights(program: &Program) -> Vec<f64> {
    program.columns.iter().map(weight).collect()
}

fn weight(column: &Column) -> f64 {
    let hash = blake3::hash(column.key.as_str().as_bytes());
    let mut first = [0; 8];
    first.copy_from_slice(&hash.as_bytes()[..8]);
    #[expect(clippy::cast_precision_loss, reason = "both are far below 2^53")]
    let share = (u64::from_le_bytes(first) % STEPS) as f64 / STEPS as f64;
    let towards = if column.lower.is_infinite() && column.upper.is_finite() { -1.0 } else { 1.0 };
    towards * round(1.0 + share)
}

/// To the digits that weights have: the shortest decimal that reads as the result.
fn round(weight: f64) -> f64 {
    #[expect(clippy::cast_precision_loss, reason = "far below 2^53")]
    let steps = STEPS as f64;
    (weight * steps).round() / steps
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::lp::Key;

    fn column(key: &str, lower: f64, upper: f64) -> Column {
        Column { key: Key::new(key), lower, upper, aim: 0.0, entries: Vec::new() }
    }

    #[test]
    fn weights_are_short_decimals_of_the_name_alone() {
        for number in 0..1_000 {
            let key = format!("activities.a{number}");
            let one = weight(&column(&key, 0.0, f64::INFINITY));
            assert!((1.0..2.0).contains(&one), "{key}: {one}");
            assert!(one.to_string().len() <= 14, "{key}: {one}");
            assert_eq!(one.to_bits(), weight(&column(&key, 3.0, 5.0)).to_bits(), "{key}: bounds do not count");
        }
    }

    #[test]
    fn names_weigh_differently() {
        let mut weights: Vec<u64> =
            (0..10_000).map(|number| weight(&column(&format!("activities.a{number}"), 0.0, 1.0)).to_bits()).collect();
        weights.sort_unstable();
        weights.dedup();
        assert_eq!(weights.len(), 10_000);
    }

    #[test]
    fn a_level_without_a_least_counts_from_its_most() {
        assert!(weight(&column("activities.a", f64::NEG_INFINITY, 7.0)) < 0.0);
    }
}
