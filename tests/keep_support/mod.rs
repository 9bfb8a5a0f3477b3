//! A daemon on a thread of its own, over a temporary folder, with a planner that records what it read.

use std::fs;
use std::path::{Path, PathBuf};
use std::sync::{Arc, Condvar, Mutex};
use std::thread::JoinHandle;
use std::time::{Duration, Instant};

use millreeve::keep::{Factory, Job, KeepError, Pace, Planner, Replanned, Report, Settings, Stop, What, keep_until};
use millreeve::store::{Durability, Written, atomic};
use tokio::sync::oneshot;

/// Far longer than anything waited for takes; a test that gets here has failed.
const DEADLINE: Duration = Duration::from_secs(60);

/// Settings that settle fast, with an everyday limit for writers.
pub(crate) fn settings() -> Settings {
    let pace = Pace {
        settle: Duration::from_millis(100),
        quiet: Duration::from_secs(30),
        patience: Duration::from_secs(30),
        grace: Duration::from_millis(600),
    };
    Settings { scan_every: Duration::from_millis(150), workers: 2, pace, ..Settings::default() }
}

/// What the planner did, in order. Models are given by name.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum Event {
    Began { model: String, what: What },
    Read { model: String, text: String },
    Planned { model: String, text: String },
    Unchanged { model: String },
    Interrupted { model: String },
    Failed { model: String },
    Ended { model: String },
}

impl Event {
    fn model(&self) -> &str {
        match self {
            Self::Began { model, .. }
            | Self::Read { model, .. }
            | Self::Planned { model, .. }
            | Self::Unchanged { model }
            | Self::Interrupted { model }
            | Self::Failed { model }
            | Self::Ended { model } => model,
        }
    }
}

/// Models by which the support itself tells how far the daemon is. Tests never hear of them.
const MARKS: [&str; 2] = ["start", "round"];

/// The events of a test's own models.
fn own(events: &[Event]) -> Vec<Event> {
    events.iter().filter(|event| !MARKS.contains(&event.model())).cloned().collect()
}

#[derive(Default)]
struct Log {
    events: Mutex<Vec<Event>>,
    held: Mutex<bool>,
    changed: Condvar,
    released: Condvar,
}

impl Log {
    fn add(&self, event: Event) {
        self.events.lock().unwrap().push(event);
        self.changed.notify_all();
    }
}

/// Writes "plan of" and the model's text as plan, whole or not at all.
struct Recorder(Arc<Log>);

impl Planner for Recorder {
    fn replan(&mut self, job: &Job, stop: &Stop) -> Replanned {
        let model = job.path.name();
        self.0.add(Event::Began { model: model.clone(), what: job.what });
        let outcome = self.work(&model, job, stop);
        if outcome == Replanned::Interrupted {
            self.0.add(Event::Interrupted { model: model.clone() });
        }
        self.0.add(Event::Ended { model });
        outcome
    }
}

impl Recorder {
    fn work(&self, model: &str, job: &Job, stop: &Stop) -> Replanned {
        let report = || Box::new(Report { model: model.to_owned(), standing: "current".into(), ..Report::default() });
        let text = match job.what {
            What::Retire => "retired".to_owned(),
            What::Replan => match fs::read_to_string(job.path.full()) {
                Ok(text) => text,
                Err(_) => return Replanned::Vanished,
            },
        };
        self.0.add(Event::Read { model: model.to_owned(), text: text.clone() });
        assert_ne!(text, "panic", "as the model asks");
        let mut held = self.0.held.lock().unwrap();
        while *held && !stop.is_raised() {
            // The flag is polled, as a solver does between two pivots.
            held = self.0.released.wait_timeout(held, Duration::from_millis(1)).unwrap().0;
        }
        drop(held);
        if stop.is_raised() {
            return Replanned::Interrupted;
        }
        let plan = format!("plan of {text}");
        match atomic::write(&job.path.plan(), plan.as_bytes(), |head| head.starts_with(b"plan of"), Durability::Cached)
        {
            Ok(Written::Same) => {
                self.0.add(Event::Unchanged { model: model.to_owned() });
                Replanned::Unchanged(report())
            }
            Ok(_) => {
                self.0.add(Event::Planned { model: model.to_owned(), text });
                Replanned::Done(report())
            }
            Err(error) => Replanned::Failed { message: error.to_string(), retry: error.may_pass() },
        }
    }
}

/// A daemon at work.
pub(crate) struct Daemon {
    folder: tempfile::TempDir,
    root: PathBuf,
    settings: Settings,
    log: Arc<Log>,
    stop: Option<oneshot::Sender<()>>,
    thread: Option<JoinHandle<Result<(), KeepError>>>,
}

impl Daemon {
    /// Starts one over a new folder.
    pub(crate) fn start(settings: Settings) -> Self {
        let folder = tempfile::tempdir().unwrap();
        let root = folder.path().join("works");
        fs::create_dir(&root).unwrap();
        fs::File::create(root.join("start.model.toml")).unwrap();
        let mut daemon = Self { folder, root, settings, log: Arc::default(), stop: None, thread: None };
        daemon.run();
        daemon
    }

    fn run(&mut self) {
        let (stop, stopped) = oneshot::channel();
        let (root, settings, log) = (self.root.clone(), self.settings.clone(), self.log.clone());
        self.stop = Some(stop);
        self.thread = Some(std::thread::spawn(move || keep_for(&root, &settings, log, stopped)));
        // The first scan comes after lock and watch are in place.
        self.wait("the first scan", |events| {
            events.iter().any(|event| matches!(event, Event::Ended { model } if model == "start"))
        });
    }

    /// Ends the daemon, forgets what it did, and starts another one over the same folder.
    pub(crate) fn restart(&mut self) {
        self.end();
        self.log = Arc::default();
        self.run();
    }

