//! One edit: where, from what, to what, and of which kind.

use crate::model::Name;

/// One edit of a model, at the place where a person would point.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Edit {
    /// Where: `resources.kiln.capacity`, `activities.floor_tile.uses.kiln`, or a whole thing such as `activities.mosaic`. Not escaped.
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
    /// One resource.
    Resource(Name),
    /// One activity.
    Activity(Name),
    /// One limit; a changed coefficient of it concerns these activities.
    Limit(Name, Vec<Name>),
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
    /// A new activity, or a prospect made an activity.
    NewActivity,
    /// A new activity that does not come in at 0: that is none of its bounds, and it is not free.
    NewCommitment,
    /// An activity withdrawn, or made a prospect.
    WithdrawnActivity,
    /// A new limit or resource.
    NewConstraint,
    /// A limit or resource withdrawn.
    WithdrawnConstraint,
    /// A recipe or another coefficient.
    Recipe,
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
            Self::NewConstraint => "new constraint",
            Self::WithdrawnConstraint => "constraint withdrawn",
            Self::Recipe => "recipe",
        }
    }
}
