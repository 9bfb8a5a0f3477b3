//! A folder of models, the real daemon over it, and what must hold of such a folder whenever it is at rest.

use std::cell::Cell;
use std::collections::BTreeSet;
use std::ffi::OsString;
use std::fs;
use std::io::{BufRead, BufReader, Read, Write};
use std::os::unix::fs::MetadataExt;
use std::path::{Path, PathBuf};
use std::process::{Child, Command, ExitStatus, Stdio};
use std::sync::mpsc::{Receiver, RecvTimeoutError, Sender, channel};
use std::time::{Duration, Instant};

use millreeve::model::meaning::Meaning;
use millreeve::model::read;
use millreeve::plan::{Standing, note, text};
use millreeve::store::atomic::is_temp;
use rustix::process::{Pid, Signal, kill_process};
use serde_json::Value;

/// Far longer than anything waited for takes; a test that gets here has failed.
const DEADLINE: Duration = Duration::from_secs(20);

/// A small model whose aim is three times its capacity, so that a plan tells which version it answers.
pub(crate) fn tiles(capacity: u32) -> String {
    format!(
        "format = 1\n[resources.kiln]\ncapacity = {capacity:>5}\n[activities.tile]\nprice = 3\nuses = {{ kiln = 1 }}\n"
    )
}

/// The aim of [`tiles`].
pub(crate) fn aim(capacity: u32) -> f64 {
    f64::from(capacity * 3)
}

/// A model of the largest size in everyday use, which takes the solver far longer than it takes to end the daemon.
pub(crate) fn heavy() -> String {
    let (activities, resources, each) = (6000_usize, 3000_usize, 24_usize);
    let mut seed = 12_345_u64;
    let mut next = move |most: u64| {
        seed = seed.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (seed >> 33) % most
    };
    let mut model = String::from("format = 1\n");
    for resource in 0..resources {
        model.push_str(&format!("[resources.r{resource}]\ncapacity = {}\n", 1000 + next(9000)));
    }
    for activity in 0..activities {
        let used: BTreeSet<_> = (0..each).map(|_| next(resources as u64)).collect();
        let uses: Vec<_> =
            used.iter().map(|resource| format!("r{resource} = {}.{}", 1 + next(9), next(1000))).collect();
        let price = 10 + next(1000);
        model.push_str(&format!("[activities.a{activity}]\nprice = {price}\nuses = {{ {} }}\n", uses.join(", ")));
    }
    model
}

/// Writes a file in place, as most editors do.
pub(crate) fn write(path: &Path, bytes: impl AsRef<[u8]>) {
    fs::File::create(path).unwrap().write_all(bytes.as_ref()).unwrap();
}

/// Waits within a writer, as part of the scenario, or between two looks of a bounded loop; never in the hope that something has happened.
#[expect(clippy::disallowed_methods, reason = "a slow writer is what is tested, and looks are spaced")]
pub(crate) fn pause(milliseconds: u64) {
    std::thread::sleep(Duration::from_millis(milliseconds));
}

/// Looks again and again until something holds that nothing tells of.
pub(crate) fn wait_until(what: &str, mut holds: impl FnMut() -> bool) {
    let until = Instant::now() + DEADLINE;
    while !holds() {
        assert!(Instant::now() < until, "waited in vain for {what}");
        pause(10);
    }
}

/// What tells whether a file was touched: inode and times.
pub(crate) fn identity(path: &Path) -> (u64, i64, i64, i64, i64) {
    let about = fs::symlink_metadata(path).unwrap();
    (about.ino(), about.mtime(), about.mtime_nsec(), about.ctime(), about.ctime_nsec())
}

/// A folder of models.
pub(crate) struct Works {
    folder: tempfile::TempDir,
    root: PathBuf,
    /// How many models told how far a daemon was, so far.
    marks: Cell<u32>,
    /// Plans in it that somebody else wrote, by their paths below it.
    pub(crate) foreign: Vec<&'static str>,
}

impl Works {
    /// A folder with these models.
    pub(crate) fn new(models: &[(&str, &str)]) -> Self {
        let folder = tempfile::tempdir().unwrap();
        let root = folder.path().join("works");
        fs::create_dir(&root).unwrap();
        let works = Self { folder, root, marks: Cell::new(0), foreign: Vec::new() };
        for (name, text) in models {
            works.save(name, text);
        }
        works
    }

    pub(crate) fn root(&self) -> &Path {
        &self.root
    }

