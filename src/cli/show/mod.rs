//! `show`: a plan for people and spreadsheets, and why one thing in it is as it is.

mod csv;
mod number;
pub(super) mod object;
pub(super) mod since;
mod standing;
mod table;
mod why;

use std::fs;
use std::io;
use std::path::{Path, PathBuf};

use super::args;
use super::check::unreadable;
use super::exit::{Error, Outcome, shown};
use super::models::{self, NOTE, PLAN, RELEASE};
use super::screen::Screen;
use crate::keep::pinned::Pinned;
use crate::model::meaning::Meaning;
use crate::model::read::{self, FileProblem};
use crate::model::{Faults, Model};
use crate::plan::Plan;
use crate::plan::text::{self as plan_text, PlanError};
use standing::Standing;

/// A plan, the model it belongs to, and how the two stand to each other.
pub(super) struct Shown {
    /// The name of the model: that of its files without their endings. Not escaped.
    pub(super) name: String,
    /// The model file.
    pub(super) model_path: PathBuf,
    /// The plan file.
    plan_path: PathBuf,
    /// The note's file.
    note_path: PathBuf,
    /// The model, where it can be read.
    model: Option<Model>,
    /// The plan as it stands in its file.
    pub(super) plan: Plan,
    /// The seal that the file carries.
    pub(super) seal: String,
    /// Whether it may be worked to.
    pub(super) standing: Standing,
    /// The release, where there is one.
    pinned: Option<Pinned>,
}

pub(super) fn run(screen: &mut Screen, asked: &args::Show) -> Result<Outcome, Error> {
    let found = Shown::find(&asked.model)?;
    let outcome = Outcome::good_if(found.standing == Standing::Current);
    if let Some(name) = &asked.why {
        why::run(screen, &found, name)?;
    } else if asked.csv {
        screen.raw(&csv::of(&found)?);
    } else if screen.json() {
        screen.object(&object::of(&found));
    } else {
        table::show(screen, &found);
    }
    if found.standing != Standing::Current && !screen.json() {
        screen.aside(found.standing.warning(&found));
    }
    Ok(outcome)
}

impl Shown {
    /// The plan of a model that is given by any of its files, or by its name.
    pub(super) fn find(given: &Path) -> Result<Self, Error> {
        let stem = models::stem(given);
        let [plan_path, note_path] = [PLAN, NOTE].map(|ending| models::with_ending(&stem, ending));
        let model_path = models::model_of(&stem);
        let written = match fs::symlink_metadata(&plan_path) {
            Ok(_) => read_plan(&plan_path)?,
            Err(error) if error.kind() == io::ErrorKind::NotFound => return Err(no_plan(given, &model_path)),
            Err(error) => return Err(Error::reading(&plan_path, &error)),
        };
        let model = read_model(&model_path)?;
        let standing = Standing::of(&written, &model);
        Ok(Self {
            name: stem.file_name().unwrap_or_default().to_string_lossy().into_owned(),
            model_path,
            plan_path,
            note_path,
            model: match model {
                Found::Model(model, _) => Some(*model),
                Found::Faulty(_) | Found::Gone => None,
            },
            plan: written.plan,
            seal: written.seal,
            standing,
            pinned: Pinned::look(&models::with_ending(&stem, RELEASE)),
        })
    }
}

/// What there is where the model should be.
enum Found {
    Model(Box<Model>, Meaning),
    Faulty(Faults),
    Gone,
}

fn read_model(path: &Path) -> Result<Found, Error> {
    let writing = match read::writing(path) {
        Ok(writing) => writing,
        Err(FileProblem::Missing(_)) => return Ok(Found::Gone),
        Err(problem) => return Err(unreadable(&problem)),
    };
    Ok(match writing.read(path) {
        Ok(reading) => {
            let meaning = Meaning::of(&reading.model);
            Found::Model(Box::new(reading.model), meaning)
        }
        Err(faults) => Found::Faulty(faults),
    })
}

fn read_plan(path: &Path) -> Result<plan_text::Written, Error> {
    let bytes = read::file(path).map_err(|problem| unreadable(&problem))?;
    let text = String::from_utf8_lossy(&bytes);
    plan_text::read(&text).map_err(|error| {
        let help = match error {
            PlanError::NotOurs | PlanError::Newer { .. } => "",
            PlanError::Broken(_) | PlanError::Edited => "delete it, and `millreeve once` writes it again",
        };
        Error::faulty(format_args!("{}: {error}", shown(path)), help)
    })
}

/// There is no plan: because there is no model either, or because nobody has worked it out.
fn no_plan(given: &Path, model_path: &Path) -> Error {
    if fs::symlink_metadata(model_path).is_ok() {
        let help = format!("`millreeve once` works it out: millreeve once {}", shown(model_path).trim_matches('`'));
        return Error::faulty(format_args!("{} has no plan yet", shown(model_path)), help);
    }
    if given.is_dir() {
        let help = "name one of the models in it; `millreeve check` lists the faults of all";
        return Error::usage(format_args!("{} is a folder, not a model", shown(given)), help);
    }
    Error::usage(format_args!("there is no {}", shown(model_path)), "")
}
