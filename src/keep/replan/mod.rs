//! One replan: from the bytes of a model to its plan and note on disk.
//!
//! What is decided here: whether the plan on disk answers the model already; where the solve starts from; what is written when there is
//! no plan. Everything it needs to know of the past is in its memory, which all workers share.

mod disk;
mod hold;
mod memory;
mod pin;
mod telling;
mod tried;
mod worths;

use std::borrow::Cow;
use std::sync::Arc;
use std::time::{Duration, Instant};

use self::disk::{Disk, OnDisk, Recorded};
use self::memory::{Known, Memory};
use self::telling::Telling;
use super::afresh::Planned;
use super::path::Form;
use super::pool::{Factory, Job, Planner, Replanned, Stop, What};
use super::report::Report;
use super::settings::Settings;
use super::stamp::Stamp;
use super::workers::{Limits, Workers};
use crate::edits::{Edit, Kept, Renames, compare, compare_renamed};
use crate::lp::{Program, build};
use crate::model::Model;
use crate::model::meaning::Meaning;
use crate::model::read::{self, FileProblem, Traced, Writing};
use crate::plan::note::{Reckoning, Trouble, Verdict};
use crate::plan::text::{self, marked};
use crate::plan::{self, Plan, Standing};
use crate::solver::desk::Desk;
use crate::solver::message::{Account, Answer, Optimum, Outcome, Start};
use crate::solver::stop;
use crate::solver::worker::{Solver, Worker};
use crate::store::publish::Finished;
use crate::store::{Record, StoreError};

/// Memory for live instances where the settings name no limit, in bytes.
const MEMORY: u64 = 2 << 30;

/// Makes planners that replan for real, all with one memory. They solve in the thread that they replan in, and a crash of the solver is the
/// end of the process.
#[must_use]
pub fn factory(settings: &Settings) -> Factory {
    let live = usize::try_from(live_share(settings)).unwrap_or(usize::MAX);
    planners(settings, move || Box::new(Worker::new(live)))
}

/// The same, with a worker process for each: started as `workers` says, which takes the limits of [`limits`].
#[must_use]
pub fn factory_apart(settings: &Settings, workers: Workers) -> Factory {
    planners(settings, move || Box::new(workers.one_more()))
}

/// What one of the workers may take that the settings ask for.
#[must_use]
pub fn limits(settings: &Settings) -> Limits {
    Limits::for_live(live_share(settings))
}

/// Memory for the live instances of one worker, in bytes.
fn live_share(settings: &Settings) -> u64 {
    settings.memory_limit.unwrap_or(MEMORY) / u64::try_from(settings.workers).unwrap_or(u64::MAX).max(1)
}

fn planners(settings: &Settings, solver: impl Fn() -> Box<dyn Solver> + Send + Sync + 'static) -> Factory {
    let memory = Arc::new(Memory::default());
    let time_limit = settings.time_limit;
    Arc::new(move || Box::new(Replanner::new(memory.clone(), solver(), time_limit)))
}

/// Replans models, with live solvers of its own.
struct Replanner {
    memory: Arc<Memory>,
    desk: Desk<Box<dyn Solver>>,
    /// Tells this planner's solver from those of other workers.
    number: usize,
}

/// Why a job came to nothing.
enum Stopped {
    Interrupted,
    Failed(StoreError),
    Trouble(String),
}

impl From<StoreError> for Stopped {
    fn from(error: StoreError) -> Self {
        Self::Failed(error)
    }
}

/// A model that was read, on its way to a plan.
struct Read {
    bytes: Vec<u8>,
    traced: Traced,
    model: Model,
    meaning: Meaning,
}

