//! The loop around the dispatcher: it feeds it events and does what it says.

use std::fmt;
use std::path::Path;
use std::pin::pin;
use std::time::{Duration, Instant};

use tokio::sync::mpsc::unbounded_channel;
use tokio::time::sleep_until;

use super::clock::now;
use super::error::KeepError;
use super::event::{Action, Event};
use super::hints;
use super::keeper::Keeper;
use super::manager::Manager;
use super::path::ModelPath;
use super::pool::{Factory, Replanned};
use super::settings::Settings;
use super::signals::{Order, Signals};

/// Events are taken in batches of at most so many.
const BATCH: usize = 4096;

/// How long background work may hold up the end.
const LINGER: Duration = Duration::from_millis(200);

/// What ties a daemon to whoever operates it.
#[derive(Default)]
pub struct Operating<'a> {
    /// Reads the settings again; on failure says why, in words for people.
    pub reread: Option<Box<dyn FnMut() -> Result<Settings, String> + 'a>>,
    /// The service manager that it runs under.
    pub manager: Option<Manager>,
}

impl fmt::Debug for Operating<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("Operating").field("manager", &self.manager).finish_non_exhaustive()
    }
}

/// Keeps the plans under `root` up to date until SIGTERM or SIGINT, then ends within two seconds. SIGHUP makes it read the settings again.
///
/// `on_report` hears of every job that was done, was unnecessary or failed, on the calling thread.
///
/// # Errors
/// The daemon cannot start, or lost the folder to another one.
pub fn keep(
    root: &Path,
    settings: &Settings,
    factory: Factory,
    operating: Operating<'_>,
    on_report: impl FnMut(&ModelPath, &Replanned),
) -> Result<(), KeepError> {
    let runtime = tokio::runtime::Builder::new_current_thread().enable_all().build()?;
    let result = runtime.block_on(async {
        let mut signals = Signals::listen()?;
        run(root, settings, &factory, operating, on_report, async || signals.next().await).await
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
    let (mut stop, mut stopped) = (pin!(stop), false);
    let orders = async || {
        if stopped {
            std::future::pending::<()>().await;
        }
        stop.as_mut().await;
        stopped = true;
        Order::Stop
    };
    run(root, settings, &factory, Operating::default(), on_report, orders).await
}

async fn run(
    root: &Path,
    settings: &Settings,
    factory: &Factory,
    operating: Operating<'_>,
    on_report: impl FnMut(&ModelPath, &Replanned),
    mut orders: impl AsyncFnMut() -> Order,
) -> Result<(), KeepError> {
    let Operating { mut reread, mut manager } = operating;
    let (events, mut inbox) = unbounded_channel();
    let (hint_sender, mut hint_queue) = hints::channel();
    let mut keeper = Keeper::start(root, settings.clone(), factory, events, hint_sender, on_report)?;
    let mut dispatcher = keeper.dispatcher(Instant::now());
    if let Some(manager) = &manager {
        manager.ready();
    }
    let (mut batch, mut hinted) = (Vec::new(), Vec::new());
    loop {
        let wakes = [dispatcher.wake(), manager.as_ref().and_then(Manager::next)];
        let wake = wakes.into_iter().flatten().min().map(Into::into);
        tokio::select! {
            order = orders() => match order {
                Order::Stop => {
                    manager.iter().for_each(Manager::stopping);
                    batch.push(Event::Stop);
                }
                Order::Reread => {
                    manager.iter().for_each(|manager| manager.reloading(monotonic()));
                    keeper.reread(reread.as_mut().map(|reread| reread()));
                    manager.iter().for_each(Manager::ready);
                }
            },
            _ = inbox.recv_many(&mut batch, BATCH) => {}
            () = hint_queue.receive(&mut hinted, BATCH) => {}
            () = at(wake) => batch.push(Event::Tick),
        }
        batch.extend(hinted.drain(..).filter(|hint| keeper.heed(hint)).map(Event::Hint));
        for event in batch.drain(..) {
            for action in dispatcher.handle(now(), event) {
                if matches!(action, Action::End) {
                    return Ok(());
                }
                keeper.perform(action)?;
            }
        }
        if let Some(manager) = &mut manager {
            manager.beat(now());
        }
    }
}

/// The system's monotonic clock, as service managers read it.
fn monotonic() -> Duration {
    let time = rustix::time::clock_gettime(rustix::time::ClockId::Monotonic);
    Duration::new(time.tv_sec.unsigned_abs(), u32::try_from(time.tv_nsec).unwrap_or(0))
}

async fn at(time: Option<tokio::time::Instant>) {
    match time {
        Some(time) => sleep_until(time).await,
        None => std::future::pending().await,
    }
}
