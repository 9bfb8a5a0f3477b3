//! The model as its planner means it: resources, activities, limits and the aim.
//!
//! A [`Model`] is what reading yields when it found no fault: every name it refers to is there, every number is finite
//! where it must be. Everything is kept in byte order of names, so nothing that follows can depend on the order of declaration.

mod limit;
mod material;

use std::collections::{BTreeMap, BTreeSet};

pub use limit::{Bound, Flow, Limit, Over, Term};
pub use material::{Closing, Discard, Late, Material, Purchase, Sale, Stock};

use super::name::Name;
use super::value::{Horizon, Value};

/// A checked model. The default is an empty one.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Model {
    /// What people call the model; decides nothing.
    pub title: Option<String>,
    /// Unit of prices and costs; a label that the plan repeats.
    pub currency: Option<String>,
    /// Which way the aim goes.
    pub aim: Aim,
    /// Added to the aim, in currency.
    pub constant: f64,
    /// The periods planned.
    pub horizon: Horizon,
    /// What there is a limited amount of.
    pub resources: BTreeMap<Name, Resource>,
    /// What can be done, at a level to be planned.
    pub activities: BTreeMap<Name, Activity>,
    /// What is stocked, bought, sold, or made by one activity and drawn by another.
    pub materials: BTreeMap<Name, Material>,
    /// Any other linear rule.
    pub limits: BTreeMap<Name, Limit>,
}

/// Which way the aim goes.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Aim {
    /// Earn as much as possible: prices less costs.
    #[default]
    Maximise,
    /// Spend as little as possible: costs alone, an activity has no price.
    Minimise,
}

impl Aim {
    /// The word a model uses for it.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Maximise => "maximise",
            Self::Minimise => "minimise",
        }
    }
}

/// What there is a limited amount of.
#[derive(Clone, Debug, PartialEq)]
pub struct Resource {
    /// Shown beside the name; decides nothing.
    pub label: Option<String>,
    /// Unit of capacity; a label.
    pub unit: Option<String>,
    /// The most that may be used, in `unit`; infinite where there is no limit.
    pub capacity: Value,
    /// The least that must be used, in `unit`; minus infinity where there is none.
    pub at_least: Value,
    /// Cost of one unit used, in currency.
    pub cost: Value,
    /// Extra capacity, dearer by tier: each adds to the capacity up to its own width.
    pub surge: Vec<Surge>,
}

/// One tier of extra capacity.
#[derive(Clone, Debug, PartialEq)]
pub struct Surge {
    /// How much it adds at most, in the unit of the resource.
    pub at_most: Value,
    /// Cost of one unit of it, in currency, on top of what a unit used costs.
    pub cost: Value,
}

impl Default for Resource {
    fn default() -> Self {
        Self {
            label: None,
            unit: None,
            capacity: Value::Every(f64::INFINITY),
            at_least: Value::Every(f64::NEG_INFINITY),
            cost: Value::Every(0.0),
            surge: Vec::new(),
        }
    }
}

/// What can be done, at a level to be planned.
#[derive(Clone, Debug, PartialEq)]
pub struct Activity {
    /// Shown beside the name; decides nothing.
    pub label: Option<String>,
    /// Unit of the level; a label.
    pub unit: Option<String>,
    /// Earned per unit of level, in currency.
    pub price: Value,
    /// Spent per unit of level, in currency, without the cost of the resources it uses.
    pub cost: Value,
    /// Resource used per unit of level.
    pub uses: BTreeMap<Name, Value>,
    /// Material taken per unit of level, in the period of the level.
    pub draws: BTreeMap<Name, Value>,
    /// Material made per unit of level; it is there `lead` periods later.
    pub makes: BTreeMap<Name, Value>,
    /// Periods until what it makes is there.
    pub lead: usize,
    /// The least level; 0 unless the model says otherwise, minus infinity where it is free.
    pub at_least: Value,
    /// The highest level; infinite where there is no limit.
    pub at_most: Value,
    /// How far the level may move, up or down, from the period before; infinite where there is no limit. The first period has none before it.
    pub change_at_most: Value,
    /// Groups it belongs to, for limits and addresses.
    pub tags: BTreeSet<Name>,
    /// Priced out at every plan, never made.
    pub prospect: bool,
}

impl Default for Activity {
    fn default() -> Self {
        Self {
            label: None,
            unit: None,
            price: Value::Every(0.0),
            cost: Value::Every(0.0),
            uses: BTreeMap::new(),
            draws: BTreeMap::new(),
            makes: BTreeMap::new(),
            lead: 0,
            at_least: Value::Every(0.0),
            at_most: Value::Every(f64::INFINITY),
            change_at_most: Value::Every(f64::INFINITY),
            tags: BTreeSet::new(),
            prospect: false,
        }
    }
}
