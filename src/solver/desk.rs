//! The near side of the boundary: remembers what was asked, so that only what differs need be said again.

use std::collections::BTreeMap;
use std::sync::Arc;
use std::time::Duration;

use super::message::{Answer, Last, ModelKey, Optimum, Outcome, Request, Task};
use super::proof::{self, Checked};
use super::stop::Stop;
use super::worker::{Place, Solver};
use crate::lp::{Difference, Program};

/// Two ways to the same number may differ by this share of its largest term: far more than rounding comes to, far less than harm does.
const ROUNDING: f64 = 1e-6;

/// Asks a solver about models, each as often as it changes.
pub struct Desk<S> {
    solver: S,
    asked: BTreeMap<ModelKey, Arc<Program>>,
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

    /// Where the next question will be answered.
    pub fn place(&mut self) -> Place {
        self.solver.place()
    }

    /// The optimum of a model's program. `last` is asked for only where the solver knows nothing of the model: a program solved
    /// earlier and its basis.
    pub fn solve(
        &mut self,
        model: &ModelKey,
        program: &Arc<Program>,
        last: impl FnOnce() -> Option<Last>,
        stop: &Stop,
    ) -> Answer {
        let place = self.place();
        let known = self.asked.insert(model.clone(), program.clone());
        let change = known.map(|known| Task::Change(Box::new(Difference::between(&known, program))));
        let answer = change.map(|task| self.ask(model, task, stop));
        let answer = answer.filter(|answer| !matches!(answer.outcome, Outcome::Forgotten));
        let mut answer = answer.unwrap_or_else(|| {
            self.ask(model, Task::Whole(Box::new(Program::clone(program)), last().map(Box::new)), stop)
        });
        if place == Place::Apart {
            answer.outcome = proven_here(answer.outcome, program);
        }
        answer
    }

    fn ask(&mut self, model: &ModelKey, task: Task, stop: &Stop) -> Answer {
        self.solver.ask(Request { model: model.clone(), task, time_limit: self.time_limit }, stop)
    }
}

/// An answer from another process, whose memory the solver may have harmed before it said "optimal": shapes are looked at and levels and
/// worths proven once more, on this side. What else it says must agree with that, and stays as it is: it may be sharper than a proof is.
fn proven_here(outcome: Outcome, program: &Program) -> Outcome {
    let Outcome::Optimal(optimum) = outcome else { return outcome };
    if !fits(&optimum, program) {
        return Outcome::Lost("an answer that does not fit the question".to_owned());
    }
    let checked = proof::check(program, &optimum.levels, &optimum.worths);
    if !checked.proof.holds() || !agree(&optimum, &checked, program) {
        return Outcome::Lost("an answer that does not hold".to_owned());
    }
    Outcome::Optimal(optimum)
}

/// Whether aim, sums and gains are those that follow from levels and worths, but for rounding.
fn agree(optimum: &Optimum, checked: &Checked, program: &Program) -> bool {
    let near = |a: f64, b: f64, scale: f64| (a - b).abs() <= ROUNDING * scale.max(1.0);
    let all = |told: &[f64], own: &[f64], scales: &[f64]| {
        told.iter().zip(own).zip(scales).all(|((&told, &own), &scale)| near(told, own, scale))
    };
    let earned: f64 =
        program.columns.iter().zip(&optimum.levels).map(|(column, level)| (column.aim * level).abs()).sum();
    near(optimum.aim, checked.aim, earned + program.offset.abs())
        && all(&optimum.sums, &checked.sums, &checked.sum_scales)
        && all(&optimum.gains, &checked.gains, &checked.gain_scales)
}

/// Whether there is one of everything for each column and row.
fn fits(optimum: &Optimum, program: &Program) -> bool {
    let (columns, rows) = (program.columns.len(), program.rows.len());
    let ranges = optimum.ranges.as_ref();
    optimum.levels.len() == columns
        && optimum.gains.len() == columns
        && optimum.worths.len() == rows
        && optimum.sums.len() == rows
        && optimum.basis.fits(program)
        && optimum.spans.as_ref().is_none_or(|spans| spans.len() == columns)
        && ranges.is_none_or(|ranges| ranges.aims.len() == columns && ranges.bounds.len() == rows)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::lp::{Column, Key, Row, RowIndex};
    use crate::solver::worker::Worker;

    /// A solver in another process, as far as anybody can tell, that has been harmed.
    struct Harmed(Worker, fn(&mut Optimum));

    impl Solver for Harmed {
        fn ask(&mut self, request: Request, stop: &Stop) -> Answer {
            let mut answer = self.0.ask(request, stop);
            if let Outcome::Optimal(optimum) = &mut answer.outcome {
                (self.1)(optimum);
            }
            answer
        }

        fn place(&mut self) -> Place {
            Place::Apart
        }
    }

    /// At most 84 of one thing that earns 3.
    fn answer(harm: fn(&mut Optimum)) -> Outcome {
        let row = Row { key: Key::new("resources.kiln"), lower: 0.0, upper: 84.0 };
        let (lower, upper) = (0.0, f64::INFINITY);
        let entries = vec![(RowIndex(0), 1.0)];
        let column = Column { key: Key::new("activities.tile"), lower, upper, aim: 3.0, entries };
        let program = Arc::new(Program { columns: vec![column], rows: vec![row], ..Program::default() });
        let mut desk = Desk::new(Harmed(Worker::new(usize::MAX), harm), Duration::from_secs(60));
        desk.solve(&ModelKey("m".to_owned()), &program, || None, &Stop::default()).outcome
    }

    #[test]
    fn an_answer_from_another_process_is_proven_again() {
        assert!(matches!(answer(|_| {}), Outcome::Optimal(_)));
        let harms: [fn(&mut Optimum); 8] = [
            |optimum| optimum.aim = 1.0,
            |optimum| optimum.sums[0] = f64::NAN,
            |optimum| optimum.gains[0] = 1.0,
            |optimum| optimum.gains.clear(),
            |optimum| optimum.levels[0] = 83.0,
            |optimum| optimum.levels[0] = 85.0,
            |optimum| optimum.worths[0] = f64::NAN,
            |optimum| optimum.levels.clear(),
        ];
        for harm in harms {
            assert!(matches!(answer(harm), Outcome::Lost(_)));
        }
        // Sharper than ours is no harm, and is kept.
        let Outcome::Optimal(optimum) = answer(|optimum| optimum.aim = 252.0_f64.next_up()) else { panic!("it holds") };
        assert_eq!(optimum.aim.to_bits(), 252.0_f64.next_up().to_bits());
    }
}
