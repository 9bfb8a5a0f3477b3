//! One pass without watching: brings the named models up to date.

use std::collections::BTreeMap;
use std::fs;
use std::io;
use std::path::{Path, PathBuf};
use std::sync::{Arc, mpsc};

use super::path::{Ignore, IgnoreError, ModelPath};
use super::pool::{Factory, Job, Pool, Replanned, Stop, What, Word};
use super::queue::Queue;
use super::remote;
use super::scan::scan;
use super::settings::Settings;
use crate::model::read::is_folder_name;
use crate::store::error::{Step, reason, shown};
use crate::store::{Folder, Lock, LockError, StoreError, atomic};

/// Why a pass was not made, or not to its end.
#[derive(Debug, thiserror::Error)]
pub enum OnceError {
    /// A path that was named is no model.
    #[error("{} is no model: the name of one ends in `.model.toml`, or in `.model` for a folder of parts", shown(.0))]
    NotAModel(PathBuf),
    /// A folder cannot be used.
    #[error(transparent)]
    Store(#[from] StoreError),
    /// A daemon keeps the folder, or its lock cannot be used.
    #[error(transparent)]
    Lock(#[from] LockError),
    /// A glob in the settings cannot be read.
    #[error(transparent)]
    Ignore(#[from] IgnoreError),
    /// Folders or models could not be read; everything else was brought up to date.
    #[error("{} cannot be read{}; let this user enter it", shown(.first), others(.more))]
    Unread {
        /// One of them.
        first: PathBuf,
        /// How many there are beside it.
        more: usize,
    },
    /// The system denies threads.
    #[error("cannot start: {}", reason(.0))]
    System(#[from] io::Error),
}

/// The words for what is not named.
fn others(more: &usize) -> String {
    if *more == 0 { String::new() } else { format!(", nor can {more} others") }
}

/// What is to be done under one root, and what could not be looked at.
#[derive(Default)]
struct Gathered {
    work: BTreeMap<ModelPath, What>,
    unread: Vec<PathBuf>,
}

/// Brings every model named, and every model in the folders named, up to date once. Models that are not there end as [`Replanned::Vanished`].
///
/// State and lock are those of the watched folder that a path lies in; where there is none, of the path's own folder.
///
/// # Errors
/// Nothing is planned in a folder that cannot be used or locked; folders before it are done. What could not be read is told at the end.
pub fn once(
    paths: &[PathBuf],
    settings: &Settings,
    factory: &Factory,
    mut on_report: impl FnMut(&ModelPath, &Replanned),
) -> Result<(), OnceError> {
    let ignore = Ignore::new(&settings.ignore)?;
    let mut roots: BTreeMap<PathBuf, Vec<&Path>> = BTreeMap::new();
    for path in paths {
        roots.entry(Folder::root_of(path)?).or_default().push(path);
    }
    let mut unread = Vec::new();
    for (root, paths) in roots {
        let folder = Folder::open(&root, settings.state_dir.as_deref())?;
        let _lock = match remote::terms(folder.root()) {
            Some(terms) => Lock::await_among_hosts(&folder, &terms)?,
            None => Lock::take(&folder)?,
        };
        let gathered = gather(&Arc::from(folder.root()), &paths, &ignore)?;
        run(gathered.work, settings.workers.max(1), &Arc::from(folder.state()), factory, &mut on_report)?;
        unread.extend(gathered.unread);
    }
    match unread.first() {
        Some(first) => Err(OnceError::Unread { first: first.clone(), more: unread.len() - 1 }),
        None => Ok(()),
    }
}

/// The models that paths under one root name.
fn gather(root: &Arc<Path>, paths: &[&Path], ignore: &Ignore) -> Result<Gathered, OnceError> {
    let Gathered { mut work, mut unread } = Gathered::default();
    for &path in paths {
        let failed = || StoreError::failed(Step::Look, path);
        let is_folder = fs::symlink_metadata(path).map_err(failed())?.is_dir();
        let within = if is_folder { path.canonicalize().map_err(failed())? } else { path.to_owned() };
        if is_folder && let Some(model) = in_parts(root, &within) {
            work.insert(model, What::Replan);
        } else if is_folder {
            let found = scan(root, ignore).map_err(failed())?;
            atomic::sweep(&found.temps);
            let missed = found.unread.keys().map(|path| root.join(path));
            unread.extend(missed.filter(|path| path.starts_with(&within) || within.starts_with(path)));
            let named = found.sights.into_iter().filter(|(model, _)| model.full().starts_with(&within));
            work.extend(
                named.map(|(model, sight)| (model, if sight.model.is_some() { What::Replan } else { What::Retire })),
            );
        } else {
            let whole = std::path::absolute(path).map_err(failed())?;
            let folder = whole.parent().unwrap_or(&whole).canonicalize().map_err(failed())?;
            let model = ModelPath::under(root, &folder.join(whole.file_name().unwrap_or_default()));
            work.insert(model.ok_or_else(|| OnceError::NotAModel(path.to_owned()))?, What::Replan);
        }
    }
    Ok(Gathered { work, unread })
}

/// The model that a folder is, if it is one.
fn in_parts(root: &Arc<Path>, folder: &Path) -> Option<ModelPath> {
    folder.file_name().filter(|name| is_folder_name(name)).and_then(|_| ModelPath::under(root, folder))
}

fn run(
    work: BTreeMap<ModelPath, What>,
    workers: usize,
    state: &Arc<Path>,
    factory: &Factory,
    on_report: &mut impl FnMut(&ModelPath, &Replanned),
) -> Result<(), OnceError> {
    let workers = workers.min(work.len()).max(1);
    let (words, inbox) = mpsc::channel();
    let pool = Pool::start(workers, factory, move |word| {
        let _ = words.send(word);
    })?;
    let mut queue = Queue::new(workers);
    for (model, what) in work {
        queue.push(&model, what);
    }
    loop {
        while let Some((worker, path, what)) = queue.take() {
            pool.run(worker, Job { path, what, state: state.clone() }, Stop::new());
        }
        if queue.is_empty() {
            return Ok(());
        }
        match inbox.recv() {
            Ok(Word::Began { .. }) => {}
            Ok(Word::Ended { worker, model, outcome, .. }) => {
                queue.done(worker, &model, false);
                on_report(&model, &outcome);
            }
            Err(error) => return Err(io::Error::other(error).into()),
        }
    }
}
