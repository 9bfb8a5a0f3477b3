//! The periods that two plans share: by name, as a horizon rolls on.

use crate::model::{Horizon, Name, Period, Value};

/// How the periods of two plans lie to each other.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Overlap {
    /// The periods that both have, as each of them counts, in the order of the later one.
    pairs: Vec<(Period, Period)>,
    /// Their names; empty where both have a single nameless one.
    pub shared: Vec<Name>,
    /// Periods of the earlier plan that the later one does not have.
    pub dropped: Vec<Name>,
    /// Periods of the later plan that the earlier one did not have.
    pub added: Vec<Name>,
}

impl Overlap {
    /// Between the periods of an earlier and of a later plan. A nameless period is shared with another nameless one only.
    #[must_use]
    pub fn of(before: &[Name], after: &[Name]) -> Self {
        let (old, new) = (Horizon::of(before.to_vec()), Horizon::of(after.to_vec()));
        if !old.is_named() && !new.is_named() {
            return Self { pairs: old.periods().zip(new.periods()).collect(), ..Self::default() };
        }
        let mut overlap = Self { dropped: before.to_vec(), ..Self::default() };
        for (period, name) in new.periods().zip(after) {
            match old.period(name.as_str()) {
                Some(was) => {
                    overlap.pairs.push((was, period));
                    overlap.shared.push(name.clone());
                    overlap.dropped.retain(|dropped| dropped != name);
                }
                None => overlap.added.push(name.clone()),
            }
        }
        overlap
    }

    /// Whether the two plan the same periods, so that their sums can be compared.
    #[must_use]
    pub fn is_whole(&self) -> bool {
        !self.is_empty() && self.dropped.is_empty() && self.added.is_empty()
    }

    /// Whether they share no period.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.pairs.is_empty()
    }

    /// The shared periods, as the earlier plan counts them.
    pub fn old_periods(&self) -> impl Iterator<Item = Period> + '_ {
        self.pairs.iter().map(|&(old, _)| old)
    }

    /// The shared periods, as the later plan counts them.
    pub fn new_periods(&self) -> impl Iterator<Item = Period> + '_ {
        self.pairs.iter().map(|&(_, new)| new)
    }

    /// A value of the earlier plan in the shared periods: a list where these have names.
    #[must_use]
    pub fn of_old(&self, value: &Value) -> Value {
        self.cut(value, self.old_periods())
    }

    /// A value of the later plan in the shared periods.
    #[must_use]
    pub fn of_new(&self, value: &Value) -> Value {
        self.cut(value, self.new_periods())
    }

    fn cut(&self, value: &Value, periods: impl Iterator<Item = Period>) -> Value {
        let mut numbers: Vec<f64> = periods.map(|period| value.at(period)).collect();
        match numbers.pop() {
            Some(number) if numbers.is_empty() && self.shared.is_empty() => Value::Every(number),
            last => Value::Listed(numbers.into_iter().chain(last).collect()),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn names(text: &str) -> Vec<Name> {
        text.split_whitespace().map(|name| Name::new(name).unwrap()).collect()
    }

    #[test]
    fn a_horizon_that_rolls_on_shares_what_lies_in_both() {
        let overlap = Overlap::of(&names("w1 w2 w3"), &names("w2 w3 w4"));
        assert_eq!((&overlap.shared, &overlap.dropped, &overlap.added), (&names("w2 w3"), &names("w1"), &names("w4")));
        assert!(!overlap.is_whole() && !overlap.is_empty());
        let value = Value::Listed(vec![1.0, 2.0, 3.0]);
        assert_eq!(overlap.of_old(&value), Value::Listed(vec![2.0, 3.0]));
        assert_eq!(overlap.of_new(&value), Value::Listed(vec![1.0, 2.0]));
        assert_eq!(overlap.of_new(&Value::Every(7.0)), Value::Listed(vec![7.0, 7.0]));
    }

    #[test]
    fn a_nameless_period_is_shared_with_a_nameless_one_only() {
        let overlap = Overlap::of(&[], &[]);
        assert!(overlap.is_whole() && overlap.shared.is_empty());
        assert_eq!(overlap.of_new(&Value::Every(7.0)), Value::Every(7.0));
        let overlap = Overlap::of(&[], &names("w1"));
        assert!(overlap.is_empty() && !overlap.is_whole());
        assert_eq!(overlap.added, names("w1"));
    }

    #[test]
    fn the_same_periods_in_another_order_are_the_same() {
        let overlap = Overlap::of(&names("w1 w2"), &names("w2 w1"));
        assert!(overlap.is_whole());
        assert_eq!(overlap.of_old(&Value::Listed(vec![1.0, 2.0])), Value::Listed(vec![2.0, 1.0]));
    }
}