    /// A path outside the folder, on the same file system.
    pub(crate) fn outside(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    /// A path in the folder.
    pub(crate) fn path(&self, below: &str) -> PathBuf {
        self.root.join(below)
    }

    pub(crate) fn model(&self, name: &str) -> PathBuf {
        self.path(&format!("{name}.model.toml"))
    }

    pub(crate) fn plan(&self, name: &str) -> PathBuf {
        self.path(&format!("{name}.plan.toml"))
    }

    pub(crate) fn note(&self, name: &str) -> PathBuf {
        self.path(&format!("{name}.note.md"))
    }

    /// Saves a model in place and in one go.
    pub(crate) fn save(&self, name: &str, text: &str) {
        write(&self.model(name), text);
    }

    pub(crate) fn plan_text(&self, name: &str) -> String {
        fs::read_to_string(self.plan(name)).unwrap()
    }

    pub(crate) fn note_text(&self, name: &str) -> String {
        fs::read_to_string(self.note(name)).unwrap()
    }

    /// The standing and the aim that a plan on disk says.
    pub(crate) fn standing(&self, name: &str) -> (String, f64) {
        let plan = text::read(&self.plan_text(name)).unwrap().plan;
        (plan.standing.word().to_owned(), plan.aim)
    }

    /// The daemon over this folder, from when it watches.
    pub(crate) fn keep(&self) -> Daemon {
        let mut daemon = Daemon::spawn(command(&["--json", "keep"]).arg(&self.root));
        daemon.wait_watching();
        daemon
    }

    /// A folder with a daemon at work that has planned [`tiles`] of these names and capacities.
    pub(crate) fn kept(models: &[(&str, u32)]) -> (Self, Daemon) {
        let works = Self::new(&[]);
        let mut daemon = works.keep();
        for &(name, capacity) in models {
            works.save(name, &tiles(capacity));
            daemon.wait_current(name, aim(capacity));
        }
        (works, daemon)
    }

    /// Runs one command to its end: exit status, results, log and errors.
    pub(crate) fn run(&self, arguments: &[&str]) -> (Option<i32>, String, String) {
        let output = command(arguments).current_dir(&self.root).output().unwrap();
        let told = |bytes: Vec<u8>| String::from_utf8(bytes).unwrap();
        (output.status.code(), told(output.stdout), told(output.stderr))
    }

    /// Checks what must hold of the folder at rest.
    pub(crate) fn check(&self) {
        let mut folders = vec![self.root.clone()];
        while let Some(folder) = folders.pop() {
            for entry in fs::read_dir(&folder).unwrap() {
                let entry = entry.unwrap();
                let (path, name) = (entry.path(), entry.file_name());
                // The daemon may be writing its status; what was left behind stays.
                if is_temp(&name) {
                    wait_until("a temporary file to go", || !path.exists());
                    continue;
                }
                if entry.file_type().unwrap().is_dir() && name != ".git" {
                    folders.push(path);
                } else if name.to_string_lossy().ends_with(".plan.toml") && !self.is_foreign(&path) {
                    check_plan(&path);
                }
            }
        }
    }

    fn is_foreign(&self, path: &Path) -> bool {
        self.foreign.iter().any(|below| self.path(below) == path)
    }
}

/// A plan is whole, sealed and finite, its note speaks of it, and where it says that it is current it answers the model beside it.
fn check_plan(path: &Path) {
    let beside = |suffix: &str| PathBuf::from(path.to_str().unwrap().replace(".plan.toml", suffix));
    let written = text::read(&fs::read_to_string(path).unwrap()).unwrap_or_else(|error| panic!("{path:?}: {error}"));
    assert!(written.sealed, "{path:?}");
    let note = fs::read_to_string(beside(".note.md")).unwrap();
    assert_eq!(note::speaks_of(&note), Some(written.seal.as_str()), "the note beside {path:?}");
    for activity in &written.plan.activities {
        for &level in activity.level.numbers() {
            let clean = level.is_finite() && (level.to_bits() == 0 || level.abs() > 1e-9);
            assert!(clean, "{path:?}: {} at {level:?}", activity.name);
        }
    }
    assert!(written.plan.aim.is_finite(), "{path:?}");
    if written.plan.standing == Standing::Current {
        let model = beside(".model.toml");
        let reading = read::writing(&model).unwrap().read(&model).unwrap();
        assert_eq!(written.plan.answers, Meaning::of(&reading.model), "{path:?}");
    }
}

/// The program, with nothing of the caller's environment that could change what it does.
pub(crate) fn command(arguments: &[&str]) -> Command {
    within(Command::new(env!("CARGO_BIN_EXE_millreeve")), arguments)
}

/// The same, started by another program.
pub(crate) fn within(mut command: Command, arguments: &[&str]) -> Command {
    let ours = |name: &OsString| name.to_string_lossy().starts_with("MILLREEVE_");
    for (name, _) in std::env::vars_os().filter(|(name, _)| ours(name)) {
        command.env_remove(name);
    }
    // Tests need not wait for whole seconds to be scanned for.
    command.env("MILLREEVE_WATCH_SCAN_EVERY", "200 ms").args(arguments);
    command
}

enum Line {
    Object(Box<Value>),
    Log(String),
    End,
}

/// The daemon at work, and all that it has said. Killed when dropped.
pub(crate) struct Daemon {
    child: Child,
    lines: Receiver<Line>,
    /// The objects told so far.
    pub(crate) objects: Vec<Value>,
    /// The lines logged so far.
    pub(crate) log: Vec<String>,
    open: usize,
    /// How many objects earlier waits have gone through.
    passed: usize,
}

impl Daemon {
    pub(crate) fn spawn(command: &mut Command) -> Self {
        let mut child = command.stdin(Stdio::null()).stdout(Stdio::piped()).stderr(Stdio::piped()).spawn().unwrap();
        let (sender, lines) = channel();
        let (out, err) = (child.stdout.take().unwrap(), child.stderr.take().unwrap());
        listen(out, sender.clone(), |line| Line::Object(Box::new(serde_json::from_str(&line).unwrap())));
        listen(err, sender, Line::Log);
        Self { child, lines, objects: Vec::new(), log: Vec::new(), open: 2, passed: 0 }
    }

