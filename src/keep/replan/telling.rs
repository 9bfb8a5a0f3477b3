//! What is told of a replan: the note, and the report for log and `--json`.

use crate::edits::Edit;
use crate::keep::pinned::Pinned;
use crate::keep::pool::Job;
use crate::keep::report::{Infeasible, Report};
use crate::model::Model;
use crate::plan::compare::{Event, events, standing_event};
use crate::plan::note::{self, EditTold, Reckoning, Verdict};
use crate::plan::number::rounded;
use crate::plan::{Plan, Standing, text};
use crate::solver::message::{Account, Start};

/// Others are told when the aim moves by more than this share of itself.
const SHARE: f64 = 0.01;

/// Tells of one job.
pub(super) struct Telling<'a> {
    job: &'a Job,
    file: String,
    title: Option<&'a str>,
    model: Option<&'a Model>,
    edits: Vec<EditTold<'a>>,
}

impl<'a> Telling<'a> {
    pub(super) fn of(job: &'a Job) -> Self {
        let file = job.path.seen().file_name().unwrap_or_default().to_string_lossy().into_owned();
        Self { job, file, title: None, model: None, edits: Vec::new() }
    }

    pub(super) fn model(mut self, model: Option<&'a Model>) -> Self {
        self.model = model;
        self.title = model.and_then(|model| model.title.as_deref()).or(self.title);
        self
    }

    /// Under the title the model had when it could last be read.
    pub(super) fn titled(mut self, last: Option<&'a Model>) -> Self {
        self.title = self.title.or(last.and_then(|model| model.title.as_deref()));
        self
    }

    pub(super) fn edited(mut self, edits: &'a [Edit], worths: &[Option<f64>]) -> Self {
        let worth = |at| worths.get(at).copied().flatten();
        self.edits = edits.iter().enumerate().map(|(at, edit)| EditTold { edit, worth: worth(at) }).collect();
        self
    }

    /// The text of the note.
    pub(super) fn note(
        &self,
        before: Option<&Plan>,
        verdict: Verdict<'_>,
        seal: Option<&str>,
        reckoning: Option<&Reckoning>,
    ) -> String {
        let pinned = Pinned::look(&self.job.path.release());
        note::write(&note::Report {
            title: self.title,
            file: &self.file,
            model: self.model,
            before,
            edits: &self.edits,
            verdict,
            seal,
            release: pinned.as_ref().map(Pinned::told),
            reckoning,
        })
    }

    fn report(&self) -> Report {
        let mut kinds: Vec<_> = self.edits.iter().map(|told| told.edit.kind).collect();
        kinds.sort();
        let mut words: Vec<_> = kinds.into_iter().map(|kind| kind.words()).collect();
        words.dedup();
        Report {
            model: self.job.path.name(),
            path: self.job.path.seen().to_string_lossy().into_owned(),
            standing: "none".to_owned(),
            edit: words,
            ..Report::default()
        }
    }

    /// The report of a plan that stands as it was written.
    pub(super) fn standing(&self, plan: &str) -> Box<Report> {
        let mut report = self.report();
        if let Ok(written) = text::read(plan) {
            stand(&mut report, &written.plan);
            report.aim_before = report.aim;
        }
        Box::new(report)
    }

    /// The report of a plan, new or found standing.
    pub(super) fn planned(
        &self,
        before: Option<&Plan>,
        plan: &Plan,
        solved: Option<(&Reckoning, &Account)>,
    ) -> Box<Report> {
        let mut report = self.report();
        stand(&mut report, plan);
        let comparable = |before: &&Plan| before.minimise == plan.minimise && before.periods == plan.periods;
        report.aim_before = before.filter(comparable).map(|before| rounded(before.aim));
        worked_out(&mut report, solved);
        tell(&mut report, events(before, plan, SHARE));
        Box::new(report)
    }

    /// The report of a model that has no plan now; `plan` is the last good one.
    pub(super) fn held(
        &self,
        before: Option<&Plan>,
        plan: Option<&Plan>,
        reason: String,
        solved: Option<(&Reckoning, &Account)>,
    ) -> Box<Report> {
        let mut report = self.report();
        if let Some(plan) = plan {
            stand(&mut report, plan);
        }
        if solved.is_some() {
            worked_out(&mut report, solved);
        }
        let event = standing_event(before.map(|before| &before.standing), &Standing::Held(reason.clone()));
        tell(&mut report, event.into_iter().collect());
        report.standing = "held".to_owned();
        report.held = Some(reason);
        Box::new(report)
    }

    /// The report of a model that is gone.
    pub(super) fn retired(&self) -> Box<Report> {
        Box::new(Report { standing: Standing::Retired.word().to_owned(), ..self.report() })
    }
}

fn stand(report: &mut Report, plan: &Plan) {
    report.standing = plan.standing.word().to_owned();
    report.held = if let Standing::Held(reason) = &plan.standing { Some(reason.clone()) } else { None };
    report.aim = Some(rounded(plan.aim));
    report.exact = Some(plan.exact);
    report.ties = Some(plan.ties);
}

fn worked_out(report: &mut Report, solved: Option<(&Reckoning, &Account)>) {
    report.start = Some(solved.map_or(Start::None, |(_, account)| account.start).word());
    report.expected_start =
        Some(solved.map_or(Start::None.word().to_owned(), |(reckoning, _)| reckoning.expected.clone()));
    if let Some((_, account)) = solved {
        report.pivots = account.pivots;
        report.exact_pivots = account.exact_pivots;
        report.capped = account.capped;
        report.infeasible =
            account.primal_infeasible.zip(account.dual_infeasible).map(|(primal, dual)| Infeasible { primal, dual });
        report.milliseconds.solve = super::milliseconds(account.time + account.settling + account.reading);
    }
}

fn tell(report: &mut Report, events: Vec<Event>) {
    for event in &events {
        match event {
            Event::Entered { name } => report.entered.push(name.clone()),
            Event::Left { name } => report.left.push(name.clone()),
            Event::WouldEnter { name, .. } => report.would_enter.push(name.clone()),
            _ => {}
        }
    }
    report.events = events;
}
