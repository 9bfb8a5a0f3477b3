//! Writing a model as TOML text that reads back to the same model.

use std::collections::BTreeMap;
use std::fmt::{self, Display, Write as _};

use super::escape::Toml;
use super::name::Name;
use super::types::{Activity, Aim, Bound, Limit, Model, Resource, Term};
use super::value::Value;

/// The text of a model, laid out as people write one. What is left at its default is left out.
#[must_use]
pub fn model(model: &Model) -> String {
    let mut text = String::new();
    // Writing to a string does not fail.
    let _ = document(&mut text, model);
    text
}

fn document(text: &mut String, model: &Model) -> fmt::Result {
    let mut keys = Keys::default();
    keys.add("format", 1);
    keys.text("title", model.title.as_deref());
    keys.text("currency", model.currency.as_deref());
    if model.aim != Aim::default() {
        keys.add("aim", Toml(model.aim.word()));
    }
    keys.value("constant", &Value::Every(model.constant), 0.0);
    keys.write(text)?;
    for (name, resource) in &model.resources {
        write!(text, "\n[resources.{}]\n", Key(name.as_str()))?;
        resource_keys(resource).write(text)?;
    }
    for (name, activity) in &model.activities {
        write!(text, "\n[activities.{}]\n", Key(name.as_str()))?;
        activity_keys(activity).write(text)?;
    }
    for (name, limit) in &model.limits {
        write!(text, "\n[limits.{}]\n", Key(name.as_str()))?;
        limit_keys(limit).write(text)?;
    }
    Ok(())
}

fn resource_keys(resource: &Resource) -> Keys {
    let Resource { label, unit, capacity, at_least, cost, surge: _ } = resource;
    let mut keys = Keys::default();
    keys.text("label", label.as_deref());
    keys.text("unit", unit.as_deref());
    keys.value("capacity", capacity, f64::INFINITY);
    keys.value("at_least", at_least, f64::NEG_INFINITY);
    keys.value("cost", cost, 0.0);
    keys
}

fn activity_keys(activity: &Activity) -> Keys {
    let Activity { label, unit, price, cost, uses, at_least, at_most, tags, prospect, .. } = activity;
    let mut keys = Keys::default();
    keys.text("label", label.as_deref());
    keys.text("unit", unit.as_deref());
    if *prospect {
        keys.add("prospect", true);
    }
    keys.value("price", price, 0.0);
    keys.value("cost", cost, 0.0);
    if !uses.is_empty() {
        keys.add("uses", Inline(uses));
    }
    keys.value("at_least", at_least, 0.0);
    keys.value("at_most", at_most, f64::INFINITY);
    if !tags.is_empty() {
        let list: Vec<String> = tags.iter().map(|tag| Toml(tag.as_str()).to_string()).collect();
        keys.add("tags", format_args!("[{}]", list.join(", ")));
    }
    keys
}

fn limit_keys(limit: &Limit) -> Keys {
    let Limit { label, terms, per, bound, over: _ } = limit;
    let mut keys = Keys::default();
    keys.text("label", label.as_deref());
    keys.add("terms", Inline(terms));
    if let Some(per) = per {
        keys.add("per", Inline(per));
    }
    match bound {
        Bound::Equals(value) => keys.add("equals", Written(value)),
        Bound::Between(least, most) => {
            keys.value("at_least", least, f64::NEG_INFINITY);
            // A limit has a bound, even where it is no limit.
            let needed = is_every(least, f64::NEG_INFINITY);
            keys.value("at_most", most, if needed { f64::NAN } else { f64::INFINITY });
        }
    }
    keys
}

/// The keys of one table, written with their equals signs in one column.
#[derive(Default)]
struct Keys(Vec<(&'static str, String)>);

impl Keys {
    fn add(&mut self, key: &'static str, value: impl Display) {
        self.0.push((key, value.to_string()));
    }

    fn text(&mut self, key: &'static str, text: Option<&str>) {
        if let Some(text) = text {
            self.add(key, Toml(text));
        }
    }

    fn value(&mut self, key: &'static str, value: &Value, default: f64) {
        if !is_every(value, default) {
            self.add(key, Written(value));
        }
    }

    fn write(&self, text: &mut String) -> fmt::Result {
        let width = self.0.iter().map(|(key, _)| key.len()).max().unwrap_or(0);
        self.0.iter().try_for_each(|(key, value)| writeln!(text, "{key:width$} = {value}"))
    }
}

#[expect(clippy::float_cmp, reason = "a default is left out only where it is that very number")]
fn is_every(value: &Value, number: f64) -> bool {
    matches!(value, Value::Every(every) if *every == number)
}

/// A value as TOML: a number, or a list of one per period.
struct Written<'a>(&'a Value);

impl Display for Written<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.0 {
            Value::Every(number) => Number(*number).fmt(f),
            Value::Listed(list) => {
                let list: Vec<String> = list.iter().map(|number| Number(*number).to_string()).collect();
                write!(f, "[{}]", list.join(", "))
            }
        }
    }
}

/// A number as TOML, in the shortest form that reads back exactly.
struct Number(f64);

impl Display for Number {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let number = self.0 + 0.0;
        let magnitude = number.abs();
        if number.is_finite() && magnitude > 0.0 && !(1e-6..1e16).contains(&magnitude) {
            write!(f, "{number:e}")
        } else {
            write!(f, "{number}")
        }
    }
}

/// A map as an inline table.
struct Inline<'a, K>(&'a BTreeMap<K, Value>);

impl<K: Word> Display for Inline<'_, K> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.0.is_empty() {
            return f.write_str("{}");
        }
        for (at, (key, value)) in self.0.iter().enumerate() {
            write!(f, "{} {} = {}", if at == 0 { "{" } else { "," }, Key(&key.word()), Written(value))?;
        }
        f.write_str(" }")
    }
}

/// What can be the key of an inline table.
trait Word {
    fn word(&self) -> std::borrow::Cow<'_, str>;
}

impl Word for Name {
    fn word(&self) -> std::borrow::Cow<'_, str> {
        self.as_str().into()
    }
}

impl Word for Term {
    fn word(&self) -> std::borrow::Cow<'_, str> {
        match self {
            Self::Activity(name) => name.as_str().into(),
            _ => self.to_string().into(),
        }
    }
}

/// A key of a table: bare where TOML allows that, else in quotes.
struct Key<'a>(&'a str);

impl Display for Key<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let bare = self.0.bytes().all(|byte| byte.is_ascii_alphanumeric() || matches!(byte, b'_' | b'-'));
        if bare && !self.0.is_empty() { f.write_str(self.0) } else { Toml(self.0).fmt(f) }
    }
}
