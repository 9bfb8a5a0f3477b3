//! A single pass over models and folders.

#![expect(clippy::unwrap_used, reason = "a test that cannot go on has failed")]

use std::fs;
use std::io::Write;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use millreeve::keep::{Factory, Job, OnceError, Planner, Replanned, Report, Settings, Stop, What, once};
use millreeve::store::{Folder, Lock};

/// Reports which model it was given, in which state folder.
struct Teller;

impl Planner for Teller {
    fn replan(&mut self, job: &Job, _: &Stop) -> Replanned {
        let what = if job.what == What::Retire { "retired" } else { "current" };
        let report =
            Report { model: job.path.name(), path: job.state.to_string_lossy().into_owned(), ..Report::default() };
        Replanned::Done(Box::new(Report { standing: what.to_owned(), ..report }))
    }
}

fn save(path: &Path) {
    fs::File::create(path).unwrap().write_all(b"x").unwrap();
}

fn pass(paths: &[&Path]) -> Result<Vec<String>, OnceError> {
    let factory: Factory = Arc::new(|| Box::new(Teller));
    let mut told = Vec::new();
    let paths: Vec<PathBuf> = paths.iter().map(|&path| path.to_owned()).collect();
    once(&paths, &Settings::default(), &factory, |model, outcome| match outcome {
        Replanned::Done(report) => told.push(format!("{model} {}", report.standing)),
        other => told.push(format!("{model} {other:?}")),
    })?;
    told.sort();
    Ok(told)
}

#[test]
fn files_and_folders_are_brought_up_to_date_in_the_kept_folder_they_belong_to() {
    let root = tempfile::tempdir().unwrap();
    let below = root.path().join("north/east");
    fs::create_dir_all(&below).unwrap();
    save(&root.path().join("a.model.toml"));
    save(&below.join("b.model.toml"));
    save(&below.join("gone.plan.toml"));
    drop(Folder::open(root.path(), None).unwrap());
    assert_eq!(pass(&[&below]).unwrap(), ["north/east/b.model.toml current", "north/east/gone.model.toml retired"]);
    assert_eq!(pass(&[&root.path().join("a.model.toml"), root.path()]).unwrap().len(), 3);
    // No second state folder comes into being further down.
    assert!(!below.join(".millreeve").exists());
}

#[test]
fn what_is_no_model_is_refused_and_a_link_is_not_followed() {
    let root = tempfile::tempdir().unwrap();
    let other = root.path().join("notes.txt");
    save(&other);
    assert!(matches!(pass(&[&other]), Err(OnceError::NotAModel(path)) if path == other));
    assert!(matches!(pass(&[&root.path().join("none.model.toml")]), Err(OnceError::Store(_))));
    let link = root.path().join("l.model.toml");
    std::os::unix::fs::symlink(&other, &link).unwrap();
    assert_eq!(pass(&[&link]).unwrap(), ["l.model.toml Vanished"]);
}

#[test]
fn a_folder_that_a_daemon_keeps_is_left_to_it() {
    let root = tempfile::tempdir().unwrap();
    save(&root.path().join("a.model.toml"));
    let lock = Lock::take(&Folder::open(root.path(), None).unwrap()).unwrap();
    assert!(matches!(pass(&[root.path()]), Err(OnceError::Lock(_))));
    drop(lock);
    assert_eq!(pass(&[root.path()]).unwrap(), ["a.model.toml current"]);
}
