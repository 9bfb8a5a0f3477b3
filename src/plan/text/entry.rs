//! What a plan's text says of one activity, resource, limit or material.
//!
//! Numbers, states and ranges may be said once, also where the periods have names, or as a list of one per period.

use serde::Deserialize;

use super::error::PlanError;
use crate::model::escape::Plain;
use crate::model::{Name, Value};
use crate::plan::each::{Each, Span};
use crate::plan::types::{PlannedActivity, PlannedLimit, PlannedMaterial, PlannedResource, State};

/// One activity as a plan or a release has it.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(in crate::plan) struct ActivityEntry {
    name: String,
    level: Numbers,
    state: Several<String>,
    may_vary: Option<Several<Span>>,
    #[serde(alias = "cost_range")]
    price_range: Option<Several<Span>>,
    break_even: Option<Numbers>,
    loses: Option<Numbers>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct ResourceEntry {
    name: String,
    used: Numbers,
    surge: Option<Numbers>,
    spare: Option<Numbers>,
    worth_of_more: Option<Numbers>,
    loss_of_less: Option<Numbers>,
    holds_between: Option<Several<Span>>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct LimitEntry {
    name: String,
    value: Option<Numbers>,
    spare: Option<Numbers>,
    worth_of_more: Option<Numbers>,
    loss_of_less: Option<Numbers>,
    holds_between: Option<Several<Span>>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct MaterialEntry {
    name: String,
    purchase: Option<Numbers>,
    sale: Option<Numbers>,
    late: Option<Numbers>,
    stock: Option<Numbers>,
    discard: Option<Numbers>,
    made: Numbers,
    drawn: Numbers,
    worth_of_more: Option<Numbers>,
    loss_of_less: Option<Numbers>,
}

/// A number, or several.
type Numbers = Several<f64>;

/// One, or a list of one per period.
#[derive(Deserialize)]
#[serde(untagged)]
enum Several<T> {
    One(T),
    Listed(Vec<T>),
}

impl ActivityEntry {
    /// As planned over so many named periods.
    pub(in crate::plan) fn planned(self, periods: usize) -> Result<PlannedActivity, PlanError> {
        let of = Of { name: &self.name, periods };
        Ok(PlannedActivity {
            name: name(&self.name)?,
            level: of.value("level", self.level)?,
            state: of.state(self.state)?,
            may_vary: of.spans("may_vary", self.may_vary)?,
            price_range: of.spans("price_range", self.price_range)?,
            break_even: of.maybe("break_even", self.break_even)?,
            loses: of.maybe("loses", self.loses)?,
        })
    }
}

impl ResourceEntry {
    pub(super) fn planned(self, periods: usize) -> Result<PlannedResource, PlanError> {
        let of = Of { name: &self.name, periods };
        Ok(PlannedResource {
            name: name(&self.name)?,
            used: of.value("used", self.used)?,
            surge: of.maybe("surge", self.surge)?,
            spare: of.maybe("spare", self.spare)?,
            worth_of_more: of.maybe("worth_of_more", self.worth_of_more)?,
            loss_of_less: of.maybe("loss_of_less", self.loss_of_less)?,
            holds_between: of.spans("holds_between", self.holds_between)?,
        })
    }
}

impl LimitEntry {
    pub(super) fn planned(self, periods: usize) -> Result<PlannedLimit, PlanError> {
        let of = Of { name: &self.name, periods };
        Ok(PlannedLimit {
            name: name(&self.name)?,
            value: of.maybe("value", self.value)?,
            spare: of.maybe("spare", self.spare)?,
            worth_of_more: of.maybe("worth_of_more", self.worth_of_more)?,
            loss_of_less: of.maybe("loss_of_less", self.loss_of_less)?,
            holds_between: of.spans("holds_between", self.holds_between)?,
        })
    }
}

impl MaterialEntry {
    pub(super) fn planned(self, periods: usize) -> Result<PlannedMaterial, PlanError> {
        let of = Of { name: &self.name, periods };
        Ok(PlannedMaterial {
            name: name(&self.name)?,
            purchase: of.maybe("purchase", self.purchase)?,
            sale: of.maybe("sale", self.sale)?,
            late: of.maybe("late", self.late)?,
            stock: of.maybe("stock", self.stock)?,
            discard: of.maybe("discard", self.discard)?,
            made: of.value("made", self.made)?,
            drawn: of.value("drawn", self.drawn)?,
            worth_of_more: of.maybe("worth_of_more", self.worth_of_more)?,
            loss_of_less: of.maybe("loss_of_less", self.loss_of_less)?,
        })
    }
}

/// What an entry is about, and how long its lists must be.
struct Of<'a> {
    name: &'a str,
    periods: usize,
}

impl Of<'_> {
    fn value(&self, key: &str, numbers: Numbers) -> Result<Value, PlanError> {
        Ok(match numbers {
            Several::One(number) => Value::Every(number),
            Several::Listed(list) => Value::Listed(self.counted(key, list)?),
        })
    }

    fn maybe(&self, key: &str, numbers: Option<Numbers>) -> Result<Option<Value>, PlanError> {
        numbers.map(|numbers| self.value(key, numbers)).transpose()
    }

    fn spans(&self, key: &str, spans: Option<Several<Span>>) -> Result<Option<Each<Span>>, PlanError> {
        Ok(match spans {
            None => None,
            Some(Several::One(span)) => Some(Each::One(span)),
            Some(Several::Listed(list)) => Some(Each::Listed(self.counted(key, list)?)),
        })
    }

    fn state(&self, words: Several<String>) -> Result<Each<State>, PlanError> {
        let known = |words: &String| {
            let state = State::ALL.into_iter().find(|state| state.words() == words);
            state.ok_or_else(|| PlanError::Broken(format!("no state is called `{}`", Plain(words))))
        };
        match words {
            Several::One(words) => Ok(Each::One(known(&words)?)),
            Several::Listed(list) => {
                let states = self.counted("state", list)?.iter().map(known).collect::<Result<Vec<_>, _>>()?;
                let none = || PlanError::Broken(format!("`{}` has no state", Plain(self.name)));
                Each::folded(states).ok_or_else(none)
            }
        }
    }

    fn counted<T>(&self, key: &str, list: Vec<T>) -> Result<Vec<T>, PlanError> {
        if list.len() == self.periods {
            return Ok(list);
        }
        let (found, name, periods) = (list.len(), Plain(self.name), self.periods);
        Err(PlanError::Broken(format!("`{key}` of `{name}` is a list of {found}, and {periods} periods are named")))
    }
}

fn name(text: &str) -> Result<Name, PlanError> {
    Name::new(text).map_err(|error| PlanError::Broken(format!("a name is wrong: {error}")))
}

/// The names of the periods of a plan or a release.
pub(in crate::plan) fn periods_of(texts: &[String]) -> Result<Vec<Name>, PlanError> {
    texts.iter().map(|text| name(text)).collect()
}

/// All entries as planned, or why one cannot be.
pub(in crate::plan) fn all<E, T>(
    entries: Vec<E>,
    planned: impl Fn(E) -> Result<T, PlanError>,
) -> Result<Vec<T>, PlanError> {
    entries.into_iter().map(planned).collect()
}
