//! A folder of models, and the program over it.

use std::collections::BTreeMap;
use std::fs;
use std::os::unix::fs::MetadataExt;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

use serde_json::Value;

/// Two activities, two resources and a prospect, small enough to check by hand: 2x + y = 100 and x + 3y = 90 give x = 42 and y = 16;
/// the aim is 30·42 + 40·16 = 1900.
pub(crate) const TILES: &str = r#"
format   = 1
title    = "Two tiles"
currency = "EUR"
[resources.kiln]
unit     = "h"
capacity = 100
[resources.press]
capacity = 90
[activities.x]
label    = "Tile X"
unit     = "m2"
price    = 31
cost     = 1
uses     = { kiln = 2, press = 1 }
[activities.y]
price    = 40
uses     = { kiln = 1, press = 3 }
[activities.z]
prospect = true
price    = 25
uses     = { kiln = 1.5, press = 1.2 }
"#;

/// A program with nothing of the caller's environment that could change what it does.
pub(crate) fn clean(mut command: Command) -> Command {
    for (name, _) in std::env::vars_os() {
        let text = name.to_string_lossy();
        if text.starts_with("MILLREEVE") || text.starts_with("GIT_") || text.starts_with("CLICOLOR") {
            command.env_remove(&name);
        }
    }
    command
}

/// The status, standard output and standard error of a program that has ended.
pub(crate) fn ended(mut command: Command) -> (i32, String, String) {
    let Output { status, stdout, stderr } = command.output().unwrap();
    (status.code().unwrap(), String::from_utf8(stdout).unwrap(), String::from_utf8(stderr).unwrap())
}

/// A folder that is removed at the end.
pub(crate) struct Works(tempfile::TempDir);

impl Works {
    /// With these files.
    pub(crate) fn with(files: &[(&str, &str)]) -> Self {
        let works = Self(tempfile::tempdir().unwrap());
        for (name, content) in files {
            works.save(name, content);
        }
        works
    }

    /// With `tiles.model.toml` and its plan.
    pub(crate) fn planned() -> Self {
        let works = Self::with(&[("tiles.model.toml", TILES)]);
        assert_eq!(works.run(&["once", "."]).0, 0);
        works
    }

    pub(crate) fn root(&self) -> &Path {
        self.0.path()
    }

    pub(crate) fn path(&self, name: &str) -> PathBuf {
        self.0.path().join(name)
    }

    pub(crate) fn save(&self, name: &str, content: impl AsRef<[u8]>) {
        let path = self.path(name);
        fs::create_dir_all(path.parent().unwrap()).unwrap();
        fs::write(path, content).unwrap();
    }

    pub(crate) fn read(&self, name: &str) -> String {
        fs::read_to_string(self.path(name)).unwrap()
    }

    /// Replaces what stands exactly once in a file.
    pub(crate) fn replace(&self, name: &str, from: &str, to: &str) {
        let text = self.read(name);
        assert_eq!(text.matches(from).count(), 1, "{from:?} in {text}");
        self.save(name, text.replace(from, to));
    }

    pub(crate) fn remove(&self, name: &str) {
        fs::remove_file(self.path(name)).unwrap();
    }

    /// Runs the program in the folder.
    pub(crate) fn run(&self, arguments: &[&str]) -> (i32, String, String) {
        let mut command = clean(Command::new(env!("CARGO_BIN_EXE_millreeve")));
        command.current_dir(self.root()).args(arguments);
        ended(command)
    }

    /// What `verify` says of the folder: its status, its lines and its objects, the two held against each other. It must not write.
    pub(crate) fn verify(&self) -> (i32, String, Vec<Value>) {
        let before = contents(self.root());
        let (status, text, err) = self.run(&["verify", "."]);
        assert_eq!(err, "");
        let (again, objects, err) = self.run(&["--json", "verify", "."]);
        assert_eq!((again, err.as_str()), (status, ""));
        assert!(contents(self.root()) == before, "verifying has written");
        let objects: Vec<Value> = objects.lines().map(|line| serde_json::from_str(line).unwrap()).collect();
        let mut lines = text.lines();
        for object in &objects {
            let [path, message] = ["path", "message"].map(|key| object[key].as_str().unwrap());
            let line = format!("{path}: {message}");
            assert!(lines.any(|told| told == line), "{line:?} in {text}");
        }
        let good = objects.iter().all(|object| object["good"] == true);
        assert_eq!(good, status == 0, "{text}");
        (status, text, objects)
    }
}

/// What a file is and when it was touched: its bytes, inode and times.
type Content = (Vec<u8>, u64, i64, i64, i64, i64);

/// Everything in a folder.
pub(crate) fn contents(folder: &Path) -> BTreeMap<PathBuf, Content> {
    let mut found = BTreeMap::new();
    let mut folders = vec![folder.to_owned()];
    while let Some(folder) = folders.pop() {
        for entry in fs::read_dir(&folder).unwrap() {
            let path = entry.unwrap().path();
            let about = fs::symlink_metadata(&path).unwrap();
            let bytes = if about.is_file() { fs::read(&path).unwrap() } else { Vec::new() };
            let times = (about.mtime(), about.mtime_nsec(), about.ctime(), about.ctime_nsec());
            if about.is_dir() {
                folders.push(path.clone());
            }
            found.insert(path, (bytes, about.ino(), times.0, times.1, times.2, times.3));
        }
    }
    found
}