impl Planner for Replanner {
    fn replan(&mut self, job: &Job, stop: &Stop) -> Replanned {
        let begun = Instant::now();
        let stamp = Stamp::of_model(&job.path.full());
        let done = match job.what {
            What::Retire => self.retire(job),
            What::Replan => match read::writing(&job.path.full()) {
                Ok(writing) => {
                    let job = job.lying(if writing.is_in_parts() { Form::Folder } else { Form::File });
                    self.bring_up_to_date(&job, (writing, stamp), stop, begun)
                }
                Err(FileProblem::Missing(_) | FileProblem::Link(_) | FileProblem::NotAFile { .. }) => {
                    return Replanned::Vanished;
                }
                Err(FileProblem::TooLarge(_)) => self.hold_for(job, &read::too_large(&job.path.seen())),
                Err(problem) => return Replanned::Failed { message: problem.to_string(), retry: true },
            },
        };
        match done {
            Ok(Told { mut report, changed }) => {
                report.milliseconds.all = milliseconds(begun.elapsed());
                if changed { Replanned::Done(report) } else { Replanned::Unchanged(report) }
            }
            Err(Stopped::Interrupted) => Replanned::Interrupted,
            Err(Stopped::Failed(error)) => Replanned::Failed { message: error.to_string(), retry: error.may_pass() },
            Err(Stopped::Trouble(message)) => Replanned::Failed { message, retry: false },
        }
    }
}

/// What is told of a job, and whether anything was written.
struct Told {
    report: Box<Report>,
    changed: bool,
}

impl Replanner {
    fn new(memory: Arc<Memory>, solver: Box<dyn Solver>, time_limit: Duration) -> Self {
        let number = memory.number();
        Self { memory, desk: Desk::new(solver, time_limit), number }
    }

    fn bring_up_to_date(
        &mut self,
        job: &Job,
        (writing, stamp): (Writing, Option<Stamp>),
        stop: &Stop,
        begun: Instant,
    ) -> Result<Told, Stopped> {
        let disk = Disk::of(&job.path);
        let records = self.memory.records(&job.state)?;
        let recorded = Recorded::of(&job.path, &records);
        let at_hand = self.memory.at_hand(&job.path);
        // The bytes of the last plan: nothing needs to be parsed to know that it stands.
        if at_hand.as_ref().is_none_or(|known| writing.is(&known.bytes))
            && let Some(record) = recorded.get()
            && writing.is(&record.source)
            && text::is_current(&record.plan)
        {
            let finished = disk.finish(record)?;
            if finished != Finished::AnotherPlan {
                let report = Telling::of(job).standing(&record.plan);
                let changed = self.heed_release(job, record)? || finished == Finished::NoteWritten;
                return Ok(Told { report, changed });
            }
        }
        let path = job.path.seen();
        let again = at_hand.and_then(|known| writing.read_again(&path, known.writing()));
        let whole = || writing.read_tracing(&path);
        let (model, traced) = match again.map_or_else(whole, Ok) {
            Ok(read) => read,
            Err(faults) => {
                // What was read may be half of a save that has begun since: then there is no fault, but another look to be had.
                if Stamp::of_model(&job.path.full()) != stamp {
                    return Err(Stopped::Interrupted);
                }
                heed(stop)?;
                return self.hold_for(job, &faults);
            }
        };
        let meaning = Meaning::of(&model);
        let read = Read { bytes: writing.into_bytes(), traced, model, meaning };
        heed(stop)?;
        let known = self.memory.known(&job.path, || recorded.get());
        let on_disk = disk.plan()?;
        if let Some(told) = self.keep_standing(job, &read, known.as_deref(), &recorded, &on_disk)? {
            return Ok(told);
        }
        drop(recorded);
        let read_in = begun.elapsed();
        let mut told = self.solve(job, read, known, on_disk, stop)?;
        told.report.milliseconds.read = milliseconds(read_in);
        Ok(told)
    }

