//! The parts of a TOML text: keys and values, laid out as people write them.

use std::borrow::Cow;
use std::collections::BTreeMap;
use std::fmt::{self, Display, Write as _};

use crate::model::escape::Toml;
use crate::model::name::Name;
use crate::model::types::Term;
use crate::model::value::Value;

/// The keys of one table.
#[derive(Default)]
pub(super) struct Keys(Vec<(&'static str, String)>);

impl Keys {
    pub(super) fn add(&mut self, key: &'static str, value: impl Display) {
        self.0.push((key, value.to_string()));
    }

    pub(super) fn text(&mut self, key: &'static str, text: Option<&str>) {
        if let Some(text) = text {
            self.add(key, Toml(text));
        }
    }

    pub(super) fn value(&mut self, key: &'static str, value: &Value, default: f64) {
        if !is_every(value, default) {
            self.add(key, Written(value));
        }
    }

    /// On a line each, with the equals signs in one column.
    pub(super) fn write(&self, text: &mut String) -> fmt::Result {
        let width = self.0.iter().map(|(key, _)| key.len()).max().unwrap_or(0);
        self.0.iter().try_for_each(|(key, value)| writeln!(text, "{key:width$} = {value}"))
    }

    /// As an inline table.
    pub(super) fn inline(&self) -> String {
        if self.0.is_empty() {
            return "{}".to_owned();
        }
        let keys: Vec<String> = self.0.iter().map(|(key, value)| format!("{key} = {value}")).collect();
        format!("{{ {} }}", keys.join(", "))
    }

    /// Tiers: one as a table, several as a list of tables, none not at all.
    pub(super) fn tiers<T>(&mut self, key: &'static str, tiers: &[T], of_one: impl Fn(&T) -> Self) {
        match tiers {
            [] => {}
            [tier] => self.add(key, of_one(tier).inline()),
            tiers => {
                let list: Vec<String> = tiers.iter().map(|tier| of_one(tier).inline()).collect();
                self.add(key, format_args!("[{}]", list.join(", ")));
            }
        }
    }

    /// Names or other texts, where there are any.
    pub(super) fn names<'a>(&mut self, key: &'static str, names: impl Iterator<Item = &'a str>) {
        let list: Vec<String> = names.map(|name| Toml(name).to_string()).collect();
        if !list.is_empty() {
            self.add(key, format_args!("[{}]", list.join(", ")));
        }
    }

    /// Numbers by name, where there are any.
    pub(super) fn rates(&mut self, key: &'static str, rates: &BTreeMap<Name, Value>) {
        if !rates.is_empty() {
            self.add(key, Inline(rates));
        }
    }
}

#[expect(clippy::float_cmp, reason = "a default is left out only where it is that very number")]
pub(super) fn is_every(value: &Value, number: f64) -> bool {
    matches!(value, Value::Every(every) if *every == number)
}

/// A value as TOML: a number, or a list of one per period.
pub(super) struct Written<'a>(pub(super) &'a Value);

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
pub(super) struct Number(pub(super) f64);

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
pub(super) struct Inline<'a, K>(pub(super) &'a BTreeMap<K, Value>);

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
pub(super) trait Word {
    fn word(&self) -> Cow<'_, str>;
}

impl Word for Name {
    fn word(&self) -> Cow<'_, str> {
        self.as_str().into()
    }
}

impl Word for Term {
    fn word(&self) -> Cow<'_, str> {
        match self {
            Self::Activity(name) => name.as_str().into(),
            _ => self.to_string().into(),
        }
    }
}

/// A key of a table: bare where TOML allows that, else in quotes.
pub(super) struct Key<'a>(pub(super) &'a str);

impl Display for Key<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let bare = self.0.bytes().all(|byte| byte.is_ascii_alphanumeric() || matches!(byte, b'_' | b'-'));
        if bare && !self.0.is_empty() { f.write_str(self.0) } else { Toml(self.0).fmt(f) }
    }
}
