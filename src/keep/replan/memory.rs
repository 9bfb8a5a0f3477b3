//! What all workers know of the models: the last accepted model, its program, basis and plan.
//!
//! A copy of what the records hold, kept so that a replan need not read and build the old model again.

use std::collections::BTreeMap;
use std::path::Path;
use std::sync::atomic::{AtomicUsize, Ordering};
use std::sync::{Arc, Mutex, MutexGuard, PoisonError};

use crate::edits::{LastPlan, Renames};
use crate::keep::path::ModelPath;
use crate::lp::{Key, Program, build};
use crate::model::read::{Traced, Writing};
use crate::model::{Model, Name};
use crate::plan::last::last_plan;
use crate::plan::{Plan, text};
use crate::solver::basis::NamedBasis;
use crate::solver::message::Last;
use crate::store::{Record, Records, StoreError};

/// How many models are kept in memory; the others are read from their records when they are edited.
const KEPT: usize = 256;

/// The last accepted model and what was planned for it.
pub(super) struct Known {
    pub(super) bytes: Vec<u8>,
    pub(super) traced: Traced,
    pub(super) model: Model,
    pub(super) program: Arc<Program>,
    pub(super) plan: Plan,
    pub(super) basis: Option<NamedBasis>,
    pub(super) cold_pivots: Option<usize>,
}

impl Known {
    /// What a record tells, if what it holds can still be read.
    fn from(record: &Record) -> Option<Self> {
        let writing = Writing::of(record.source.clone());
        let (model, traced) = writing.read_tracing(&record.model).ok()?;
        let plan = text::read(&record.plan).ok()?.plan;
        let (bytes, basis, program) = (writing.into_bytes(), record.basis.clone(), Arc::new(build(&model)));
        Some(Self { bytes, traced, model, program, plan, basis, cold_pivots: record.cold_pivots })
    }

    /// The bytes that the model was read from, where what they say lies in them, and the model.
    pub(super) fn writing(&self) -> (&[u8], &Traced, &Model) {
        (&self.bytes, &self.traced, &self.model)
    }

    /// What the solver can start from.
    pub(super) fn last(&self) -> Option<Last> {
        let basis = self.basis.clone()?;
        Some(Last { program: Program::clone(&self.program), basis, cold_pivots: self.cold_pivots })
    }

    /// The same under the names that things have now.
    pub(super) fn renamed(&self, renames: &Renames) -> Self {
        let model = renames.applied(&self.model);
        let basis = self.basis.as_ref().map(|basis| basis.renamed(|key| renamed_key(renames, key)));
        let program = Arc::new(build(&model));
        let mut plan = self.plan.clone();
        rename(&mut plan.resources, &renames.resources, |planned| &planned.name, |planned, name| planned.name = name);
        rename(&mut plan.activities, &renames.activities, |planned| &planned.name, |planned, name| planned.name = name);
        rename(&mut plan.limits, &renames.limits, |planned| &planned.name, |planned, name| planned.name = name);
        // Under the new names the text says something else.
        let (bytes, traced) = (Vec::new(), Traced::default());
        Self { bytes, traced, model, program, plan, basis, cold_pivots: self.cold_pivots }
    }

    /// What mattered in the plan.
    pub(super) fn last_plan(&self) -> LastPlan {
        self.basis.as_ref().map(|basis| last_plan(&self.model.horizon, &self.program, basis)).unwrap_or_default()
    }
}

fn rename<T>(list: &mut [T], names: &BTreeMap<Name, Name>, name: fn(&T) -> &Name, set: fn(&mut T, Name)) {
    for planned in list.iter_mut() {
        if let Some(new) = names.get(name(planned)).cloned() {
            set(planned, new);
        }
    }
    list.sort_by(|a, b| name(a).cmp(name(b)));
}

/// A column's or row's key after renaming; `None` where its thing kept its name.
fn renamed_key(renames: &Renames, key: &Key) -> Option<Key> {
    let mut parts = key.as_str().splitn(3, '.');
    let (table, name, rest) = (parts.next()?, parts.next()?, parts.next());
    let names = match table {
        "resources" => &renames.resources,
        "activities" => &renames.activities,
        "materials" => &renames.materials,
        _ => &renames.limits,
    };
    let name = names.get(name)?;
    let rest = rest.map(|rest| format!(".{rest}")).unwrap_or_default();
    Some(Key::new(&format!("{table}.{name}{rest}")))
}

/// Shared by all workers.
#[derive(Default)]
pub(super) struct Memory {
    inner: Mutex<Inner>,
    workers: AtomicUsize,
}

#[derive(Default)]
struct Inner {
    known: BTreeMap<ModelPath, (u64, Arc<Known>)>,
    solved_last: BTreeMap<ModelPath, usize>,
    records: BTreeMap<Arc<Path>, Records>,
    clock: u64,
}

impl Memory {
    /// A number for one more worker.
    pub(super) fn number(&self) -> usize {
        self.workers.fetch_add(1, Ordering::Relaxed)
    }

    fn inner(&self) -> MutexGuard<'_, Inner> {
        // What is in memory is whole after every statement, so a panic elsewhere does not spoil it.
        self.inner.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// The records of a state folder, opened once.
    pub(super) fn records(&self, state: &Arc<Path>) -> Result<Records, StoreError> {
        if let Some(records) = self.inner().records.get(state) {
            return Ok(records.clone());
        }
        let records = Records::open(state)?;
        self.inner().records.insert(state.clone(), records.clone());
        Ok(records)
    }

    /// What is known of a model: from memory, else from its record, which is asked for only then.
    pub(super) fn known<'r>(
        &self,
        path: &ModelPath,
        record: impl FnOnce() -> Option<&'r Record>,
    ) -> Option<Arc<Known>> {
        self.at_hand(path).or_else(|| Known::from(record()?).map(Arc::new))
    }

    /// What is in memory of a model. It is what the model's record says: whoever is about to write another one first makes this forgotten.
    pub(super) fn at_hand(&self, path: &ModelPath) -> Option<Arc<Known>> {
        self.inner().known.get(path).map(|(_, known)| known.clone())
    }

    /// Keeps what was planned for a model and recorded, in place of what was known.
    pub(super) fn keep(&self, path: &ModelPath, known: Known) {
        let mut inner = self.inner();
        inner.clock += 1;
        let clock = inner.clock;
        inner.known.insert(path.clone(), (clock, Arc::new(known)));
        if inner.known.len() > KEPT
            && let Some(oldest) = inner.known.iter().min_by_key(|(_, (clock, _))| *clock).map(|(path, _)| path.clone())
        {
            inner.known.remove(&oldest);
        }
    }

    /// Forgets a model; its record, if it has one, is read again at its next edit.
    pub(super) fn forget(&self, path: &ModelPath) {
        self.inner().known.remove(path);
    }

    /// Whether this worker's solver was the last to solve a model.
    pub(super) fn solved_last(&self, path: &ModelPath, worker: usize) -> bool {
        self.inner().solved_last.get(path) == Some(&worker)
    }

    /// This worker's solver has just solved a model.
    pub(super) fn solves(&self, path: &ModelPath, worker: usize) {
        self.inner().solved_last.insert(path.clone(), worker);
    }
}
