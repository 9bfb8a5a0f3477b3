//! What a plan says of resources.
//!
//! Worths are those of capacity: a minimum load that binds says nothing of what more capacity would be worth.

use super::super::number::{rounded, rounded_to};
use super::{MakeError, Maker, PlannedResource, Rates, Side, finite, range, rate, settled};
use crate::lp::{RowIndex, keys};
use crate::model::{Name, Resource};

impl Maker<'_> {
    pub(super) fn resources(&self) -> Result<Vec<PlannedResource>, MakeError> {
        self.model.resources.iter().map(|(name, resource)| self.resource(name, resource)).collect()
    }

    fn resource(&self, name: &Name, resource: &Resource) -> Result<PlannedResource, MakeError> {
        let (mut used, mut spare, mut rates) = (Vec::new(), Vec::new(), None);
        for period in self.model.horizon.periods() {
            let index = self.row(keys::resource_key(name, &self.model.horizon, period))?;
            let capacity = resource.capacity.at(period);
            let sum = finite(
                settled(self.optimum.sums[index.0], resource.at_least.at(period), capacity),
                "the use",
                name.as_str(),
            )?;
            used.push(sum);
            spare.push(left_up_to(capacity, sum));
            rates = self.rates_of_capacity(name, index, sum)?;
        }
        let limited = spare.iter().any(|left| left.is_finite());
        let rates = rates.filter(|_| limited);
        Ok(PlannedResource {
            name: name.clone(),
            used: self.value(used),
            spare: limited.then(|| self.value(spare)),
            worth_of_more: rates.as_ref().map(|rates| rates.worth_of_more),
            loss_of_less: rates.as_ref().map(|rates| rates.loss_of_less),
            holds_between: rates.and_then(|rates| rates.holds_between),
        })
    }

    fn rates_of_capacity(&self, name: &Name, index: RowIndex, sum: f64) -> Result<Option<Rates>, MakeError> {
        if !self.worths {
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
    pub(super) fn bounds(&self, name: &Name, index: RowIndex) -> Result<Option<(f64, f64)>, MakeError> {
        let told = self.ranges.map(|ranges| ranges.bounds[index.0]);
        told.map(|(least, most)| range(least, most, "the range of the bound", name)).transpose()
    }
}

/// What is left of `most` where `sum` is taken, to the last digit that both have.
pub(super) fn left_up_to(most: f64, sum: f64) -> f64 {
    if most.is_finite() { rounded_to(most - rounded(sum), most.abs().max(sum.abs())) } else { most }
}
