//! A plan out of an answer, and a plan out of nothing but a model.

use std::sync::Arc;
use std::time::Duration;

use crate::lp::{Program, build};
use crate::model::Model;
use crate::model::meaning::Meaning;
use crate::plan::make::MakeError;
use crate::plan::note::{Trouble, reason};
use crate::plan::{self, Plan, text};
use crate::solver::desk::Desk;
use crate::solver::message::{ModelKey, Optimum, Outcome};
use crate::solver::stop::Stop;
use crate::solver::worker::Worker;

/// A plan and the text of its file.
#[derive(Clone, Debug)]
pub struct Planned {
    /// The plan.
    pub plan: Plan,
    /// Its text, sealed.
    pub text: String,
}

impl Planned {
    /// The plan of `model` from the optimum of its program, and its text.
    ///
    /// # Errors
    /// As [`plan::make()`].
    pub fn of(model: &Model, meaning: Meaning, program: &Program, optimum: &Optimum) -> Result<Self, MakeError> {
        let plan = plan::make(model, meaning, program, optimum)?;
        let text = text::write(&plan);
        Ok(Self { plan, text })
    }
}

/// Why working a model out gave no plan.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Fruitless {
    /// There is no plan for it; why, in one plain sentence without a full stop. Not escaped.
    NoPlan(String),
    /// It cannot be told whether there is one; why, in the same way.
    Untold(String),
}

/// Works a model out from nothing: a solver of its own, no basis, no record, no file. One run of it may take `time_limit`.
///
/// # Errors
/// Where there is no plan, and where that cannot be told.
pub fn work_out(model: &Model, meaning: Meaning, time_limit: Duration) -> Result<Planned, Fruitless> {
    let program = Arc::new(build(model));
    // The solver's memory is let go with it.
    let mut desk = Desk::new(Worker::new(usize::MAX), time_limit);
    let answer = desk.solve(&ModelKey(String::new()), &program, || None, &Stop::default());
    let no_plan = |trouble| Fruitless::NoPlan(reason(trouble, Some(model)));
    match answer.outcome {
        Outcome::Optimal(optimum) => {
            Planned::of(model, meaning, &program, &optimum).map_err(|error| Fruitless::Untold(error.to_string()))
        }
        Outcome::Infeasible(conflict) => Err(no_plan(Trouble::Infeasible(&conflict))),
        Outcome::Unbounded(growth) => Err(no_plan(Trouble::Unbounded(&growth))),
        Outcome::Undecided(why) => Err(Fruitless::Untold(reason(Trouble::Undecided(&why), Some(model)))),
        Outcome::Interrupted | Outcome::Forgotten | Outcome::Lost(_) => {
            Err(Fruitless::Untold("the solver gave up".to_owned()))
        }
    }
}
