//! What the program is interrupted in: a folder of two models and what is asked of it. And what must hold of the folder afterwards.

use std::collections::BTreeMap;
use std::fs;
use std::io::Write;
use std::os::unix::fs::MetadataExt;
use std::path::{Path, PathBuf};

use millreeve::plan::{note, text};
use millreeve::store::atomic::is_temp;

use crate::disk::Change;
use crate::tracer::{At, End, Run, pass, record, run};

/// A small tileworks.
fn tileworks(title: &str, kiln: &str) -> String {
    format!(
        "format = 1\ntitle = \"{title}\"\n\
         [resources.kiln]\nunit = \"h\"\ncapacity = {kiln}\n\
         [resources.press]\nunit = \"h\"\ncapacity = 90\n\
         [activities.floor]\nprice = 21.0\ncost = 6.5\nuses = {{ kiln = 0.2, press = 0.12 }}\n\
         [activities.wall]\nprice = 16.0\ncost = 5\nuses = {{ kiln = 0.1, press = 0.15 }}\nat_most = 400\n\
         [activities.trim]\nprospect = true\nprice = 9.0\nuses = {{ kiln = 0.3 }}\n"
    )
}

/// What is asked of the program.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Asked {
    /// One pass.
    Once,
    /// The daemon, until it has told of both models.
    Keep,
}

/// A folder before the program runs, by what was done to its model `m` since its plan was made.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Done {
    /// Nothing was planned yet.
    New,
    Nothing,
    Capacity,
    Wording,
    Damaged,
    /// Damaged, noted as such, and mended.
    Mended,
    Removed,
}

/// What the program is interrupted in.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Scenario {
    pub(crate) done: Done,
    pub(crate) asked: Asked,
}

/// All of them: first plans, replans of every outcome, and starts.
pub(crate) const SCENARIOS: [Scenario; 9] = [
    Scenario { done: Done::New, asked: Asked::Once },
    Scenario { done: Done::Capacity, asked: Asked::Once },
    Scenario { done: Done::Wording, asked: Asked::Once },
    Scenario { done: Done::Damaged, asked: Asked::Once },
    Scenario { done: Done::Mended, asked: Asked::Once },
    Scenario { done: Done::Removed, asked: Asked::Once },
    Scenario { done: Done::Nothing, asked: Asked::Once },
    Scenario { done: Done::Nothing, asked: Asked::Keep },
    Scenario { done: Done::Capacity, asked: Asked::Keep },
];

/// What a fault may cost beyond time.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Lost {
    Nothing,
    /// What was remembered: the plan is the same, the note cannot tell what was edited.
    Records,
    /// A sight of the release: until the next pass the note tells of one that cannot be read.
    Release,
}

/// The files of a folder, without the daemon's own.
type Files = BTreeMap<String, String>;

/// A scenario with what comes of it when nothing goes wrong.
pub(crate) struct Case {
    pub(crate) scenario: Scenario,
    template: PathBuf,
    before: Files,
    after: Files,
    /// What a start without a past writes over the same models.
    fresh: Files,
    /// What a pass writes that has lost the records, and has only the last plan to go by.
    unrecorded: Files,
    /// What a pass writes that has lost the records and the notes when the plans were in place already.
    unnoted: Files,
    /// The same where the records are those of before.
    outdated: Files,
    /// How many calls there are to meddle with.
    pub(crate) calls: usize,
    status: i32,
}

impl Case {
    /// Lays out a scenario under `folder` and runs it once undisturbed.
    pub(crate) fn new(scenario: Scenario, folder: &Path) -> Self {
        let name = format!("{:?}-{:?}", scenario.done, scenario.asked);
        let template = folder.join(&name).join("template");
        fs::create_dir_all(&template).unwrap();
        lay_out(scenario.done, &template);
        let before = files(&template);
        let none = Files::new;
        let mut case = Self {
            scenario,
            template,
            before,
            after: none(),
            fresh: none(),
            unrecorded: none(),
            unnoted: none(),
            outdated: none(),
            calls: 0,
            status: 0,
        };
        let undisturbed = case.copy(&folder.join(&name).join("undisturbed"));
        let run = case.run(&undisturbed, None);
        let End::Exit(status) = run.end else { panic!("{scenario:?}: {run:?}") };
        (case.calls, case.status, case.after) = (run.calls, status, files(&undisturbed));
        let fresh = folder.join(&name).join("fresh/works");
        fs::create_dir_all(&fresh).unwrap();
        for (name, text) in models(&case.before) {
            write(&fresh.join(name), text);
        }
        pass(&fresh);
        case.fresh = files(&fresh);
        let unrecorded = case.copy(&folder.join(&name).join("unrecorded"));
        let _ = fs::remove_dir_all(unrecorded.join(".millreeve"));
        pass(&unrecorded);
        case.unrecorded = files(&unrecorded);
        case.unnoted = case.without_notes(&undisturbed, None);
        case.outdated = case.without_notes(&undisturbed, Some(&case.template.join(".millreeve")));
        case.expect_plans_of_a_fresh_start();
        case
    }

