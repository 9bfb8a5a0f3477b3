//! The solver in a process of its own, as everybody else sees it: asks are answered, whatever becomes of the process.

use std::sync::atomic::Ordering;
use std::thread;
use std::time::{Duration, Instant};

use super::Workers;
use super::child::{Child, Ended, Next};
use crate::solver::message::{Account, Answer, Outcome, Request};
use crate::solver::stop::Stop;
use crate::solver::wire::{Order, Word, encode};
use crate::solver::worker::{Place, Solver, Worker};

/// How often it is looked whether a running solve is to be given up.
const LOOK_EVERY: Duration = Duration::from_millis(5);

/// How long a solve that is to be given up has until its process is killed. Simplex looks within milliseconds and exact pivots at each one;
/// the longest that nobody looks is a factorisation or ranging of the largest models, a second or two on a busy machine.
const GRACE: Duration = Duration::from_secs(5);

/// The pause before a worker that has crashed twice in a row without an answer in between is started again; twice as long each further time.
const FIRST_PAUSE: Duration = Duration::from_millis(10);

/// The longest of these pauses: a model waits for it.
const LONGEST_PAUSE: Duration = Duration::from_secs(1);

/// How long to do without, once no worker could be started; twice as long each further time.
const FIRST_REST: Duration = Duration::from_secs(1);

/// The longest time to do without.
const LONGEST_REST: Duration = Duration::from_secs(60);

/// A solver in a process of its own; in this one while no other can be started.
pub struct Apart {
    workers: Workers,
    number: usize,
    child: Option<Child>,
    /// Ends in a row in the middle of an answer.
    crashes: u32,
    without: Option<Without>,
}

/// Solves here while there is no process to be had.
struct Without {
    worker: Worker,
    rest: Duration,
    until: Instant,
}

impl Apart {
    pub(super) fn new(workers: Workers, number: usize) -> Self {
        Self { workers, number, child: None, crashes: 0, without: None }
    }

    /// A process to ask, started if there is none; `None` where that fails or failed a short while ago.
    fn child(&mut self) -> Option<&Child> {
        if self.child.as_mut().is_some_and(Child::is_gone) {
            let Ended { how } = self.child.take()?.end();
            tracing::warn!(
                "worker {} ended while it had nothing to do ({how}); another one takes its place",
                self.number
            );
        }
        if self.child.is_none() {
            let resting = self.without.as_ref().is_some_and(|without| Instant::now() < without.until);
            self.child = if resting { None } else { self.start() };
        }
        self.child.as_ref()
    }

    fn start(&mut self) -> Option<Child> {
        if let Some(doublings) = self.crashes.checked_sub(2) {
            rest_for(LONGEST_PAUSE.min(FIRST_PAUSE.saturating_mul(1 << doublings.min(16))));
        }
        match Child::start(&self.workers, self.number) {
            Ok(child) => {
                tracing::debug!("worker {} is process {}", self.number, child.id());
                if self.workers.missed.swap(false, Ordering::Relaxed) {
                    tracing::info!("solving in worker processes again");
                }
                self.without = None;
                Some(child)
            }
            Err(error) => {
                if !self.workers.missed.swap(true, Ordering::Relaxed) {
                    tracing::warn!(
                        "no worker process: {error}; until there is one, solving goes on without its protection"
                    );
                }
                let before = self.without.take();
                let rest = before.as_ref().map_or(FIRST_REST, |before| before.rest.saturating_mul(2).min(LONGEST_REST));
                let live = usize::try_from(self.workers.limits.live).unwrap_or(usize::MAX);
                let worker = before.map_or_else(|| Worker::new(live), |before| before.worker);
                self.without = Some(Without { worker, rest, until: Instant::now() + rest });
                None
            }
        }
    }

    /// Waits for the answer to what was just asked.
    fn answer(&mut self, limit: Duration, stop: &Stop) -> Answer {
        let mut patience = Patience { limit, begun: Instant::now(), told: None };
        loop {
            let Some(child) = &self.child else { return of(Outcome::Lost("it is gone".to_owned())) };
            match child.next(LOOK_EVERY) {
                Next::Word(Word::Answer(answer)) => {
                    self.crashes = 0;
                    return patience.judge(*answer);
                }
                Next::Word(Word::Progress(progress)) => stop.count(progress.pivots),
                Next::Ended => return self.lost(),
                Next::Nothing => {}
            }
            match patience.look(Instant::now(), stop.is_stopped()) {
                Look::Wait => {}
                Look::Interrupt => {
                    if let Ok(frame) = encode(&Order::Interrupt) {
                        child.send(frame);
                    }
                }
                Look::Kill => {
                    tracing::warn!("worker {} did not stop when told to, and was killed", self.number);
                    // Dropping it kills it.
                    self.child = None;
                    return patience.judge(of(Outcome::Interrupted));
                }
            }
        }
    }

