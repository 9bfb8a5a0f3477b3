//! One edit: where, from what, to what, and of which kind.

/// One edit of a model, at the place where a person would point.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Edit {
    /// Where: `resources.kiln.capacity`, `activities.floor_tile.uses.kiln`, or a whole thing such as `activities.mosaic`. Not escaped.
    pub address: String,
    /// What stood there, as a planner would write it; `None` where nothing did.
    pub old: Option<String>,
    /// What stands there now; `None` where nothing does.
    pub new: Option<String>,
    /// Of which kind it is.
    pub kind: Kind,
}

/// The kinds of edit, by what they do to the program.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Kind {
    /// Titles, labels, units, the currency, tags no limit asks for: no number of the program.
    Wording,
    /// A price or cost.
    Price,
    /// The aim turned round, or its constant.
    Aim,
    /// A capacity, or a bound moved.
    Capacity,
    /// A bound taken away.
    BoundRemoved,
    /// A new activity, or a prospect made an activity.
    NewActivity,
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
            Self::Aim => "aim",
            Self::Capacity => "capacity",
            Self::BoundRemoved => "bound taken away",
            Self::NewActivity => "new activity",
            Self::WithdrawnActivity => "activity withdrawn",
            Self::NewConstraint => "new constraint",
            Self::WithdrawnConstraint => "constraint withdrawn",
            Self::Recipe => "recipe",
        }
    }
}
