//! The periods that a model plans, as its values are written for them.

use std::cell::Cell;
use std::collections::HashMap;

use super::most::MOST_LISTED;
use crate::model::name::Name;
use crate::model::products;
use crate::model::value::{Horizon, Period, Value};

/// Words that stand in a table of numbers beside the names of periods, so no period is called so.
pub(super) const EACH: &str = "each";
/// See [`EACH`].
pub(super) const PER_DAY: &str = "per_day";

/// The periods of a model, and the working days in them.
#[derive(Debug, Default)]
pub(super) struct Calendar {
    horizon: Horizon,
    days: Option<Value>,
    positions: HashMap<Name, Period>,
    /// Whether `periods` or `days` holds a fault: then nothing more is said about what depends on it.
    faulty: bool,
    /// Numbers that were listed by period.
    listed: Cell<usize>,
}

impl Calendar {
    /// A calendar whose periods cannot be read.
    pub(super) fn unreadable() -> Self {
        Self { faulty: true, ..Self::default() }
    }

    /// The same with working days; `None` where these cannot be read.
    pub(super) fn with_days(self, days: Option<Value>) -> Self {
        Self { faulty: self.faulty || days.is_none(), days, listed: Cell::default(), ..self }
    }

    /// A calendar of these.
    pub(super) fn of(horizon: Horizon, days: Option<Value>) -> Self {
        let label = |period| Some((Name::new(horizon.label(period)?).ok()?, period));
        let positions = horizon.periods().filter_map(label).collect();
        Self { horizon, days, positions, ..Self::default() }
    }

    /// The periods.
    pub(super) fn horizon(&self) -> &Horizon {
        &self.horizon
    }

    /// The working days in each period, where they are given.
    pub(super) fn days(&self) -> Option<&Value> {
        self.days.as_ref()
    }

    /// Whether nothing is to be said about what depends on the periods or days, as these hold a fault themselves.
    pub(super) fn is_faulty(&self) -> bool {
        self.faulty
    }

    /// The period called `label`.
    pub(super) fn period(&self, label: &str) -> Option<Period> {
        self.positions.get(label).copied()
    }

    /// The periods in words: how many there are, and what they are called.
    pub(super) fn told(&self) -> String {
        let label = |period| self.horizon.label(period).unwrap_or_default().to_owned();
        let labels: Vec<String> = self.horizon.periods().map(label).collect();
        match &labels[..] {
            [only] => format!("the one period {only}"),
            [first, second] => format!("the 2 periods {first} and {second}"),
            [first, .., last] => format!("the {} periods {first} to {last}", labels.len()),
            [] => "the period".to_owned(),
        }
    }

    /// ` in PERIOD`, where periods have names and it matters which.
    pub(super) fn place(&self, period: Period, values: &[&Value]) -> String {
        let differ = values.iter().any(|value| matches!(value, Value::Listed(_)));
        match self.horizon.label(period).filter(|_| differ) {
            Some(label) => format!(" in {label}"),
            None => String::new(),
        }
    }

    /// So much per day, in each period; `None` where the days are not given. The decimals are multiplied as they are written.
    pub(super) fn of_days(&self, per_day: f64) -> Option<Vec<f64>> {
        let days = self.days.as_ref()?;
        let product = |period| products::sum(std::iter::once((per_day, days.at(period))));
        Some(self.horizon.periods().map(product).collect())
    }

    /// Whether more numbers were listed by period than a model may have, so that no more of them are kept: the whole of it is refused.
    pub(super) fn is_full(&self) -> bool {
        self.listed.get() > MOST_LISTED
    }

    /// The value, counted; `None` where there are too many of them.
    pub(super) fn kept(&self, value: Value) -> Option<Value> {
        if let Value::Listed(numbers) = &value {
            self.listed.set(self.listed.get() + numbers.len());
        }
        (!self.is_full()).then_some(value)
    }
}
