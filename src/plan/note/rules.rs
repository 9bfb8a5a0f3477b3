//! Rules and levels of a program in planners' words: what a key stands for, and what binds it.

use super::periods;
use super::words::{amount, listed};
use crate::lp::Key;
use crate::model::{Bound, Limit, Model, Name, Over, Period, Value};
use crate::solver::message::Rule;

/// What a key stands for. Names have no dots.
pub(super) struct Place<'a> {
    table: &'a str,
    /// The name of the thing.
    pub(super) name: &'a str,
    /// What of the thing: `at_least`, `surge`, `sale`; empty where it is the thing itself.
    what: &'a str,
    /// What stands after that: a tier, `late`, `demand`.
    rest: Vec<&'a str>,
    /// The period, where it has a name.
    pub(super) period: Option<&'a str>,
}

/// What a part of a key says when it is no period.
const WORDS: [&str; 10] =
    ["at_least", "at_most", "equals", "change", "surge", "purchase", "sale", "stock", "late", "discard"];

impl<'a> Place<'a> {
    pub(super) fn of(key: &'a Key, model: Option<&Model>) -> Self {
        let mut parts = key.as_str().split('.');
        let (table, name) = (parts.next().unwrap_or_default(), parts.next().unwrap_or_default());
        let mut rest: Vec<&str> = parts.collect();
        let named = match (model, rest.last()) {
            (Some(model), _) if table == "limits" => {
                let over = model.limits.get(name).map(|limit| &limit.over);
                model.horizon.is_named() && over.is_none_or(|over| *over == Over::Each)
            }
            (Some(model), _) => model.horizon.is_named(),
            (None, last) => last.is_some_and(|last| !WORDS.contains(last) && last.parse::<usize>().is_err()),
        };
        let period = if named { rest.pop() } else { None };
        let what = if rest.is_empty() { "" } else { rest.remove(0) };
        Self { table, name, what, rest, period }
    }

    /// Whether it is the level of a prospect.
    pub(super) fn is_prospect(&self, model: Option<&Model>) -> bool {
        let activity = model.and_then(|model| model.activities.get(self.name));
        self.table == "activities" && activity.is_some_and(|activity| activity.prospect)
    }

    /// A level in words: `floor_tile`, `purchase of slip`. Not escaped.
    pub(super) fn level(&self) -> String {
        match (self.table, self.what) {
            ("resources", _) => format!("extra capacity of {}", self.name),
            ("materials", "sale") if self.rest.contains(&"late") => format!("late sales of {}", self.name),
            ("materials", "sale" | "purchase" | "stock" | "discard") => format!("{} of {}", self.what, self.name),
            _ => self.name.to_owned(),
        }
    }

    /// The unit of what it counts.
    pub(super) fn unit<'m>(&self, model: Option<&'m Model>) -> Option<&'m str> {
        let model = model?;
        match self.table {
            "resources" => model.resources.get(self.name)?.unit.as_deref(),
            "materials" => model.materials.get(self.name)?.unit.as_deref(),
            _ => model.activities.get(self.name)?.unit.as_deref(),
        }
    }
}

/// Rules in words, those that differ by nothing but the period told together:
/// `capacity of kiln (at most 84 h) in 2027-W01 to 2027-W03`. Not escaped.
pub(super) fn told(rules: &[&Rule], model: Option<&Model>) -> Vec<String> {
    let mut together: Vec<(String, Vec<&str>)> = Vec::new();
    for rule in rules {
        let place = Place::of(&rule.key, model);
        let words = one(rule, &place, model);
        match together.iter_mut().find(|(known, _)| *known == words) {
            Some((_, periods)) => periods.extend(place.period),
            None => together.push((words, place.period.into_iter().collect())),
        }
    }
    together.into_iter().map(|(words, periods)| in_periods(words, &periods, model)).collect()
}

/// Something, and the periods in which it is. Not escaped.
fn in_periods(words: String, periods: &[&str], model: Option<&Model>) -> String {
    if periods.is_empty() {
        return words;
    }
    let labels = model.map_or_else(Vec::new, labels);
    let mut places: Vec<usize> =
        periods.iter().filter_map(|period| labels.iter().position(|label| label.as_str() == *period)).collect();
    if places.len() < periods.len() {
        let names: Vec<String> = periods.iter().map(|&period| period.to_owned()).collect();
        return format!("{words} in {}", listed(&names));
    }
    places.sort_unstable();
    format!("{words} in {}", periods::which_plainly(&places, &labels))
}

fn labels(model: &Model) -> Vec<Name> {
    let labels = model.horizon.periods().filter_map(|period| model.horizon.label(period));
    labels.filter_map(|label| Name::new(label).ok()).collect()
}

/// A rule in words: `capacity of kiln (at most 84 h)`, `floor_tile at least 5 000 m2`. Without its period.
fn one(rule: &Rule, place: &Place<'_>, model: Option<&Model>) -> String {
    let way = if rule.upper { "at most" } else { "at least" };
    let (name, bound) = (place.name, with_plain_unit(rule.bound, place.unit(model)));
    match (place.table, place.what) {
        ("resources", "") => {
            let what = if rule.upper { "capacity" } else { "minimum load" };
            format!("{what} of {name} ({way} {bound})")
        }
        ("activities", "change") => {
            let by = with_plain_unit(rule.bound.abs(), place.unit(model));
            format!("change of {name} from the period before (at most {by})")
        }
        ("materials", "") => format!("what comes in and goes out of {name}"),
        ("materials", "sale") if place.rest.contains(&"demand") && !rule.upper => {
            format!("firm sales of {name} ({way} {bound})")
        }
        ("materials", "sale") if place.rest.contains(&"demand") => format!("sales of {name} ({way} {bound})"),
        ("limits", _) => limit(rule, place, model),
        _ => format!("{} {way} {bound}", place.level()),
    }
}

fn limit(rule: &Rule, place: &Place<'_>, model: Option<&Model>) -> String {
    let limit = model.and_then(|model| model.limits.get(place.name));
    let own: Option<&Limit> = limit.filter(|limit| limit.per.is_some());
    let position = place.period.and_then(|label| model?.horizon.period(label)).map_or(0, Period::position);
    let there = |value: &Value| value.numbers().get(position).or(value.numbers().first()).copied().unwrap_or_default();
    let way = if rule.upper { "at most" } else { "at least" };
    let (way, bound) = match (own.map(|limit| &limit.bound), limit.map(|limit| &limit.bound)) {
        (Some(Bound::Between(least, _)), _) if place.what == "at_least" => ("at least", there(least)),
        (Some(Bound::Between(_, most)), _) => ("at most", there(most)),
        (_, Some(Bound::Equals(value))) => ("exactly", there(value)),
        _ => (way, rule.bound),
    };
    let ratio = if own.is_some() { ", as a ratio" } else { "" };
    format!("limit {} ({way} {}{ratio})", place.name, amount(bound))
}

fn with_plain_unit(number: f64, unit: Option<&str>) -> String {
    match unit {
        Some(unit) if !unit.is_empty() => format!("{} {unit}", amount(number)),
        _ => amount(number),
    }
}
