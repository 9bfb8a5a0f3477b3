//! What of the last basis an edit leaves standing, and the start that theory says follows.
//!
//! Textbook post-optimality (Dantzig, *Linear Programming and Extensions*, 1963, ch. 12): new numbers in the aim leave the basis primal
//! feasible, new numbers on the right-hand side leave it dual feasible. What is withdrawn softly (see the solver's
//! `soft`) leaves the side standing that the table below says.

use std::collections::BTreeSet;

use super::edit::{Edit, Kind, Planned, Subject};
use crate::lp::{Key, keys};
use crate::model::{Flow, Horizon, Name, Period};

/// What of the last basis is sure to stay.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kept {
    /// Primal and dual feasibility: the plan stands.
    Both,
    /// Primal feasibility.
    Primal,
    /// Dual feasibility.
    Dual,
    /// Neither for sure.
    Neither,
}

impl Kept {
    /// What two edits together leave standing.
    #[must_use]
    pub fn and(self, other: Self) -> Self {
        match (self, other) {
            (Self::Both, kept) | (kept, Self::Both) => kept,
            (Self::Primal, Self::Primal) => Self::Primal,
            (Self::Dual, Self::Dual) => Self::Dual,
            _ => Self::Neither,
        }
    }

    /// The start that theory expects, in words; `look` where only a look at the last basis can tell.
    #[must_use]
    pub fn expected(self) -> &'static str {
        match self {
            Self::Both => "none",
            Self::Primal => "none or primal",
            Self::Dual => "none or dual",
            Self::Neither => "look",
        }
    }
}

/// What mattered in the last plan: enough to say what an edit leaves standing.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct LastPlan {
    /// The periods it planned.
    pub horizon: Horizon,
    /// Columns in the basis, or at a level other than 0: all but those that are idle.
    pub busy: BTreeSet<Key>,
    /// Columns out of the basis, at any level.
    pub resting: BTreeSet<Key>,
    /// Rows that bind.
    pub binding: BTreeSet<Key>,
}

impl LastPlan {
    /// What all of `edits` together leave standing.
    #[must_use]
    pub fn kept(&self, edits: &[Edit]) -> Kept {
        edits.iter().map(|edit| self.kept_by(edit)).fold(Kept::Both, Kept::and)
    }

    /// What one edit leaves standing.
    #[must_use]
    pub fn kept_by(&self, edit: &Edit) -> Kept {
        match edit.kind {
            Kind::Wording => Kept::Both,
            Kind::Price | Kind::Aim | Kind::NewActivity => Kept::Primal,
            Kind::Capacity | Kind::NewConstraint => Kept::Dual,
            Kind::NewCommitment
            | Kind::NewBalance
            | Kind::WithdrawnBalance
            | Kind::HorizonRolled
            | Kind::HorizonReplaced => Kept::Neither,
            Kind::BoundRemoved | Kind::WithdrawnConstraint => {
                if self.leans_on(&edit.subject) {
                    Kept::Primal
                } else {
                    Kept::Both
                }
            }
            Kind::WithdrawnActivity => {
                if self.is_idle(&edit.subject) {
                    Kept::Both
                } else {
                    Kept::Dual
                }
            }
            Kind::Recipe => {
                if matches!(&edit.subject, Subject::Limit(_, concerned) if concerned.is_empty()) {
                    Kept::Both
                } else if self.is_idle(&edit.subject) {
                    Kept::Primal
                } else {
                    Kept::Neither
                }
            }
        }
    }

    /// Whether anything of a subject stands at a bound, in any period.
    fn leans_on(&self, subject: &Subject) -> bool {
        match subject {
            Subject::Model => false,
            Subject::Resource(name) => self.binds(|period| keys::resource_key(name, &self.horizon, period)),
            Subject::Change(name) => self.binds(|period| keys::change_key(name, &self.horizon, period)),
            Subject::Material(name) => self.binds(|period| keys::balance_key(name, &self.horizon, period)),
            Subject::Activity(name) => self.rests(&Planned::Activity(name.clone())),
            Subject::Planned(planned) => self.rests(planned) || self.demand_binds(planned),
            Subject::Limit(name, _) => self.limit_binds(name),
        }
    }

    fn binds(&self, key: impl Fn(Period) -> Key) -> bool {
        self.horizon.periods().any(|period| self.binding.contains(&key(period)))
    }

    fn limit_binds(&self, name: &Name) -> bool {
        [None, Some("at_least"), Some("at_most"), Some("equals")].into_iter().any(|side| {
            self.binding.contains(&keys::limit_over_key(name, side))
                || self.binds(|period| keys::limit_key(name, side, &self.horizon, period))
        })
    }

    /// Whether sales that may be late stand at a bound.
    fn demand_binds(&self, planned: &Planned) -> bool {
        let Planned::Flow(name, Flow::Sale(Some(tier))) = planned else { return false };
        self.binds(|period| keys::demand_key(name, *tier, &self.horizon, period))
    }

    fn rests(&self, planned: &Planned) -> bool {
        self.columns(planned).any(|key| self.resting.contains(&key))
    }

    /// Whether all of a subject is idle, in all periods.
    fn is_idle(&self, subject: &Subject) -> bool {
        let idle = |planned: &Planned| !self.columns(planned).any(|key| self.busy.contains(&key));
        match subject {
            Subject::Model | Subject::Resource(_) | Subject::Change(_) | Subject::Material(_) => false,
            Subject::Activity(name) => idle(&Planned::Activity(name.clone())),
            Subject::Planned(planned) => idle(planned),
            Subject::Limit(_, concerned) => concerned.iter().all(idle),
        }
    }

    fn columns(&self, planned: &Planned) -> impl Iterator<Item = Key> {
        self.horizon.periods().map(move |period| match planned {
            Planned::Activity(name) => keys::activity_key(name, &self.horizon, period),
            Planned::Flow(name, flow) => keys::flow_key(name, *flow, &self.horizon, period),
            Planned::Surge(name, tier) => keys::surge_key(name, *tier, &self.horizon, period),
        })
    }
}
