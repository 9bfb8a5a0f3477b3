//! Whether a plan on disk may be worked to, and if not, why.

use std::fmt;
use std::path::Path;

use super::super::check::counted;
use super::super::screen::{HINT, WARN};
use super::{Found, Shown};
use crate::model::escape::Plain;
use crate::plan;
use crate::plan::text::Written;

/// How a plan stands to its model as both are on disk now.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(in crate::cli) enum Standing {
    /// It answers the model, and nobody has touched it.
    Current,
    /// Somebody has edited the plan's file.
    Edited,
    /// The daemon has marked it: the model could not be planned, for this reason.
    Held(String),
    /// The model has so many faults.
    Faulty(usize),
    /// The model has been edited since.
    Stale,
    /// The model is gone.
    Gone,
}

impl Standing {
    pub(super) fn of(written: &Written, model: &Found) -> Self {
        if !written.sealed {
            return Self::Edited;
        }
        match (&written.plan.standing, model) {
            (_, Found::Gone) => Self::Gone,
            (plan::Standing::Held(reason), Found::Faulty(_) | Found::Model(..)) => Self::Held(reason.clone()),
            (_, Found::Faulty(faults)) => Self::Faulty(faults.reported.len() + faults.more),
            (plan::Standing::Current, Found::Model(_, meaning)) if *meaning == written.plan.answers => Self::Current,
            (_, Found::Model(..)) => Self::Stale,
        }
    }

    /// Whether the plan may be worked to.
    pub(in crate::cli) fn is_current(&self) -> bool {
        *self == Self::Current
    }

    /// The word for it.
    pub(super) fn word(&self) -> &'static str {
        match self {
            Self::Current => "current",
            Self::Edited => "edited by hand",
            Self::Held(_) => "held",
            Self::Faulty(_) => "model faulty",
            Self::Stale => "out of date",
            Self::Gone => "model gone",
        }
    }

    /// One word for programs.
    pub(super) fn key(&self) -> &'static str {
        match self {
            Self::Current => "current",
            Self::Edited => "edited",
            Self::Held(_) => "held",
            Self::Faulty(_) => "faulty",
            Self::Stale => "stale",
            Self::Gone => "retired",
        }
    }

    /// Whether the plan's numbers are not those of the model, so that nothing can be worked out from both.
    pub(super) fn says_little(&self) -> bool {
        matches!(self, Self::Edited | Self::Stale | Self::Held(_))
    }

    /// What is wrong.
    pub(in crate::cli) fn reason(&self, shown: &Shown) -> String {
        match self {
            Self::Current => String::new(),
            Self::Edited => format!(
                "{} has been edited by hand: its seal does not fit, so its numbers prove nothing",
                text(&shown.plan_path)
            ),
            Self::Held(reason) => {
                format!("this is the last good plan; the model as it stands cannot be planned: {}", Plain(reason))
            }
            Self::Faulty(count) => {
                format!("this is the last good plan; the model as it stands has {}", counted(*count, "fault"))
            }
            Self::Stale => "the model has been edited since this plan was worked out".to_owned(),
            Self::Gone => format!("there is no {} any more", text(&shown.model_path)),
        }
    }

    /// What to do about it; empty where nothing can be said.
    pub(in crate::cli) fn cure(&self, shown: &Shown) -> String {
        let model = text(&shown.model_path);
        match self {
            Self::Current | Self::Gone => String::new(),
            Self::Edited => format!("millreeve once {model} works it out again"),
            Self::Held(_) => format!("{} says more", text(&shown.note_path)),
            Self::Faulty(count) => {
                format!("millreeve check {model} points at {}", if *count == 1 { "it" } else { "them" })
            }
            Self::Stale => format!("millreeve once {model} brings it up to date"),
        }
    }

    /// Reason and cure, for standard error.
    pub(super) fn warning(&self, shown: &Shown) -> String {
        let cure = self.cure(shown);
        let cure = if cure.is_empty() { cure } else { format!("\n  {HINT}{cure}{HINT:#}") };
        format!("{WARN}not current:{WARN:#} {}{cure}", self.reason(shown))
    }
}

fn text(path: &Path) -> impl fmt::Display {
    Plain(&path.to_string_lossy()).to_string()
}
