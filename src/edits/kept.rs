//! What of the last basis an edit leaves standing, and the start that theory says follows.
//!
//! Textbook post-optimality (Dantzig, *Linear Programming and Extensions*, 1963, ch. 12): new numbers in the aim leave the basis primal
//! feasible, new numbers on the right-hand side leave it dual feasible. What is withdrawn softly (see the solver's
//! `soft`) leaves the side standing that the table below says.

use std::collections::BTreeSet;

use super::edit::{Edit, Kind, Subject};
use crate::model::Name;

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
    /// Activities at level 0.
    pub idle: BTreeSet<Name>,
    /// Activities that stand at a bound other than 0.
    pub bounded: BTreeSet<Name>,
    /// Resources used up to a bound.
    pub scarce: BTreeSet<Name>,
    /// Limits that bind.
    pub binding: BTreeSet<Name>,
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
            Kind::NewCommitment => Kept::Neither,
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

    fn leans_on(&self, subject: &Subject) -> bool {
        match subject {
            Subject::Model => false,
            Subject::Resource(name) => self.scarce.contains(name),
            Subject::Activity(name) => self.bounded.contains(name) || self.idle.contains(name),
            Subject::Limit(name, _) => self.binding.contains(name),
        }
    }

    fn is_idle(&self, subject: &Subject) -> bool {
        match subject {
            Subject::Model | Subject::Resource(_) => false,
            Subject::Activity(name) => self.idle.contains(name),
            Subject::Limit(_, concerned) => concerned.iter().all(|name| self.idle.contains(name)),
        }
    }
}
