//! What a plan says of resources.
//!
//! Worths are those of capacity: a minimum load that binds says nothing of what more capacity would be worth.

use super::super::number::{rounded, rounded_to};
use super::{MakeError, Maker, PlannedResource, Rates, Side, Span, finite, range, rate, settled};
use crate::lp::{RowIndex, keys};
use crate::model::{Name, Resource};

impl Maker<'_> {
    pub(super) fn resources(&self) -> Result<Vec<PlannedResource>, MakeError> {
        self.model.resources.iter().map(|(name, resource)| self.resource(name, resource)).collect()
    }

    fn resource(&self, name: &Name, resource: &Resource) -> Result<PlannedResource, MakeError> {
        let (mut used, mut surge, mut spare, mut rates) = (Vec::new(), Vec::new(), Vec::new(), Vec::new());
        for period in self.model.horizon.periods() {
            let index = self.row(keys::resource_key(name, &self.model.horizon, period))?;
            let (least, capacity) = (resource.at_least.at(period), resource.capacity.at(period));
            // The row holds what is used less the extra capacity that is taken for it.
            let sum = finite(settled(self.optimum.sums[index.0], least, capacity), "the use", name.as_str())?;
            let extra = self.surged(name, resource.surge.len(), period)?;
            let width: f64 = resource.surge.iter().map(|tier| tier.at_most.at(period)).sum();
            used.push(sum + extra);
            surge.push(extra);
            spare.push(if resource.surge.is_empty() {
                left_up_to(capacity, sum)
            } else {
                left_up_to(capacity + width, sum + extra).max(0.0)
            });
            rates.push(self.rates_of_capacity(name, index, sum)?);
        }
        let bounded = spare.iter().any(|left| left.is_finite());
        let limited = resource.capacity.numbers().iter().any(|capacity| capacity.is_finite());
        let rates = rates.into_iter().collect::<Option<Vec<_>>>().filter(|_| limited).unwrap_or_default();
        let told =
            |number: fn(&Rates) -> f64| (!rates.is_empty()).then(|| self.value(rates.iter().map(number).collect()));
        Ok(PlannedResource {
            name: name.clone(),
            used: self.value(used),
            surge: (!resource.surge.is_empty()).then(|| self.value(surge)),
            spare: bounded.then(|| self.value(spare)),
            worth_of_more: told(|rates| rates.worth_of_more),
            loss_of_less: told(|rates| rates.loss_of_less),
            holds_between: self
                .spans_of_all(rates.iter().map(|rates| rates.holds_between))
                .filter(|spans| !spans.all().is_empty()),
        })
    }

    fn rates_of_capacity(&self, name: &Name, index: RowIndex, sum: f64) -> Result<Option<Rates>, MakeError> {
        if !self.knows_worth(index) {
            return Ok(None);
        }
        let row = &self.program.rows[index.0];
        let worth = rate(self.better(self.optimum.worths[index.0]), "the worth", name)?;
        let rates = match Side::of(sum, row.lower, row.upper) {
            Side::Upper => {
                Rates { worth_of_more: worth, loss_of_less: worth, holds_between: self.bounds(name, index)? }
            }
            // Less capacity than the minimum load leaves no plan. How much more is worth so much, the basis does not tell:
            // its range moves capacity and minimum load together.
            Side::Both => Rates { worth_of_more: worth.max(0.0), loss_of_less: f64::INFINITY, holds_between: None },
            Side::Lower | Side::Neither => {
                let holds_between = self.optimum.levels_unique.then_some((sum, f64::INFINITY));
                Rates { worth_of_more: 0.0, loss_of_less: 0.0, holds_between }
            }
        };
        Ok(Some(rates))
    }

    /// Between which numbers of its binding bound a row's worth holds, where that may be told.
    pub(super) fn bounds(&self, name: &Name, index: RowIndex) -> Result<Option<Span>, MakeError> {
        let told = self.ranges.map(|ranges| ranges.bounds[index.0]);
        told.map(|(least, most)| range(least, most, "the range of the bound", name)).transpose()
    }
}

/// What is left of `most` where `sum` is taken, to the last digit that both have.
pub(super) fn left_up_to(most: f64, sum: f64) -> f64 {
    if most.is_finite() { rounded_to(most - rounded(sum), most.abs().max(sum.abs())) } else { most }
}
