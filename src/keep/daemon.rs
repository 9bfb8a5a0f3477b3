//! The dispatcher: the one owner of the daemon's state. An event in, a list of actions out; time is passed in.

use std::collections::BTreeMap;
use std::path::Path;
use std::sync::Arc;
use std::time::{Duration, Instant};

use super::event::{Action, Event, Scanned, Weight};
use super::hints::Hint;
use super::path::ModelPath;
use super::pool::{Job, Replanned, What, Word, Worker};
use super::queue::Queue;
use super::sayings::{Cause, Sayings};
use super::scan::{FolderId, Scan};
use super::settings::Settings;
use super::settle::{Settling, StillOpen, Touch};
use super::stamp::{Sight, Stamp};
use super::status::{Due, Status, Tally};
use super::watch::{Followed, Watching};
use crate::model::escape::Plain;

/// A scan takes at most this share of the time: one part in so many.
const SCAN_SHARE: u32 = 20;
/// The same while events tell of edits in all folders, and scans are for what they miss.
const SPARE_SCAN_SHARE: u32 = 150;
/// The same for scans that a hint asked for.
const HINTED_SCAN_SHARE: u32 = 5;
/// The least time between two scans.
const LEAST_GAP: Duration = Duration::from_millis(20);
/// The pause before the first new try after a failure; each further one is twice as long.
const FIRST_PAUSE: Duration = Duration::from_secs(1);
/// The longest pause between tries.
const LONGEST_PAUSE: Duration = Duration::from_secs(60);
/// How long workers have to give up when the daemon ends.
const END_WITHIN: Duration = Duration::from_millis(1500);

/// A model that could not be planned for a reason outside it.
#[derive(Debug)]
struct Trouble {
    message: String,
    pause: Duration,
    again: Option<Instant>,
}

/// The daemon's state.
#[derive(Debug)]
pub struct Dispatcher {
    state: Arc<Path>,
    root: Arc<Path>,
    scan_every: Duration,
    settle: Duration,
    settling: Settling,
    queue: Queue,
    /// How each model looked when it was last dealt with.
    planned: BTreeMap<ModelPath, Sight>,
    /// Stamps of the models in hand, as they were before reading.
    begun: BTreeMap<ModelPath, Option<Stamp>>,
    troubles: BTreeMap<ModelPath, Trouble>,
    sayings: Sayings,
    tally: Tally,
    status_due: Due,
    watching: Watching,
    /// Since when there has always been a model that waits.
    behind: Option<Instant>,
    /// The folder that is ours; none while another one stands in its place or the lock is lost, and then nothing is planned.
    claimed: Option<FolderId>,
    begun_at: Instant,
    /// The time of the start by the clock of the file system; taken by the first scan.
    started: Option<i128>,
    scanned_once: bool,
    scanning: bool,
    next_scan: Instant,
    /// Before this no scan starts, whoever asks.
    scan_floor: Instant,
    ending: Option<Instant>,
}

impl Dispatcher {
    /// A daemon for `root` that knows nothing yet. `started` is the time by the clock of the file system, in nanoseconds since 1970: models
    /// that had been at rest then are read at once.
    #[must_use]
    pub fn new(now: Instant, root: Arc<Path>, state: Arc<Path>, settings: &Settings, started: Option<i128>) -> Self {
        Self {
            state,
            root,
            scan_every: settings.scan_every,
            settle: settings.pace.settle,
            settling: Settling::new(settings.pace),
            queue: Queue::new(settings.workers.max(1)),
            planned: BTreeMap::new(),
            begun: BTreeMap::new(),
            troubles: BTreeMap::new(),
            sayings: Sayings::default(),
            tally: Tally::default(),
            status_due: Due::default(),
            watching: Watching::Events,
            behind: None,
            claimed: None,
            begun_at: now,
            started,
            scanned_once: false,
            scanning: false,
            next_scan: now,
            scan_floor: now,
            ending: None,
        }
    }

