//! A dispatcher to be tested, with a clock of its own.

use std::collections::BTreeSet;
use std::path::PathBuf;

use super::*;

/// A dispatcher with a clock of its own, over a real folder whose files are laid out by the test.
pub(super) struct Bench {
    pub(super) dispatcher: Dispatcher,
    pub(super) now: Instant,
    pub(super) folder: tempfile::TempDir,
    pub(super) root: Arc<Path>,
    /// Jobs handed out and not ended.
    pub(super) jobs: Vec<(Worker, Job)>,
    pub(super) interrupted: Vec<Worker>,
    pub(super) said: Vec<String>,
    pub(super) claims: usize,
    pub(super) swept: Vec<PathBuf>,
    pub(super) folders: BTreeSet<PathBuf>,
    pub(super) statuses: Vec<Status>,
    pub(super) scans: Vec<Instant>,
    /// How long a scan takes.
    pub(super) scan_takes: Duration,
    pub(super) ended: bool,
}

impl Bench {
    pub(super) fn new(workers: usize) -> Self {
        let folder = tempfile::tempdir().unwrap();
        let root: Arc<Path> = Arc::from(folder.path());
        let now = Instant::now();
        let settings = Settings { workers, ..Settings::default() };
        let dispatcher = Dispatcher::new(now, root.clone(), Arc::from(Path::new("/state")), &settings, None);
        let mut bench = Self {
            dispatcher,
            now,
            folder,
            root,
            jobs: Vec::new(),
            interrupted: Vec::new(),
            said: Vec::new(),
            claims: 0,
            swept: Vec::new(),
            folders: BTreeSet::new(),
            statuses: Vec::new(),
            scans: Vec::new(),
            scan_takes: Duration::ZERO,
            ended: false,
        };
        bench.claim();
        bench
    }

    /// Claims the folder that stands at the root's path.
    pub(super) fn claim(&mut self) {
        let claimed = Event::Claimed(FolderId::of(&self.root).unwrap());
        self.event(claimed);
    }

    pub(super) fn model(&self, name: &str) -> ModelPath {
        ModelPath::new(&self.root, Path::new(&format!("{name}.model.toml"))).unwrap()
    }

    pub(super) fn write(&self, file: &str, text: &str) {
        use std::io::Write as _;
        std::fs::File::create(self.folder.path().join(file)).unwrap().write_all(text.as_bytes()).unwrap();
    }

    pub(super) fn remove(&self, file: &str) {
        std::fs::remove_file(self.folder.path().join(file)).unwrap();
    }

    pub(super) fn event(&mut self, event: Event) {
        for action in self.dispatcher.handle(self.now, event) {
            match action {
                Action::Scan => {
                    self.scans.push(self.now);
                    let found = crate::keep::scan::scan(&self.root, &crate::keep::Ignore::new(&[]).unwrap());
                    let found = found.map_err(|error| error.to_string());
                    let began = self.now;
                    self.now += self.scan_takes;
                    self.event(Event::Scanned(Scanned { began, found, locked: true }));
                }
                Action::Run(worker, job) => {
                    let (model, stamp) = (job.path.clone(), Stamp::of(&job.path.full()));
                    self.jobs.push((worker, job));
                    self.event(Event::Word(Word::Began { model, stamp }));
                }
                Action::Interrupt(worker) => self.interrupted.push(worker),
                Action::Say(_, text) => self.said.push(text),
                Action::Claim => {
                    self.claims += 1;
                    self.claim();
                }
                Action::Sweep(temps) => self.swept.extend(temps),
                Action::Follow(folders) => self.folders = folders,
                Action::Note(status) => self.statuses.push(*status),
                Action::Tell(..) => {}
                Action::End => self.ended = true,
            }
        }
    }

    /// Lets time pass, with a tick whenever one is due.
    pub(super) fn pass(&mut self, time: Duration) {
        let end = self.now + time;
        while let Some(wake) = self.dispatcher.wake().filter(|&wake| wake <= end) {
            self.now = self.now.max(wake);
            self.event(Event::Tick);
        }
        self.now = end;
    }

    pub(super) fn hint(&mut self, hint: impl Fn(PathBuf) -> Hint, name: &str) {
        let path = self.model(name).full();
        self.event(Event::Hint(hint(path)));
    }

    /// The names and orders of the jobs in hand.
    pub(super) fn in_hand(&self) -> Vec<(String, What)> {
        self.jobs.iter().map(|(_, job)| (job.path.name(), job.what)).collect()
    }

    /// Ends the oldest job in hand.
    pub(super) fn end(&mut self, outcome: Replanned) {
        let (worker, job) = self.jobs.remove(0);
        let model = job.path;
        let sight = Sight::of(&model);
        self.event(Event::Word(Word::Ended { worker, model, sight, outcome }));
    }
}
