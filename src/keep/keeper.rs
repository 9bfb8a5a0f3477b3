//! What the loop holds, and does when the dispatcher says so: the folder with its lock and watcher, the scanner and the workers.

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};
use std::sync::{Arc, mpsc};
use std::thread;
use std::time::Instant;

use tokio::sync::mpsc::UnboundedSender;

use super::clock::now;
use super::daemon::Dispatcher;
use super::error::KeepError;
use super::event::{Action, Event, Scanned, Weight};
use super::hints::{Hint, HintSender};
use super::path::{Ignore, ModelPath};
use super::pool::{Factory, Pool, Replanned, Stop, Worker};
use super::remote;
use super::scan::{FolderId, scan};
use super::settings::{By, Settings};
use super::watch::{Followed, Watcher, Watching};
use crate::store::error::reason;
use crate::store::{Folder, Lock, LockError, Step, StoreError, Watched, atomic};

/// What the loop holds.
pub(super) struct Keeper<R> {
    settings: Settings,
    folder: Folder,
    root: Arc<Path>,
    ignore: Arc<Ignore>,
    lock: Option<Arc<Lock>>,
    /// What was seen of other hosts that may keep the folder.
    watched: Watched,
    watcher: Option<Watcher>,
    scans: mpsc::Sender<ScanJob>,
    pool: Pool,
    /// The stop flag of the job that each worker has, or had last.
    stops: Vec<Stop>,
    events: UnboundedSender<Event>,
    hints: HintSender,
    on_report: R,
}

/// A scan to be made.
struct ScanJob {
    root: Arc<Path>,
    ignore: Arc<Ignore>,
    lock: Option<Arc<Lock>>,
    began: Instant,
}

impl<R: FnMut(&ModelPath, &Replanned)> Keeper<R> {
    pub(super) fn start(
        root: &Path,
        settings: Settings,
        factory: &Factory,
        events: UnboundedSender<Event>,
        hints: HintSender,
        on_report: R,
    ) -> Result<Self, KeepError> {
        let ignore = Arc::new(Ignore::new(&settings.ignore)?);
        allow_state(root, settings.state_dir.as_deref())?;
        let folder = Folder::open(root, settings.state_dir.as_deref())?;
        let workers = settings.workers.max(1);
        let words = events.clone();
        let pool = Pool::start(workers, factory, move |word| {
            // Nobody listens any more once the daemon has ended.
            let _ = words.send(Event::Word(word));
        })?;
        let scans = scanner(events.clone())?;
        let root = Arc::from(folder.root());
        let stops = vec![Stop::new(); workers];
        let (lock, watcher, watched) = (None, None, Watched::default());
        let mut keeper = Self {
            settings,
            folder,
            root,
            ignore,
            lock,
            watched,
            watcher,
            scans,
            pool,
            stops,
            events,
            hints,
            on_report,
        };
        match keeper.claim() {
            // It asks again with every scan, until it is sure.
            Err(error @ KeepError::Lock(LockError::Unsure { .. })) => keeper.send(Event::Unclaimed(error.to_string())),
            claimed => claimed?,
        }
        Ok(keeper)
    }

    /// A dispatcher for this folder.
    pub(super) fn dispatcher(&self, now: Instant) -> Dispatcher {
        let started = self.lock.as_ref().and_then(|lock| lock.taken());
        Dispatcher::new(now, self.root.clone(), Arc::from(self.folder.state()), &self.settings, started)
    }

    /// Locks the folder that now stands at the root's path, and watches it.
    fn claim(&mut self) -> Result<(), KeepError> {
        self.lock = None;
        self.watcher = None;
        allow_state(&self.root, self.settings.state_dir.as_deref())?;
        self.folder = Folder::open(&self.root, self.settings.state_dir.as_deref())?;
        let id = FolderId::of(&self.root).map_err(StoreError::failed(Step::Look, &self.root))?;
        let lock = match remote::terms(&self.root) {
            Some(terms) => Lock::take_among_hosts(&self.folder, &terms, &mut self.watched)?,
            None => Lock::take(&self.folder)?,
        };
        self.lock = Some(Arc::new(lock));
        // Folders within it are watched when a scan has found them.
        self.follow(&BTreeSet::from([PathBuf::new()]));
        // What was written before the watch began is found by the scan that follows.
        self.send(Event::Claimed(id));
        Ok(())
    }

    /// Watches these folders as well as can be, and says how well that is.
    fn follow(&mut self, folders: &BTreeSet<PathBuf>) {
        let watching = self.watch(folders);
        let followed = watching.unwrap_or_else(|watching| {
            self.watcher = None;
            Followed { added: 0, watching }
        });
        self.send(Event::Followed(followed));
    }

    /// Fails with the reason for doing without events.
    fn watch(&mut self, folders: &BTreeSet<PathBuf>) -> Result<Followed, Watching> {
        if self.settings.by == By::Poll {
            return Err(Watching::Asked);
        }
        if let Ok(Some(kind)) = remote::kind(&self.root) {
            return Err(Watching::Scans(format!("the folder is on {kind}, which does not tell what others do")));
        }
        let watcher = match &mut self.watcher {
            Some(watcher) => watcher,
            none => none.insert(Watcher::new(&self.root, self.hints.clone()).map_err(Watching::Scans)?),
        };
        Ok(watcher.follow(folders))
    }