    /// Ends the daemon, and returns all that happened.
    pub(crate) fn stop(mut self) -> Vec<Event> {
        self.end();
        own(&self.log.events.lock().unwrap())
    }

    fn end(&mut self) {
        let _ = self.stop.take().unwrap().send(());
        self.thread.take().unwrap().join().unwrap().unwrap();
    }

    /// What a second daemon on the same folder comes to.
    pub(crate) fn second(&self) -> Result<(), KeepError> {
        let (_stop, stopped) = oneshot::channel();
        keep_for(&self.root, &self.settings, Arc::default(), stopped)
    }

    /// A path in the watched folder.
    pub(crate) fn path(&self, below: &str) -> PathBuf {
        self.root.join(below)
    }

    /// Makes every run wait in the middle, until released or interrupted.
    pub(crate) fn hold(&self) {
        *self.log.held.lock().unwrap() = true;
    }

    /// Lets runs go on.
    pub(crate) fn release(&self) {
        *self.log.held.lock().unwrap() = false;
        self.log.released.notify_all();
    }

    /// Waits until what happened is as wanted.
    pub(crate) fn wait_for(&self, what: &str, wanted: impl Fn(&[Event]) -> bool) {
        self.wait(what, |events| wanted(&own(events)));
    }

    fn wait(&self, what: &str, wanted: impl Fn(&[Event]) -> bool) {
        let start = Instant::now();
        let mut events = self.log.events.lock().unwrap();
        while !wanted(&events) {
            assert!(start.elapsed() < DEADLINE, "waited in vain for {what}; {events:#?}");
            events = self.log.changed.wait_timeout(events, Duration::from_millis(20)).unwrap().0;
        }
    }

    /// Waits until a model was planned from this text.
    pub(crate) fn wait_planned(&self, model: &str, text: &str) {
        let wanted = Event::Planned { model: model.to_owned(), text: text.to_owned() };
        self.wait(&format!("{wanted:?}"), |events| events.contains(&wanted));
    }

    /// Waits until a model was found unchanged.
    pub(crate) fn wait_unchanged(&self, model: &str) {
        let wanted = Event::Unchanged { model: model.to_owned() };
        self.wait(&format!("{wanted:?}"), |events| events.contains(&wanted));
    }

    /// Waits until whole rounds of scanning, settling and grace have gone by: a model that only scans can find, written through a link
    /// from outside, is found, and another one that is removed is retired. Whatever else was due has been done before that.
    pub(crate) fn wait_rounds(&self) {
        let path = self.path("round.model.toml");
        let planned = |text: &str| self.wait_planned("round", text);
        fs::File::create(&path).unwrap();
        planned("");
        let link = self.folder.path().join("round");
        fs::hard_link(&path, &link).unwrap();
        std::io::Write::write_all(&mut fs::File::create(&link).unwrap(), b"round").unwrap();
        planned("round");
        fs::remove_file(&path).unwrap();
        self.wait("the end of the rounds", |events| {
            events.contains(&Event::Planned { model: "round".into(), text: "retired".into() })
        });
    }

    /// How many events are of a kind.
    pub(crate) fn count(&self, kind: impl Fn(&Event) -> bool) -> usize {
        own(&self.log.events.lock().unwrap()).iter().filter(|event| kind(event)).count()
    }

    /// All texts of a model that were read, without repeats in a row.
    pub(crate) fn read(&self, name: &str) -> Vec<String> {
        let events = self.log.events.lock().unwrap();
        let mut texts: Vec<_> = events
            .iter()
            .filter_map(|event| match event {
                Event::Read { model, text } if model == name => Some(text.clone()),
                _ => None,
            })
            .collect();
        texts.dedup();
        texts
    }

    /// All texts that a model was planned from, in order.
    pub(crate) fn planned(&self, name: &str) -> Vec<String> {
        let events = self.log.events.lock().unwrap();
        let text = |event: &Event| match event {
            Event::Planned { model, text } if model == name => Some(text.clone()),
            _ => None,
        };
        events.iter().filter_map(text).collect()
    }

    /// How many runs of one model there were at the same time, at most.
    pub(crate) fn most_at_once(&self, name: &str) -> usize {
        let events = self.log.events.lock().unwrap();
        let (mut now, mut most) = (0, 0);
        for event in events.iter() {
            match event {
                Event::Began { model, .. } if model == name => now += 1,
                Event::Ended { model } if model == name => now -= 1,
                _ => {}
            }
            most = most.max(now);
        }
        most
    }
}

impl Drop for Daemon {
    fn drop(&mut self) {
        self.release();
        if let (Some(stop), Some(thread)) = (self.stop.take(), self.thread.take()) {
            let _ = stop.send(());
            let ended = thread.join().unwrap();
            if !std::thread::panicking() {
                ended.unwrap();
            }
        }
    }
}

fn keep_for(root: &Path, settings: &Settings, log: Arc<Log>, stopped: oneshot::Receiver<()>) -> Result<(), KeepError> {
    let runtime = tokio::runtime::Builder::new_current_thread().enable_all().build().unwrap();
    let recorder = log.clone();
    let factory: Factory = Arc::new(move || Box::new(Recorder(recorder.clone())));
    let stop = async {
        let _ = stopped.await;
    };
    let on_report = |model: &millreeve::keep::ModelPath, outcome: &Replanned| {
        if matches!(outcome, Replanned::Failed { .. }) {
            log.add(Event::Failed { model: model.name() });
        }
    };
    let ended = runtime.block_on(keep_until(root, settings, factory, on_report, stop));
    runtime.shutdown_timeout(Duration::from_millis(200));
    ended
}
