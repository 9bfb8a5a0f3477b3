//! Reading a plan back.

use serde::Deserialize;

use super::entry::{ActivityEntry, LimitEntry, MaterialEntry, ResourceEntry, all, periods_of};
use super::error::PlanError;
use super::{HEADER, VERSIONS, seal, seal_for, version};
use crate::model::escape::Plain;
use crate::model::meaning::Meaning;
use crate::plan::types::{Plan, Standing};

/// A plan that was read from a file.
#[derive(Clone, Debug, PartialEq)]
pub struct Written {
    /// The plan.
    pub plan: Plan,
    /// The seal the file carries.
    pub seal: String,
    /// Whether the seal is right: nobody has edited the file since it was written.
    pub sealed: bool,
}

/// What the first lines of a plan say: enough to decide whether it answers a model, without reading the rest.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Head {
    /// Hash of the meaning of the model that it answers.
    pub answers: Meaning,
    /// Whether it may be worked to.
    pub standing: Standing,
    /// The seal the file carries.
    pub seal: String,
    /// Whether the seal is right: what follows is what was written.
    pub sealed: bool,
}

/// The head of the plan that `text` says.
///
/// # Errors
/// As [`read`], for the lines before the first table.
pub fn read_head(text: &str) -> Result<Head, PlanError> {
    ours_and_known(text)?;
    let end = text.find("\n[").map_or(text.len(), |at| at + 1);
    let lines: HeadLines = toml::from_str(&text[..end]).map_err(|error| broken(text, &error))?;
    let (answers, standing) = (meaning_of(&lines.answers)?, standing_of(&lines.standing, lines.held)?);
    let sealed = lines.seal == seal_for(text);
    Ok(Head { answers, standing, seal: lines.seal, sealed })
}

/// The plan that `text` says.
///
/// A plan whose seal does not fit is still read; [`Written::sealed`] tells.
///
/// # Errors
/// Says that the text is not ours, comes from a newer version, or is no whole plan.
pub fn read(text: &str) -> Result<Written, PlanError> {
    ours_and_known(text)?;
    let file: File = toml::from_str(text).map_err(|error| broken(text, &error))?;
    let plan = file.plan()?;
    let seal = seal(text).unwrap_or_default().to_owned();
    let sealed = seal == seal_for(text);
    Ok(Written { plan, seal, sealed })
}

fn ours_and_known(text: &str) -> Result<(), PlanError> {
    if text.lines().next() != Some(HEADER) {
        return Err(PlanError::NotOurs);
    }
    VERSIONS.iter().try_for_each(|&(what, known)| refuse_newer(text, what, known))
}

pub(in crate::plan) fn meaning_of(text: &str) -> Result<Meaning, PlanError> {
    Meaning::parse(text).ok_or_else(|| PlanError::Broken("its `answers` is no hash of a meaning".to_owned()))
}

fn standing_of(word: &str, held: Option<String>) -> Result<Standing, PlanError> {
    match (word, held) {
        ("current", None) => Ok(Standing::Current),
        ("retired", None) => Ok(Standing::Retired),
        ("held", Some(reason)) => Ok(Standing::Held(reason)),
        _ => Err(PlanError::Broken("its `standing` and `held` do not fit together".to_owned())),
    }
}

fn refuse_newer(text: &str, what: &'static str, known: u32) -> Result<(), PlanError> {
    match version(text, what) {
        Some(found) if found > known => Err(PlanError::Newer { what, found, known }),
        Some(_) => Ok(()),
        None => Err(PlanError::Broken(format!("it does not say its `{what}`"))),
    }
}

fn broken(text: &str, error: &toml::de::Error) -> PlanError {
    PlanError::Broken(message_of(text, error))
}

/// A parser's message, without its copy of the text, cut to a readable length.
pub(in crate::plan) fn message_of(text: &str, error: &toml::de::Error) -> String {
    let line = error.span().map_or(1, |span| 1 + text.bytes().take(span.start).filter(|&byte| byte == b'\n').count());
    let message: String = error.message().chars().take(200).collect();
    format!("line {line}: {}", Plain(&message))
}

#[derive(Deserialize)]
struct HeadLines {
    answers: String,
    seal: String,
    standing: String,
    held: Option<String>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    #[serde(rename = "format")]
    _format: u32,
    #[serde(rename = "rules")]
    _rules: u32,
    answers: String,
    #[serde(rename = "seal")]
    _seal: String,
    standing: String,
    held: Option<String>,
    aim: f64,
    #[serde(default)]
    minimise: bool,
    currency: Option<String>,
    #[serde(default)]
    periods: Vec<String>,
    exact: bool,
    ties: bool,
    #[serde(default)]
    may_vary_left_out: usize,
    complete: bool,
    #[serde(default)]
    activities: Vec<ActivityEntry>,
    #[serde(default)]
    resources: Vec<ResourceEntry>,
    #[serde(default)]
    limits: Vec<LimitEntry>,
    #[serde(default)]
    materials: Vec<MaterialEntry>,
}

impl File {
    fn plan(self) -> Result<Plan, PlanError> {
        let (standing, answers) = (standing_of(&self.standing, self.held)?, meaning_of(&self.answers)?);
        let periods = periods_of(&self.periods)?;
        let count = periods.len();
        Ok(Plan {
            answers,
            standing,
            aim: self.aim,
            minimise: self.minimise,
            currency: self.currency,
            periods,
            exact: self.exact,
            ties: self.ties,
            may_vary_left_out: self.may_vary_left_out,
            complete: self.complete,
            activities: all(self.activities, |entry| entry.planned(count))?,
            resources: all(self.resources, |entry| entry.planned(count))?,
            limits: all(self.limits, |entry| entry.planned(count))?,
            materials: all(self.materials, |entry| entry.planned(count))?,
        })
    }
}
