//! Levels of what is planned beside activities: extra capacity, and the ways in which materials come, go and wait.

use super::{MakeError, Maker};
use crate::lp::{Key, keys};
use crate::model::{Flow, Material, Name, Period};

impl Maker<'_> {
    /// How much of a resource's extra capacity is taken in a period, over all of its tiers.
    pub(super) fn surged(&self, name: &Name, tiers: usize, period: Period) -> Result<f64, MakeError> {
        (1..=tiers).map(|tier| self.surge_of(name, Some(tier), period)).sum()
    }

    /// How much of one tier of a resource's extra capacity is taken, or of all.
    pub(super) fn surge_of(&self, name: &Name, tier: Option<usize>, period: Period) -> Result<f64, MakeError> {
        let Some(tier) = tier else {
            let tiers = self.model.resources.get(name).map_or(0, |resource| resource.surge.len());
            return self.surged(name, tiers, period);
        };
        self.level_at(&keys::surge_key(name, tier, &self.model.horizon, period))
    }

    /// How much of a material flows one way in a period, over all of its tiers where none is named.
    pub(super) fn flow(&self, name: &Name, flow: Flow, period: Period) -> Result<f64, MakeError> {
        let Some(material) = self.model.materials.get(name) else { return Ok(0.0) };
        let key = |flow| keys::flow_key(name, flow, &self.model.horizon, period);
        tiers(material, flow).into_iter().map(|flow| self.level_at(&key(flow))).sum()
    }

    /// Whether anything can flow that way in any period.
    pub(super) fn can_flow(&self, name: &Name, material: &Material, flow: Flow) -> bool {
        let open = |key: &Key| {
            let column = self.program.column(key).map(|index| &self.program.columns[index.0]);
            column.is_some_and(|column| column.lower < 0.0 || column.upper > 0.0)
        };
        self.model.horizon.periods().any(|period| {
            tiers(material, flow).into_iter().any(|flow| open(&keys::flow_key(name, flow, &self.model.horizon, period)))
        })
    }

    /// The level of a column; 0 where there is none, as the program has none for what cannot be.
    fn level_at(&self, key: &Key) -> Result<f64, MakeError> {
        self.program.column(key).map_or(Ok(0.0), |index| self.level(index))
    }
}

/// The flows with their tiers named that a flow stands for.
fn tiers(material: &Material, flow: Flow) -> Vec<Flow> {
    let all = |count: usize, tier: fn(Option<usize>) -> Flow| (1..=count).map(|at| tier(Some(at))).collect();
    match flow {
        Flow::Purchase(None) => all(material.purchase.len(), Flow::Purchase),
        Flow::Sale(None) => all(material.sale.len(), Flow::Sale),
        Flow::Late(None) => all(material.sale.len(), Flow::Late),
        one => vec![one],
    }
}
