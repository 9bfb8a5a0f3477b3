//! The plan as a value: what `NAME.plan.toml` says.

use crate::model::meaning::Meaning;
use crate::model::{Name, Value};

/// Version of the plan file's layout.
pub const FORMAT: u32 = 1;

/// Version of the rules by which a model gets its plan; raised whenever the same model may get other bytes.
pub const RULES: u32 = 1;

/// A plan. Lists are in byte order of names.
#[derive(Clone, Debug, PartialEq)]
pub struct Plan {
    /// The meaning of the model that it answers.
    pub answers: Meaning,
    /// Whether it may be worked to.
    pub standing: Standing,
    /// The aim, in currency.
    pub aim: f64,
    /// Whether the aim is to be small: then costs, not prices, are ranged and broken even.
    pub minimise: bool,
    /// Unit of the aim.
    pub currency: Option<String>,
    /// Whether nothing was decided by a tolerance; if not, the plan is proven within 1e-9 only.
    pub exact: bool,
    /// Whether other plans earn as much.
    pub ties: bool,
    /// Of how many activities it was not worked out how far their levels may vary without loss, where other plans earn as much.
    pub may_vary_left_out: usize,
    /// Whether every worth and range was worked out.
    pub complete: bool,
    /// What is done.
    pub activities: Vec<PlannedActivity>,
    /// What is used.
    pub resources: Vec<PlannedResource>,
    /// What the limits come to.
    pub limits: Vec<PlannedLimit>,
}

/// Whether a plan may be worked to.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Standing {
    /// It is optimal for the model as it stands.
    Current,
    /// The model cannot be planned now; the numbers are the last good ones. The reason, one sentence.
    Held(String),
    /// The model is gone.
    Retired,
}

impl Standing {
    /// The word for it.
    #[must_use]
    pub fn word(&self) -> &'static str {
        match self {
            Self::Current => "current",
            Self::Held(_) => "held",
            Self::Retired => "retired",
        }
    }
}

/// One activity of a plan.
#[derive(Clone, Debug, PartialEq)]
pub struct PlannedActivity {
    /// Its name.
    pub name: Name,
    /// Its level.
    pub level: Value,
    /// How it stands.
    pub state: State,
    /// The least and the most that its level is in any plan that earns as much, in the unit of the level; infinite where there is no
    /// limit. `None` where no other level is as good, or where it was not worked out.
    pub may_vary: Option<(f64, f64)>,
    /// Prices (costs, where the aim is to be small) between which these levels stay optimal. Infinite where there is no limit.
    pub price_range: Option<(f64, f64)>,
    /// Idle or prospect: the price above which (the cost below which) it would enter.
    pub break_even: Option<f64>,
    /// Idle or prospect: what making one unit would cost the aim; negative for a prospect that would pay.
    pub loses: Option<f64>,
}

/// How an activity stands in a plan.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum State {
    /// Made, between its bounds.
    InTheMix,
    /// At the highest level it may have.
    AtItsMost,
    /// At the least level it must have, which is not 0.
    AtItsLeast,
    /// Its bounds leave one level only.
    Fixed,
    /// Not made, though it could be.
    Idle,
    /// Priced out, never made.
    Prospect,
}

impl State {
    /// All states.
    pub const ALL: [Self; 6] =
        [Self::InTheMix, Self::AtItsMost, Self::AtItsLeast, Self::Fixed, Self::Idle, Self::Prospect];

    /// The words for it.
    #[must_use]
    pub fn words(self) -> &'static str {
        match self {
            Self::InTheMix => "in the mix",
            Self::AtItsMost => "at its most",
            Self::AtItsLeast => "at its least",
            Self::Fixed => "fixed",
            Self::Idle => "idle",
            Self::Prospect => "prospect",
        }
    }
}

/// One resource of a plan.
#[derive(Clone, Debug, PartialEq)]
pub struct PlannedResource {
    /// Its name.
    pub name: Name,
    /// How much is used.
    pub used: Value,
    /// What is left of its capacity; `None` where it has no limit.
    pub spare: Option<Value>,
    /// What one unit more would add to the aim, as a rate (positive is better, under either aim).
    pub worth_of_more: Option<f64>,
    /// What one unit less would take away; infinite where there would be no plan.
    pub loss_of_less: Option<f64>,
    /// Capacities between which those rates hold. Infinite where there is no limit.
    pub holds_between: Option<(f64, f64)>,
}

/// One limit of a plan.
#[derive(Clone, Debug, PartialEq)]
pub struct PlannedLimit {
    /// Its name.
    pub name: Name,
    /// What its terms come to; with `per`, the ratio of terms to `per` (`None` where `per` comes to 0).
    pub value: Option<Value>,
    /// What is left up to `at_most`, in the unit of the terms; `None` where there is no `at_most`.
    pub spare: Option<Value>,
    /// What one unit more of its binding bound, in the unit of the terms, would add to the aim (positive is better); negative
    /// where `at_least` binds, 0 where nothing does.
    pub worth_of_more: Option<f64>,
    /// What one unit less of it would take away.
    pub loss_of_less: Option<f64>,
    /// Numbers of the binding bound (where none binds: of the nearest) between which those rates hold; left out with `per`.
    pub holds_between: Option<(f64, f64)>,
}
