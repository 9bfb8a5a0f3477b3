//! What is done where there is no plan: the last good one stays, marked, and the note says why.

use super::disk::{Disk, OnDisk};
use super::telling::Telling;
use super::{Read, Replanner, Stopped, Told};
use crate::edits::Edit;
use crate::keep::path::Form;
use crate::keep::pool::Job;
use crate::model::{Faults, read};
use crate::plan::note::{Reckoning, Trouble, Verdict};
use crate::plan::text::{self, marked};
use crate::plan::{self, Standing};
use crate::solver::message::Account;
use crate::store::{Record, Written};

impl Replanner {
    pub(super) fn hold_for(&mut self, job: &Job, faults: &Faults) -> Result<Told, Stopped> {
        let mut told = self.hold(job, None, Trouble::Faults(faults), None)?;
        told.report.faults = faults.reported.iter().map(Into::into).collect();
        Ok(told)
    }

    /// There is no plan for the model as it is: the last good one stays, marked as held, and the note says why.
    pub(super) fn hold(
        &mut self,
        job: &Job,
        read: Option<(&Read, &[Edit])>,
        trouble: Trouble<'_>,
        solved: Option<(&Reckoning, &Account)>,
    ) -> Result<Told, Stopped> {
        let model = read.map(|(read, _)| &read.model);
        let reason = plan::note::reason(trouble, model);
        let disk = Disk::of(&job.path);
        let on_disk = disk.plan()?;
        let records = self.memory.records(&job.state)?;
        let record = records.load(job.path.relative()).ok();
        // A plan that lies there unharmed stays; one that was edited or lost comes back from the record.
        let last_good = match &on_disk {
            OnDisk::Good(found) => Some(found.text.clone()),
            _ => record.as_ref().map(|record| record.plan.clone()).filter(|plan| !plan.is_empty()),
        };
        let held = last_good.and_then(|text| marked(&text, &Standing::Held(reason.clone())).ok());
        let plan = held.as_deref().and_then(|text| text::read(text).ok());
        let last = self.memory.known(&job.path, || record.as_ref());
        let telling = Telling::of(job).edited(read.map_or(&[], |(_, edits)| edits), &[]).model(model);
        let telling = telling.titled(last.as_ref().map(|known| &known.model));
        let seal = plan.as_ref().map(|written| written.seal.as_str());
        let before = on_disk.plan().or_else(|| plan.as_ref().map(|written| &written.plan));
        let note = telling.note(before, Verdict::Trouble(trouble), seal, solved.map(|(reckoning, _)| reckoning));
        let changed = match held {
            Some(held) => {
                let record =
                    record.unwrap_or_else(|| Record { model: job.path.relative().to_owned(), ..Record::default() });
                disk.publish(&records, &Record { plan: held, note, ..record })?
            }
            None => disk.write_note(&note)? != Written::Same,
        };
        let report = telling.held(before, plan.as_ref().map(|written| &written.plan), reason, solved);
        Ok(Told { report, changed })
    }

    /// The model is gone: its plan stays, marked as retired.
    pub(super) fn retire(&mut self, job: &Job) -> Result<Told, Stopped> {
        let disk = Disk::of(&job.path);
        let record = self.memory.records(&job.state)?.load(job.path.relative()).ok();
        // It is told of as what it was.
        let was_in_parts = record.as_ref().is_some_and(|record| read::is_in_parts(&record.source));
        let job = &job.lying(if was_in_parts { Form::Folder } else { Form::File });
        let last = self.memory.known(&job.path, || record.as_ref());
        let telling = Telling::of(job).titled(last.as_ref().map(|known| &known.model));
        let mut changed = false;
        if let OnDisk::Good(found) = disk.plan()?
            && let Ok(retired) = marked(&found.text, &Standing::Retired)
        {
            let seal = text::seal(&retired).map(str::to_owned);
            let note = telling.note(found.plan(), Verdict::Retired, seal.as_deref(), None);
            changed |= disk.write_plan(&retired)? != Written::Same;
            changed |= disk.write_note(&note)? != Written::Same;
        }
        self.memory.forget(&job.path);
        Ok(Told { report: telling.retired(), changed })
    }
}
