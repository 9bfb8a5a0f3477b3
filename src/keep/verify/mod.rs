//! Whether a plan is what its model gives: worked out afresh, cold, from nothing but the model, and compared byte by byte.
//!
//! Nothing is written, no record is read, no lock is taken.

mod crew;

use std::io::ErrorKind;
use std::path::{Path, PathBuf};
use std::time::Duration;

pub use crew::verify;

use super::afresh::{Fruitless, Planned, work_out};
use crate::model::meaning::Meaning;
use crate::model::read::{self, FileProblem};
use crate::model::{Faults, Model};
use crate::plan::difference::Difference;
use crate::plan::text::{self, Head, PlanError};
use crate::plan::{Plan, Standing};
use crate::store::error::reason;
use crate::store::reading;

/// A model and the plan beside it. Either may be missing.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Pair {
    /// Where the model lies.
    pub model: PathBuf,
    /// Where the plan lies.
    pub plan: PathBuf,
}

/// What was found of one plan. Texts are not escaped unless they say so.
#[derive(Clone, Debug)]
pub enum Finding {
    /// It is byte for byte what its model gives.
    Verified(Box<Plan>),
    /// It is not; it is sealed and answers its model all the same.
    Differs(Box<Difference>),
    /// It is there, and its model has no plan: why not.
    Baseless(String),
    /// Somebody has edited it. What that changed, where it answers its model.
    Edited(Option<Box<Difference>>),
    /// It holds the marks of a merge that git could not make, the first in this line.
    Unmerged(usize),
    /// It bears our header and is no plan: why, escaped.
    Damaged(String),
    /// Somebody else wrote it.
    Foreign,
    /// A newer version wrote it.
    Newer {
        /// The version that is ahead: `format` or `rules`.
        what: &'static str,
        /// Its number in the plan.
        found: u32,
        /// The highest number known.
        known: u32,
    },
    /// It was made under earlier rules, by which its model may have got other bytes.
    OldRules,
    /// It answers another model: its own has been edited since.
    Stale,
    /// It is marked as held or retired, and its model has a plan.
    Overtaken {
        /// What it is marked as.
        standing: Standing,
        /// The plan that its model has.
        afresh: Box<Plan>,
    },
    /// It is held, and there is no plan now either.
    Held {
        /// Why, as it says.
        reason: String,
        /// Why there is none now.
        now: String,
    },
    /// There is none, though the model has one.
    Missing(Box<Plan>),
    /// There is none, and the model has none: why not.
    Unplannable(String),
    /// The model has faults.
    Faulty(Box<Faults>),
    /// It is marked as retired, and its model is gone.
    Retired,
    /// Its model is gone, and it is not marked as retired.
    Orphaned,
    /// Model or plan cannot be read: why, escaped.
    Unread(String),
    /// The solver cannot tell: why.
    Untold(String),
}

impl Finding {
    /// Whether the plan is as it should be.
    #[must_use]
    pub fn is_good(&self) -> bool {
        matches!(self, Self::Verified(_) | Self::Held { .. } | Self::Unplannable(_) | Self::Retired)
    }

    /// Whether nothing could be found out.
    #[must_use]
    pub fn is_failure(&self) -> bool {
        matches!(self, Self::Unread(_) | Self::Untold(_))
    }

    /// One word for programs.
    #[must_use]
    pub fn word(&self) -> &'static str {
        match self {
            Self::Verified(_) => "verified",
            Self::Differs(_) | Self::Baseless(_) => "differs",
            Self::Edited(_) => "edited",
            Self::Unmerged(_) => "unmerged",
            Self::Damaged(_) => "damaged",
            Self::Foreign => "foreign",
            Self::Newer { .. } => "newer",
            Self::OldRules => "old_rules",
            Self::Stale | Self::Overtaken { .. } => "stale",
            Self::Held { .. } => "held",
            Self::Missing(_) | Self::Unplannable(_) => "none",
            Self::Faulty(_) => "faulty",
            Self::Retired => "retired",
            Self::Orphaned => "orphaned",
            Self::Unread(_) => "unread",
            Self::Untold(_) => "untold",
        }
    }
}

/// Verifies one plan; one run of the solver may take `time_limit`. `None` where there is neither a model nor a plan of ours.
#[must_use]
pub fn examine(pair: &Pair, time_limit: Duration) -> Option<Finding> {
    let writing = match read::writing(&pair.model) {
        Ok(writing) => writing,
        Err(FileProblem::Missing(_)) => return without_model(&pair.plan),
        Err(FileProblem::TooLarge(_)) => return Some(Finding::Faulty(Box::new(read::too_large(&pair.model)))),
        Err(problem) => return Some(Finding::Unread(problem.to_string())),
    };
    let model = match writing.read(&pair.model) {
        Ok(reading) => reading.model,
        Err(faults) => return Some(Finding::Faulty(Box::new(faults))),
    };
    let subject = Subject { meaning: Meaning::of(&model), model, time_limit };
    Some(subject.beside(&pair.plan).unwrap_or_else(|finding| finding))
}