    /// Where the model can be planned, what an undisturbed run leaves are the plans of a fresh start, byte for byte.
    fn expect_plans_of_a_fresh_start(&self) {
        for (name, text) in self.after.iter().filter(|(name, _)| name.ends_with(".plan.toml")) {
            let standing = text::read(text).unwrap().plan.standing;
            if standing.word() == "current" {
                assert_eq!(Some(text), self.fresh.get(name), "{:?}", self.scenario);
            }
        }
        assert_eq!(
            self.fresh.contains_key("m.plan.toml"),
            !matches!(self.scenario.done, Done::Damaged | Done::Removed)
        );
    }

    /// What a pass writes in a folder where all was done, its notes taken away and its records replaced by these.
    fn without_notes(&self, works: &Path, records: Option<&Path>) -> Files {
        for name in self.after.keys().filter(|name| name.ends_with(".note.md")) {
            fs::remove_file(works.join(name)).unwrap();
        }
        let _ = fs::remove_dir_all(works.join(".millreeve"));
        if let Some(records) = records.filter(|records| records.exists()) {
            copy(records, &works.join(".millreeve"));
        }
        pass(works);
        files(works)
    }

    /// The folder as it is before, at `folder`/works.
    pub(crate) fn copy(&self, folder: &Path) -> PathBuf {
        let works = folder.join("works");
        copy(&self.template, &works);
        works
    }

    /// Does what is asked, disturbed or not.
    pub(crate) fn run(&self, works: &Path, at: Option<At>) -> Run {
        match self.scenario.asked {
            Asked::Once => run(works, &["once"], 0, at),
            Asked::Keep => run(works, &["--json", "keep"], 2, at),
        }
    }

    /// Runs it undisturbed, and answers what it changes.
    pub(crate) fn record(&self, works: &Path) -> Vec<Change> {
        match self.scenario.asked {
            Asked::Once => record(works, &["once"], 0),
            Asked::Keep => record(works, &["--json", "keep"], 2),
        }
    }

    /// What must hold at any instant: every file is whole, either what it was or what it becomes; the models are untouched; no note is
    /// there before the plan that it speaks of.
    pub(crate) fn check_at_once(&self, works: &Path, lost: Lost, context: &str) {
        let now = files(works);
        assert_eq!(models(&now), models(&self.before), "{context}");
        for (name, text) in &now {
            if lost == Lost::Release && name.ends_with(".note.md") {
                assert!(
                    text.contains("Nothing is compared with it") || self.known(name, lost).contains(&text),
                    "{context}: {text}"
                );
                continue;
            }
            let known = self.known(name, lost);
            assert!(known.contains(&text), "{context}: {name} is neither old nor new:\n{text}\n{known:#?}");
        }
        for name in self.before.keys() {
            assert!(now.contains_key(name), "{context}: {name} is gone");
        }
        for model in ["m", "n"] {
            let [plan, note] = [format!("{model}.plan.toml"), format!("{model}.note.md")];
            let (Some(note_now), Some(plan_now)) = (now.get(&note), now.get(&plan)) else {
                assert!(
                    !now.contains_key(&note) || !self.after.contains_key(&plan),
                    "{context}: a note without its plan"
                );
                continue;
            };
            // A note that lags behind says so by the seal it carries, until the next start.
            if self.before.get(&note) != Some(note_now) {
                assert_eq!(note::speaks_of(note_now), seal(plan_now), "{context}: {note} ahead of its plan");
            }
        }
    }

    /// What must hold where a pass says that all is current: all plans are.
    pub(crate) fn check_current(&self, works: &Path, context: &str) {
        let plans = |files: &Files| -> Vec<_> {
            files
                .iter()
                .filter(|(name, _)| name.ends_with(".plan.toml"))
                .map(|(name, text)| (name.clone(), text.clone()))
                .collect()
        };
        assert_eq!(plans(&files(works)), plans(&self.after), "{context}: it said that all is well");
    }

    /// After the fault: one undisturbed pass brings everything to where it would be without it; another one touches nothing.
    pub(crate) fn check_convergence(&self, works: &Path, lost: Lost, context: &str) {
        let (status, said) = pass(works);
        assert_eq!(status, Some(self.status), "{context}: {said}");
        self.check_settled(works, lost, context);
        let before = identities(works);
        pass(works);
        assert_eq!(identities(works), before, "{context}: a pass over current plans wrote something");
    }

