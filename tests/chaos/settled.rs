//! Whether a folder is what a fresh start over the same models writes.

use std::fs;
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant};

use millreeve::plan::{Standing, note, text};

use crate::support::{Daemon, Works, identity, pause};

/// Far longer than it takes: a model that failed is tried again after a minute at most.
const DEADLINE: Duration = Duration::from_secs(150);

/// Waits until the folder is what a fresh start writes, and sees that nothing of it is touched any more.
pub(crate) fn wait(works: &Works, daemon: &mut Daemon) {
    let fresh = fresh(works);
    let until = Instant::now() + DEADLINE;
    while let Err(why) = compare(works, &fresh) {
        assert!(Instant::now() < until, "it did not converge: {why}");
        pause(50);
    }
    works.check();
    let before = files(works.root());
    let identities = || -> Vec<_> { before.iter().map(|path| identity(path)).collect() };
    let settled = identities();
    // A model's end is only sure after several scans.
    daemon.wait_grace(works);
    assert_eq!(identities(), settled, "after more scans: {before:?}");
}

/// The same models in a folder of their own, brought up to date by a daemon without a past.
fn fresh(works: &Works) -> Works {
    let fresh = Works::new(&[]);
    for model in files(works.root()).iter().filter(|path| has_ending(path, ".model.toml")) {
        let target = fresh.path(model.strip_prefix(works.root()).unwrap().to_str().unwrap());
        fs::create_dir_all(target.parent().unwrap()).unwrap();
        fs::copy(model, target).unwrap();
    }
    let (status, _, said) = fresh.run(&["once", "."]);
    // Some models have no plan.
    assert!(matches!(status, Some(0 | 1)), "{status:?} {said}");
    fresh
}

/// Says what differs. Plans are the same byte for byte; where a fresh start finds none, the last good one may stay, marked.
fn compare(works: &Works, fresh: &Works) -> Result<(), String> {
    let read = |path: &Path| fs::read_to_string(path).map_err(|error| format!("{}: {error}", path.display()));
    let all = files(works.root());
    for model in all.iter().filter(|path| has_ending(path, ".model.toml")) {
        let plan = beside(model, ".model.toml", ".plan.toml");
        let twin = fresh.path(plan.strip_prefix(works.root()).unwrap().to_str().unwrap());
        if twin.exists() {
            if read(&plan)? != read(&twin)? {
                return Err(format!(
                    "{} is not what a fresh start writes:\n{}\n{}",
                    plan.display(),
                    read(&plan)?,
                    read(&twin)?
                ));
            }
        } else {
            // What is wrong with the model is told.
            read(&beside(model, ".model.toml", ".note.md"))?;
        }
    }
    for plan in all.iter().filter(|path| has_ending(path, ".plan.toml")) {
        let model = beside(plan, ".plan.toml", ".model.toml");
        let twin = fresh.path(plan.strip_prefix(works.root()).unwrap().to_str().unwrap());
        let text = read(plan)?;
        let written = text::read(&text).map_err(|error| format!("{}: {error}", plan.display()))?;
        let marked = match written.plan.standing {
            Standing::Current => twin.exists(),
            Standing::Held(_) => model.exists() && !twin.exists(),
            Standing::Retired => !model.exists(),
        };
        let note = read(&beside(plan, ".plan.toml", ".note.md"))?;
        if !written.sealed || !marked || note::speaks_of(&note) != Some(written.seal.as_str()) {
            return Err(format!("{} is amiss:\n{text}\n{note}", plan.display()));
        }
    }
    Ok(())
}

fn has_ending(path: &Path, ending: &str) -> bool {
    path.to_string_lossy().ends_with(ending)
}

fn beside(path: &Path, ending: &str, other: &str) -> PathBuf {
    PathBuf::from(format!("{}{other}", path.to_str().unwrap().strip_suffix(ending).unwrap()))
}

/// All files of a folder and those below it, without git's and the daemon's own, in order.
fn files(folder: &Path) -> Vec<PathBuf> {
    let mut found = Vec::new();
    for entry in fs::read_dir(folder).unwrap().map(Result::unwrap) {
        let name = entry.file_name();
        if !entry.file_type().unwrap().is_dir() {
            found.push(entry.path());
        } else if name != ".git" && name != ".millreeve" {
            found.extend(files(&entry.path()));
        }
    }
    found.sort();
    found
}
