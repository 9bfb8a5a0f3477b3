//! The plan and the note as they lie on disk.

use std::cell::OnceCell;
use std::io;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use rustix::io::Errno;

use crate::keep::path::ModelPath;
use crate::plan::text::{self, Head, is_ours};
use crate::plan::{Plan, Standing};
use crate::store::publish::{self, Finished};
use crate::store::{Output, Outputs, Record, Records, Step, StoreError, Written, reading};

/// Where the plan and the note of a model lie.
pub(super) struct Disk {
    root: Arc<Path>,
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
        Self { root: path.shared_root(), plan: path.plan(), note: path.note() }
    }

    fn outputs(&self) -> Outputs<'_> {
        let output = |path| Output { root: &self.root, path, ours: is_ours };
        Outputs { plan: output(&self.plan), note: output(&self.note) }
    }

    /// The plan on disk, if it can be gone by. What is no plain file or no text counts as nothing; writing will say why.
    ///
    /// # Errors
    /// It cannot be read now: whether it is a good plan, to be kept or marked, is not known.
    pub(super) fn plan(&self) -> Result<OnDisk, StoreError> {
        let text = match reading::text(&self.plan) {
            Err(error) if !says_what_is_there(&error) => return Err(StoreError::failed(Step::Look, &self.plan)(error)),
            text => text.ok(),
        };
        let head = text.as_deref().and_then(|text| text::read_head(text).ok()).filter(|head| head.sealed);
        Ok(match (text, head) {
            (Some(text), Some(head)) => OnDisk::Good(Box::new(Found { head, text, plan: OnceCell::new() })),
            _ => OnDisk::Nothing,
        })
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
        self.outputs().plan.put(text)
    }

    pub(super) fn write_note(&self, text: &str) -> Result<Written, StoreError> {
        self.outputs().note.put(text)
    }
}

/// Whether a file was not read because of what lies in its place, or because nothing does; not because the system could not just now.
fn says_what_is_there(error: &io::Error) -> bool {
    let Some(number) = error.raw_os_error() else { return true };
    // No such file, a link, a socket, a file where a folder should be.
    [Errno::NOENT, Errno::LOOP, Errno::NXIO, Errno::NOTDIR].iter().any(|errno| errno.raw_os_error() == number)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_plan_that_cannot_be_read_just_now_is_not_taken_for_none() {
        for passing in [Errno::IO, Errno::ACCESS, Errno::MFILE, Errno::NOMEM, Errno::STALE] {
            assert!(!says_what_is_there(&passing.into()), "{passing:?}");
        }
        let no_text = [io::ErrorKind::InvalidData, io::ErrorKind::InvalidInput, io::ErrorKind::FileTooLarge];
        let lasting = [Errno::NOENT, Errno::LOOP].map(io::Error::from).into_iter().chain(no_text.map(io::Error::from));
        assert!(lasting.into_iter().all(|error| says_what_is_there(&error)));
    }
}
