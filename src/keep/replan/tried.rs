//! Asking the solver, which may crash over the question: what ended it twice is not asked again until it is edited.
//!
//! A crash is counted on disk before the next try. In a worker process it cannot take the daemon with it, and what ends the daemon while a
//! worker solves says nothing about the model. Where there is no such process, a try is counted before it is made, and taken back after.

use std::sync::Arc;

use super::memory::Known;
use super::{Replanner, Stopped};
use crate::keep::pool::Job;
use crate::lp::Program;
use crate::solver::message::{Account, Answer, ModelKey, Outcome};
use crate::solver::stop::Stop;
use crate::solver::worker::Place;
use crate::store::{Records, Tries};

/// So many crashes over the same content, and it is not tried again.
const MOST_CRASHES: u32 = 2;

/// Why a model that has crashed the solver too often is held, to follow "the solver cannot tell: ".
pub(super) fn in_vain(how: &str) -> String {
    format!(
        "it crashed {MOST_CRASHES} times over this model ({how}) and is asked again once the model is edited; bring very large and \
         very small numbers closer together or take back the last edit, and look into the log"
    )
}

impl Replanner {
    /// The answer to a program that was built from `bytes`; told `whole` where the solver's memory of the model is not to be gone by.
    /// [`Outcome::Lost`] where the solver has crashed over these bytes too often.
    pub(super) fn ask(
        &mut self,
        job: &Job,
        (bytes, program): (&[u8], &Arc<Program>),
        whole: bool,
        known: Option<&Known>,
        stop: &Stop,
    ) -> Result<Answer, Stopped> {
        let records = self.memory.records(&job.state)?;
        let mut tries = records.tries(job.path.relative(), bytes);
        let key = ModelKey(job.path.relative().to_string_lossy().into_owned());
        if whole {
            self.desk.forget(&key);
        }
        while tries.crashes < MOST_CRASHES {
            let place = self.desk.place();
            if place == Place::Here {
                let mut begun = tries.clone();
                begun.add("with no process of its own to crash in");
                remember(&records, job, &begun);
            }
            let answer = self.desk.solve(&key, program, || known.and_then(Known::last), stop);
            let Outcome::Lost(how) = answer.outcome else {
                // What was given up has shown nothing yet.
                let given_up = matches!(answer.outcome, Outcome::Interrupted);
                remember(&records, job, &if given_up { tries } else { Tries::none(bytes) });
                return Ok(answer);
            };
            tries.add(how);
            remember(&records, job, &tries);
            self.desk.forget(&key);
            if stop.is_stopped() {
                return Err(Stopped::Interrupted);
            }
        }
        self.desk.forget(&key);
        Ok(Answer { outcome: Outcome::Lost(tries.how), account: Account::default() })
    }
}

/// Counts on disk; where that fails, the count in hand still ends the tries of this job.
fn remember(records: &Records, job: &Job, tries: &Tries) {
    if let Err(error) = records.remember_tries(job.path.relative(), tries) {
        tracing::debug!("{error}");
    }
}

#[cfg(test)]
mod tests {
    use std::path::Path;
    use std::sync::{Arc, Mutex};
    use std::time::Duration;

    use super::*;
    use crate::keep::path::ModelPath;
    use crate::keep::pool::What;
    use crate::keep::replan::memory::Memory;
    use crate::solver::message::Request;
    use crate::solver::worker::Solver;

    const MODEL: &str = "m.model.toml";

    /// Notes how many tries are on disk when it is asked, and has these answers, the last of them first.
    struct Notes {
        records: Records,
        place: Place,
        seen: Arc<Mutex<Vec<u32>>>,
        answers: Vec<Outcome>,
    }

    impl Solver for Notes {
        fn ask(&mut self, _: Request, _: &Stop) -> Answer {
            self.seen.lock().unwrap().push(self.records.tries(Path::new(MODEL), b"x").crashes);
            Answer { outcome: self.answers.pop().unwrap(), account: Account::default() }
        }

        fn place(&mut self) -> Place {
            self.place
        }
    }

    /// What comes of asking, the tries that were on disk meanwhile, and those after it.
    fn asked(place: Place, before: u32, answers: Vec<Outcome>) -> (Outcome, Vec<u32>, u32) {
        let folder = tempfile::tempdir().unwrap();
        let (root, state): (Arc<Path>, Arc<Path>) = (Arc::from(folder.path()), Arc::from(folder.path().join("state")));
        let path = ModelPath::new(&root, Path::new(MODEL)).unwrap();
        let records = Records::open(&state).unwrap();
        let mut tries = Tries::none(b"x");
        (0..before).for_each(|_| tries.add("signal SIGSEGV"));
        records.remember_tries(Path::new(MODEL), &tries).unwrap();
        let seen = Arc::<Mutex<Vec<u32>>>::default();
        let notes = Notes { records: records.clone(), place, seen: seen.clone(), answers };
        let mut replanner = Replanner::new(Arc::new(Memory::default()), Box::new(notes), Duration::from_secs(1));
        let job = Job { path, what: What::Replan, state };
        let answer = replanner.ask(&job, (b"x", &Arc::default()), false, None, &Stop::default());
        let seen = seen.lock().unwrap().clone();
        (answer.ok().unwrap().outcome, seen, records.tries(Path::new(MODEL), b"x").crashes)
    }

    fn lost() -> Outcome {
        Outcome::Lost("signal SIGSEGV".to_owned())
    }

    #[test]
    fn two_crashes_in_processes_of_their_own_are_counted_as_they_come() {
        let (outcome, seen, after) = asked(Place::Apart, 0, vec![lost(), lost()]);
        assert!(matches!(outcome, Outcome::Lost(how) if how == "signal SIGSEGV"));
        assert_eq!((seen, after), (vec![0, 1], 2));
        let (outcome, seen, after) = asked(Place::Apart, 1, vec![Outcome::Undecided(String::new())]);
        assert!(matches!(outcome, Outcome::Undecided(_)));
        assert_eq!((seen, after), (vec![1], 0));
    }

    #[test]
    fn what_may_end_the_daemon_is_counted_before_it_is_tried() {
        let (_, seen, after) = asked(Place::Here, 0, vec![Outcome::Undecided(String::new())]);
        assert_eq!((seen, after), (vec![1], 0));
        // What was given up has neither crashed nor shown that it does not.
        let (_, seen, after) = asked(Place::Here, 1, vec![Outcome::Interrupted]);
        assert_eq!((seen, after), (vec![2], 1));
    }

    #[test]
    fn what_has_crashed_twice_is_not_asked_again() {
        for place in [Place::Here, Place::Apart] {
            let (outcome, seen, after) = asked(place, 2, vec![]);
            assert!(matches!(outcome, Outcome::Lost(how) if how == "signal SIGSEGV"));
            assert_eq!((seen, after), (vec![], 2));
        }
    }
}
