//! Keeping a note true about the release when nothing but the release has changed.

use super::disk::Disk;
use super::{Replanner, Stopped};
use crate::keep::pinned::Pinned;
use crate::keep::pool::Job;
use crate::model::Model;
use crate::model::read::Writing;
use crate::plan::note::{self, ReleaseTold};
use crate::plan::{Plan, text};
use crate::store::Record;

impl Replanner {
    /// Tells in the note of a plan that stands of a release that was pinned, changed or withdrawn since. Answers whether it had to.
    pub(super) fn heed_release(&self, job: &Job, record: &Record) -> Result<bool, Stopped> {
        let pinned = Pinned::look(&job.path.release());
        if !is_news(&record.note, pinned.as_ref()) {
            return Ok(false);
        }
        let Ok(written) = text::read(&record.plan) else { return Ok(false) };
        let model = Writing::of(record.source.clone()).read(job.path.relative()).ok().map(|reading| reading.model);
        let told = pinned.as_ref().map(Pinned::told);
        let note = note::with_release(&record.note, told, &written.plan, model.as_ref());
        let record = Record { note, ..record.clone() };
        Ok(Disk::of(&job.path).publish(&self.memory.records(&job.state)?, &record)?)
    }
}

/// `note`, which speaks of `plan`, true about the release as it is now.
pub(super) fn told_anew(job: &Job, note: String, plan: &Plan, model: &Model) -> String {
    let pinned = Pinned::look(&job.path.release());
    if is_news(&note, pinned.as_ref()) {
        note::with_release(&note, pinned.as_ref().map(Pinned::told), plan, Some(model))
    } else {
        note
    }
}

fn is_news(note: &str, pinned: Option<&Pinned>) -> bool {
    note::release_told(note) != pinned.map(Pinned::told).map(|ReleaseTold { mark, .. }| mark)
}