    /// Takes an event and says what is to be done, in this order.
    pub fn handle(&mut self, now: Instant, event: Event) -> Vec<Action> {
        let mut actions = Vec::new();
        match event {
            Event::Hint(hint) => self.hint(now, hint, &mut actions),
            Event::Scanned(scanned) => self.scanned(now, scanned, &mut actions),
            Event::Claimed(folder) => {
                self.claimed = Some(folder);
                self.next_scan = now;
                if self.sayings.settle(Cause::Unclaimed) {
                    actions.push(Action::Say(Weight::Info, "the folder is kept again".to_owned()));
                }
                self.status_due.touch();
            }
            Event::Unclaimed(why) => self.say(Cause::Unclaimed, &why, || why.clone(), &mut actions),
            Event::Followed(followed) => self.followed(now, followed, &mut actions),
            Event::ScanEvery(time) => {
                self.scan_every = time;
                self.next_scan = now;
            }
            Event::Word(Word::Began { model, stamp }) => {
                self.tally.began(now, &model);
                self.status_due.touch();
                self.begun.insert(model, stamp);
            }
            Event::Word(Word::Ended { worker, model, sight, outcome }) => {
                self.ended(now, worker, model, sight, outcome, &mut actions);
            }
            Event::Tick => self.tick(now, &mut actions),
            Event::Stop => {
                self.ending.get_or_insert(now + END_WITHIN);
                actions.extend(self.queue.close().into_iter().map(Action::Interrupt));
            }
        }
        self.proceed(now, &mut actions);
        actions
    }

    /// When [`Event::Tick`] is due.
    #[must_use]
    pub fn wake(&self) -> Option<Instant> {
        let scan = (!self.scanning).then(|| self.scan_at());
        let retry = self.troubles.values().filter_map(|trouble| trouble.again).min();
        let status = self.claimed.and_then(|_| self.status_due.next(self.tally.is_running()));
        match self.ending {
            Some(end) => Some(end),
            None => [scan, retry, self.settling.next_quiet(), self.settling.next_due(), self.sayings.next(), status]
                .into_iter()
                .flatten()
                .min(),
        }
    }

    fn scan_at(&self) -> Instant {
        let asked = self.settling.next_look().map_or(self.next_scan, |look| look.min(self.next_scan));
        asked.max(self.scan_floor)
    }

    /// Starts what can be started, or ends.
    fn proceed(&mut self, now: Instant, actions: &mut Vec<Action>) {
        if let Some(end) = self.ending {
            if self.queue.is_empty() || now >= end {
                actions.push(Action::End);
            }
            return;
        }
        while self.claimed.is_some()
            && let Some((worker, path, what)) = self.queue.take()
        {
            actions.push(Action::Run(worker, Job { path, what, state: self.state.clone() }));
        }
        self.behind = (self.queue.waiting() > 0).then(|| self.behind.unwrap_or(now));
        // Where another daemon keeps the folder, the status there is that one's.
        if self.claimed.is_some() && self.status_due.take(now, self.tally.is_running()) {
            actions.push(Action::Note(Box::new(self.status(now))));
        }
    }

    /// How things are.
    fn status(&self, now: Instant) -> Status {
        let mut status = Status {
            status: Status::VERSION,
            process: std::process::id(),
            folder: self.root.to_string_lossy().into_owned(),
            seconds: now.saturating_duration_since(self.begun_at).as_secs(),
            watching: (&self.watching).into(),
            trouble: self.sayings.about_folder(),
            waiting: self.queue.waiting(),
            waiting_seconds: self.behind.map_or(0, |since| now.saturating_duration_since(since).as_secs()),
            ..Status::default()
        };
        self.tally.fill(now, &mut status);
        status
    }

    fn push(&mut self, model: &ModelPath, what: What, actions: &mut Vec<Action>) {
        if self.ending.is_none() {
            actions.extend(self.queue.push(model, what).map(Action::Interrupt));
        }
    }

    fn say(&mut self, cause: Cause, key: &str, text: impl FnOnce() -> String, actions: &mut Vec<Action>) {
        let said = self.sayings.say(cause, key, text);
        if said.is_some() {
            self.status_due.touch();
        }
        actions.extend(said);
    }

    /// Takes note of how the folders of a scan are watched.
    fn followed(&mut self, now: Instant, followed: Followed, actions: &mut Vec<Action>) {
        if followed.added > 0 {
            // What was written into them before brought no event.
            self.next_scan = now;
        }
        if followed.watching == self.watching {
            return;
        }
        self.watching = followed.watching;
        self.status_due.touch();
        match &self.watching {
            Watching::Events => {
                if self.sayings.settle(Cause::Unwatched) {
                    actions.push(Action::Say(Weight::Info, "file events come from all folders again".to_owned()));
                }
            }
            Watching::Asked => {
                self.sayings.settle(Cause::Unwatched);
                actions.push(Action::Say(Weight::Info, self.watching.to_string()));
            }
            // How many folders there are may change all the time.
            Watching::Partly { why, .. } | Watching::Scans(why) => {
                let (key, text) = (why.clone(), self.watching.to_string());
                self.say(Cause::Unwatched, &key, || text, actions);
            }
        }
    }

