//! Worker threads, each with a planner of its own.

use std::io;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::Path;
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, mpsc};
use std::thread;

use super::path::{Form, ModelPath};
use super::report::Report;
use super::stamp::{Sight, Stamp};

/// A worker, by its number.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Worker(pub usize);

/// What is to be done about a model.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum What {
    /// Read it and bring its plan up to date.
    Replan,
    /// It is gone: mark its plan as retired.
    Retire,
}

/// One look at one model.
#[derive(Clone, Debug)]
pub struct Job {
    /// The model.
    pub path: ModelPath,
    /// What is to be done.
    pub what: What,
    /// The folder where the daemon's state lies.
    pub state: Arc<Path>,
}

impl Job {
    /// The same, of a model that lies there in this form.
    #[must_use]
    pub fn lying(&self, form: Form) -> Self {
        Self { path: self.path.lying(form), ..self.clone() }
    }
}

/// Tells a planner to give up: a newer edit has made its work void, or the daemon ends.
#[derive(Clone, Debug, Default)]
pub struct Stop(Arc<AtomicBool>);

impl Stop {
    /// A flag that is not raised.
    #[must_use]
    pub fn new() -> Self {
        Self::default()
    }

    /// Raises it; it is never lowered.
    pub fn raise(&self) {
        self.0.store(true, Ordering::Release);
    }

    /// Whether it was raised.
    #[must_use]
    pub fn is_raised(&self) -> bool {
        self.0.load(Ordering::Acquire)
    }

    /// The flag itself, for a solver that polls one.
    #[must_use]
    pub fn flag(&self) -> Arc<AtomicBool> {
        self.0.clone()
    }
}

/// What came of a job, and what the dispatcher then does.
#[derive(Clone, Debug, PartialEq)]
pub enum Replanned {
    /// Plan and note were written (also: marked held or retired). The report is passed on; the model rests until it changes.
    Done(Box<Report>),
    /// Plan and note were current already and are untouched. As `Done`, but not logged.
    Unchanged(Box<Report>),
    /// Given up because the stop flag was raised; nothing was written. The newest state is looked at next.
    Interrupted,
    /// The model was not there, or was no plain file. The next event or scan decides what that means.
    Vanished,
    /// The work could not be done for a reason outside the model. Logged once; the last plan stays.
    Failed {
        /// Why, as a sentence for people, escaped.
        message: String,
        /// Whether to try again by itself, with growing pauses: a full disk, a missing permission. Otherwise when the model changes.
        retry: bool,
    },
}

/// Brings plans up to date. One per worker, used by that worker's thread only.
///
/// For each job it reads the model as it is then (never what an event said), decides whether the plan answers it already, and
/// publishes. It may keep live solvers between jobs. It should look at `stop` now and then while it solves, and publish
/// nothing for a job that it gives up. A panic costs the job and the planner, which is made afresh.
pub trait Planner: Send {
    /// Does one job. `What::Replan` is asked only where a plain file stood a moment ago, `What::Retire` where none did.
    fn replan(&mut self, job: &Job, stop: &Stop) -> Replanned;
}

/// Makes planners: one per worker at the start, and one in place of each that panicked.
pub type Factory = Arc<dyn Fn() -> Box<dyn Planner> + Send + Sync>;

/// What a worker tells the dispatcher.
#[derive(Clone, Debug)]
#[expect(clippy::large_enum_variant, reason = "there are two for each job, and none is kept")]
pub enum Word {
    /// It is about to read a model whose stamp is this.
    Began {
        /// The model.
        model: ModelPath,
        /// Its stamp before reading.
        stamp: Option<Stamp>,
    },
    /// It is done.
    Ended {
        /// Who.
        worker: Worker,
        /// The model.
        model: ModelPath,
        /// Model and release before they were read, plan and note after they were written.
        sight: Sight,
        /// What came of it.
        outcome: Replanned,
    },
}

/// The workers. They end with the job in hand when the pool is dropped.
#[derive(Debug)]
pub struct Pool {
    workers: Vec<mpsc::Sender<(Job, Stop)>>,
}

impl Pool {
    /// Starts `count` workers, which report through `send`.
    ///
    /// # Errors
    /// The system has no threads left.
    pub fn start(count: usize, factory: &Factory, send: impl Fn(Word) + Clone + Send + 'static) -> io::Result<Self> {
        let start = |number| {
            let (jobs, inbox) = mpsc::channel();
            let (factory, send) = (factory.clone(), send.clone());
            thread::Builder::new()
                .name(format!("planner-{number}"))
                .spawn(move || work(Worker(number), &inbox, &factory, send))?;
            Ok(jobs)
        };
        (0..count).map(start).collect::<io::Result<_>>().map(|workers| Self { workers })
    }

    /// Gives an idle worker its next job.
    pub fn run(&self, worker: Worker, job: Job, stop: Stop) {
        // A worker's thread never ends before the pool does.
        let _ = self.workers[worker.0].send((job, stop));
    }
}

fn work(worker: Worker, inbox: &mpsc::Receiver<(Job, Stop)>, factory: &Factory, send: impl Fn(Word)) {
    let mut planner = None;
    while let Ok((job, stop)) = inbox.recv() {
        let model = job.path.clone();
        let inputs = Sight::of_inputs(&model);
        let stamp = inputs.model;
        send(Word::Began { model: model.clone(), stamp });
        let outcome = attempt(&mut planner, factory, job, stamp, &stop);
        let sight = inputs.with_outputs(&model);
        send(Word::Ended { worker, model, sight, outcome });
    }
}

/// Does one job, with a planner made now if the last one was lost.
fn attempt(
    planner: &mut Option<Box<dyn Planner>>,
    factory: &Factory,
    mut job: Job,
    stamp: Option<Stamp>,
    stop: &Stop,
) -> Replanned {
    match (job.what, stamp) {
        (What::Replan, None) => return Replanned::Vanished,
        (What::Retire, Some(_)) => job.what = What::Replan,
        _ => {}
    }
    if stop.is_raised() {
        return Replanned::Interrupted;
    }
    // The planner is put back only if it comes through: after a panic it may be in any state.
    let taken = planner.take();
    let tried = catch_unwind(AssertUnwindSafe(|| {
        let mut planner = taken.unwrap_or_else(|| factory());
        let outcome = planner.replan(&job, stop);
        (planner, outcome)
    }));
    match tried {
        Ok((back, outcome)) => {
            *planner = Some(back);
            outcome
        }
        Err(_) => Replanned::Failed {
            message: "an error inside millreeve stopped the planning of this model; the last plan stays. Please report it with the model"
                .to_owned(),
            retry: false,
        },
    }
}
