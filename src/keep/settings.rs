//! What can be set about keeping a folder.

use std::path::PathBuf;
use std::time::Duration;

/// How edits are noticed.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum By {
    /// By the system's events, with a scan behind them.
    #[default]
    Events,
    /// By scanning alone: for file systems whose events do not arrive.
    Poll,
}

/// Settings of the daemon and of a single pass.
#[derive(Clone, Debug)]
pub struct Settings {
    /// How edits are noticed.
    pub by: By,
    /// The least time from one scan to the next; it is longer where scanning is slow.
    pub scan_every: Duration,
    /// Globs of paths, relative to the watched folder, that are left out.
    pub ignore: Vec<String>,
    /// How many models are planned at a time; at least 1.
    pub workers: usize,
    /// How long one solve may take.
    pub time_limit: Duration,
    /// Memory for live models, in bytes; `None` for no limit.
    pub memory_limit: Option<u64>,
    /// Where the daemon's state lies; `None` for `.millreeve/` in the watched folder.
    pub state_dir: Option<PathBuf>,
    /// How long things must be still before they count.
    pub pace: Pace,
}

impl Default for Settings {
    fn default() -> Self {
        Self {
            by: By::Events,
            scan_every: Duration::from_secs(2),
            ignore: Vec::new(),
            workers: std::thread::available_parallelism().map_or(2, |cores| cores.get().max(2)),
            time_limit: Duration::from_secs(60),
            memory_limit: None,
            state_dir: None,
            pace: Pace::default(),
        }
    }
}

impl Settings {
    /// What is different in `new`, one line for people each: what holds from now on, and what only after the next start.
    #[must_use]
    pub fn changes(&self, new: &Self) -> Vec<String> {
        let now = [
            ("watch.by", self.by != new.by),
            ("watch.scan_every", self.scan_every != new.scan_every),
            ("watch.ignore", self.ignore != new.ignore),
        ];
        let later = [
            ("solve.workers", self.workers != new.workers),
            ("solve.time_limit", self.time_limit != new.time_limit),
            ("solve.memory_limit", self.memory_limit != new.memory_limit),
            ("state.dir", self.state_dir != new.state_dir),
        ];
        let of = |keys: &[(&str, bool)], what: &str| -> Vec<_> {
            keys.iter().filter(|(_, changed)| *changed).map(|(key, _)| format!("{key} has changed{what}")).collect()
        };
        [of(&now, " and holds from now on"), of(&later, "; it holds after the daemon is started again")].concat()
    }

    /// Takes over from `new` what can be changed while the daemon runs.
    pub fn take_live(&mut self, new: &Self) {
        self.by = new.by;
        self.scan_every = new.scan_every;
        self.ignore.clone_from(&new.ignore);
    }
}

/// How long things must be still before they count.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Pace {
    /// A file known only from scans is read once two looks this far apart agree. Two seconds are the coarsest time stamp in use, so
    /// that a write after the reading cannot hide in the stamp of the one before it.
    pub settle: Duration,
    /// A file that stays open for writing is reported when nothing was written for so long. Its last plan stays.
    pub quiet: Duration,
    /// A file that stays open for writing is read as it is when nothing was written for so long.
    pub patience: Duration,
    /// A model must be gone for so long before its plan is retired: editors and git move files away and back.
    pub grace: Duration,
}

impl Default for Pace {
    fn default() -> Self {
        Self {
            settle: Duration::from_secs(2),
            quiet: Duration::from_secs(10),
            patience: Duration::from_secs(600),
            grace: Duration::from_secs(2),
        }
    }
}
