//! Draws operations and does them to a folder that a daemon keeps.

use std::fs::{self, File};
use std::io::Write;
use std::path::PathBuf;
use std::process::Command;

use crate::rng::Rng;
use crate::support::{Daemon, Works, pause, tiles};

/// Models, in the folder and in one below it.
const NAMES: [&str; 8] = ["a", "b", "c", "d", "e", "yard/f", "yard/g", "yard/h"];
const BRANCHES: [&str; 3] = ["one", "two", "three"];
/// So many of the last operations are told when a run fails.
const TOLD: usize = 40;

/// Does something, and says to what.
type Operation = fn(&mut Driver) -> String;

/// What can be done, and how often: of all weights together, so many times. Saves outweigh all else, as they do in life.
const OPERATIONS: [(usize, &str, Operation); 15] = [
    (14, "saved in place", Driver::save_in_place),
    (6, "saved slowly", Driver::save_slowly),
    (10, "saved by rename", Driver::save_by_rename),
    (4, "damaged", Driver::damage),
    (3, "asked for too much", Driver::contradict),
    (6, "renamed", Driver::rename),
    (6, "deleted", Driver::delete),
    (2, "touched", Driver::touch),
    (4, "plan or note deleted", Driver::delete_output),
    (1, "plan edited", Driver::edit_plan),
    (3, "branch switched", Driver::switch),
    (1, "state lost", Driver::lose_state),
    (2, "killed", Driver::kill),
    (1, "stopped", Driver::stop),
    (3, "disk filled or freed", Driver::fill_or_free),
];

/// A folder of models in a git repository, a daemon over it, and a source of chance.
pub(crate) struct Driver {
    seed: u64,
    rng: Rng,
    works: Works,
    daemon: Option<Daemon>,
    /// Where mounting is allowed the folder is a small file system of its own, which can be filled.
    mount: Option<Mount>,
    filler: Option<File>,
    log: Vec<String>,
}

struct Mount(PathBuf);

impl Drop for Mount {
    fn drop(&mut self) {
        let _ = Command::new("umount").arg("-l").arg(&self.0).output();
    }
}

impl Drop for Driver {
    #[expect(clippy::print_stderr, reason = "how to have the same run again")]
    fn drop(&mut self) {
        if std::thread::panicking() {
            let from = self.log.len().saturating_sub(TOLD);
            eprintln!("seed {}, {} operations, the last ones: {:#?}", self.seed, self.log.len(), &self.log[from..]);
            if let Some(daemon) = &self.daemon {
                let from = daemon.log.len().saturating_sub(TOLD);
                eprintln!("logged: {:#?}", &daemon.log[from..]);
            }
        }
    }
}

impl Driver {
    #[expect(clippy::print_stderr, reason = "a part that is not tested is said so")]
    pub(crate) fn new(seed: u64) -> Self {
        let works = Works::new(&[]);
        let mut mount = Command::new("mount");
        mount.args(["-t", "tmpfs", "-o", "size=8m", "millreeve-test"]).arg(works.root());
        let mounted = mount.output().is_ok_and(|output| output.status.success());
        let mount = mounted.then(|| Mount(works.root().to_owned()));
        if mount.is_none() {
            eprintln!("mounting is not allowed here: no disk is filled in this run");
        }
        let rng = Rng::new(seed);
        let mut driver = Self { seed, rng, works, daemon: None, mount, filler: None, log: Vec::new() };
        driver.make_repository();
        driver.daemon = Some(driver.works.keep());
        driver
    }

    /// One operation, drawn, and a pause.
    pub(crate) fn operate(&mut self) {
        let mut draw = self.rng.below(OPERATIONS.iter().map(|(weight, ..)| weight).sum());
        for (weight, what, operation) in OPERATIONS {
            if draw < weight {
                let about = operation(self);
                self.log.push(format!("{what}: {about}"));
                break;
            }
            draw -= weight;
        }
        let time = u64::try_from(self.rng.below(40)).unwrap();
        pause(time);
    }

    /// The end of all faults: there is room on the disk, and a daemon that lives.
    pub(crate) fn rest(&mut self) -> (&Works, &mut Daemon) {
        self.filler = None;
        let _ = fs::remove_file(self.works.path("filler"));
        (&self.works, self.daemon.as_mut().unwrap())
    }

    fn make_repository(&mut self) {
        self.git(&["init", "--quiet", "--template="]);
        for branch in BRANCHES {
            self.git(&["checkout", "--quiet", "-B", branch]);
            for name in NAMES {
                if self.rng.below(4) > 0 {
                    let text = self.text();
                    self.save(name, &text);
                } else {
                    let _ = fs::remove_file(self.works.model(name));
                }
            }
            self.git(&["add", "--all", "*.model.toml"]);
            self.git(&["commit", "--quiet", "--allow-empty", "--message", branch]);
        }
    }