    /// Where a plan that answers this model exists already, on disk or in the record, nothing is solved.
    fn keep_standing(
        &mut self,
        job: &Job,
        read: &Read,
        known: Option<&Known>,
        recorded: &Recorded<'_>,
        on_disk: &OnDisk,
    ) -> Result<Option<Told>, Stopped> {
        let answers = read.meaning.to_string();
        let plan_text = match on_disk {
            OnDisk::Good(found) if found.head.answers == read.meaning => found.text.clone(),
            // The record, of which this is a copy, is about another meaning too.
            _ if known.is_some_and(|known| known.plan.answers != read.meaning) => return Ok(None),
            _ => match recorded.get() {
                Some(record) if record.answers == answers && !record.plan.is_empty() => record.plan.clone(),
                _ => return Ok(None),
            },
        };
        if !text::follows_rules(&plan_text) {
            return Ok(None);
        }
        let record = recorded.get();
        let was = text::read(&plan_text).ok();
        let Ok(plan_text) = marked(&plan_text, &Standing::Current) else { return Ok(None) };
        let Ok(now) = text::read(&plan_text) else { return Ok(None) };
        let edits = known.map(|known| compare(&known.model, &read.model)).unwrap_or_default();
        let there = on_disk.plan().or_else(|| was.as_ref().map(|written| &written.plan));
        let mended = there.is_some_and(|plan| plan.standing != Standing::Current);
        // A plan that came with its model, or was made by a run whose record is lost, is news after the last one that is known.
        let last = known.map(|known| &known.plan).filter(|plan| plan.answers != read.meaning);
        let before = last.or(there);
        let telling = Telling::of(job).edited(&edits, &[]).model(Some(&read.model));
        let recorded = record.filter(|record| record.plan == plan_text && record.source == read.bytes);
        // The note on disk still holds unless there is something new to tell.
        let disk = Disk::of(&job.path);
        let note = match (disk.note(), recorded) {
            (Some(note), _)
                if edits.is_empty() && !mended && plan::note::speaks_of(&note) == Some(now.seal.as_str()) =>
            {
                note
            }
            // A crash or a full disk kept it from its place when the plan was made.
            (_, Some(recorded)) if !mended => recorded.note.clone(),
            _ => telling.note(before, Verdict::Planned(&now.plan), Some(&now.seal), None),
        };
        let note = pin::told_anew(job, note, &now.plan, &read.model);
        let record = Record {
            model: job.path.relative().to_owned(),
            answers,
            source: read.bytes.clone(),
            basis: record
                .filter(|record| record.answers == now.plan.answers.to_string())
                .and_then(|record| record.basis.clone()),
            plan: plan_text,
            note,
            cold_pivots: record.and_then(|record| record.cold_pivots),
        };
        self.memory.forget(&job.path);
        let written = disk.publish(&self.memory.records(&job.state)?, &record)?;
        let report = telling.planned(before, &now.plan, None);
        Ok(Some(Told { report, changed: written }))
    }

    fn solve(
        &mut self,
        job: &Job,
        read: Read,
        known: Option<Arc<Known>>,
        on_disk: OnDisk,
        stop: &Stop,
    ) -> Result<Told, Stopped> {
        let program = Arc::new(build(&read.model));
        let renames = known.as_ref().map(|known| Renames::between(&known.model, &read.model)).unwrap_or_default();
        let edits =
            known.as_ref().map(|known| compare_renamed(&known.model, &read.model, &renames)).unwrap_or_default();
        let known = if renames.is_empty() { known } else { known.map(|known| Arc::new(known.renamed(&renames))) };
        let solver_stop = stop::Stop::watching(stop.flag());
        let whole = !renames.is_empty() || !self.memory.solved_last(&job.path, self.number);
        let answer = self.ask(job, (&read.bytes, &program), whole, known.as_deref(), &solver_stop)?;
        self.memory.solves(&job.path, self.number);
        heed(stop)?;
        let Answer { outcome, account } = answer;
        let reckoning = |optimum: Option<&Optimum>| reckoning(known.as_deref(), &edits, &account, optimum);
        match outcome {
            Outcome::Optimal(optimum) => {
                let worths =
                    worths::of_each(known.as_deref(), &read.model, &edits, optimum.aim, &mut self.desk, &solver_stop);
                let reckoning = reckoning(Some(&optimum));
                self.publish(job, read, program, *optimum, Solved { known, on_disk, edits, worths, reckoning, account })
            }
            Outcome::Infeasible(conflict) => self.hold(
                job,
                Some((&read, &edits)),
                Trouble::Infeasible(&conflict),
                Some((&reckoning(None), &account)),
            ),
            Outcome::Unbounded(growth) => {
                self.hold(job, Some((&read, &edits)), Trouble::Unbounded(&growth), Some((&reckoning(None), &account)))
            }
            Outcome::Undecided(why) => {
                self.hold(job, Some((&read, &edits)), Trouble::Undecided(&why), Some((&reckoning(None), &account)))
            }
            Outcome::Interrupted => Err(Stopped::Interrupted),
            Outcome::Forgotten => {
                Err(Stopped::Trouble("the solver forgot the model twice; the last plan stays".to_owned()))
            }
            Outcome::Lost(how) => {
                self.hold(job, Some((&read, &edits)), Trouble::Undecided(&tried::in_vain(&how)), None)
            }
        }
    }

