//! The release: the plan that the floor works to, pinned as `NAME.release.toml`.
//!
//! It says what was planned, not why: levels and states, the aim, and which plan of which model that was. Whether a plan is worked to is
//! for people to say, so nothing but `millreeve release` writes it.

mod text;

pub use text::{HEADER, ReleaseError, is_ours, read, write};

use super::compare::{Comparison, compare};
use super::types::{Plan, PlannedActivity};

/// Version of the release file's layout.
pub const FORMAT: u32 = 1;

/// A release.
#[derive(Clone, Debug, PartialEq)]
pub struct Release {
    /// The seal of the plan that it pins.
    pub pins: String,
    /// That plan as far as it is pinned: its aim and what is done. No resources, no limits, no worths and no ranges; nor how far levels may vary.
    pub plan: Plan,
}

impl Release {
    /// Pins a plan, given with the seal it carries.
    #[must_use]
    pub fn of(plan: &Plan, seal: &str) -> Self {
        let pinned = |planned: &PlannedActivity| PlannedActivity {
            name: planned.name.clone(),
            level: planned.level.clone(),
            state: planned.state.clone(),
            may_vary: None,
            price_range: None,
            break_even: None,
            loses: None,
        };
        let activities = plan.activities.iter().map(pinned).collect();
        let plan = Plan {
            activities,
            resources: Vec::new(),
            limits: Vec::new(),
            materials: Vec::new(),
            may_vary_left_out: 0,
            complete: false,
            ..plan.clone()
        };
        Self { pins: seal.to_owned(), plan }
    }
}

/// What differs between a release and a plan, as far as both know the same names and plan the same periods.
///
/// Which periods those are is told by the comparison's overlap; the aims of other periods are not compared.
#[derive(Clone, Debug, PartialEq)]
pub struct Since {
    /// Aim and levels: `before` is the release. What is scarce is not compared, as a release does not say.
    pub comparison: Comparison,
    /// How many activities the plan has that the release does not know.
    pub new: usize,
    /// How many activities the release has that are gone from the plan.
    pub gone: usize,
}

/// What differs between `release` and `plan`.
#[must_use]
pub fn since(release: &Release, plan: &Plan) -> Since {
    let comparison = Comparison { binds: Vec::new(), eases: Vec::new(), ..compare(&release.plan, plan) };
    let unknown = |list: &[PlannedActivity], to: &[PlannedActivity]| {
        let known = |name| to.binary_search_by(|planned| planned.name.cmp(name)).is_ok();
        list.iter().filter(|planned| !known(&planned.name)).count()
    };
    let (released, planned) = (&release.plan.activities, &plan.activities);
    Since { comparison, new: unknown(planned, released), gone: unknown(released, planned) }
}
