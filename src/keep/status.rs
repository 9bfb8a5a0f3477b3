//! How the daemon is: what is kept, how it is watched, what is running. Written beside the state, read by `keep --status`.

use std::collections::BTreeMap;
use std::io::Read as _;
use std::path::Path;
use std::time::{Duration, Instant};

use serde::{Deserialize, Serialize};

use super::path::ModelPath;
use super::pool::Replanned;
use super::watch::Watching;
use crate::store::{Durability, StoreError, atomic};

/// The file's name in the state folder.
const NAME: &str = "status.json";
/// The largest status that is read, in bytes.
const LARGEST: u64 = 4 << 20;
/// Of the models that are not current, so many are listed.
const LISTED: usize = 500;
/// A reason is cut to so many characters.
const LONGEST: usize = 400;

/// How the daemon is. Texts are not escaped, reasons are of bounded length.
#[derive(Clone, Debug, Default, PartialEq, Deserialize, Serialize)]
pub struct Status {
    /// The version of this format.
    pub status: u32,
    /// The daemon's process.
    pub process: u32,
    /// The kept folder.
    pub folder: String,
    /// For how many seconds the daemon had been at work when this was written.
    pub seconds: u64,
    /// How edits are noticed.
    pub watching: Noticed,
    /// What is wrong with the folder as a whole: gone, empty, or not ours to keep.
    pub trouble: Vec<String>,
    /// How many models stand how: `current`, `held`, `retired`, `failed`, `none`.
    pub models: BTreeMap<String, usize>,
    /// How many models wait to be planned.
    pub waiting: usize,
    /// For how many seconds there has always been one that waits.
    #[serde(default)]
    pub waiting_seconds: u64,
    /// What is being planned.
    pub running: Vec<Running>,
    /// What was done since the daemon began.
    pub done: Counts,
    /// The models that are not as they should be, the first of them.
    pub amiss: Vec<Amiss>,
    /// How many more of these there are.
    pub more: usize,
}

/// How edits are noticed.
#[derive(Clone, Debug, Default, PartialEq, Eq, Deserialize, Serialize)]
pub struct Noticed {
    /// `events`, `events and scans`, or `scans`.
    pub by: String,
    /// The same in words, with the reason.
    pub words: String,
}

impl From<&Watching> for Noticed {
    fn from(watching: &Watching) -> Self {
        let by = match watching {
            Watching::Events => "events",
            Watching::Partly { .. } => "events and scans",
            Watching::Scans(_) | Watching::Asked => "scans",
        };
        Self { by: by.to_owned(), words: watching.to_string() }
    }
}

/// A model that is being planned.
#[derive(Clone, Debug, PartialEq, Eq, Deserialize, Serialize)]
pub struct Running {
    /// The model's path below the folder.
    pub path: String,
    /// Since how many seconds.
    pub seconds: u64,
}

/// What was done since the daemon began.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Deserialize, Serialize)]
pub struct Counts {
    /// Looks at a model that changed its plan or note.
    pub replanned: u64,
    /// Looks at a model that found all as it should be.
    pub unchanged: u64,
    /// Looks at a model that were given up for a newer edit.
    pub interrupted: u64,
    /// Looks at a model that failed.
    pub failed: u64,
    /// How often file events were lost.
    pub events_lost: u64,
}

/// A model that is not as it should be.
#[derive(Clone, Debug, PartialEq, Eq, Deserialize, Serialize)]
pub struct Amiss {
    /// The model's path below the folder.
    pub path: String,
    /// `held`, `failed` or `none`.
    pub standing: String,
    /// Why.
    pub why: String,
}

impl Status {
    /// The version of the format.
    pub const VERSION: u32 = 1;

    /// Writes it into the state folder, whole or not at all.
    ///
    /// # Errors
    /// The file cannot be written.
    pub fn write(&self, state: &Path) -> Result<(), StoreError> {
        // Plain values with text keys cannot fail to be written.
        let mut text = serde_json::to_string_pretty(self).unwrap_or_default();
        text.push('\n');
        // Nobody else has a file of that name in the daemon's own folder; a damaged one is ours too.
        atomic::write(&state.join(NAME), text.as_bytes(), |_| true, Durability::Cached).map(drop)
    }

    /// Reads the one in a state folder.
    ///
    /// # Errors
    /// There is none, or it is not one of this version.
    pub fn read(state: &Path) -> std::io::Result<Self> {
        let mut text = String::new();
        atomic::open_plain(&state.join(NAME))?.take(LARGEST).read_to_string(&mut text)?;
        let status: Self = serde_json::from_str(&text)?;
        if status.status == Self::VERSION {
            return Ok(status);
        }
        Err(std::io::Error::new(std::io::ErrorKind::InvalidData, "it is of another version of millreeve"))
    }
}

/// How each model stands, and what was done.
#[derive(Debug, Default)]
pub struct Tally {
    standings: BTreeMap<ModelPath, (String, Option<String>)>,
    running: BTreeMap<ModelPath, Instant>,
    counts: Counts,
}

impl Tally {
    /// A model is being planned.
    pub fn began(&mut self, now: Instant, model: &ModelPath) {
        self.running.insert(model.clone(), now);
    }