/// A plan whose model is gone.
fn without_model(plan: &Path) -> Option<Finding> {
    match on_disk(plan) {
        Ok(None) | Err(Finding::Foreign) => None,
        Ok(Some((_, Head { sealed: true, standing: Standing::Retired, .. }))) => Some(Finding::Retired),
        Err(finding @ (Finding::Unread(_) | Finding::Newer { .. })) => Some(finding),
        // Whatever else is wrong with it matters no more.
        Ok(Some(_)) | Err(_) => Some(Finding::Orphaned),
    }
}

/// The plan on disk with what its first lines say, if there is one that can be gone by; else what is to be found of it.
fn on_disk(path: &Path) -> Result<Option<(String, Head)>, Finding> {
    let text = match reading::text(path) {
        Ok(text) => text,
        Err(error) if error.kind() == ErrorKind::NotFound => return Ok(None),
        Err(error) if error.kind() == ErrorKind::InvalidData => {
            return Err(Finding::Damaged("it is no UTF-8 text".to_owned()));
        }
        Err(error) => return Err(Finding::Unread(format!("its plan cannot be read: {}", reason(&error)))),
    };
    // Before all else: marks make nonsense of whatever stands around them.
    if text.lines().next() == Some(text::HEADER)
        && let Some(line) = text.lines().position(|line| line.starts_with("<<<<<<< "))
    {
        return Err(Finding::Unmerged(line + 1));
    }
    // A seal that fits vouches for what follows; without one all of it has to make sense.
    let head =
        text::read_head(&text).and_then(|head| if head.sealed { Ok(head) } else { text::read(&text).map(|_| head) });
    match head {
        Ok(head) => Ok(Some((text, head))),
        Err(PlanError::NotOurs) => Err(Finding::Foreign),
        Err(PlanError::Newer { what, found, known }) => Err(Finding::Newer { what, found, known }),
        Err(error @ (PlanError::Broken(_) | PlanError::Edited)) => Err(Finding::Damaged(error.to_string())),
    }
}

/// A model without fault.
struct Subject {
    model: Model,
    meaning: Meaning,
    time_limit: Duration,
}

impl Subject {
    fn work_out(&self) -> Result<Planned, Fruitless> {
        work_out(&self.model, self.meaning, self.time_limit)
    }

    /// What is found of the plan beside the model. Both sides are findings; the other one is that of a plan that cannot be read.
    fn beside(&self, plan: &Path) -> Result<Finding, Finding> {
        let Some((text, head)) = on_disk(plan)? else { return Ok(self.missing()) };
        if !head.sealed {
            let afresh = if head.answers == self.meaning { self.work_out().ok() } else { None };
            return Ok(Finding::Edited(afresh.map(|afresh| difference(&text, &afresh)).transpose()?));
        }
        if head.standing != Standing::Current {
            return Ok(self.marked(head.standing));
        }
        if head.answers != self.meaning {
            return Ok(Finding::Stale);
        }
        if !text::follows_rules(&text) {
            return Ok(Finding::OldRules);
        }
        Ok(match self.work_out() {
            Ok(afresh) if afresh.text == text => Finding::Verified(Box::new(afresh.plan)),
            Ok(afresh) => Finding::Differs(difference(&text, &afresh)?),
            Err(Fruitless::NoPlan(why)) => Finding::Baseless(why),
            Err(Fruitless::Untold(why)) => Finding::Untold(why),
        })
    }

    /// Where there is no plan.
    fn missing(&self) -> Finding {
        match self.work_out() {
            Ok(afresh) => Finding::Missing(Box::new(afresh.plan)),
            Err(Fruitless::NoPlan(why)) => Finding::Unplannable(why),
            Err(Fruitless::Untold(why)) => Finding::Untold(why),
        }
    }

    /// Where the plan says that it may not be worked to.
    fn marked(&self, standing: Standing) -> Finding {
        match (self.work_out(), standing) {
            (Ok(afresh), standing) => Finding::Overtaken { standing, afresh: Box::new(afresh.plan) },
            // What the solver could not tell when the plan was held it need not be able to tell now.
            (Err(Fruitless::NoPlan(now) | Fruitless::Untold(now)), Standing::Held(reason)) => {
                Finding::Held { reason, now }
            }
            (Err(Fruitless::NoPlan(_) | Fruitless::Untold(_)), _) => Finding::Stale,
        }
    }
}

fn difference(written: &str, afresh: &Planned) -> Result<Box<Difference>, Finding> {
    let plan = text::read(written).map_err(|error| Finding::Damaged(error.to_string()))?.plan;
    Ok(Box::new(Difference::between((&plan, written), (&afresh.plan, &afresh.text))))
}
