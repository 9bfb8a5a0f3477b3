//! The plan and the note as they lie on disk.

use std::cell::OnceCell;
use std::path::{Path, PathBuf};

use crate::keep::path::ModelPath;
use crate::plan::text::{self, Head, is_ours};
use crate::plan::{Plan, Standing};
use crate::store::publish::{self, Finished};
use crate::store::{Durability, Output, Outputs, Record, Records, StoreError, Written, atomic, reading};

/// Where the plan and the note of a model lie.
pub(super) struct Disk {
    plan: PathBuf,
    note: PathBuf,
}

/// What lies where the plan should.
pub(super) enum OnDisk {
    /// A whole plan of ours, unharmed.
    Good(Box<Found>),
    /// Nothing, or nothing that can be gone by: edited, damaged, of a newer version, not ours.
    Nothing,
}

/// The record of a model, read when it is first asked for: an edit of a model that is in memory does without.
pub(super) struct Recorded<'a> {
    records: &'a Records,
    model: &'a Path,
    record: OnceCell<Option<Record>>,
}

impl<'a> Recorded<'a> {
    pub(super) fn of(path: &'a ModelPath, records: &'a Records) -> Self {
        Self { records, model: path.relative(), record: OnceCell::new() }
    }

    pub(super) fn get(&self) -> Option<&Record> {
        self.record.get_or_init(|| self.records.load(self.model).ok()).as_ref()
    }
}

/// A plan on disk. Its tables are read only if somebody asks for them.
pub(super) struct Found {
    pub(super) head: Head,
    pub(super) text: String,
    plan: OnceCell<Option<Plan>>,
}

impl Found {
    /// The plan it says.
    pub(super) fn plan(&self) -> Option<&Plan> {
        self.plan.get_or_init(|| text::read(&self.text).ok().map(|written| written.plan)).as_ref()
    }
}

impl OnDisk {
    pub(super) fn plan(&self) -> Option<&Plan> {
        match self {
            Self::Good(found) => found.plan(),
            Self::Nothing => None,
        }
    }

    pub(super) fn standing(&self) -> Option<Standing> {
        match self {
            Self::Good(found) => Some(found.head.standing.clone()),
            Self::Nothing => None,
        }
    }
}

impl Disk {
    pub(super) fn of(path: &ModelPath) -> Self {
        Self { plan: path.plan(), note: path.note() }
    }

    fn outputs(&self) -> Outputs<'_> {
        Outputs { plan: Output { path: &self.plan, ours: is_ours }, note: Output { path: &self.note, ours: is_ours } }
    }

    /// The plan on disk, if it can be gone by. What cannot be read counts as nothing; writing will say why.
    pub(super) fn plan(&self) -> OnDisk {
        let text = reading::text(&self.plan).ok();
        let head = text.as_deref().and_then(|text| text::read_head(text).ok()).filter(|head| head.sealed);
        match (text, head) {
            (Some(text), Some(head)) => OnDisk::Good(Box::new(Found { head, text, plan: OnceCell::new() })),
            _ => OnDisk::Nothing,
        }
    }

    /// The note on disk, if it is ours.
    pub(super) fn note(&self) -> Option<String> {
        reading::text(&self.note).ok().filter(|text| is_ours(text.as_bytes()))
    }

    /// Whether the plan is just what a record says; if so, the note is made what the record says too.
    pub(super) fn finish(&self, record: &Record) -> Result<Finished, StoreError> {
        publish::finish(record, &self.outputs())
    }

    /// Records and publishes plan and note. Answers whether anything was written.
    pub(super) fn publish(&self, records: &Records, record: &Record) -> Result<bool, StoreError> {
        let published = publish::publish(records, record, &self.outputs())?;
        Ok(published.plan != Written::Same || published.note != Written::Same)
    }

    pub(super) fn write_plan(&self, text: &str) -> Result<Written, StoreError> {
        atomic::write(&self.plan, text.as_bytes(), is_ours, Durability::Synced)
    }

    pub(super) fn write_note(&self, text: &str) -> Result<Written, StoreError> {
        atomic::write(&self.note, text.as_bytes(), is_ours, Durability::Synced)
    }
}
