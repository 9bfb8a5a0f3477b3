//! Putting a plan and its note in place so that they always agree: record, then plan, then note.

use std::io::Read;
use std::path::Path;

use super::atomic::{self, Durability, Written};
use super::error::StoreError;
use super::state::{Record, Records};

/// A file that Millreeve writes, and how it knows its own.
#[derive(Clone, Copy, Debug)]
pub struct Output<'a> {
    /// The watched folder, below which no link is followed.
    pub root: &'a Path,
    /// Where it lies, below that.
    pub path: &'a Path,
    /// Whether a file that begins so is one of ours, and may be replaced.
    pub ours: fn(&[u8]) -> bool,
}

impl Output<'_> {
    /// Puts a text there, whole or not at all.
    ///
    /// # Errors
    /// As [`atomic::write_below`].
    pub fn put(&self, text: &str) -> Result<Written, StoreError> {
        atomic::write_below(self.root, self.path, text.as_bytes(), self.ours, Durability::Synced)
    }
}

/// The two files written for a model.
#[derive(Clone, Copy, Debug)]
pub struct Outputs<'a> {
    /// The plan.
    pub plan: Output<'a>,
    /// The note about it.
    pub note: Output<'a>,
}

/// What a publication came to.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Published {
    /// What became of the plan.
    pub plan: Written,
    /// What became of the note.
    pub note: Written,
}

/// What finishing an interrupted publication came to.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Finished {
    /// Plan and note agree.
    Agreed,
    /// The note was missing or spoke of another plan; it is written.
    NoteWritten,
    /// The plan on disk is missing or is not the one remembered: the record says nothing about it.
    AnotherPlan,
}

/// Publishes what a record holds. May be repeated: what is in place already is not touched.
///
/// The record comes first: should the process die in between, the next start finds in it the note that belongs to the plan on disk.
///
/// # Errors
/// The first write that failed. Before the plan is in place the old pair stands; after it, [`finish`] or another call completes it.
pub fn publish(records: &Records, record: &Record, outputs: &Outputs<'_>) -> Result<Published, StoreError> {
    records.save(record)?;
    let plan = outputs.plan.put(&record.plan)?;
    let note = outputs.note.put(&record.note)?;
    Ok(Published { plan, note })
}

/// Completes a publication that was interrupted between plan and note.
///
/// # Errors
/// The note cannot be written.
pub fn finish(record: &Record, outputs: &Outputs<'_>) -> Result<Finished, StoreError> {
    if !holds(&outputs.plan, &record.plan) {
        return Ok(Finished::AnotherPlan);
    }
    if holds(&outputs.note, &record.note) {
        return Ok(Finished::Agreed);
    }
    match outputs.note.put(&record.note)? {
        Written::Same => Ok(Finished::Agreed),
        Written::New | Written::Replaced => Ok(Finished::NoteWritten),
    }
}

/// Whether a file holds exactly this text. One that cannot be read does not; whoever then writes there is told why.
fn holds(output: &Output<'_>, text: &str) -> bool {
    let mut there = Vec::with_capacity(text.len() + 1);
    let most = u64::try_from(text.len()).unwrap_or(u64::MAX).saturating_add(1);
    let read = atomic::open_plain(output.path).and_then(|file| file.take(most).read_to_end(&mut there));
    read.is_ok() && there == text.as_bytes()
}

#[cfg(test)]
#[expect(clippy::disallowed_methods, reason = "tests lay out files as an interrupted process would")]
mod tests {
    use std::fs;

    use super::*;

    fn plan_is_ours(head: &[u8]) -> bool {
        head.starts_with(b"# plan")
    }

    fn note_is_ours(head: &[u8]) -> bool {
        head.starts_with(b"# note")
    }

    fn record(number: u32) -> Record {
        Record {
            model: "m.model.toml".into(),
            plan: format!("# plan {number}\n"),
            note: format!("# note {number}\n"),
            ..Record::default()
        }
    }

    #[test]
    fn a_pair_is_published_once_and_an_interrupted_one_is_finished() {
        let folder = tempfile::tempdir().unwrap();
        let records = Records::open(folder.path()).unwrap();
        let [plan, note] = ["m.plan.toml", "m.note.md"].map(|name| folder.path().join(name));
        let outputs = Outputs {
            plan: Output { root: folder.path(), path: &plan, ours: plan_is_ours },
            note: Output { root: folder.path(), path: &note, ours: note_is_ours },
        };
        let published = |plan, note| Published { plan, note };
        assert_eq!(publish(&records, &record(1), &outputs).unwrap(), published(Written::New, Written::New));
        assert_eq!(publish(&records, &record(1), &outputs).unwrap(), published(Written::Same, Written::Same));
        assert_eq!(finish(&record(1), &outputs).unwrap(), Finished::Agreed);

        // Killed before the plan was in place: the old pair stands, and the record says nothing about it.
        records.save(&record(2)).unwrap();
        let remembered = records.load(Path::new("m.model.toml")).unwrap();
        assert_eq!(finish(&remembered, &outputs).unwrap(), Finished::AnotherPlan);
        assert_eq!(fs::read_to_string(&note).unwrap(), "# note 1\n");

        // Killed between plan and note: the note follows.
        fs::write(&plan, &remembered.plan).unwrap();
        assert_eq!(finish(&remembered, &outputs).unwrap(), Finished::NoteWritten);
        assert_eq!(fs::read_to_string(&note).unwrap(), "# note 2\n");
        fs::remove_file(&note).unwrap();
        assert_eq!(finish(&remembered, &outputs).unwrap(), Finished::NoteWritten);
        fs::remove_file(&plan).unwrap();
        assert_eq!(finish(&remembered, &outputs).unwrap(), Finished::AnotherPlan);
    }

    #[test]
    fn a_foreign_note_stops_nothing_but_itself() {
        let folder = tempfile::tempdir().unwrap();
        let records = Records::open(folder.path()).unwrap();
        let [plan, note] = ["m.plan.toml", "m.note.md"].map(|name| folder.path().join(name));
        fs::write(&note, "minutes of a meeting\n").unwrap();
        let outputs = Outputs {
            plan: Output { root: folder.path(), path: &plan, ours: plan_is_ours },
            note: Output { root: folder.path(), path: &note, ours: note_is_ours },
        };
        assert!(matches!(publish(&records, &record(1), &outputs), Err(StoreError::NotOurs { .. })));
        assert_eq!(fs::read_to_string(&note).unwrap(), "minutes of a meeting\n");
        assert_eq!(fs::read_to_string(&plan).unwrap(), record(1).plan);
    }
}
