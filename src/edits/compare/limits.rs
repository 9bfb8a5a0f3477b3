//! Edits of limits.

use std::collections::{BTreeMap, BTreeSet};

use super::values::{bound_kinds, bound_shown, bounds};
use super::{Concerned, Edits, in_short};
use crate::edits::edit::{Kind, Planned, Subject};
use crate::edits::side_by_side::Pair;
use crate::model::{Limit, Name, Over, Term, Value};

impl Edits {
    pub(super) fn limit(&mut self, name: &Name, pair: Pair<'_, Limit>, concerned: &Concerned<'_>) {
        let address = format!("limits.{name}");
        let whole = Subject::Limit(name.clone(), Vec::new());
        match pair {
            // With `per` it stands in rows of their own: another rule under the same name.
            (Some(old), Some(new)) if old.per.is_some() != new.per.is_some() => {
                self.push(address.clone(), &whole, Kind::WithdrawnConstraint, Some(in_short::limit(old)), None);
                self.push(address, &whole, Kind::NewConstraint, None, Some(in_short::limit(new)));
            }
            // So it does where it sums over other periods.
            (Some(old), Some(new)) if old.over != new.over => {
                let (was, is) = (self.over(&old.over), self.over(&new.over));
                self.push(format!("{address}.over"), &whole, Kind::NewBalance, Some(was), Some(is));
                self.limit_changed(name, old, new, concerned);
            }
            (Some(old), Some(new)) => self.limit_changed(name, old, new, concerned),
            (None, Some(new)) => self.push(address, &whole, Kind::NewConstraint, None, Some(in_short::limit(new))),
            (Some(old), None) => {
                self.push(address, &whole, Kind::WithdrawnConstraint, Some(in_short::limit(old)), None);
            }
            (None, None) => {}
        }
    }

    fn limit_changed(&mut self, name: &Name, old: &Limit, new: &Limit, concerned: &Concerned<'_>) {
        let address = format!("limits.{name}");
        let whole = Subject::Limit(name.clone(), Vec::new());
        self.words(format!("{address}.label"), &whole, old.label.as_ref(), new.label.as_ref());
        self.terms(&format!("{address}.terms"), name, &old.terms, &new.terms, concerned);
        let none = BTreeMap::new();
        let (old_per, new_per) = (old.per.as_ref().unwrap_or(&none), new.per.as_ref().unwrap_or(&none));
        self.terms(&format!("{address}.per"), name, old_per, new_per, concerned);
        self.limit_bounds(name, old, new, concerned);
    }

    fn over(&self, over: &Over) -> String {
        match over {
            Over::Each => "each".to_owned(),
            Over::All => "all".to_owned(),
            Over::Some(periods) => {
                let labels = periods.iter().filter_map(|&period| self.horizon.label(period));
                format!("[{}]", labels.collect::<Vec<_>>().join(", "))
            }
        }
    }

    fn terms(
        &mut self,
        address: &str,
        limit: &Name,
        old: &BTreeMap<Term, Value>,
        new: &BTreeMap<Term, Value>,
        concerned: &Concerned<'_>,
    ) {
        let terms: BTreeSet<&Term> = old.keys().chain(new.keys()).collect();
        for term in terms {
            let (was, is) = (old.get(term), new.get(term));
            if was != is {
                let subject = Subject::Limit(limit.clone(), concerned.by(term));
                self.rate(&format!("{address}.{term}"), &subject, Kind::Recipe, was, is);
            }
        }
    }

    /// With `per`, a bound is a coefficient of the row, and each bound has a row of its own.
    fn limit_bounds(&mut self, name: &Name, old: &Limit, new: &Limit, concerned: &Concerned<'_>) {
        let per: Vec<Planned> =
            new.per.iter().chain(&old.per).flat_map(BTreeMap::keys).flat_map(|term| concerned.by(term)).collect();
        let by_per = old.per.is_some() || new.per.is_some();
        let (olds, news) = (bounds(&old.bound), bounds(&new.bound));
        let subject = Subject::Limit(name.clone(), per);
        for (at, (word, old)) in olds.iter().enumerate() {
            let new = &news[at].1;
            let address = format!("limits.{name}.{word}");
            self.value(&address, &subject, (old, new), bound_shown, |period| {
                let (was, is) = (old.at(period).is_finite(), new.at(period).is_finite());
                let of = |bounds: &[(&str, Value); 3]| [0, 1].map(|at| bounds[at].1.at(period));
                match (was, is) {
                    (true, true) if by_per => Kind::Recipe,
                    (false, true) if by_per => Kind::NewConstraint,
                    (true, false) if by_per => Kind::WithdrawnConstraint,
                    (true, false) if at == EQUALS => Kind::BoundRemoved,
                    _ if at == EQUALS => Kind::Capacity,
                    _ => bound_kinds(of(&olds), of(&news))[at],
                }
            });
        }
    }
}

/// Where the exact bound stands among the [three](bounds).
const EQUALS: usize = 2;