    fn send(&self, event: Event) {
        // The loop that takes these in outlives whoever sends them.
        let _ = self.events.send(event);
    }

    /// Keeps the watcher in step with folders that come and go. Answers whether the dispatcher is to hear of it.
    pub(super) fn heed(&mut self, hint: &Hint) -> bool {
        match (hint, &mut self.watcher) {
            (Hint::Closed(path) | Hint::Arrived(path, _) | Hint::Writing(path) | Hint::Gone(path), _) => {
                return !self.ignores(path);
            }
            (Hint::Folder(path), Some(watcher)) => watcher.appeared(path),
            (Hint::FolderGone(path), Some(watcher)) => return watcher.vanished(path),
            // What it knows of folders may be void: it starts anew with the scan that follows.
            (Hint::Rescan, watcher) => *watcher = None,
            _ => {}
        }
        true
    }

    /// Whether a scan would leave out what lies at a path.
    fn ignores(&self, path: &Path) -> bool {
        let Ok(below) = path.strip_prefix(&self.root) else { return true };
        let mut ways = below.ancestors().filter(|way| !way.as_os_str().is_empty());
        let model = ModelPath::concerned(&self.root, path);
        ways.any(|way| self.ignore.covers(way)) || model.is_some_and(|(model, _)| self.ignore.covers(model.relative()))
    }

    /// Takes new settings, or leaves all as it is where they are wrong.
    pub(super) fn reread(&mut self, settings: Option<Result<Settings, String>>) {
        let new = match settings {
            None => return,
            Some(Ok(new)) => new,
            Some(Err(why)) => return tracing::warn!("the settings stay as they were: {why}"),
        };
        let ignore = match Ignore::new(&new.ignore) {
            Ok(ignore) => ignore,
            Err(error) => return tracing::warn!("the settings stay as they were: {error}"),
        };
        let changes = self.settings.changes(&new);
        if changes.is_empty() {
            return tracing::info!("the settings were read again; none has changed");
        }
        for change in changes {
            tracing::info!("{change}");
        }
        self.ignore = Arc::new(ignore);
        self.settings.take_live(&new);
        self.send(Event::ScanEvery(new.scan_every));
    }

    pub(super) fn perform(&mut self, action: Action) -> Result<(), KeepError> {
        match action {
            Action::Scan => self.scan(),
            Action::Follow(folders) => self.follow(&folders),
            Action::Run(worker, job) => {
                let stop = Stop::new();
                self.stops[worker.0] = stop.clone();
                self.pool.run(worker, job, stop);
            }
            Action::Interrupt(Worker(number)) => self.stops[number].raise(),
            Action::Sweep(temps) => {
                let swept = atomic::sweep(&temps);
                if swept > 0 {
                    tracing::info!("removed {swept} unfinished files that an earlier run left behind");
                }
            }
            Action::Claim => match self.claim() {
                Err(error @ KeepError::Lock(LockError::Held { .. })) => return Err(error),
                Err(error) => self.send(Event::Unclaimed(error.to_string())),
                Ok(()) => {}
            },
            Action::Note(status) => {
                // What keeps it from being written keeps plans from being written too, and is told with them.
                if let Err(error) = status.write(self.folder.state()) {
                    tracing::debug!("{error}");
                }
            }
            Action::Tell(model, outcome) => (self.on_report)(&model, &outcome),
            Action::Say(Weight::Info, text) => tracing::info!("{text}"),
            Action::Say(Weight::Warning, text) => tracing::warn!("{text}"),
            Action::End => {}
        }
        Ok(())
    }

    fn scan(&self) {
        let job =
            ScanJob { root: self.root.clone(), ignore: self.ignore.clone(), lock: self.lock.clone(), began: now() };
        // The scanner's thread ends only after this is dropped.
        let _ = self.scans.send(job);
    }
}

/// A thread of its own for scans, so that none is ever denied for want of a thread.
fn scanner(events: UnboundedSender<Event>) -> std::io::Result<mpsc::Sender<ScanJob>> {
    let (jobs, inbox) = mpsc::channel::<ScanJob>();
    thread::Builder::new().name("scanner".to_owned()).spawn(move || {
        while let Ok(ScanJob { root, ignore, lock, began }) = inbox.recv() {
            let found = scan(&root, &ignore).map_err(|error| reason(&error));
            let locked = lock.is_some_and(|lock| lock.stands());
            let _ = events.send(Event::Scanned(Scanned { began, found, locked }));
        }
    })?;
    Ok(jobs)
}

/// Whether the state can lie where the settings put it: locks and syncs of a network file system are not to be relied on.
fn allow_state(root: &Path, state: Option<&Path>) -> Result<(), KeepError> {
    let folder = state.unwrap_or(root);
    // A state folder that is not there yet is made under one that is.
    let existing = folder.ancestors().find(|folder| folder.exists());
    match existing.map(remote::kind) {
        Some(Ok(Some(kind))) => Err(KeepError::RemoteState { folder: folder.to_owned(), kind }),
        _ => Ok(()),
    }
}