    /// Takes in the next line; `false` once there are no more.
    fn take(&mut self, until: Instant, what: &str) -> bool {
        if self.open == 0 {
            return false;
        }
        match self.lines.recv_timeout(until.saturating_duration_since(Instant::now())) {
            Ok(Line::Object(object)) => self.objects.push(*object),
            Ok(Line::Log(line)) => self.log.push(line),
            Ok(Line::End) => self.open -= 1,
            Err(RecvTimeoutError::Timeout | RecvTimeoutError::Disconnected) => self.fail(what),
        }
        true
    }

    fn fail(&self, what: &str) -> ! {
        panic!("waited in vain for {what}; told: {:#?}\nlogged: {:#?}", self.objects, self.log)
    }

    /// Waits until the system would tell the daemon of a file: from then on no edit needs a scan to be found.
    pub(crate) fn wait_watching(&mut self) {
        let until = Instant::now() + DEADLINE;
        let folder = PathBuf::from(format!("/proc/{}/fdinfo", self.child.id()));
        let watches =
            |entry: fs::DirEntry| fs::read_to_string(entry.path()).is_ok_and(|told| told.contains("inotify wd:"));
        while !fs::read_dir(&folder).unwrap().flatten().any(watches) {
            assert!(Instant::now() < until, "waited in vain for the watch");
            pause(2);
        }
    }

    /// Waits for an object that no wait before has gone through.
    pub(crate) fn wait(&mut self, what: &str, wanted: impl Fn(&Value) -> bool) -> Value {
        let until = Instant::now() + DEADLINE;
        loop {
            while let Some(object) = self.objects.get(self.passed) {
                self.passed += 1;
                if wanted(object) {
                    return object.clone();
                }
            }
            if !self.take(until, what) {
                self.fail(what);
            }
        }
    }

    /// Waits until a model is current with this aim.
    pub(crate) fn wait_current(&mut self, model: &str, aim: f64) -> Value {
        self.wait(&format!("{model} at {aim}"), |object| {
            object["model"] == model && object["standing"] == "current" && object["aim"] == aim
        })
    }

    /// Waits until a model stands so.
    pub(crate) fn wait_standing(&mut self, model: &str, standing: &str) -> Value {
        self.wait(&format!("{model} {standing}"), |object| object["model"] == model && object["standing"] == standing)
    }

    /// Waits until a line with these words has been logged, now or before.
    pub(crate) fn wait_log(&mut self, words: &str) {
        let until = Instant::now() + DEADLINE;
        while self.logged(words) == 0 {
            if !self.take(until, words) {
                self.fail(words);
            }
        }
    }

    /// How many lines with these words have been logged so far.
    pub(crate) fn logged(&self, words: &str) -> usize {
        self.log.iter().filter(|line| line.contains(words)).count()
    }

    /// Waits until each of these models has been told of, now or before.
    pub(crate) fn wait_told(&mut self, models: &[&str]) {
        let until = Instant::now() + DEADLINE;
        let what = format!("a word of each of {models:?}");
        while models.iter().any(|model| self.told(model).is_empty()) {
            if !self.take(until, &what) {
                self.fail(&what);
            }
        }
    }

