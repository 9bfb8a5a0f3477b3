//! The plan as a value: what `NAME.plan.toml` says.

mod material;

pub use material::PlannedMaterial;

use super::each::{Each, Span};
use crate::model::meaning::Meaning;
use crate::model::{Horizon, Name, Value};

/// Version of the plan file's layout.
pub const FORMAT: u32 = 1;

/// Version of the rules by which a model gets its plan; raised whenever the same model may get other bytes.
pub const RULES: u32 = 1;

/// A plan. Lists are in byte order of names.
///
/// Where the periods have names, numbers are lists of one per period, also where they are equal; of what is one for several periods
/// together (a limit over all of them) there is one number. Where something is not known for every period, it is left out for all.
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
    /// The names of the periods, first to last; empty where the model names none.
    pub periods: Vec<Name>,
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
    /// What becomes of the materials.
    pub materials: Vec<PlannedMaterial>,
}

impl Plan {
    /// The periods it plans.
    #[must_use]
    pub fn horizon(&self) -> Horizon {
        Horizon::of(self.periods.clone())
    }
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
    /// How it stands: once where it stands alike in all periods.
    pub state: Each<State>,
    /// The least and the most that its level is in any plan that earns as much, in the unit of the level; infinite where there is no
    /// limit. `None` where no other level is as good in any period, or where it was not worked out.
    pub may_vary: Option<Each<Span>>,
    /// Prices (costs, where the aim is to be small) between which these levels stay optimal, where the price of that one period moves
    /// alone. Infinite where there is no limit. `None` where it is idle or a prospect in every period.
    pub price_range: Option<Each<Span>>,
    /// Idle or prospect in some period: the price above which (the cost below which) one unit more would pay.
    pub break_even: Option<Value>,
    /// Idle or prospect in some period: what making one unit more would cost the aim; negative where it would pay.
    pub loses: Option<Value>,
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

impl Each<State> {
    /// The words for it: of the one state, or in how many periods there is which, most first.
    #[must_use]
    pub fn words(&self) -> String {
        if let Some(state) = self.one() {
            return state.words().to_owned();
        }
        let many = |state: State| self.all().iter().filter(|&&other| other == state).count();
        let mut told: Vec<(State, usize)> = State::ALL.map(|state| (state, many(state))).into();
        told.retain(|(_, many)| *many > 0);
        told.sort_by_key(|&(_, many)| std::cmp::Reverse(many));
        let one = |(at, (state, many)): (usize, (State, usize))| match (at, many) {
            (0, 1) => format!("{} in 1 period", state.words()),
            (0, many) => format!("{} in {many} periods", state.words()),
            (_, many) => format!("{} in {many}", state.words()),
        };
        told.into_iter().enumerate().map(one).collect::<Vec<_>>().join(", ")
    }
}

/// One resource of a plan.
#[derive(Clone, Debug, PartialEq)]
pub struct PlannedResource {
    /// Its name.
    pub name: Name,
    /// How much is used.
    pub used: Value,
    /// How much of that is extra capacity; `None` where the model has none.
    pub surge: Option<Value>,
    /// What is left of its capacity and of all extra capacity; `None` where they have no limit in any period.
    pub spare: Option<Value>,
    /// What one unit more of its capacity would add to the aim, as a rate (positive is better, under either aim).
    pub worth_of_more: Option<Value>,
    /// What one unit less would take away; infinite where there would be no plan.
    pub loss_of_less: Option<Value>,
    /// Capacities between which those rates hold, where that of the one period moves alone. Infinite where there is no limit.
    pub holds_between: Option<Each<Span>>,
}

/// One limit of a plan. One over several periods together has one number of each kind.
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
    pub worth_of_more: Option<Value>,
    /// What one unit less of it would take away.
    pub loss_of_less: Option<Value>,
    /// Numbers of the binding bound (where none binds: of the nearest) between which those rates hold; left out with `per`.
    pub holds_between: Option<Each<Span>>,
}
