//! What a plan says of limits.

use std::collections::BTreeMap;

use super::super::number::rounded_to;
use super::resources::left_up_to;
use super::{Each, MakeError, Maker, NIL, PlannedActivity, PlannedLimit, Rates, Side, Span, finite, rate, settled};
use crate::lp::RowIndex;
use crate::lp::build::{self, Group};
use crate::model::{Bound, Limit, Name, Over, Period, Term, Value};

/// What a limit comes to, in one period or in several together.
struct Told {
    value: Option<f64>,
    /// Infinite where there is no `at_most`.
    spare: f64,
    rates: Option<Rates>,
}

impl Maker<'_> {
    /// `activities` are those planned, in the order of the model.
    pub(super) fn limits(&self, activities: &[PlannedActivity]) -> Result<Vec<PlannedLimit>, MakeError> {
        self.model.limits.iter().map(|(name, limit)| self.limit(name, limit, activities)).collect()
    }

    pub(super) fn limit_is_complete(&self, planned: &PlannedLimit) -> bool {
        let share = self.model.limits.get(&planned.name).is_some_and(|limit| limit.per.is_some());
        planned.worth_of_more.is_some() && (share || planned.holds_between.is_some())
    }

    fn limit(&self, name: &Name, limit: &Limit, activities: &[PlannedActivity]) -> Result<PlannedLimit, MakeError> {
        let mut told = Vec::new();
        for over in build::groups(limit, &self.model.horizon) {
            let Some(first) = over.first() else { continue };
            told.push(match &limit.per {
                None => self.sum(name, limit, &over)?,
                Some(per) => self.ratio(name, limit, per, activities, (&over, first))?,
            });
        }
        let each = limit.over == Over::Each;
        let value = |numbers: Vec<f64>| if each { self.value(numbers) } else { alone(&numbers) };
        let rates = |rate: fn(&Rates) -> f64| {
            told.iter().map(|told| told.rates.as_ref().map(rate)).collect::<Option<Vec<_>>>().map(value)
        };
        let spans = told.iter().map(|told| told.rates.as_ref().and_then(|rates| rates.holds_between));
        let spare: Vec<f64> = told.iter().map(|told| told.spare).collect();
        Ok(PlannedLimit {
            name: name.clone(),
            value: told.iter().map(|told| told.value).collect::<Option<Vec<_>>>().map(value),
            spare: spare.iter().any(|left| left.is_finite()).then(|| value(spare)),
            worth_of_more: rates(|rates| rates.worth_of_more),
            loss_of_less: rates(|rates| rates.loss_of_less),
            holds_between: if each { self.spans_of_all(spans) } else { one_span(spans) },
        })
    }

    /// A limit whose bounds stand alone.
    fn sum(&self, name: &Name, limit: &Limit, over: &Group) -> Result<Told, MakeError> {
        let index = self.row(over.key(name, None, &self.model.horizon))?;
        let row = &self.program.rows[index.0];
        let sum = finite(settled(self.optimum.sums[index.0], row.lower, row.upper), "the value", name.as_str())?;
        let side = Side::of(sum, row.lower, row.upper);
        let rates = if !self.knows_worth(index) {
            None
        } else if side == Side::Neither {
            let nearest_is_upper = row.upper - sum <= sum - row.lower;
            let between = if nearest_is_upper { (sum, f64::INFINITY) } else { (f64::NEG_INFINITY, sum) };
            let holds_between = self.optimum.levels_unique.then_some(between);
            Some(Rates { worth_of_more: 0.0, loss_of_less: 0.0, holds_between })
        } else {
            let worth = rate(self.better(self.optimum.worths[index.0]), "the worth", name)?;
            Some(Rates { worth_of_more: worth, loss_of_less: worth, holds_between: self.bounds(name, index)? })
        };
        let spare = match limit.bound {
            Bound::Between(..) => left_up_to(row.upper, sum),
            Bound::Equals(_) => f64::INFINITY,
        };
        Ok(Told { value: Some(sum), spare, rates })
    }

    /// A limit whose bounds are multiplied by `per`: its value is a ratio, and each bound has a row of its own.
    fn ratio(
        &self,
        name: &Name,
        limit: &Limit,
        per: &BTreeMap<Term, Value>,
        activities: &[PlannedActivity],
        (over, first): (&Group, Period),
    ) -> Result<Told, MakeError> {
        let terms = self.total(&limit.terms, activities, &over.periods)?;
        let per = self.total(per, activities, &over.periods)?;
        let (least, most) = match &limit.bound {
            Bound::Between(least, most) => (least.at(first), most.at(first)),
            Bound::Equals(value) => (value.at(first), value.at(first)),
        };
        let value = (per.abs() > NIL).then(|| settled(terms / per, least, most));
        let value = value.map(|value| finite(value, "the value", name.as_str())).transpose()?;
        let spare = match limit.bound {
            Bound::Between(..) if most.is_finite() => {
                let allowed = most * per;
                rounded_to(allowed - terms, allowed.abs().max(terms.abs()))
            }
            _ => f64::INFINITY,
        };
        Ok(Told { value, spare, rates: self.rates_of_ratio(name, limit, terms.abs(), (over, first))? })
    }

    /// The rates of the row that binds most; there may be two. `None` where one of them may not be told.
    fn rates_of_ratio(
        &self,
        name: &Name,
        limit: &Limit,
        scale: f64,
        (over, first): (&Group, Period),
    ) -> Result<Option<Rates>, MakeError> {
        let mut worth = 0.0_f64;
        for side in build::sides(limit, first) {
            let row = self.row(over.key(name, side.word, &self.model.horizon))?;
            if !self.knows_worth(row) {
                return Ok(None);
            }
            let RowIndex(index) = row;
            let binds = self.optimum.sums[index].abs() <= NIL * scale.max(1.0);
            let own = rate(self.better(self.optimum.worths[index]), "the worth", name)?;
            if binds && own.abs() > worth.abs() {
                worth = own;
            }
        }
        Ok(Some(Rates { worth_of_more: worth, loss_of_less: worth, holds_between: None }))
    }

    /// What `terms` come to at the planned levels, over these periods together.
    fn total(
        &self,
        terms: &BTreeMap<Term, Value>,
        activities: &[PlannedActivity],
        periods: &[Period],
    ) -> Result<f64, MakeError> {
        let mut total = 0.0;
        for &period in periods {
            for (term, coefficient) in terms {
                total += coefficient.at(period) * self.term(term, activities, period)?;
            }
        }
        Ok(total)
    }

    fn term(&self, term: &Term, activities: &[PlannedActivity], period: Period) -> Result<f64, MakeError> {
        let level = |planned: &PlannedActivity| planned.level.at(period);
        Ok(match term {
            Term::Activity(name) => activities
                .binary_search_by(|planned| planned.name.cmp(name))
                .map_or(0.0, |position| level(&activities[position])),
            Term::Tag(tag) => self
                .model
                .activities
                .values()
                .zip(activities)
                .filter(|(activity, _)| activity.tags.contains(tag))
                .map(|(_, planned)| level(planned))
                .sum(),
            Term::All => activities.iter().map(level).sum(),
            Term::Material(name, flow) => self.flow(name, *flow, period)?,
            Term::Surge(name, tier) => self.surge_of(name, *tier, period)?,
        })
    }
}

/// The number of a limit over several periods together.
fn alone(numbers: &[f64]) -> Value {
    Value::Every(numbers.first().copied().unwrap_or(0.0))
}

fn one_span(mut spans: impl Iterator<Item = Option<Span>>) -> Option<Each<Span>> {
    Some(Each::One(spans.next()??))
}