    fn publish(
        &mut self,
        job: &Job,
        mut read: Read,
        program: Arc<Program>,
        optimum: Optimum,
        solved: Solved,
    ) -> Result<Told, Stopped> {
        let Planned { plan, text: plan_text } = Planned::of(&read.model, read.meaning, &program, &optimum)
            .map_err(|error| Stopped::Trouble(format!("{error}; the last plan stays")))?;
        let seal = text::seal(&plan_text).map(str::to_owned);
        let on_disk = &solved.on_disk;
        let before = solved.known.as_ref().map(|known| &known.plan).or_else(|| on_disk.plan());
        let before = before.map(|plan| match on_disk.standing() {
            Some(standing) if standing != plan.standing => Cow::Owned(Plan { standing, ..plan.clone() }),
            _ => Cow::Borrowed(plan),
        });
        let before = before.as_deref();
        let telling = Telling::of(job).edited(&solved.edits, &solved.worths).model(Some(&read.model));
        let note = telling.note(before, Verdict::Planned(&plan), seal.as_deref(), Some(&solved.reckoning));
        let record = Record {
            model: job.path.relative().to_owned(),
            answers: plan.answers.to_string(),
            source: std::mem::take(&mut read.bytes),
            basis: Some(optimum.basis.named(&program)),
            plan: plan_text,
            note,
            cold_pivots: solved.account.cold_pivots,
        };
        let begun = Instant::now();
        self.memory.forget(&job.path);
        let changed = Disk::of(&job.path).publish(&self.memory.records(&job.state)?, &record)?;
        let mut report = telling.planned(before, &plan, Some((&solved.reckoning, &solved.account)));
        report.milliseconds.write = milliseconds(begun.elapsed());
        let Record { source: bytes, basis, cold_pivots, .. } = record;
        let Read { traced, model, .. } = read;
        self.memory.keep(&job.path, Known { bytes, traced, model, program, plan, basis, cold_pivots });
        Ok(Told { report, changed })
    }
}

/// What a solve was about and how it went.
struct Solved {
    known: Option<Arc<Known>>,
    on_disk: OnDisk,
    edits: Vec<Edit>,
    worths: Vec<Option<f64>>,
    reckoning: Reckoning,
    account: Account,
}

fn reckoning(known: Option<&Known>, edits: &[Edit], account: &Account, optimum: Option<&Optimum>) -> Reckoning {
    let mut kinds: Vec<_> = edits.iter().map(|edit| edit.kind).collect();
    kinds.sort();
    kinds.dedup();
    let expected = match known {
        Some(known) if known.basis.is_some() => known.last_plan().kept(edits).expected(),
        // The plan was found, not made; the solver may still know an older version of the model to start from.
        _ if account.primal_infeasible.is_some() => Kept::Neither.expected(),
        _ => Start::Cold.word(),
    };
    Reckoning {
        kinds,
        expected: expected.to_owned(),
        taken: account.start,
        primal_infeasible: account.primal_infeasible,
        dual_infeasible: account.dual_infeasible,
        by_name: account.by_name,
        pivots: account.pivots,
        exact_pivots: account.exact_pivots,
        detours: account.detours.clone(),
        worst: optimum.map_or(0.0, |optimum| optimum.proof.worst()),
    }
}

fn milliseconds(time: Duration) -> f64 {
    // Microseconds are as fine as anyone reads.
    (time.as_secs_f64() * 1e6).round() / 1e3
}

/// Gives up where that was asked for. Nothing has been written up to here.
fn heed(stop: &Stop) -> Result<(), Stopped> {
    if stop.is_raised() { Err(Stopped::Interrupted) } else { Ok(()) }
}
