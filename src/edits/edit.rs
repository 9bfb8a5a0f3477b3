//! One edit: where, from what, to what, and of which kind.

use crate::model::{Flow, Name};

/// One edit of a model, at the place where a person would point.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Edit {
    /// Where: `resources.kiln.capacity`, `activities.floor_tile.uses.kiln`, or a whole thing such as `activities.mosaic`; with a period
    /// last, `resources.kiln.capacity.2027-W02`, where it is about that one alone. Not escaped.
    pub address: String,
    /// What it is about.
    pub subject: Subject,
    /// What stood there, as a planner would write it; `None` where nothing did.
    pub old: Option<String>,
    /// What stands there now; `None` where nothing does.
    pub new: Option<String>,
    /// Of which kind it is.
    pub kind: Kind,
}

/// What an edit is about.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Subject {
    /// The model as a whole.
    Model,
    /// One resource: its capacity.
    Resource(Name),
    /// One activity: its level.
    Activity(Name),
    /// How far the level of one activity may change from a period to the next.
    Change(Name),
    /// One material: its balance.
    Material(Name),
    /// One way in which a material comes, goes or waits, or one tier of extra capacity.
    Planned(Planned),
    /// One limit; a changed coefficient of it concerns these.
    Limit(Name, Vec<Planned>),
}

/// Something that is planned: a column in each period.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Planned {
    /// The level of an activity.
    Activity(Name),
    /// A way in which a material comes, goes or waits, with its tier.
    Flow(Name, Flow),
    /// A tier of a resource's extra capacity, counted from 1.
    Surge(Name, usize),
}

/// The kinds of edit, by what they do to the program.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Kind {
    /// Titles, labels, units, the currency, the aim's constant, tags no limit asks for, a name: no number of the program that decides.
    Wording,
    /// A price or cost.
    Price,
    /// The aim turned round.
    Aim,
    /// A capacity, or a bound moved.
    Capacity,
    /// A bound taken away.
    BoundRemoved,
    /// A new activity, or a prospect made an activity; a new tier, or stock that can be carried now.
    NewActivity,
    /// The same that does not come in at 0: that is none of its bounds, and it is not free.
    NewCommitment,
    /// An activity withdrawn, or made a prospect; a tier or a stock withdrawn.
    WithdrawnActivity,
    /// A new limit or resource.
    NewConstraint,
    /// A limit or resource withdrawn.
    WithdrawnConstraint,
    /// A new constraint that brings columns of its own, or stands in for others: a material, a resource with extra capacity, sales that may
    /// be late, a limit over other periods.
    NewBalance,
    /// The same withdrawn.
    WithdrawnBalance,
    /// A recipe or another coefficient.
    Recipe,
    /// Periods dropped at the beginning, added at the end, or both.
    HorizonRolled,
    /// Other periods than before.
    HorizonReplaced,
}

impl Kind {
    /// The words for it.
    #[must_use]
    pub fn words(self) -> &'static str {
        match self {
            Self::Wording => "wording",
            Self::Price => "price",
            Self::Aim => "aim turned round",
            Self::Capacity => "capacity",
            Self::BoundRemoved => "bound taken away",
            Self::NewActivity | Self::NewCommitment => "new activity",
            Self::WithdrawnActivity => "activity withdrawn",
            Self::NewConstraint | Self::NewBalance => "new constraint",
            Self::WithdrawnConstraint | Self::WithdrawnBalance => "constraint withdrawn",
            Self::Recipe => "recipe",
            Self::HorizonRolled => "horizon rolled",
            Self::HorizonReplaced => "other periods",
        }
    }
}
