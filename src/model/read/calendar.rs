//! The periods that a model plans, as its values are written for them.

use std::cell::Cell;
use std::collections::{HashMap, HashSet};

use super::caps::{MOST_LISTED, MOST_PERIODS};
use super::fields::name;
use super::findings::{Findings, Span, shown};
use super::number::{self, Role};
use super::toml_types::{Table, kind};
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
    /// The periods and days that the keys of a model give.
    pub(super) fn read(root: &Table<'_>, findings: &mut Findings) -> Self {
        let mut calendar = Self::default();
        if let Some(labels) = labels(root, findings) {
            calendar = Self::of(Horizon::of(labels), None);
        } else {
            calendar.faulty = root.contains_key("periods");
        }
        if let Some(node) = root.get("days") {
            let days = number::value("days", node, Role::Days, &calendar, findings);
            calendar.faulty |= days.is_none();
            calendar.days = days;
            calendar.listed = Cell::default();
        }
        calendar
    }

    /// A calendar that was read before.
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

    /// The value of one number per period; a fault where the model has too many such numbers to be kept.
    pub(super) fn value(&self, numbers: Vec<f64>, span: &Span, findings: &mut Findings) -> Option<Value> {
        let value = Value::of(numbers);
        let before = self.listed.get();
        if before > MOST_LISTED {
            return None;
        }
        if let Value::Listed(numbers) = &value {
            self.listed.set(before + numbers.len());
        }
        if self.listed.get() > MOST_LISTED {
            let message = format!("the model lists more than {MOST_LISTED} numbers by period up to here");
            findings.add(span, "too-many", message, "plan fewer periods, or split the model");
            return None;
        }
        Some(value)
    }
}

/// The names under `periods`; `None` where they are left out or hold a fault.
fn labels(root: &Table<'_>, findings: &mut Findings) -> Option<Vec<Name>> {
    let node = root.get("periods")?;
    let Some(list) = node.get_ref().as_array() else {
        let message = format!("`periods` must be a list of names, not {}", kind(node));
        findings.add(&node.span(), "wrong-type", message, "write it as periods = [\"2027-W01\", \"2027-W02\"]");
        return None;
    };
    if list.is_empty() {
        let message = "`periods` is empty, but a model plans at least one".to_owned();
        findings.add(&node.span(), "no-periods", message, "name the periods, or take the key out to plan a single one");
        return None;
    }
    if list.len() > MOST_PERIODS {
        let message = format!("{} periods are more than the {MOST_PERIODS} that one model may have", list.len());
        findings.add(&node.span(), "too-many", message, "plan fewer periods, or longer ones");
        return None;
    }
    let mut seen = HashSet::new();
    let mut labels = Vec::with_capacity(list.len());
    for item in list {
        let Some(text) = item.get_ref().as_str() else {
            let message = format!("`periods` holds names, not {}", kind(item));
            findings.add(&item.span(), "wrong-type", message, "put each name in double quotes");
            continue;
        };
        let Some(label) = name(text, &item.span(), findings) else { continue };
        if [EACH, PER_DAY].contains(&text) {
            let message = format!("a period cannot be called `{text}`, which has a meaning of its own in values");
            findings.add(&item.span(), "bad-name", message, "give it another name");
        } else if seen.insert(label.clone()) {
            labels.push(label);
        } else {
            let message = format!("period `{}` is given twice", shown(text));
            findings.add(&item.span(), "duplicate-period", message, "give each period a name of its own");
        }
    }
    (labels.len() == list.len()).then_some(labels)
}
