//! The far side of the boundary: answers requests with one session per model, within a memory limit.

use std::collections::BTreeMap;
use std::sync::Arc;

use super::message::{Account, Answer, ModelKey, Outcome, Request, Task};
use super::session::Session;
use super::stop::Stop;
use crate::lp::Program;

/// Memory a live instance takes per entry, column or row, in bytes: measured between 350 and 560 per entry.
const BYTES_PER_ENTRY: usize = 500;

/// Where a request is answered.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Place {
    /// In this process, which a crash of the solver ends.
    Here,
    /// In a process of its own.
    Apart,
}

/// Something that answers requests about programs, one at a time.
pub trait Solver: Send {
    /// Answers a request; `stop` can end it early.
    fn ask(&mut self, request: Request, stop: &Stop) -> Answer;

    /// Makes ready for the next request, and tells where it will be answered.
    fn place(&mut self) -> Place {
        Place::Here
    }
}

impl<S: Solver + ?Sized> Solver for Box<S> {
    fn ask(&mut self, request: Request, stop: &Stop) -> Answer {
        (**self).ask(request, stop)
    }

    fn place(&mut self) -> Place {
        (**self).place()
    }
}

/// Solves in the thread that asks.
pub struct Worker {
    sessions: BTreeMap<ModelKey, Held>,
    memory_limit: usize,
    asked: u64,
}

struct Held {
    session: Session,
    last_asked: u64,
}

impl Worker {
    /// A worker whose live instances take about `memory_limit` bytes at most; the one in use is always kept.
    #[must_use]
    pub fn new(memory_limit: usize) -> Self {
        Self { sessions: BTreeMap::new(), memory_limit, asked: 0 }
    }

    fn program(&mut self, model: &ModelKey, task: Task) -> Option<Arc<Program>> {
        match task {
            Task::Whole(program, last) => {
                if let Some(last) = last {
                    let session = Session::remembered(last.program, &last.basis, last.cold_pivots);
                    self.sessions.insert(model.clone(), Held { session, last_asked: 0 });
                }
                Some(Arc::from(program))
            }
            Task::Change(difference) => {
                let asked = self.sessions.get(model)?.session.asked()?;
                difference.apply(asked).ok().map(Arc::new)
            }
        }
    }

    /// Lets live instances go, the least recently used first, until the rest are within the limit.
    fn shrink(&mut self) {
        let bytes = |held: &Held| held.session.live_entries().saturating_mul(BYTES_PER_ENTRY);
        let mut all: usize = self.sessions.values().map(bytes).sum();
        while all > self.memory_limit {
            let asked = self.asked;
            let idle = self.sessions.values_mut().filter(|held| held.last_asked < asked && bytes(held) > 0);
            let Some(oldest) = idle.min_by_key(|held| held.last_asked) else { break };
            all -= bytes(oldest);
            oldest.session.shrink();
        }
    }
}

impl Solver for Worker {
    fn ask(&mut self, request: Request, stop: &Stop) -> Answer {
        self.asked += 1;
        let Some(program) = self.program(&request.model, request.task) else {
            return Answer { outcome: Outcome::Forgotten, account: Account::default() };
        };
        let fresh = || Held { session: Session::default(), last_asked: 0 };
        let held = self.sessions.entry(request.model).or_insert_with(fresh);
        held.last_asked = self.asked;
        let answer = held.session.solve(program, request.time_limit, stop);
        self.shrink();
        answer
    }
}
