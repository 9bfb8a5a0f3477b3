//! Why a folder is not kept.

use std::path::PathBuf;

use super::path::IgnoreError;
use crate::store::error::{reason, shown};
use crate::store::{LockError, StoreError};

/// Why a folder is not kept, or no longer.
#[derive(Debug, thiserror::Error)]
pub enum KeepError {
    /// The folder, or the state folder, cannot be used.
    #[error(transparent)]
    Store(#[from] StoreError),
    /// Another process keeps the folder, or its lock cannot be used.
    #[error(transparent)]
    Lock(#[from] LockError),
    /// A glob in the settings cannot be read.
    #[error(transparent)]
    Ignore(#[from] IgnoreError),
    /// The state would lie on a network file system.
    #[error("{} is on a network file system ({kind}), where the daemon's state cannot lie", shown(.folder))]
    RemoteState {
        /// The state folder.
        folder: PathBuf,
        /// What kind of file system it is on.
        kind: &'static str,
    },
    /// The system denies threads, timers or signals.
    #[error("cannot start: {}", reason(.0))]
    System(#[from] std::io::Error),
}