    fn git(&self, arguments: &[&str]) -> bool {
        let mut git = Command::new("git");
        git.current_dir(self.works.root()).env("GIT_CONFIG_GLOBAL", "/dev/null").env("GIT_CONFIG_SYSTEM", "/dev/null");
        git.args(["-c", "user.name=Planner", "-c", "user.email=planner@example.invalid"]).args(arguments);
        git.output().is_ok_and(|output| output.status.success())
    }

    fn name(&mut self) -> &'static str {
        self.rng.pick::<&str>(&NAMES)
    }

    /// A model that can be planned.
    fn text(&mut self) -> String {
        tiles(u32::try_from(1 + self.rng.below(9_000)).unwrap())
    }

    /// Saves in one go; on a full disk the file stays as empty as the save has made it.
    fn save(&self, name: &str, text: &str) {
        let path = self.works.model(name);
        let _ = fs::create_dir_all(path.parent().unwrap());
        if let Ok(mut file) = File::create(path) {
            let _ = file.write_all(text.as_bytes());
        }
    }

    fn save_in_place(&mut self) -> String {
        let (name, text) = (self.name(), self.text());
        self.save(name, &text);
        name.to_owned()
    }

    fn save_slowly(&mut self) -> String {
        let (name, text) = (self.name(), self.text());
        if let Ok(mut file) = File::create(self.works.model(name)) {
            for part in text.as_bytes().chunks(text.len().div_ceil(4)) {
                let _ = file.write_all(part);
                pause(4);
            }
        }
        name.to_owned()
    }

    fn save_by_rename(&mut self) -> String {
        let (name, text) = (self.name(), self.text());
        let beside = self.works.path("saving.tmp");
        let written = File::create(&beside).and_then(|mut file| file.write_all(text.as_bytes()));
        if written.is_ok() {
            let _ = fs::rename(beside, self.works.model(name));
        }
        name.to_owned()
    }

    fn damage(&mut self) -> String {
        let name = self.name();
        let text = self.text().replace("price = 3", "price = = 3");
        self.save(name, &text);
        name.to_owned()
    }

    fn contradict(&mut self) -> String {
        let (name, text) = (self.name(), self.text() + "at_least = 1000000\n");
        self.save(name, &text);
        name.to_owned()
    }

    fn rename(&mut self) -> String {
        let (from, to) = (self.name(), self.name());
        let _ = fs::rename(self.works.model(from), self.works.model(to));
        format!("{from} to {to}")
    }

    fn delete(&mut self) -> String {
        let name = self.name();
        let _ = fs::remove_file(self.works.model(name));
        name.to_owned()
    }

    fn touch(&mut self) -> String {
        let name = self.name();
        if let Ok(text) = fs::read_to_string(self.works.model(name)) {
            self.save(name, &text);
        }
        name.to_owned()
    }

    fn delete_output(&mut self) -> String {
        let name = self.name();
        let path = if self.rng.below(2) == 0 { self.works.plan(name) } else { self.works.note(name) };
        let _ = fs::remove_file(&path);
        path.display().to_string()
    }

    fn edit_plan(&mut self) -> String {
        let name = self.name();
        let path = self.works.plan(name);
        if let Ok(text) = fs::read_to_string(&path)
            && let Ok(mut file) = File::create(path)
        {
            let _ = file.write_all(text.replace("level = ", "level = 1").as_bytes());
        }
        name.to_owned()
    }

    fn switch(&mut self) -> String {
        let branch = *self.rng.pick(&BRANCHES);
        let done = self.git(&["checkout", "--quiet", "--force", branch]);
        format!("{branch} {done}")
    }

    fn lose_state(&mut self) -> String {
        let _ = fs::remove_dir_all(self.works.path(".millreeve/records"));
        String::new()
    }

    fn kill(&mut self) -> String {
        self.daemon.as_mut().unwrap().kill();
        self.daemon = Some(self.works.keep());
        String::new()
    }

    fn stop(&mut self) -> String {
        self.daemon.as_mut().unwrap().stop();
        self.daemon = Some(self.works.keep());
        String::new()
    }

    fn fill_or_free(&mut self) -> String {
        if self.mount.is_none() {
            return "not here".to_owned();
        }
        let path = self.works.path("filler");
        match self.filler.take() {
            Some(_) => {
                let _ = fs::remove_file(path);
                "freed".to_owned()
            }
            None => {
                if let Ok(mut file) = File::create(path) {
                    while file.write_all(&[0; 4096]).is_ok() {}
                    self.filler = Some(file);
                }
                "filled".to_owned()
            }
        }
    }
}
