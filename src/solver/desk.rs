//! The near side of the boundary: remembers what was asked, so that only what differs need be said again.

use std::collections::BTreeMap;
use std::time::Duration;

use super::message::{Answer, Last, ModelKey, Outcome, Request, Task};
use super::stop::Stop;
use super::worker::Solver;
use crate::lp::{Difference, Program};

/// Asks a solver about models, each as often as it changes.
pub struct Desk<S> {
    solver: S,
    asked: BTreeMap<ModelKey, Program>,
    time_limit: Duration,
}

impl<S: Solver> Desk<S> {
    /// A desk before `solver`; one run may take `time_limit`.
    pub fn new(solver: S, time_limit: Duration) -> Self {
        Self { solver, asked: BTreeMap::new(), time_limit }
    }

    /// Forgets a model, so that its next program is told whole: another solver has gone on with it.
    pub fn forget(&mut self, model: &ModelKey) {
        self.asked.remove(model);
    }

    /// The optimum of a model's program. `last` is asked for only where the solver knows nothing of the model: a program solved
    /// earlier and its basis.
    pub fn solve(
        &mut self,
        model: &ModelKey,
        program: &Program,
        last: impl FnOnce() -> Option<Last>,
        stop: &Stop,
    ) -> Answer {
        let known = self.asked.insert(model.clone(), program.clone());
        if let Some(known) = known {
            let task = Task::Change(Box::new(Difference::between(&known, program)));
            let answer = self.ask(model, task, stop);
            if !matches!(answer.outcome, Outcome::Forgotten) {
                return answer;
            }
        }
        self.ask(model, Task::Whole(Box::new(program.clone()), last().map(Box::new)), stop)
    }

    fn ask(&mut self, model: &ModelKey, task: Task, stop: &Stop) -> Answer {
        self.solver.ask(Request { model: model.clone(), task, time_limit: self.time_limit }, stop)
    }
}