    /// What came of it.
    pub fn ended(&mut self, model: &ModelPath, outcome: &Replanned) {
        self.running.remove(model);
        let (count, stands) = match outcome {
            Replanned::Done(report) | Replanned::Unchanged(report) => {
                let fault = report.faults.first().map(|fault| match fault.line {
                    Some(line) => format!("line {line}: {}", fault.message),
                    None => fault.message.clone(),
                });
                let why = fault.or_else(|| report.held.clone());
                let changed = matches!(outcome, Replanned::Done(_));
                let count = if changed { &mut self.counts.replanned } else { &mut self.counts.unchanged };
                (count, Some((report.standing.clone(), why)))
            }
            Replanned::Failed { message, .. } => {
                (&mut self.counts.failed, Some(("failed".to_owned(), Some(message.clone()))))
            }
            Replanned::Interrupted => (&mut self.counts.interrupted, None),
            Replanned::Vanished => return,
        };
        *count += 1;
        if let Some(stands) = stands {
            self.standings.insert(model.clone(), stands);
        }
    }

    /// Events were lost.
    pub fn lost(&mut self) {
        self.counts.events_lost += 1;
    }

    /// Forgets the models that are not kept any more.
    pub fn retain(&mut self, kept: impl Fn(&ModelPath) -> bool) {
        self.standings.retain(|model, _| kept(model));
    }

    /// Whether something is being planned.
    #[must_use]
    pub fn is_running(&self) -> bool {
        !self.running.is_empty()
    }

    /// Fills in what is known here.
    pub fn fill(&self, now: Instant, status: &mut Status) {
        let path = |model: &ModelPath| model.seen().to_string_lossy().into_owned();
        for (standing, _) in self.standings.values() {
            *status.models.entry(standing.clone()).or_default() += 1;
        }
        let since = |begun: &Instant| now.saturating_duration_since(*begun).as_secs();
        let running = |(model, begun)| Running { path: path(model), seconds: since(begun) };
        status.running = self.running.iter().map(running).collect();
        status.done = self.counts;
        let amiss = self.standings.iter().filter(|(_, (standing, _))| !matches!(&standing[..], "current" | "retired"));
        for (at, (model, (standing, why))) in amiss.enumerate() {
            if at >= LISTED {
                status.more += 1;
                continue;
            }
            let why = why.iter().flat_map(|why| why.chars()).take(LONGEST).collect();
            status.amiss.push(Amiss { path: path(model), standing: standing.clone(), why });
        }
    }
}

/// When a status is due: at most once a second, and only after something has happened; every few seconds while a solve runs.
#[derive(Debug, Default)]
pub struct Due {
    touched: bool,
    last: Option<Instant>,
}

impl Due {
    const LEAST: Duration = Duration::from_secs(1);
    const WHILE_RUNNING: Duration = Duration::from_secs(5);

    /// Something has happened that a status would show.
    pub fn touch(&mut self) {
        self.touched = true;
    }

    /// When the next is due.
    #[must_use]
    pub fn next(&self, running: bool) -> Option<Instant> {
        let last = self.last?;
        match (self.touched, running) {
            (true, _) => Some(last + Self::LEAST),
            (false, true) => Some(last + Self::WHILE_RUNNING),
            (false, false) => None,
        }
    }

    /// Whether one is due now; if so it is taken for written.
    pub fn take(&mut self, now: Instant, running: bool) -> bool {
        let due = match self.last {
            None => self.touched,
            Some(_) => self.next(running).is_some_and(|next| next <= now),
        };
        if due {
            *self = Self { touched: false, last: Some(now) };
        }
        due
    }
}

#[cfg(test)]
mod tests {
    use std::sync::Arc;

    use super::*;
    use crate::keep::Report;

    fn model(number: usize) -> ModelPath {
        ModelPath::new(&Arc::from(Path::new("/works")), Path::new(&format!("m{number:04}.model.toml"))).unwrap()
    }

    #[test]
    fn models_are_counted_and_those_amiss_listed_up_to_a_bound() {
        let (mut tally, now) = (Tally::default(), Instant::now());
        let done =
            |standing: &str| Replanned::Done(Box::new(Report { standing: standing.into(), ..Report::default() }));
        (0..700).for_each(|number| tally.ended(&model(number), &done("current")));
        let full = Replanned::Failed { message: "x".repeat(5000), retry: true };
        (0..600).for_each(|number| tally.ended(&model(number), &full));
        tally.ended(&model(0), &done("held"));
        tally.began(now, &model(650));
        let mut status = Status { status: Status::VERSION, ..Status::default() };
        tally.fill(now + Duration::from_secs(7), &mut status);
        let counts = [("current", 100), ("failed", 599), ("held", 1)];
        assert_eq!(status.models, counts.map(|(standing, count)| (standing.to_owned(), count)).into());
        assert_eq!((status.amiss.len(), status.more, status.amiss[1].why.len()), (LISTED, 100, LONGEST));
        assert_eq!(status.running, [Running { path: "m0650.model.toml".into(), seconds: 7 }]);
        assert_eq!(status.done, Counts { replanned: 701, failed: 600, ..Counts::default() });
        let folder = tempfile::tempdir().unwrap();
        status.write(folder.path()).unwrap();
        assert_eq!(Status::read(folder.path()).unwrap(), status);
        Status { status: 2, ..status }.write(folder.path()).unwrap();
        assert!(Status::read(folder.path()).is_err());
        tally.retain(|model| model.name() != "m0000");
        let mut status = Status::default();
        tally.fill(now, &mut status);
        assert_eq!(status.models.get("held"), None);
    }

    #[test]
    fn a_status_is_written_at_most_once_a_second_and_only_if_something_happened() {
        let (mut due, start) = (Due::default(), Instant::now());
        let second = Duration::from_secs(1);
        assert!(!due.take(start, false));
        due.touch();
        assert!(due.take(start, false) && !due.take(start + 9 * second, false));
        due.touch();
        assert_eq!(due.next(false), Some(start + second));
        assert!(!due.take(start + second / 2, false) && due.take(start + second, false));
        assert_eq!((due.next(false), due.next(true)), (None, Some(start + 6 * second)));
    }
}
