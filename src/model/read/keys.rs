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
    /// What such a table looks like, where it stands within another.
    example: &'static str,
}

/// Why a part of the format is not read yet.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Later {
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
            Self::Whole => "this version plans no whole numbers of things",
            Self::Variants => "this version plans no variants",
            Self::Steady => "this version keeps no plan near its release",
            Self::Guard => "this version holds no edits back",
        }
    }

    fn cure(self) -> &'static str {
        match self {
            Self::Whole => "take it out; levels may then be any number",
            Self::Variants => "take it out, and try the change in a copy of the model",
            Self::Steady | Self::Guard => "take it out; it changes no plan of this version",
        }
    }

    /// Adds the fault that `what` is not read yet.
    fn refuse(self, what: &str, span: &Span, findings: &mut Findings) {
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

    /// What such a table looks like within another.
    pub(super) fn example(&self) -> &'static str {
        self.example
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
    known: &[
        "format",
        "title",
        "currency",
        "aim",
        "constant",
        "periods",
        "days",
        "resources",
        "activities",
        "materials",
        "limits",
    ],
    later: &[("variants", Later::Variants), ("steady", Later::Steady), ("guard", Later::Guard)],
    note: "; tables begin with [resources.NAME], [activities.NAME], [materials.NAME] or [limits.NAME]",
    example: "",
};

/// A resource.
pub(super) static RESOURCE: Keys = Keys {
    whose: "a resource",
    known: &["label", "unit", "capacity", "at_least", "cost", "surge"],
    later: &[],
    note: "",
    example: "{ capacity = 168 }",
};

/// A tier of extra capacity.
pub(super) static SURGE: Keys = within("a tier of `surge`", &["at_most", "cost"], "{ at_most = 16, cost = 95 }");

/// An activity.
pub(super) static ACTIVITY: Keys = Keys {
    whose: "an activity",
    known: &[
        "label",
        "unit",
        "price",
        "cost",
        "uses",
        "draws",
        "makes",
        "lead",
        "at_least",
        "at_most",
        "change_at_most",
        "tags",
        "prospect",
    ],
    later: &[("lot", Later::Whole), ("none_or_at_least", Later::Whole), ("setup", Later::Whole)],
    note: "",
    example: "{ price = 21, uses = { kiln = 0.02 } }",
};

/// A material.
pub(super) static MATERIAL: Keys = within(
    "a material",
    &["label", "unit", "opening", "purchase", "sale", "stock", "closing", "discard"],
    "{ purchase = { price = 34 } }",
);

/// A tier of purchases.
pub(super) static PURCHASE: Keys =
    within("`purchase`", &["price", "at_least", "at_most"], "{ price = 34, at_most = 90 }");

/// A tier of sales.
pub(super) static SALE: Keys =
    within("`sale`", &["price", "at_least", "at_most", "late"], "{ price = 5, at_most = 10 }");

/// Sales that are delivered late.
pub(super) static LATE: Keys = within("`late`", &["cost", "at_most"], "{ cost = 2, at_most = 6 }");

/// What is carried from a period to the next.
pub(super) static STOCK: Keys =
    within("`stock`", &["cost", "at_least", "at_most"], "{ cost = 0.4, at_least = 2, at_most = 60 }");

/// What is left at the end.
pub(super) static CLOSING: Keys = within("`closing`", &["at_least", "worth"], "{ at_least = 10, worth = 30 }");

/// What is thrown away.
pub(super) static DISCARD: Keys = within("`discard`", &["cost", "at_most"], "{ cost = 8, at_most = 5 }");

/// A limit.
pub(super) static LIMIT: Keys = within(
    "a limit",
    &["label", "terms", "per", "at_most", "at_least", "equals", "over"],
    "{ terms = { floor_tile = 1.0 }, at_most = 900 }",
);

/// The keys of a table that has no keys of later versions.
const fn within(whose: &'static str, known: &'static [&'static str], example: &'static str) -> Keys {
    Keys { whose, known, later: &[], note: "", example }
}
