//! What a plan says of limits.

use std::collections::BTreeMap;

use super::super::number::rounded_to;
use super::resources::left_up_to;
use super::{MakeError, Maker, NIL, PlannedActivity, PlannedLimit, Rates, Side, finite, rate, settled};
use crate::lp::{RowIndex, build, keys};
use crate::model::{Bound, Limit, Name, Period, Term, Value};

/// What a limit comes to in one period.
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
        let (mut values, mut spare, mut rates) = (Vec::new(), Vec::new(), None);
        for period in self.model.horizon.periods() {
            let told = match &limit.per {
                None => self.sum(name, limit, period)?,
                Some(per) => self.ratio(name, limit, per, activities, period)?,
            };
            values.push(told.value);
            spare.push(told.spare);
            rates = told.rates;
        }
        let values: Option<Vec<f64>> = values.into_iter().collect();
        let bounded = spare.iter().any(|left| left.is_finite());
        Ok(PlannedLimit {
            name: name.clone(),
            value: values.map(|numbers| self.value(numbers)),
            spare: bounded.then(|| self.value(spare)),
            worth_of_more: rates.as_ref().map(|rates| rates.worth_of_more),
            loss_of_less: rates.as_ref().map(|rates| rates.loss_of_less),
            holds_between: rates.and_then(|rates| rates.holds_between),
        })
    }

    /// A limit whose bounds stand alone.
    fn sum(&self, name: &Name, limit: &Limit, period: Period) -> Result<Told, MakeError> {
        let index = self.row(keys::limit_key(name, None, &self.model.horizon, period))?;
        let row = &self.program.rows[index.0];
        let sum = finite(settled(self.optimum.sums[index.0], row.lower, row.upper), "the value", name.as_str())?;
        let side = Side::of(sum, row.lower, row.upper);
        let rates = if !self.worths {
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
        period: Period,
    ) -> Result<Told, MakeError> {
        let terms = self.total(&limit.terms, activities, period);
        let per = self.total(per, activities, period);
        let (least, most) = match &limit.bound {
            Bound::Between(least, most) => (least.at(period), most.at(period)),
            Bound::Equals(value) => (value.at(period), value.at(period)),
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
        let rates = if self.worths { Some(self.rates_of_ratio(name, limit, terms.abs(), period)?) } else { None };
        Ok(Told { value, spare, rates })
    }

    /// The rates of the row that binds most; there may be two.
    fn rates_of_ratio(&self, name: &Name, limit: &Limit, scale: f64, period: Period) -> Result<Rates, MakeError> {
        let mut worth = 0.0_f64;
        for side in build::sides(limit, period) {
            let RowIndex(index) = self.row(keys::limit_key(name, side.word, &self.model.horizon, period))?;
            let binds = self.optimum.sums[index].abs() <= NIL * scale.max(1.0);
            let own = rate(self.better(self.optimum.worths[index]), "the worth", name)?;
            if binds && own.abs() > worth.abs() {
                worth = own;
            }
        }
        Ok(Rates { worth_of_more: worth, loss_of_less: worth, holds_between: None })
    }

    /// What `terms` come to at the planned levels.
    fn total(&self, terms: &BTreeMap<Term, Value>, activities: &[PlannedActivity], period: Period) -> f64 {
        let level = |planned: &PlannedActivity| planned.level.at(period);
        let sum_of = |term: &Term| -> f64 {
            match term {
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
                Term::Material(..) | Term::Surge(..) => 0.0,
            }
        };
        terms.iter().map(|(term, coefficient)| coefficient.at(period) * sum_of(term)).sum()
    }
}
