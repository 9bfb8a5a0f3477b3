//! The columns that CSV parts may have.

use super::super::findings::{Among, Cure, Findings, shown};
use super::cells::Cell;

/// What a CSV part holds, by its name.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(in crate::model::read) enum Kind {
    /// Entries of a section: a row for each.
    Entries(&'static Entries),
    /// Rates of activities: a row for each pair.
    Rates(&'static Rates),
}

/// A part with a row for each entry of a section.
#[derive(Debug, PartialEq, Eq)]
pub(in crate::model::read) struct Entries {
    /// The section.
    pub(in crate::model::read) section: &'static str,
    /// What an entry is, in a message.
    whose: &'static str,
    texts: &'static [&'static str],
    flags: &'static [&'static str],
    /// Numbers that may differ by period.
    values: &'static [&'static str],
    /// Numbers that may not.
    numbers: &'static [&'static str],
    /// Keys that no cell can hold, and where they are given instead.
    elsewhere: &'static [(&'static str, &'static str)],
}

/// A part with a row for each pair of an activity and what it uses, draws or makes.
#[derive(Debug, PartialEq, Eq)]
pub(in crate::model::read) struct Rates {
    /// The key of the activity.
    pub(in crate::model::read) key: &'static str,
    /// The column of what it uses, draws or makes.
    pub(super) other: &'static str,
}

const IN_TOML: &str = "give it in a TOML part";

static ACTIVITIES: Entries = Entries {
    section: "activities",
    whose: "an activity",
    texts: &["label", "unit"],
    flags: &["prospect"],
    values: &["price", "cost", "at_least", "at_most", "change_at_most"],
    numbers: &["lead", "lot", "none_or_at_least"],
    elsewhere: &[
        ("uses", "give it in uses.csv, or in a TOML part"),
        ("draws", "give it in draws.csv, or in a TOML part"),
        ("makes", "give it in makes.csv, or in a TOML part"),
        ("tags", IN_TOML),
        ("setup", IN_TOML),
    ],
};

static RESOURCES: Entries = Entries {
    section: "resources",
    whose: "a resource",
    texts: &["label", "unit"],
    flags: &[],
    values: &["capacity", "at_least", "cost"],
    numbers: &[],
    elsewhere: &[("surge", IN_TOML)],
};

static MATERIALS: Entries = Entries {
    section: "materials",
    whose: "a material",
    texts: &["label", "unit"],
    flags: &[],
    values: &[],
    numbers: &["opening", "closing"],
    elsewhere: &[("purchase", IN_TOML), ("sale", IN_TOML), ("stock", IN_TOML), ("discard", IN_TOML)],
};

static USES: Rates = Rates { key: "uses", other: "resource" };
static DRAWS: Rates = Rates { key: "draws", other: "material" };
static MAKES: Rates = Rates { key: "makes", other: "material" };

/// The CSV parts there can be.
pub(in crate::model::read) static KINDS: [(&str, Kind); 6] = [
    ("activities.csv", Kind::Entries(&ACTIVITIES)),
    ("resources.csv", Kind::Entries(&RESOURCES)),
    ("materials.csv", Kind::Entries(&MATERIALS)),
    ("uses.csv", Kind::Rates(&USES)),
    ("draws.csv", Kind::Rates(&DRAWS)),
    ("makes.csv", Kind::Rates(&MAKES)),
];

impl Kind {
    /// What the part of this name holds; `None` where no CSV part is called so.
    pub(in crate::model::read) fn of(name: &str) -> Option<Self> {
        KINDS.iter().find(|(known, _)| *known == name).map(|&(_, kind)| kind)
    }

    /// The section that its rows are about.
    pub(in crate::model::read) fn section(self) -> &'static str {
        match self {
            Self::Entries(entries) => entries.section,
            Self::Rates(_) => "activities",
        }
    }

    /// What the cells of a column hold that is called so; `None` where there is no such column.
    pub(super) fn column(self, word: &str) -> Option<Holds> {
        let given = |list: &'static [&'static str]| list.iter().copied().find(|key| *key == word);
        match self {
            Self::Entries(_) if word == "name" => Some(Holds::Name),
            Self::Entries(entries) => given(entries.texts)
                .map(Holds::Text)
                .or_else(|| given(entries.flags).map(Holds::Flag))
                .or_else(|| given(entries.values).map(Holds::Value))
                .or_else(|| given(entries.numbers).map(Holds::Number)),
            Self::Rates(_) if word == "activity" => Some(Holds::Name),
            Self::Rates(rates) if word == rates.other => Some(Holds::Other),
            Self::Rates(_) if word == RATE => Some(Holds::Value(RATE)),
            Self::Rates(_) => None,
        }
    }

    /// The columns without which nothing can be read.
    pub(super) fn needed(self) -> Vec<(&'static str, Holds)> {
        match self {
            Self::Entries(_) => vec![("name", Holds::Name)],
            Self::Rates(rates) => {
                vec![("activity", Holds::Name), (rates.other, Holds::Other), (RATE, Holds::Value(RATE))]
            }
        }
    }

    /// Adds the fault that there is no such column as the one `cell` begins.
    pub(super) fn unknown(self, word: &str, cell: &Cell<'_>, findings: &mut Findings) {
        if let Self::Entries(entries) = self
            && let Some((key, cure)) = entries.elsewhere.iter().find(|(key, _)| *key == word)
        {
            let message = format!("`{key}` is more than one number or text, so it cannot be a column");
            return findings.add(&cell.span, "unknown-column", message, *cure);
        }
        let columns = self.columns();
        let by_period = self.by_period().map(|word| format!("; `{word}@PERIOD` gives a number for one period"));
        let list = format!("the columns are {}{}", columns.join(", "), by_period.unwrap_or_default());
        let whose = match self {
            Self::Entries(entries) => entries.whose,
            Self::Rates(rates) => rates.key,
        };
        let message = match self {
            Self::Entries(_) => format!("unknown column `{}`: {whose} has no such key", shown(word)),
            Self::Rates(_) => format!("unknown column `{}` in {whose}.csv", shown(word)),
        };
        findings.add(&cell.span, "unknown-column", message, Cure::Nearest(shown(word), Among::Words(columns, list)));
    }

    /// Adds the fault that the column which `cell` begins names a period and not what differs by it.
    pub(super) fn wordless(self, cell: &Cell<'_>, findings: &mut Findings) {
        let message = "what differs by period must stand before `@`".to_owned();
        let cure = match self.by_period() {
            Some(word) => format!("write {word}{}, say, or take the column out", shown(&cell.text)),
            None => "take the column out".to_owned(),
        };
        findings.add(&cell.span, "unknown-column", message, cure);
    }

    /// A column, if there is one, whose numbers may differ by period.
    fn by_period(self) -> Option<&'static str> {
        match self {
            Self::Entries(entries) => entries.values.first().copied(),
            Self::Rates(_) => Some(RATE),
        }
    }

    fn columns(self) -> Vec<&'static str> {
        match self {
            Self::Entries(Entries { texts, flags, values, numbers, .. }) => {
                [&["name"], *texts, *values, *numbers, *flags].concat()
            }
            Self::Rates(rates) => vec!["activity", rates.other, RATE],
        }
    }
}

/// The column of a rate.
pub(super) const RATE: &str = "rate";

/// What the cells of a column hold.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Holds {
    /// The name of the entry, or of the activity.
    Name,
    /// The name of what the activity uses, draws or makes.
    Other,
    /// A text.
    Text(&'static str),
    /// True or false.
    Flag(&'static str),
    /// A number that may differ by period.
    Value(&'static str),
    /// A number that may not.
    Number(&'static str),
}
