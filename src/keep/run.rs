//! The loop around the dispatcher: it feeds it events and does what it says.

use std::path::Path;
use std::pin::pin;
use std::sync::Arc;
use std::time::{Duration, Instant};

use tokio::sync::mpsc::{UnboundedSender, unbounded_channel};
use tokio::task::spawn_blocking;
use tokio::time::sleep_until;

use super::daemon::Dispatcher;
use super::event::{Action, Event, Scanned, Weight};
use super::path::{Ignore, IgnoreError, ModelPath};
use super::pool::{Factory, Pool, Replanned, Stop, Worker};
use super::scan::{FolderId, scan};
use super::settings::{By, Settings};
use super::watch::{Hint, Watcher, watch};
use crate::store::error::reason;
use crate::store::{Folder, Lock, LockError, StoreError, atomic};

/// Events are taken in batches of at most so many.
const BATCH: usize = 4096;

/// How long background work may hold up the end.
const LINGER: Duration = Duration::from_millis(200);

/// Why a folder is not kept, or no longer.
#[derive(Debug, thiserror::Error)]
pub enum KeepError {
    /// The folder, or the state folder, cannot be used.
    #[error(transparent)]
    Store(#[from] StoreError),
    /// Another process keeps the folder, or its lock cannot be used.
    #[error(transparent)]
    Lock(#[from] LockError),
    /// A glob in the settings cannot be read.
    #[error(transparent)]
    Ignore(#[from] IgnoreError),
    /// The system denies threads, timers or signals.
    #[error("cannot start: {}", reason(.0))]
    System(#[from] std::io::Error),
}

/// Keeps the plans under `root` up to date until SIGTERM or SIGINT, then ends within two seconds.
///
/// `on_report` hears of every job that was done, was unnecessary or failed, on the calling thread.
///
/// # Errors
/// The daemon cannot start, or lost the folder to another one.
pub fn keep(
    root: &Path,
    settings: &Settings,
    factory: Factory,
    on_report: impl FnMut(&ModelPath, &Replanned),
) -> Result<(), KeepError> {
    let runtime = tokio::runtime::Builder::new_current_thread().enable_all().build()?;
    let result = runtime.block_on(async {
        let signals = Signals::listen()?;
        keep_until(root, settings, factory, on_report, signals.wait()).await
    });
    runtime.shutdown_timeout(LINGER);
    result
}

/// As [`keep`], until `stop` is ready.
///
/// # Errors
/// As [`keep`].
pub async fn keep_until(
    root: &Path,
    settings: &Settings,
    factory: Factory,
    on_report: impl FnMut(&ModelPath, &Replanned),
    stop: impl Future<Output = ()>,
) -> Result<(), KeepError> {
    let (events, mut inbox) = unbounded_channel();
    let mut keeper = Keeper::start(root, settings, &factory, events, on_report)?;
    let started = keeper.lock.as_ref().and_then(|lock| lock.taken());
    let (root, state) = (keeper.root.clone(), Arc::from(keeper.folder.state()));
    let mut dispatcher = Dispatcher::new(Instant::now(), root, state, settings, started);
    let (mut stop, mut stopped) = (pin!(stop), false);
    let mut batch = Vec::new();
    loop {
        let wake = dispatcher.wake().map(Into::into);
        tokio::select! {
            () = &mut stop, if !stopped => {
                stopped = true;
                batch.push(Event::Stop);
            }
            _ = inbox.recv_many(&mut batch, BATCH) => {}
            () = at(wake) => batch.push(Event::Tick),
        }
        for event in batch.drain(..) {
            for action in dispatcher.handle(now(), event) {
                if matches!(action, Action::End) {
                    return Ok(());
                }
                keeper.perform(action)?;
            }
        }
    }
}

fn now() -> Instant {
    tokio::time::Instant::now().into_std()
}

async fn at(time: Option<tokio::time::Instant>) {
    match time {
        Some(time) => sleep_until(time).await,
        None => std::future::pending().await,
    }
}

/// What the loop holds: the folder with its lock and watcher, and the workers.
struct Keeper<'a, R> {
    settings: &'a Settings,
    folder: Folder,
    root: Arc<Path>,
    ignore: Arc<Ignore>,
    lock: Option<Arc<Lock>>,
    watcher: Option<Watcher>,
    pool: Pool,
    /// The stop flag of the job that each worker has, or had last.
    stops: Vec<Stop>,
    events: UnboundedSender<Event>,
    on_report: R,
}

impl<'a, R: FnMut(&ModelPath, &Replanned)> Keeper<'a, R> {
    fn start(
        root: &Path,
        settings: &'a Settings,
        factory: &Factory,
        events: UnboundedSender<Event>,
        on_report: R,
    ) -> Result<Self, KeepError> {
        let ignore = Arc::new(Ignore::new(&settings.ignore)?);
        let folder = Folder::open(root, settings.state_dir.as_deref())?;
        let workers = settings.workers.max(1);
        let words = events.clone();
        let pool = Pool::start(workers, factory, move |word| {
            // Nobody listens any more once the daemon has ended.
            let _ = words.send(Event::Word(word));
        })?;
        let root = Arc::from(folder.root());
        let stops = vec![Stop::new(); workers];
        let mut keeper =
            Self { settings, folder, root, ignore, lock: None, watcher: None, pool, stops, events, on_report };
        keeper.claim()?;
        Ok(keeper)
    }

    /// Locks the folder that now stands at the root's path, and watches it.
    fn claim(&mut self) -> Result<(), KeepError> {
        self.lock = None;
        self.watcher = None;
        self.folder = Folder::open(&self.root, self.settings.state_dir.as_deref())?;
        let id = FolderId::of(&self.root).map_err(StoreError::failed(crate::store::Step::Look, &self.root))?;
        self.lock = Some(Arc::new(Lock::take(&self.folder)?));
        if self.settings.by == By::Events {
            let hints = self.events.clone();
            let watching = watch(&self.root, move |hint| {
                let _ = hints.send(Event::Hint(hint));
            });
            match watching {
                Ok(watcher) => self.watcher = Some(watcher),
                Err(why) => self.send(Event::Hint(Hint::Trouble(why))),
            }
        }
        // What was written before the watch began is found by the scan that follows.
        self.send(Event::Claimed(id));
        Ok(())
    }

    fn send(&self, event: Event) {
        let _ = self.events.send(event);
    }

    fn perform(&mut self, action: Action) -> Result<(), KeepError> {
        match action {
            Action::Scan => self.scan(),
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
                Err(KeepError::Store(error)) => self.send(Event::Unclaimed(error.to_string())),
                claimed => claimed?,
            },
            Action::Tell(model, outcome) => (self.on_report)(&model, &outcome),
            Action::Say(Weight::Info, text) => tracing::info!("{text}"),
            Action::Say(Weight::Warning, text) => tracing::warn!("{text}"),
            Action::End => {}
        }
        Ok(())
    }

    fn scan(&self) {
        let (root, ignore, lock) = (self.root.clone(), self.ignore.clone(), self.lock.clone());
        let events = self.events.clone();
        let began = now();
        spawn_blocking(move || {
            let found = scan(&root, &ignore).map_err(|error| reason(&error));
            let locked = lock.is_some_and(|lock| lock.stands());
            let _ = events.send(Event::Scanned(Scanned { began, found, locked }));
        });
    }
}

/// The signals that end the daemon.
struct Signals {
    terminate: tokio::signal::unix::Signal,
    interrupt: tokio::signal::unix::Signal,
}

impl Signals {
    fn listen() -> std::io::Result<Self> {
        use tokio::signal::unix::{SignalKind, signal};
        Ok(Self { terminate: signal(SignalKind::terminate())?, interrupt: signal(SignalKind::interrupt())? })
    }

    async fn wait(mut self) {
        tokio::select! {
            _ = self.terminate.recv() => {}
            _ = self.interrupt.recv() => {}
        }
    }
}