    /// What must hold of the folder at rest.
    fn check_settled(&self, works: &Path, lost: Lost, context: &str) {
        let now = files(works);
        assert_eq!(now.keys().collect::<Vec<_>>(), self.after.keys().collect::<Vec<_>>(), "{context}");
        for (name, text) in &now {
            if name.ends_with(".note.md") {
                assert!(
                    self.known(name, lost).contains(&text),
                    "{context}: {name} is neither what it becomes nor a first note:\n{text}"
                );
                if let Some(plan) = now.get(&name.replace(".note.md", ".plan.toml")) {
                    assert_eq!(note::speaks_of(text), seal(plan), "{context}: {name}");
                }
            } else {
                assert_eq!(text, &self.after[name], "{context}: {name}");
            }
        }
        let left: Vec<_> = temps(works);
        assert!(left.is_empty(), "{context}: left behind: {left:?}");
    }

    /// The texts that a file may have: what it was, what it becomes, what a fresh start writes and, where a record could not be read,
    /// what is told without it.
    fn known(&self, name: &str, lost: Lost) -> Vec<&String> {
        let unrecorded = (lost != Lost::Nothing).then_some([&self.unrecorded, &self.unnoted, &self.outdated]);
        let known = [&self.before, &self.after, &self.fresh].into_iter().chain(unrecorded.into_iter().flatten());
        known.filter_map(|files| files.get(name)).collect()
    }
}

fn seal(plan: &str) -> Option<&str> {
    text::seal(plan)
}

/// Makes the folder that a scenario starts from.
fn lay_out(done: Done, folder: &Path) {
    let model = folder.join("m.model.toml");
    let first = tileworks("Tileworks", "100");
    write(&model, &first);
    write(&folder.join("n.model.toml"), &tileworks("Annexe", "70"));
    if done != Done::New {
        pass(folder);
    }
    match done {
        Done::New | Done::Nothing => {}
        Done::Capacity => write(&model, &tileworks("Tileworks", "120")),
        Done::Wording => write(&model, &tileworks("Tileworks, next week", "100")),
        Done::Damaged => write(&model, &tileworks("Tileworks", "= 100")),
        Done::Mended => {
            write(&model, &tileworks("Tileworks", "= 100"));
            pass(folder);
            write(&model, &first);
        }
        Done::Removed => fs::remove_file(&model).unwrap(),
    }
}

pub(crate) fn write(path: &Path, text: &str) {
    write_bytes(path, text.as_bytes());
}

pub(crate) fn write_bytes(path: &Path, bytes: &[u8]) {
    fs::File::create(path).unwrap().write_all(bytes).unwrap();
}

fn copy(from: &Path, to: &Path) {
    fs::create_dir_all(to).unwrap();
    for entry in fs::read_dir(from).unwrap() {
        let entry = entry.unwrap();
        let target = to.join(entry.file_name());
        if entry.file_type().unwrap().is_dir() {
            copy(&entry.path(), &target);
        } else {
            fs::copy(entry.path(), target).unwrap();
        }
    }
}

/// All files of a folder but temporary ones and the daemon's own.
fn files(works: &Path) -> Files {
    let entries = fs::read_dir(works).unwrap().map(Result::unwrap);
    let entries = entries.filter(|entry| entry.file_type().unwrap().is_file() && !is_temp(&entry.file_name()));
    let text = |entry: fs::DirEntry| fs::read_to_string(entry.path()).unwrap();
    entries.map(|entry| (entry.file_name().into_string().unwrap(), text(entry))).collect()
}

fn models(files: &Files) -> Vec<(&String, &String)> {
    files.iter().filter(|(name, _)| name.ends_with(".model.toml")).collect()
}

/// Temporary files, anywhere in the folder.
fn temps(folder: &Path) -> Vec<PathBuf> {
    let mut found = Vec::new();
    for entry in fs::read_dir(folder).unwrap() {
        let entry = entry.unwrap();
        if entry.file_type().unwrap().is_dir() {
            found.extend(temps(&entry.path()));
        } else if is_temp(&entry.file_name()) {
            found.push(entry.path());
        }
    }
    found
}

/// What tells whether files were touched: inodes and times of plans and notes.
fn identities(works: &Path) -> Vec<(String, u64, i64, i64)> {
    let about = |name: &String| {
        let about = fs::metadata(works.join(name)).unwrap();
        (name.clone(), about.ino(), about.mtime(), about.mtime_nsec())
    };
    files(works).keys().map(about).collect()
}
