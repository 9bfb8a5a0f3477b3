//! The keys each table of a model may have: those read today, and those of the format that this version does not plan yet.

use super::findings::{Among, Cure, Findings, Span, shown};
use super::toml_types::Key;

/// The keys of one kind of table.
#[derive(Debug)]
pub(super) struct Keys {
    /// What the table is, in a message.
    whose: &'static str,
    known: &'static [&'static str],
    later: &'static [(&'static str, Later)],
    /// What to add to a list of the keys.
    note: &'static str,
}

/// Why a part of the format is not read yet.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Later {
    /// It speaks of several periods.
    Periods,
    /// It speaks of materials.
    Materials,
    /// It speaks of extra capacity.
    Surge,
    /// It asks for whole numbers of things.
    Whole,
    /// It asks for more than one plan.
    Variants,
    /// It refers to a release.
    Steady,
    /// It holds edits back.
    Guard,
}

impl Later {
    fn reason(self) -> &'static str {
        match self {
            Self::Periods => "this version plans a single period",
            Self::Materials => "this version plans no materials",
            Self::Surge => "this version plans no surge capacity",
            Self::Whole => "this version plans no whole numbers of things",
            Self::Variants => "this version plans no variants",
            Self::Steady => "this version knows no releases",
            Self::Guard => "this version holds no edits back",
        }
    }

    fn cure(self) -> &'static str {
        match self {
            Self::Periods => "take it out, and give every number for the period as a whole",
            Self::Materials => {
                "take it out; a scarce material can be written as a resource, with the stock as its capacity"
            }
            Self::Surge => "take it out, or raise `capacity` by what the surge would add",
            Self::Whole => "take it out; levels may then be any number",
            Self::Variants => "take it out, and try the change in a copy of the model",
            Self::Steady | Self::Guard => "take it out; it changes no plan of this version",
        }
    }

    /// Adds the fault that `what` is not read yet.
    pub(super) fn refuse(self, what: &str, span: &Span, findings: &mut Findings) {
        let message = format!("{what} is part of the format, but {}", self.reason());
        findings.add(span, "unsupported", message, self.cure());
    }
}

impl Keys {
    /// Says what is wrong with a key that is not read: not there yet, or not known.
    pub(super) fn check(&'static self, key: &Key<'_>, findings: &mut Findings) {
        let word: &str = key.get_ref();
        if self.known.contains(&word) {
            return;
        }
        match self.later.iter().find(|(later, _)| *later == word) {
            Some((_, later)) => later.refuse(&format!("`{word}`"), &key.span(), findings),
            None => {
                let message = format!("unknown key `{}` in {}", shown(word), self.whose);
                let cure = Cure::Nearest(shown(word), Among::Words(self.all().collect(), self.list()));
                findings.add(&key.span(), "unknown-key", message, cure);
            }
        }
    }

    /// Every key that can be meant.
    fn all(&self) -> impl Iterator<Item = &'static str> {
        self.known.iter().copied().chain(self.later.iter().map(|(word, _)| *word))
    }

    /// The keys that are read, for a message.
    fn list(&self) -> String {
        format!("{} may have {}{}", self.whose, self.known.join(", "), self.note)
    }
}

/// The model itself.
pub(super) static MODEL: Keys = Keys {
    whose: "the model",
    known: &["format", "title", "currency", "aim", "constant", "resources", "activities", "limits"],
    later: &[
        ("periods", Later::Periods),
        ("days", Later::Periods),
        ("materials", Later::Materials),
        ("variants", Later::Variants),
        ("steady", Later::Steady),
        ("guard", Later::Guard),
    ],
    note: "; tables begin with [resources.NAME], [activities.NAME] or [limits.NAME]",
};

/// A resource.
pub(super) static RESOURCE: Keys = Keys {
    whose: "a resource",
    known: &["label", "unit", "capacity", "at_least", "cost"],
    later: &[("surge", Later::Surge)],
    note: "",
};

/// An activity.
pub(super) static ACTIVITY: Keys = Keys {
    whose: "an activity",
    known: &["label", "unit", "price", "cost", "uses", "at_least", "at_most", "tags", "prospect"],
    later: &[
        ("draws", Later::Materials),
        ("makes", Later::Materials),
        ("lead", Later::Periods),
        ("change_at_most", Later::Periods),
        ("lot", Later::Whole),
        ("none_or_at_least", Later::Whole),
        ("setup", Later::Whole),
    ],
    note: "",
};

/// A limit.
pub(super) static LIMIT: Keys = Keys {
    whose: "a limit",
    known: &["label", "terms", "per", "at_most", "at_least", "equals", "over"],
    later: &[],
    note: "",
};
