//! What a plan says of materials.

use std::collections::BTreeMap;

use super::{MakeError, Maker, PlannedActivity, PlannedMaterial, finite, rate};
use crate::lp::keys;
use crate::model::{Flow, Material, Name, Value};

/// Per material what activities make that arrives, and what they draw, per period.
type Traffic<'a> = BTreeMap<&'a Name, (Vec<f64>, Vec<f64>)>;

impl Maker<'_> {
    /// `activities` are those planned, in the order of the model.
    pub(super) fn materials(&self, activities: &[PlannedActivity]) -> Result<Vec<PlannedMaterial>, MakeError> {
        let traffic = self.traffic(activities);
        let none = (Vec::new(), Vec::new());
        let planned = self.model.materials.iter().map(|(name, material)| {
            let (made, drawn) = traffic.get(name).unwrap_or(&none);
            self.material(name, material, made, drawn)
        });
        planned.collect()
    }

    fn material(
        &self,
        name: &Name,
        material: &Material,
        made: &[f64],
        drawn: &[f64],
    ) -> Result<PlannedMaterial, MakeError> {
        let worth = self.worth_at_hand(name)?;
        Ok(PlannedMaterial {
            name: name.clone(),
            purchase: self.flows(name, material, Flow::Purchase(None))?,
            sale: self.flows(name, material, Flow::Sale(None))?,
            late: self.flows(name, material, Flow::Late(None))?,
            stock: self.flows(name, material, Flow::Stock)?,
            discard: self.flows(name, material, Flow::Discard)?,
            made: self.summed(made, name)?,
            drawn: self.summed(drawn, name)?,
            // Where the worth is the only one, the aim bends nowhere: one less takes away what one more adds.
            loss_of_less: worth.clone(),
            worth_of_more: worth,
        })
    }

    fn flows(&self, name: &Name, material: &Material, flow: Flow) -> Result<Option<Value>, MakeError> {
        if !self.can_flow(name, material, flow) {
            return Ok(None);
        }
        let numbers = self.model.horizon.periods().map(|period| self.flow(name, flow, period));
        Ok(Some(self.value(numbers.collect::<Result<_, _>>()?)))
    }

    /// What activities have come to over the periods.
    fn summed(&self, numbers: &[f64], name: &Name) -> Result<Value, MakeError> {
        let number =
            |at| finite(numbers.get(at).copied().unwrap_or(0.0), "what activities make or draw", name.as_str());
        Ok(self.value((0..self.model.horizon.count()).map(number).collect::<Result<_, _>>()?))
    }

    /// What one unit more at hand is worth; `None` where that of some period may not be told.
    fn worth_at_hand(&self, name: &Name) -> Result<Option<Value>, MakeError> {
        let mut worths = Vec::with_capacity(self.model.horizon.count());
        for period in self.model.horizon.periods() {
            let index = self.row(keys::balance_key(name, &self.model.horizon, period))?;
            // What is at hand stands on the left of the balance: one unit more there is one less on the right.
            let worth = rate(0.0 - self.better(self.optimum.worths[index.0]), "the worth", name)?;
            worths.push(self.knows_worth(index).then_some(worth));
        }
        Ok(self.value_of_all(worths.into_iter()))
    }

    fn traffic<'m>(&'m self, activities: &[PlannedActivity]) -> Traffic<'m> {
        let count = self.model.horizon.count();
        let mut traffic = Traffic::new();
        if self.model.materials.is_empty() {
            return traffic;
        }
        for (activity, planned) in self.model.activities.values().zip(activities) {
            for (material, rate) in &activity.draws {
                let (_, drawn) = traffic.entry(material).or_insert_with(|| (vec![0.0; count], vec![0.0; count]));
                for period in self.model.horizon.periods() {
                    drawn[period.position()] += rate.at(period) * planned.level.at(period);
                }
            }
            for (material, rate) in &activity.makes {
                let (made, _) = traffic.entry(material).or_insert_with(|| (vec![0.0; count], vec![0.0; count]));
                for period in self.model.horizon.periods() {
                    let Some(begun) = period.before(activity.lead) else { continue };
                    made[period.position()] += rate.at(begun) * planned.level.at(begun);
                }
            }
        }
        traffic
    }
}
