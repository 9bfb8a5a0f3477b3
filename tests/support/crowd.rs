//! A folder of many small models in a git repository, and the real daemon over it.

use std::collections::BTreeMap;
use std::fs;
use std::io::{BufRead, BufReader};
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};
use std::sync::mpsc::{Receiver, channel};
use std::time::{Duration, Instant};

use serde_json::Value;

/// Far longer than anything waited for takes.
const DEADLINE: Duration = Duration::from_secs(300);
/// Models in each folder.
const EACH: usize = 100;

/// The folder. Branch `first` has the models as they are laid out; on branch `second` some have other capacities.
pub(crate) struct Crowd {
    folder: tempfile::TempDir,
    /// The models, by their paths below the root.
    pub(crate) models: Vec<String>,
}

fn tiles(capacity: usize) -> String {
    format!(
        "format = 1\n[resources.kiln]\ncapacity = {capacity:>7}\n[resources.press]\ncapacity = 9000000\n\
         [activities.floor]\nprice = 3\nuses = {{ kiln = 1, press = 2 }}\n\
         [activities.wall]\nprice = 2\nuses = {{ kiln = 1.5, press = 1 }}\n"
    )
}

/// The aim of the model of this number, as it is laid out and as it is changed: three times its capacity.
pub(crate) fn aim(number: usize, changed: bool) -> f64 {
    let capacity = u32::try_from(capacity(number, changed)).unwrap();
    f64::from(3 * capacity)
}

fn capacity(number: usize, changed: bool) -> usize {
    if changed { 100_000 + number } else { 1 + number }
}

impl Crowd {
    /// Lays out `count` models; every `every`-th is another one on branch `second`. Nothing is planned yet.
    pub(crate) fn new(count: usize, every: usize) -> Self {
        let folder = tempfile::tempdir().unwrap();
        let name = |number: usize| format!("yard-{:02}/m-{number:04}.model.toml", number / EACH);
        let crowd = Self { folder, models: (0..count).map(name).collect() };
        fs::create_dir(crowd.root()).unwrap();
        crowd.git(&["init", "--quiet", "--template=", "--initial-branch=first"]);
        for (number, model) in crowd.models.iter().enumerate() {
            fs::create_dir_all(crowd.root().join(model).parent().unwrap()).unwrap();
            crowd.save(model, &tiles(capacity(number, false)));
        }
        crowd.commit("first");
        crowd.git(&["checkout", "--quiet", "-b", "second"]);
        for (number, model) in crowd.models.iter().enumerate().step_by(every) {
            crowd.save(model, &tiles(capacity(number, true)));
        }
        crowd.commit("second");
        crowd.switch("first");
        crowd
    }

    /// The watched folder.
    pub(crate) fn root(&self) -> PathBuf {
        self.folder.path().join("works")
    }

    /// Switches to a branch.
    pub(crate) fn switch(&self, branch: &str) {
        self.git(&["checkout", "--quiet", branch]);
    }

    /// Plans all in a single pass.
    pub(crate) fn plan(&self) {
        let done = command().arg("once").arg(self.root()).output().unwrap();
        assert!(done.status.success(), "{done:?}");
    }

    /// What tells whether plans and notes were touched: their inodes, in order.
    pub(crate) fn outputs(&self) -> Vec<u64> {
        use std::os::unix::fs::MetadataExt;
        let inodes = |model: &String| {
            [".plan.toml", ".note.md"]
                .map(|ending| fs::metadata(self.root().join(model.replace(".model.toml", ending))).unwrap().ino())
        };
        self.models.iter().flat_map(inodes).collect()
    }

    /// Saves a model in place.
    pub(crate) fn save(&self, model: &str, text: &str) {
        use std::io::Write;
        fs::File::create(self.root().join(model)).unwrap().write_all(text.as_bytes()).unwrap();
    }

    /// A model saved last: once it is told of, all events before it have been dealt with.
    pub(crate) fn save_mark(&self) {
        self.save("mark.model.toml", &tiles(7));
    }

    fn commit(&self, message: &str) {
        self.git(&["add", "--all", "*.model.toml"]);
        self.git(&["commit", "--quiet", "--message", message]);
    }

    fn git(&self, arguments: &[&str]) {
        let mut git = Command::new("git");
        git.current_dir(self.root()).env("GIT_CONFIG_GLOBAL", "/dev/null").env("GIT_CONFIG_SYSTEM", "/dev/null");
        git.args(["-c", "user.name=Planner", "-c", "user.email=planner@example.invalid"]).args(arguments);
        let done = git.output().unwrap();
        assert!(done.status.success(), "{done:?}");
    }
}

fn command() -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_millreeve"));
    for (name, _) in std::env::vars_os().filter(|(name, _)| name.to_string_lossy().starts_with("MILLREEVE_")) {
        command.env_remove(name);
    }
    command
}

/// A daemon at work. Killed when dropped.
pub(crate) struct Keeper {
    child: Child,
    objects: Receiver<Value>,
    /// What was told so far, by model: its aims, and how many of the tellings were solves with pivots or from nothing.
    pub(crate) told: BTreeMap<String, Vec<Value>>,
}

impl Keeper {
    /// Starts one over a folder.
    pub(crate) fn start(root: &Path) -> Self {
        let mut keep = command();
        keep.args(["--json", "keep"]).arg(root).stdin(Stdio::null()).stdout(Stdio::piped()).stderr(Stdio::null());
        let mut child = keep.spawn().unwrap();
        let (sender, objects) = channel();
        let lines = BufReader::new(child.stdout.take().unwrap()).lines();
        std::thread::spawn(move || {
            for line in lines.map_while(Result::ok) {
                if sender.send(serde_json::from_str(&line).unwrap()).is_err() {
                    break;
                }
            }
        });
        Self { child, objects, told: BTreeMap::new() }
    }

    /// Takes in what is told until it is enough.
    pub(crate) fn wait(&mut self, what: &str, enough: impl Fn(&BTreeMap<String, Vec<Value>>) -> bool) {
        let until = Instant::now() + DEADLINE;
        while !enough(&self.told) {
            let object = self.objects.recv_timeout(until.saturating_duration_since(Instant::now()));
            let object = object.unwrap_or_else(|error| panic!("waited in vain for {what}: {error}"));
            let path = object["path"].as_str().unwrap().to_owned();
            self.told.entry(path).or_default().push(object);
        }
    }

    /// How many of the tellings so far were of solves.
    pub(crate) fn solves(&self) -> usize {
        let solved = |object: &&Value| !object["start"].is_null();
        self.told.values().flatten().filter(solved).count()
    }

    /// The folder of this process in `/proc`.
    pub(crate) fn proc(&self) -> PathBuf {
        PathBuf::from(format!("/proc/{}", self.child.id()))
    }
}

impl Drop for Keeper {
    fn drop(&mut self) {
        let _ = self.child.kill();
        let _ = self.child.wait();
    }
}