    /// Waits until the daemon has come past all events up to now: a model saved after them is planned. Gives its name and capacity.
    pub(crate) fn wait_events(&mut self, works: &Works) -> (String, u32) {
        let mark = works.marks.get() + 1;
        works.marks.set(mark);
        let name = format!("mark-{mark}");
        works.save(&name, &tiles(mark));
        self.wait_current(&name, aim(mark));
        (name, mark)
    }

    /// Waits until a scan has found, and settling has passed, all that had changed up to now without an event: a model written
    /// through a link from outside is planned.
    pub(crate) fn wait_scan(&mut self, works: &Works) {
        let (name, mark) = self.wait_events(works);
        let link = works.outside(&name);
        fs::hard_link(works.model(&name), &link).unwrap();
        write(&link, tiles(1000 + mark));
        self.wait_current(&name, aim(1000 + mark));
    }

    /// Waits until whatever was removed up to now has been taken note of: a model that is removed now is retired.
    pub(crate) fn wait_grace(&mut self, works: &Works) {
        let (name, _) = self.wait_events(works);
        fs::remove_file(works.model(&name)).unwrap();
        self.wait_standing(&name, "retired");
    }

    /// All objects about one model so far, in order.
    pub(crate) fn told(&self, model: &str) -> Vec<&Value> {
        self.objects.iter().filter(|object| object["model"] == model).collect()
    }

    /// The aims of one model's plans so far, without repeats in a row.
    pub(crate) fn aims(&self, model: &str) -> Vec<f64> {
        let mut aims: Vec<_> = self.told(model).iter().filter_map(|object| object["aim"].as_f64()).collect();
        aims.dedup();
        aims
    }

    /// How many times one model was solved from nothing or with pivots.
    pub(crate) fn solves(&self, model: &str) -> usize {
        self.told(model).iter().filter(|object| object["pivots"] != 0 || object["start"] == "cold").count()
    }

    pub(crate) fn pid(&self) -> Pid {
        Pid::from_child(&self.child)
    }

    pub(crate) fn signal(&self, signal: Signal) {
        kill_process(self.pid(), signal).unwrap();
    }

    /// The worker processes of the daemon, by the system's list.
    pub(crate) fn workers(&self) -> Vec<Pid> {
        let numbers =
            fs::read_dir("/proc").unwrap().flatten().filter_map(|entry| entry.file_name().to_str()?.parse().ok());
        let processes = numbers.filter_map(Pid::from_raw);
        // `ppid`, field 4 of proc_pid_stat(5).
        let parent = Some(self.pid().as_raw_nonzero().get().to_string());
        processes.filter(|&process| stat(process).get(1).cloned() == parent).collect()
    }

    /// The processor time that the daemon and its workers have used, in clock ticks.
    pub(crate) fn ticks(&self) -> u64 {
        // `utime`, field 14 of proc_pid_stat(5).
        let ticks = |process| stat(process).get(11).map_or(0, |ticks| ticks.parse::<u64>().unwrap());
        ticks(self.pid()) + self.workers().into_iter().map(ticks).sum::<u64>()
    }

    /// Waits for the end: the status, if it came within `time`.
    pub(crate) fn wait_end(&mut self, time: Duration) -> Option<ExitStatus> {
        let until = Instant::now() + time;
        while Instant::now() < until {
            if let Some(status) = self.child.try_wait().unwrap() {
                while self.take(until, "the last lines") {}
                return Some(status);
            }
            pause(5);
        }
        None
    }

    /// Ends the daemon as a service manager does.
    pub(crate) fn stop(&mut self) {
        self.signal(Signal::TERM);
        let ended = self.wait_end(DEADLINE).unwrap();
        assert!(ended.success(), "{ended:?} {:#?}", self.log);
    }

    /// Kills the daemon without a warning.
    pub(crate) fn kill(&mut self) {
        self.signal(Signal::KILL);
        self.wait_end(DEADLINE).unwrap();
    }
}

impl Drop for Daemon {
    fn drop(&mut self) {
        let _ = self.child.kill();
        let _ = self.child.wait();
    }
}

/// What the system tells of a process, see proc_pid_stat(5): from field 3 on, which follows the name; nothing of one that is gone.
pub(crate) fn stat(process: Pid) -> Vec<String> {
    let told = fs::read_to_string(format!("/proc/{}/stat", process.as_raw_nonzero())).unwrap_or_default();
    told.rsplit_once(") ").map_or_else(Vec::new, |(_, fields)| fields.split(' ').map(str::to_owned).collect())
}

fn listen(from: impl Read + Send + 'static, to: Sender<Line>, line: impl Fn(String) -> Line + Send + 'static) {
    std::thread::spawn(move || {
        for text in BufReader::new(from).lines() {
            // The test may have ended.
            let _ = to.send(line(text.unwrap()));
        }
        let _ = to.send(Line::End);
    });
}
