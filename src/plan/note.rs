//! The change note: a page that tells a planner in a minute what was edited and what came of it.

mod account;
mod layout;
mod lead;
mod materials;
mod moves;
mod periods;
mod prospects;
mod rules;
mod scarce;
mod since;
mod tables;
mod ties;
mod trouble;
mod words;

use std::borrow::Cow;

use super::compare::compare;
use super::release::Release;
use super::text::NOTE_HEADER;
use super::types::{Plan, Standing};
use crate::edits::{Edit, Kind};
use crate::model::{Faults, Model};
use crate::solver::message::{Conflict, Growth, Start};

pub use trouble::reason;

/// All that a note tells of.
#[derive(Clone, Debug)]
pub struct Report<'a> {
    /// What people call the model; without one the file's name stands in.
    pub title: Option<&'a str>,
    /// The model file's name.
    pub file: &'a str,
    /// The model as it stands, for its units; `None` where it cannot be read or is gone.
    pub model: Option<&'a Model>,
    /// The plan that stood before; `None` for a first one.
    pub before: Option<&'a Plan>,
    /// What was edited since then.
    pub edits: &'a [EditTold<'a>],
    /// What came of it.
    pub verdict: Verdict<'a>,
    /// The seal of the plan that now lies beside the model, if there is one.
    pub seal: Option<&'a str>,
    /// The release, where there is one.
    pub release: Option<ReleaseTold<'a>>,
    /// How it was worked out; `None` where nothing was.
    pub reckoning: Option<&'a Reckoning>,
}

/// The release that a plan is held against.
#[derive(Clone, Copy, Debug)]
pub struct ReleaseTold<'a> {
    /// Tells this release from others: hexadecimal digits.
    pub mark: &'a str,
    /// What it says, or why that cannot be told, as a sentence without a full stop.
    pub release: Result<&'a Release, &'a str>,
}

/// An edit, and what it was worth.
#[derive(Clone, Debug)]
pub struct EditTold<'a> {
    /// The edit.
    pub edit: &'a Edit,
    /// What it added to the aim (positive is better, under either aim), where that is known.
    pub worth: Option<f64>,
}

/// What came of a look at a model.
#[derive(Clone, Debug)]
pub enum Verdict<'a> {
    /// This plan, proven.
    Planned(&'a Plan),
    /// No plan: the last good one, if any, stays and is held.
    Trouble(Trouble<'a>),
    /// The model is gone.
    Retired,
}

/// Why there is no plan.
#[derive(Clone, Copy, Debug)]
pub enum Trouble<'a> {
    /// The model cannot be read.
    Faults(&'a Faults),
    /// Its rules contradict each other.
    Infeasible(&'a Conflict),
    /// Its aim has no limit.
    Unbounded(&'a Growth),
    /// The solver cannot tell; the reason, as a sentence.
    Undecided(&'a str),
}

/// How a plan was worked out.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Reckoning {
    /// The kinds of the edits, each once.
    pub kinds: Vec<Kind>,
    /// The start or starts that theory expects, as words: `dual`, `none or dual`. Empty where it expects none in particular.
    pub expected: String,
    /// The start taken.
    pub taken: Start,
    /// How many bounds the last basis broke under the new data; `None` where there was no basis.
    pub primal_infeasible: Option<usize>,
    /// How many levels could still improve the aim; `None` where there was no basis.
    pub dual_infeasible: Option<usize>,
    /// Whether the last basis was carried over by name, as far as the two programs overlap.
    pub by_name: bool,
    /// Simplex iterations.
    pub pivots: usize,
    /// Pivots in exact arithmetic after that, to the one plan.
    pub exact_pivots: usize,
    /// What was tried and given up.
    pub detours: Vec<Cow<'static, str>>,
    /// The worst relative breach of any law of optimality.
    pub worst: f64,
}

/// The text of the note. It is a pure function of what is reported.
#[must_use]
pub fn write(report: &Report<'_>) -> String {
    let mut out = format!("{NOTE_HEADER} Plan: {} -->\n", report.seal.filter(|seal| is_hex(seal)).unwrap_or("none"));
    out.push_str(&format!("# {}\n\n", words::text(report.title.unwrap_or(report.file))));
    let comparison = match (report.before, &report.verdict) {
        (Some(before), Verdict::Planned(after)) => Some(compare(before, after)),
        _ => None,
    };
    out.push_str(&format!("**{}**\n", lead::sentence(report, comparison.as_ref())));
    if let Verdict::Trouble(trouble) = report.verdict {
        out.push_str(&trouble::told(trouble, report.model));
    }
    out.push_str(&tables::edits(report));
    if let Verdict::Planned(plan) = report.verdict {
        out.push_str(&tables::of_plan(report, plan, comparison.as_ref()));
        out.push_str(&reservations(plan, report.model));
    }
    let plan = if let Verdict::Planned(plan) = report.verdict { Some(plan) } else { report.before };
    out.push_str(&plan.map_or_else(String::new, |plan| since::told(report.release, plan, report.model)));
    out.push_str(since::ADVICE);
    if let Some(reckoning) = report.reckoning {
        let planned = if let Verdict::Planned(plan) = report.verdict { Some(plan) } else { None };
        out.push_str(&format!("\n{}\n", account::line(reckoning, planned)));
    }
    out
}

/// The seal of the plan that a note speaks of; `None` where it speaks of none, or is no note of ours.
#[must_use]
pub fn speaks_of(text: &str) -> Option<&str> {
    let line = text.lines().next()?.strip_prefix(NOTE_HEADER)?;
    let seal = line.strip_prefix(" Plan: ")?.strip_suffix(" -->")?;
    is_hex(seal).then_some(seal)
}

/// The mark of the release that a note tells of; `None` where it tells of none.
#[must_use]
pub fn release_told(note: &str) -> Option<&str> {
    since::mark(note)
}

/// The note with what it says of the release told afresh: of this one, about this plan. Nothing else of it changes.
#[must_use]
pub fn with_release(note: &str, release: Option<ReleaseTold<'_>>, plan: &Plan, model: Option<&Model>) -> String {
    since::retold(note, &since::told(release, plan, model))
}

fn is_hex(text: &str) -> bool {
    !text.is_empty() && text.bytes().all(|byte| byte.is_ascii_hexdigit())
}

/// What a plan cannot say in one number, in a few plain sentences.
fn reservations(plan: &Plan, model: Option<&Model>) -> String {
    let mut told = ties::told(plan, model);
    if !plan.complete {
        let space = if told.is_empty() { "" } else { " " };
        told.push_str(space);
        told.push_str("Where one more or one less has no single worth, worths and ranges are left out.");
    }
    if told.is_empty() { told } else { format!("\n{told}\n") }
}

/// Whether the plan before was held.
fn was_held(report: &Report<'_>) -> bool {
    report.before.is_some_and(|before| matches!(before.standing, Standing::Held(_)))
}
