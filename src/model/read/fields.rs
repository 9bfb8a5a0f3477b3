//! One table of a model, read key by key.

use std::collections::BTreeMap;

use toml::de::DeValue;

use super::by_period;
use super::calendar::Calendar;
use super::findings::{Findings, Span};
use super::keys::Keys;
use super::most::MOST_PERIODS;
use super::named::name;
use super::number::{self, Role};
use super::toml_types::{Key, Node, Table, kind};
use crate::model::name::Name;
use crate::model::value::Value;

/// The longest text a model may hold, in characters.
pub const LONGEST_TEXT: usize = 1000;

/// A value that was written out, and where.
#[derive(Clone, Debug)]
pub(super) struct Given {
    pub(super) value: Value,
    pub(super) span: Span,
}

/// A table whose keys have been checked; each method reads one key, and answers `None` where it is left out or faulty.
pub(super) struct Fields<'a, 'i> {
    table: &'a Table<'i>,
    span: Span,
    calendar: &'a Calendar,
    findings: &'a mut Findings,
}

impl<'a, 'i> Fields<'a, 'i> {
    /// Opens a table: whatever is not one of `keys` is a fault.
    /// `span` is where the table begins, for what it lacks.
    pub(super) fn open(
        table: &'a Table<'i>,
        span: Span,
        keys: &'static Keys,
        calendar: &'a Calendar,
        findings: &'a mut Findings,
    ) -> Self {
        for key in table.keys() {
            keys.check(key, findings);
        }
        Self { table, span, calendar, findings }
    }

    /// Opens a table within this one.
    pub(super) fn within<'b>(&'b mut self, table: &'b Table<'i>, span: Span, keys: &'static Keys) -> Fields<'b, 'i> {
        Fields::open(table, span, keys, self.calendar, self.findings)
    }

    /// Where the table begins.
    pub(super) fn span(&self) -> Span {
        self.span.clone()
    }

    /// The periods that values are given for.
    pub(super) fn calendar(&self) -> &'a Calendar {
        self.calendar
    }

    /// Where faults of this table go.
    pub(super) fn findings(&mut self) -> &mut Findings {
        self.findings
    }

    /// Where `key` stands, if it is there.
    pub(super) fn key_span(&self, key: &str) -> Option<Span> {
        self.table.get_key_value(key).map(|(key, _)| key.span())
    }

    /// The value of `key` as it was parsed.
    pub(super) fn node(&self, key: &str) -> Option<&'a Node<'i>> {
        self.table.get(key)
    }

    /// A text for people.
    pub(super) fn text(&mut self, key: &str) -> Option<String> {
        let node = self.table.get(key)?;
        match node.get_ref().as_str() {
            Some(text) if text.len() > LONGEST_TEXT && text.chars().count() > LONGEST_TEXT => {
                let message = format!("`{key}` is longer than {LONGEST_TEXT} characters");
                self.findings.add(&node.span(), "too-long", message, "say the rest in a comment");
                None
            }
            Some(text) => Some(text.to_owned()),
            None => self.wrong(key, node, "a text", "put it in double quotes"),
        }
    }

    /// True or false; false where it is left out.
    pub(super) fn flag(&mut self, key: &str) -> bool {
        let Some(node) = self.table.get(key) else { return false };
        match node.get_ref().as_bool() {
            Some(flag) => flag,
            None => self.wrong(key, node, "true or false", "write true, without quotes").unwrap_or(false),
        }
    }

    /// A number, in a role, that may differ by period.
    pub(super) fn value(&mut self, key: &str, role: Role) -> Option<Given> {
        let node = self.table.get(key)?;
        let value = by_period::value(key, node, role, self.calendar, self.findings)?;
        Some(Given { value, span: node.span() })
    }

    /// As [`value`](Self::value), or `default` where it is left out or faulty.
    pub(super) fn value_or(&mut self, key: &str, role: Role, default: f64) -> Value {
        self.value(key, role).map_or(Value::Every(default), |given| given.value)
    }

    /// A number that cannot differ by period.
    pub(super) fn number(&mut self, key: &str, role: Role) -> Option<f64> {
        number::number(key, self.table.get(key)?, role, self.findings)
    }

    /// A whole number of periods; 0 where it is left out.
    pub(super) fn periods(&mut self, key: &str) -> usize {
        let Some(node) = self.table.get(key) else { return 0 };
        let number = node.get_ref().as_integer().and_then(|integer| {
            usize::from_str_radix(integer.as_str(), integer.radix()).ok().filter(|&number| number <= MOST_PERIODS)
        });
        number.unwrap_or_else(|| {
            let message = format!("`{key}` must be a whole number of periods, from 0 to {MOST_PERIODS}");
            self.findings.add(&node.span(), "not-whole", message, "write for example 2");
            0
        })
    }

    /// Numbers by name, each of which may differ by period.
    pub(super) fn rates(
        &mut self,
        key: &str,
        example: &str,
        mut name: impl FnMut(&Key<'i>, &mut Findings) -> Option<Name>,
    ) -> BTreeMap<Name, Value> {
        let mut rates = BTreeMap::new();
        for (word, node) in self.table(key, example).into_iter().flatten() {
            let rate = by_period::value(word.get_ref(), node, Role::Rate, self.calendar, self.findings);
            if let Some(name) = name(word, self.findings) {
                rates.insert(name, rate.unwrap_or(Value::Every(0.0)));
            }
        }
        rates
    }

    /// A table.
    pub(super) fn table(&mut self, key: &str, example: &str) -> Option<&'a Table<'i>> {
        let node = self.table.get(key)?;
        node.get_ref().as_table().or_else(|| self.wrong(key, node, "a table", &format!("write it as {example}")))
    }

    /// A table within this one, and where it begins.
    pub(super) fn inner(&mut self, key: &str, keys: &'static Keys) -> Option<(&'a Table<'i>, Span)> {
        let span = self.table.get(key)?.span();
        Some((self.table(key, &format!("{key} = {}", keys.example()))?, span))
    }

    /// A list of names.
    pub(super) fn names(&mut self, key: &str) -> Vec<Name> {
        let Some(node) = self.table.get(key) else { return Vec::new() };
        let DeValue::Array(list) = node.get_ref() else {
            let example = node.get_ref().as_str().and_then(|text| Name::new(text).ok());
            let help = format!("write it as [\"{}\"]", example.as_ref().map_or("glazed", Name::as_str));
            self.wrong::<()>(key, node, "a list of names", &help);
            return Vec::new();
        };
        list.iter().filter_map(|item| self.name_in(key, item)).collect()
    }

    fn name_in(&mut self, key: &str, node: &Node<'i>) -> Option<Name> {
        let Some(text) = node.get_ref().as_str() else {
            let message = format!("`{key}` holds names, not {}", kind(node));
            self.findings.add(&node.span(), "wrong-type", message, "put each name in double quotes");
            return None;
        };
        name(text, &node.span(), self.findings)
    }

    fn wrong<T>(&mut self, key: &str, node: &Node<'_>, wanted: &str, help: &str) -> Option<T> {
        let message = format!("`{key}` must be {wanted}, not {}", kind(node));
        self.findings.add(&node.span(), "wrong-type", message, help);
        None
    }
}