    fn hint(&mut self, now: Instant, hint: Hint, actions: &mut Vec<Action>) {
        let (path, touch, stamp) = match hint {
            Hint::Closed(path) => (path, Touch::Finished, None),
            Hint::Arrived(path, stamp) => (path, Touch::Finished, stamp),
            Hint::Writing(path) => (path, Touch::Writing, None),
            Hint::Gone(path) => (path, Touch::Gone, None),
            Hint::Folder(_) | Hint::FolderGone(_) => {
                self.next_scan = now;
                return;
            }
            Hint::Rescan => {
                self.tally.lost();
                self.settling.clear();
                self.next_scan = now;
                return;
            }
        };
        let Some((model, part)) = ModelPath::concerned(&self.root, &path) else { return };
        if let Some(part) = part {
            self.settling.touch_part(now, &model, &part, touch);
            // What may be reading it now has some parts of before and some of after.
            actions.extend(self.queue.withhold(&model).map(Action::Interrupt));
        } else if self.settling.touch(now, &model, touch) {
            // A scan may have found what was moved here before the word of it came: then it is being read already.
            let in_hand = stamp.is_some() && self.begun.get(&model) == Some(&stamp);
            if !in_hand {
                self.push(&model, What::Replan, actions);
            }
        } else if touch == Touch::Writing {
            // An earlier save is about to be read, and would be found half overwritten by this one.
            actions.extend(self.queue.withhold(&model).map(Action::Interrupt));
        }
    }

    fn tick(&mut self, now: Instant, actions: &mut Vec<Action>) {
        for StillOpen { model, age, given_up } in self.settling.quiet(now) {
            let seconds = age.as_secs();
            let what_follows = if given_up {
                "nothing was written for long, so it is read as it is"
            } else {
                "its last plan stays until whatever writes to it closes it"
            };
            let text = format!("{model}: still open for writing, since {seconds} s ago; {what_follows}");
            actions.push(Action::Say(Weight::Warning, text));
            if given_up {
                self.push(&model, What::Replan, actions);
            }
        }
        for model in self.settling.due(now) {
            self.push(&model, What::Replan, actions);
        }
        actions.extend(self.sayings.tick(now));
        let due = |trouble: &Trouble| trouble.again.is_some_and(|again| again <= now);
        let again: Vec<_> =
            self.troubles.iter().filter(|(_, trouble)| due(trouble)).map(|(model, _)| model.clone()).collect();
        for model in again {
            if let Some(trouble) = self.troubles.get_mut(&model) {
                trouble.again = None;
            }
            self.push(&model, What::Replan, actions);
        }
        if !self.scanning && self.ending.is_none() && now >= self.scan_at() {
            self.scanning = true;
            actions.push(Action::Scan);
        }
    }

    fn scanned(&mut self, now: Instant, scanned: Scanned, actions: &mut Vec<Action>) {
        let took = now.saturating_duration_since(scanned.began);
        self.scanning = false;
        let share = if self.watching == Watching::Events { SPARE_SCAN_SHARE } else { SCAN_SHARE };
        self.next_scan = now + self.scan_every.max(took * share);
        self.scan_floor = now + LEAST_GAP.max(took * HINTED_SCAN_SHARE);
        let scan = match scanned.found {
            Ok(scan) => scan,
            Err(why) => {
                self.settling.clear();
                let root = Plain(&self.root.to_string_lossy()).to_string();
                let text = || format!("{root} cannot be read; its plans are left as they are until it can: {why}");
                self.say(Cause::Gone, "", text, actions);
                return;
            }
        };
        // An unmounted folder shows what lies below it: nothing is claimed there, and nothing taken for removed.
        if scan.is_hollow() && !self.planned.is_empty() {
            self.settling.clear();
            let text = "neither models nor plans are left in the folder; in case it was unmounted, nothing is taken for removed";
            self.say(Cause::Hollow, "", || text.to_owned(), actions);
            return;
        }
        let back = [self.sayings.settle(Cause::Gone), self.sayings.settle(Cause::Hollow)].contains(&true);
        if back {
            actions.push(Action::Say(Weight::Info, "the folder is back".to_owned()));
        }
        if back || !scanned.locked || self.claimed != Some(scan.root) {
            self.settling.clear();
            self.claimed = None;
            actions.push(Action::Claim);
            return;
        }
        self.compare(now, scanned.began, &scan, actions);
        actions.extend(self.sayings.mention(&scan));
        actions.push(Action::Follow(scan.folders));
        if !self.scanned_once {
            self.scanned_once = true;
            actions.push(Action::Sweep(scan.temps));
        }
    }

