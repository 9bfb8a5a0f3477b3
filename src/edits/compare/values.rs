//! Comparing numbers that may differ by period, and pairs of bounds.

use super::Edits;
use crate::edits::edit::{Kind, Subject};
use crate::model::{Bound, Period, Value};

/// Two values of one thing, before and after.
pub(super) type Pair<'a> = (&'a Value, &'a Value);

/// The three ways to bound a limit, each with its number; infinite where it is not used.
pub(super) fn bounds(bound: &Bound) -> [(&'static str, Value); 3] {
    let none = || Value::Every(f64::INFINITY);
    match bound {
        Bound::Between(least, most) => [("at_least", least.clone()), ("at_most", most.clone()), ("equals", none())],
        Bound::Equals(value) => [("at_least", none()), ("at_most", none()), ("equals", value.clone())],
    }
}

impl Edits {
    /// A number that is always there.
    pub(super) fn number(&mut self, address: &str, subject: &Subject, kind: Kind, old: &Value, new: &Value) {
        self.value(address, subject, (old, new), |value| Some(shown(value)), |_| kind);
    }

    /// A number that may come or go.
    pub(super) fn rate(
        &mut self,
        address: &str,
        subject: &Subject,
        kind: Kind,
        old: Option<&Value>,
        new: Option<&Value>,
    ) {
        match (old, new) {
            (Some(old), Some(new)) => self.number(address, subject, kind, old, new),
            (old, new) => self.push(address.to_owned(), subject, kind, old.map(shown), new.map(shown)),
        }
    }

    /// A value: one edit for each period in which it differs, or one for all where it differs in most and is of one kind.
    pub(super) fn value(
        &mut self,
        address: &str,
        subject: &Subject,
        (old, new): Pair<'_>,
        show: impl Fn(&Value) -> Option<String>,
        kind: impl Fn(Period) -> Kind,
    ) {
        let horizon = self.horizon.clone();
        let differs = |&period: &Period| !same(old.at(period), new.at(period));
        let differing: Vec<(Period, Kind)> =
            horizon.periods().filter(differs).map(|period| (period, kind(period))).collect();
        let Some(&(_, first)) = differing.first() else { return };
        let one_kind = differing.iter().all(|&(_, kind)| kind == first);
        let single = old.numbers().len() == 1 && new.numbers().len() == 1;
        if !horizon.is_named() || one_kind && (single || 2 * differing.len() > horizon.count()) {
            self.push(address.to_owned(), subject, first, show(old), show(new));
            return;
        }
        for (period, kind) in differing {
            let label = horizon.label(period).unwrap_or_default();
            let (was, is) = (Value::Every(old.at(period)), Value::Every(new.at(period)));
            self.push(format!("{address}.{label}"), subject, kind, show(&was), show(&is));
        }
    }

    /// Two bounds: each moved, put there, or taken away.
    pub(super) fn bounds(&mut self, addresses: [&str; 2], subject: &Subject, old: [&Value; 2], new: [&Value; 2]) {
        for (at, address) in addresses.into_iter().enumerate() {
            self.value(address, subject, (old[at], new[at]), bound_shown, |period| {
                let at_period = |values: [&Value; 2]| values.map(|value| value.at(period));
                bound_kinds(at_period(old), at_period(new))[at]
            });
        }
    }
}

/// The kinds of what has become of two bounds.
pub(super) fn bound_kinds(old: [f64; 2], new: [f64; 2]) -> [Kind; 2] {
    let let_go = let_go(old, new);
    [0, 1].map(|at| {
        let gone = old[at].is_finite() && !new[at].is_finite();
        if let_go.map_or(gone, |let_go| let_go[at]) { Kind::BoundRemoved } else { Kind::Capacity }
    })
}

/// Where both bounds were one and part: which of them lets go of what they held. Where both have moved, what they held stands at
/// neither, which is as if one of them were taken away and the other moved. `None` where they do not part.
fn let_go(old: [f64; 2], new: [f64; 2]) -> Option<[bool; 2]> {
    let parted = old[0].is_finite() && same(old[0], old[1]) && !same(new[0], new[1]);
    parted.then(|| [!same(old[0], new[0]) && same(old[1], new[1]), !same(old[1], new[1])])
}

/// Whether two numbers are one; there is one zero only.
pub(super) fn same(a: f64, b: f64) -> bool {
    (a + 0.0).total_cmp(&(b + 0.0)).is_eq()
}

pub(super) fn has_bound(value: &Value) -> bool {
    value.numbers().iter().any(|number| number.is_finite())
}

pub(super) fn bound_shown(value: &Value) -> Option<String> {
    has_bound(value).then(|| shown(value))
}

/// As a planner would write it: a number, or a list of one per period.
pub(super) fn shown(value: &Value) -> String {
    let numbers = value.numbers();
    match numbers {
        [first, rest @ ..] if rest.iter().all(|number| same(*number, *first)) => first.to_string(),
        _ => format!("[{}]", numbers.iter().map(f64::to_string).collect::<Vec<_>>().join(", ")),
    }
}
