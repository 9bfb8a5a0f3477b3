//! Reading one limit.

use std::collections::BTreeMap;

use super::fields::{Fields, Given};
use super::findings::shown;
use super::known::Summable;
use super::number::Role;
use super::toml_types::Key;
use super::{bounds, by_period};
use super::{over, term};
use crate::model::types::{Bound, Limit, Over, Term};
use crate::model::value::Value;

/// The limit in a table.
pub(super) fn read(fields: &mut Fields<'_, '_>, there: &Summable<'_, '_>) -> Limit {
    let over = over::read(fields);
    let bound = bound(fields, &over);
    Limit {
        label: fields.text("label"),
        terms: sum(fields, "terms", there).unwrap_or_else(|| missing(fields)),
        per: sum(fields, "per", there),
        bound,
        over,
    }
}

fn missing(fields: &mut Fields<'_, '_>) -> BTreeMap<Term, Value> {
    if fields.node("terms").is_none() {
        let message = "a limit needs `terms`: what it sums up".to_owned();
        let span = fields.span();
        fields.findings().add(&span, "no-terms", message, "add terms = { floor_tile = 1.0 }");
    }
    BTreeMap::new()
}

fn bound(fields: &mut Fields<'_, '_>, over: &Over) -> Bound {
    let at_least = over::bound(fields, "at_least", Role::Least, over);
    let at_most = over::bound(fields, "at_most", Role::Most, over);
    let equals = over::bound(fields, "equals", Role::Amount, over);
    if let Some(span) = fields.key_span("equals") {
        for other in ["at_least", "at_most"] {
            if let Some(other_span) = fields.key_span(other) {
                let later = if other_span.start > span.start { other_span } else { span.clone() };
                let message = format!("`equals` and `{other}` cannot stand together");
                fields.findings().add(&later, "equals-and-bound", message, "keep one of the two");
            }
        }
        return Bound::Equals(equals.map_or(Value::Every(0.0), |given| given.value));
    }
    if let (Some(least), Some(most)) = (&at_least, &at_most) {
        bounds::ordered(("at_least", least), ("at_most", most), fields);
    }
    if fields.key_span("at_least").is_none() && fields.key_span("at_most").is_none() {
        let message = "a limit needs a bound".to_owned();
        let span = fields.span();
        fields.findings().add(&span, "no-bound", message, "add `at_most`, `at_least` or `equals`");
    }
    let or = |given: Option<Given>, number| given.map_or(Value::Every(number), |given| given.value);
    Bound::Between(or(at_least, f64::NEG_INFINITY), or(at_most, f64::INFINITY))
}

/// The sum written under `key`.
fn sum(fields: &mut Fields<'_, '_>, key: &str, there: &Summable<'_, '_>) -> Option<BTreeMap<Term, Value>> {
    let table = fields.table(key, &format!("{key} = {{ floor_tile = 1.0 }}"))?;
    if key == "per" && table.is_empty() {
        let message = "`per` is empty, so the bounds would be multiplied by nothing".to_owned();
        let span = fields.key_span(key).unwrap_or_default();
        fields.findings().add(&span, "no-terms", message, "name what the bounds are per, or take `per` out");
    }
    let mut sum = BTreeMap::new();
    let mut spelt: BTreeMap<Term, &Key<'_>> = BTreeMap::new();
    for (word, node) in table {
        if term::refuse_dotted(word, node, fields.findings()) {
            continue;
        }
        let value = by_period::value(word.get_ref(), node, Role::Rate, fields.calendar(), fields.findings());
        let Some(term) = term::read(word, there, fields.findings()) else { continue };
        if let Some(other) = spelt.insert(term.clone(), word) {
            let (first, second) = if other.span().start < word.span().start { (other, word) } else { (word, other) };
            let message = format!("`{}` and `{}` are the same term", shown(first.get_ref()), shown(second.get_ref()));
            fields.findings().add(&second.span(), "duplicate-term", message, "keep one, with the sum of their numbers");
        }
        sum.insert(term, value.unwrap_or(Value::Every(0.0)));
    }
    Some(sum)
}