    /// The process has ended over a question.
    fn lost(&mut self) -> Answer {
        self.crashes = self.crashes.saturating_add(1);
        let how = self.child.take().map_or_else(String::new, |child| child.end().how);
        tracing::warn!("worker {} ended in the middle of a solve ({how}); another one takes its place", self.number);
        of(Outcome::Lost(how))
    }
}

impl Solver for Apart {
    fn ask(&mut self, request: Request, stop: &Stop) -> Answer {
        let number = self.number;
        let Some(child) = self.child() else {
            // Whether a process could be had was settled when the place was asked for, a moment ago.
            return match &mut self.without {
                Some(without) => without.worker.ask(request, stop),
                None => of(Outcome::Lost("there is no process".to_owned())),
            };
        };
        tracing::debug!("worker {number} (process {}) solves {}", child.id(), request.model.0);
        let limit = request.time_limit;
        match encode(&Order::Solve(Box::new(request))) {
            Ok(frame) => child.send(frame),
            Err(error) => return of(Outcome::Undecided(error.to_string())),
        }
        self.answer(limit, stop)
    }

    fn place(&mut self) -> Place {
        if self.child().is_some() { Place::Apart } else { Place::Here }
    }
}

/// How long an answer is waited for.
struct Patience {
    limit: Duration,
    begun: Instant,
    /// When the solve was told to give up, and whether for the time it took.
    told: Option<(Instant, bool)>,
}

/// What is to be done about a solve that runs.
#[derive(Debug, PartialEq, Eq)]
enum Look {
    Wait,
    Interrupt,
    Kill,
}

impl Patience {
    fn look(&mut self, now: Instant, stopped: bool) -> Look {
        let late = now.saturating_duration_since(self.begun) >= self.limit;
        match self.told {
            Some((told, _)) if now.saturating_duration_since(told) >= GRACE => Look::Kill,
            Some(_) => Look::Wait,
            None if stopped || late => {
                self.told = Some((now, !stopped));
                Look::Interrupt
            }
            None => Look::Wait,
        }
    }

    /// An answer that was cut short for the time it took is none.
    fn judge(&self, answer: Answer) -> Answer {
        let for_time = matches!(self.told, Some((_, true)));
        if for_time && matches!(answer.outcome, Outcome::Interrupted) {
            let why = format!("the time limit of {} s was reached", self.limit.as_secs_f64());
            return Answer { outcome: Outcome::Undecided(why), ..answer };
        }
        answer
    }
}

fn of(outcome: Outcome) -> Answer {
    Answer { outcome, account: Account::default() }
}

fn rest_for(time: Duration) {
    let until = Instant::now() + time;
    while let Some(left) = until.checked_duration_since(Instant::now()) {
        thread::park_timeout(left);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn patience(begun: Instant) -> Patience {
        Patience { limit: Duration::from_secs(60), begun, told: None }
    }

    #[test]
    fn a_solve_is_told_to_stop_once_and_killed_if_it_does_not() {
        let begun = Instant::now();
        let mut waiting = patience(begun);
        let limit = begun + Duration::from_secs(60);
        assert_eq!(waiting.look(begun, false), Look::Wait);
        assert_eq!(waiting.look(limit, false), Look::Interrupt);
        // A newer edit that comes now changes nothing about why it was told.
        assert_eq!(waiting.look(limit, true), Look::Wait);
        assert_eq!(waiting.look(limit + GRACE, true), Look::Kill);
        let Outcome::Undecided(why) = waiting.judge(of(Outcome::Interrupted)).outcome else { panic!() };
        assert_eq!(why, "the time limit of 60 s was reached");
    }

    #[test]
    fn a_solve_that_was_overtaken_is_interrupted_and_not_too_long() {
        let begun = Instant::now();
        let mut waiting = patience(begun);
        assert_eq!(waiting.look(begun, true), Look::Interrupt);
        assert!(matches!(waiting.judge(of(Outcome::Interrupted)).outcome, Outcome::Interrupted));
        // What it answers all the same counts.
        let told = waiting.judge(of(Outcome::Undecided("hm".to_owned())));
        assert!(matches!(told.outcome, Outcome::Undecided(why) if why == "hm"));
        assert_eq!(waiting.look(begun + GRACE, true), Look::Kill);
    }
}
