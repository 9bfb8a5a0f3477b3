//! `once`: brings models up to date, and exits.

use std::path::{Path, PathBuf};

use super::exit::{Error, Outcome, shown};
use super::screen::Screen;
use super::worker::planners;
use super::{Setting, models, told};
use crate::keep::{self, OnceError};
use crate::store::{Folder, LockError, StoreError};

pub(super) fn run(screen: &mut Screen, setting: &Setting<'_>, paths: &[PathBuf]) -> Result<Outcome, Error> {
    for path in paths {
        std::fs::symlink_metadata(path).map_err(|error| Error::reading(path, &error))?;
    }
    let mut worst = Outcome::Good;
    let mut count = 0;
    screen.progress("planning …");
    // Each path by itself: the folder it belongs to may have settings of its own.
    for path in paths {
        let root = Folder::root_of(path).map_err(|error| Error::failure(error, ""))?;
        let settings = setting.for_folder(&root)?.keep;
        let done = keep::once(std::slice::from_ref(path), &settings, &planners(&settings), |model, replanned| {
            count += 1;
            worst = worst.max(told::outcome(replanned));
            if screen.json() {
                told::object(screen, model, replanned);
            } else {
                told::line(screen, model, replanned);
                screen.progress(format_args!("{count} done, planning …"));
            }
        });
        done.map_err(|error| not_done(path, &error))?;
    }
    if count == 0 {
        let named = paths.iter().map(|path| shown(path)).collect::<Vec<_>>().join(", ");
        return Err(Error::usage(format_args!("there is no model in {named}"), models::WHAT_A_MODEL_IS));
    }
    Ok(worst)
}

fn not_done(path: &Path, error: &OnceError) -> Error {
    match error {
        OnceError::NotAModel(path) => models::no_model(path),
        OnceError::Ignore(_) => Error::usage(error, ""),
        OnceError::Store(StoreError::Failed { source, .. }) if source.kind() == std::io::ErrorKind::NotFound => {
            Error::reading(path, source)
        }
        OnceError::Lock(lock) => locked(lock),
        OnceError::Store(_) | OnceError::Unread { .. } | OnceError::System(_) => Error::failure(error, ""),
    }
}

/// Another process keeps the folder, or its lock cannot be used.
pub(super) fn locked(error: &LockError) -> Error {
    Error::failure(error, "")
}