    /// Compares what a scan saw with what was dealt with.
    fn compare(&mut self, now: Instant, began: Instant, scan: &Scan, actions: &mut Vec<Action>) {
        let rested = self.started.take().map(|started| started - self.settle.as_nanos().cast_signed());
        let mut ready = Vec::new();
        for (model, sight) in &scan.sights {
            let in_hand = match self.begun.get(model) {
                Some(&stamp) => stamp == sight.model,
                None => self.queue.is_running(model),
            };
            // What waits will be read as it is then.
            if in_hand || self.queue.is_waiting(model) || self.planned.get(model) == Some(sight) {
                self.settling.rest(model);
                continue;
            }
            let at_rest = rested.zip(sight.model).is_some_and(|(rested, stamp)| stamp.changed() < rested);
            let what = if at_rest { Some(What::Replan) } else { self.settling.look(began, now, model, *sight) };
            if let Some(what) = what {
                ready.push((sight.model.map(|stamp| stamp.changed()), model, what));
            }
        }
        // What was touched last is what somebody waits for.
        ready.sort_by_key(|&(changed, ..)| std::cmp::Reverse(changed));
        for (_, model, what) in ready {
            self.push(model, what, actions);
        }
        self.settling.forget_unseen(|model| scan.sights.contains_key(model));
        let queue = &mut self.queue;
        let kept = |model: &ModelPath| scan.sights.contains_key(model) || scan.may_hide(model);
        self.planned.retain(|model, _| {
            let keep = kept(model);
            if !keep {
                queue.forget(model);
            }
            keep
        });
        self.troubles.retain(|model, _| kept(model));
        self.tally.retain(kept);
    }

    fn ended(
        &mut self,
        now: Instant,
        worker: Worker,
        model: ModelPath,
        sight: Sight,
        outcome: Replanned,
        actions: &mut Vec<Action>,
    ) {
        self.begun.remove(&model);
        self.queue.done(worker, &model, outcome == Replanned::Interrupted);
        self.tally.ended(&model, &outcome);
        self.status_due.touch();
        match &outcome {
            Replanned::Done(report) => {
                let weight = if report.standing == "current" { Weight::Info } else { Weight::Warning };
                actions.push(Action::Say(weight, report.to_string()));
            }
            Replanned::Unchanged(_) => {}
            Replanned::Interrupted => {
                if !self.queue.is_waiting(&model) && !self.settling.is_being_written(&model) {
                    self.push(&model, What::Replan, actions);
                }
                return;
            }
            Replanned::Vanished => {
                self.planned.remove(&model);
                return;
            }
            Replanned::Failed { message, retry } => self.failed(now, &model, message, *retry, actions),
        }
        if !matches!(outcome, Replanned::Failed { .. }) {
            self.troubles.remove(&model);
        }
        self.planned.insert(model.clone(), sight);
        actions.push(Action::Tell(model, outcome));
    }

    fn failed(&mut self, now: Instant, model: &ModelPath, message: &str, retry: bool, actions: &mut Vec<Action>) {
        let before = self.troubles.remove(model);
        if before.as_ref().is_none_or(|trouble| trouble.message != message) {
            actions.extend(self.sayings.failed(now, format!("{model}: {message}")));
        }
        let pause = before.map_or(FIRST_PAUSE, |trouble| (trouble.pause * 2).min(LONGEST_PAUSE));
        let again = retry.then(|| now + pause);
        self.troubles.insert(model.clone(), Trouble { message: message.to_owned(), pause, again });
    }
}

#[cfg(test)]
#[path = "daemon_tests.rs"]
mod tests;
