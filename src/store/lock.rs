//! One daemon per folder: a lock file held for life, which the system frees however the daemon ends.

use std::fs::{File, OpenOptions, TryLockError};
use std::io::{self, Read, Write};
use std::os::unix::fs::{MetadataExt, OpenOptionsExt};
use std::path::PathBuf;
use std::thread;
use std::time::{Duration, Instant};

use rustix::fs::OFlags;

use super::atomic::open_plain;
use super::error::{reason, shown};
use super::folder::Folder;
use super::host::host;
use super::lease::{Asked, Lease, Terms, Watched};
use crate::model::escape::Plain;

const NAME: &str = "lock";

/// The longest lock file that is read for a message, in bytes.
const LONGEST: u64 = 512;

/// A daemon that was killed while it started another program leaves a process that has the lock until it is that program: some
/// milliseconds, more on a busy machine.
const PATIENCE: Duration = Duration::from_secs(1);

/// How often a lock that is held is tried meanwhile.
const LOOK_EVERY: Duration = Duration::from_millis(2);

/// The lock on a watched folder. Freed when dropped, and by the system when the process ends.
#[derive(Debug)]
pub struct Lock {
    file: File,
    path: PathBuf,
    /// On a network, a sign of life for other hosts.
    lease: Option<Lease>,
}

/// Why the lock was not taken.
#[derive(Debug, thiserror::Error)]
pub enum LockError {
    /// Another process has it.
    #[error("{} is already kept by {holder}; stop that first, or let it do the work", shown(.root))]
    Held {
        /// The watched folder.
        root: PathBuf,
        /// Who has it, as that process wrote: "process 4711 on host mill". Escaped.
        holder: String,
    },
    /// A process on another host may have it.
    #[error("{} may be kept by {holder}, where this host cannot look; it is kept from here once that has given no sign of life for half a minute", shown(.root))]
    Unsure {
        /// The watched folder.
        root: PathBuf,
        /// Who may have it. Escaped.
        holder: String,
    },
    /// The lock file cannot be opened or locked.
    #[error("cannot lock {}: {}", shown(.path), reason(.source))]
    Failed {
        /// The lock file.
        path: PathBuf,
        /// What the system said.
        source: io::Error,
    },
}

impl Lock {
    /// Takes the lock on a watched folder, without waiting for more than a second.
    ///
    /// # Errors
    /// Another process has it, or the lock file cannot be used.
    pub fn take(folder: &Folder) -> Result<Self, LockError> {
        Self::take_named(folder, NAME)
    }

    /// The same in a folder that other hosts may use too. `watched` is what was seen of their signs of life when this was asked before.
    ///
    /// # Errors
    /// As [`Lock::take`]; [`LockError::Unsure`] where another host had the folder and may be alive: to be asked again a little later.
    pub fn take_among_hosts(folder: &Folder, terms: &Terms, watched: &mut Watched) -> Result<Self, LockError> {
        let lock = Self::take_named(folder, terms.own_lock().as_deref().unwrap_or(NAME))?;
        let root = || folder.root().to_owned();
        let holder = |holder: String| Plain(&holder).to_string();
        let failed = |source| LockError::Failed { path: lock.path.clone(), source };
        match Lease::ask(folder.own(), terms, watched, Instant::now()).map_err(failed)? {
            Asked::Taken(lease) => Ok(Self { lease: Some(lease), ..lock }),
            Asked::Held(who) => Err(LockError::Held { root: root(), holder: holder(who) }),
            Asked::Unsure(who) => Err(LockError::Unsure { root: root(), holder: holder(who) }),
        }
    }

    /// The same, waiting until it is known whether another host is alive.
    ///
    /// # Errors
    /// As [`Lock::take`].
    pub fn await_among_hosts(folder: &Folder, terms: &Terms) -> Result<Self, LockError> {
        let mut watched = Watched::default();
        loop {
            match Self::take_among_hosts(folder, terms, &mut watched) {
                Err(LockError::Unsure { .. }) => thread::park_timeout(terms.look_every()),
                taken => return taken,
            }
        }
    }

    fn take_named(folder: &Folder, name: &str) -> Result<Self, LockError> {
        let path = folder.own().join(name);
        let failed = |source| LockError::Failed { path: path.clone(), source };
        let flags = OFlags::NOFOLLOW | OFlags::NONBLOCK | OFlags::CLOEXEC;
        let mut file = OpenOptions::new()
            .read(true)
            .write(true)
            .create(true)
            .truncate(false)
            .custom_flags(flags.bits().cast_signed())
            .open(&path)
            .map_err(failed)?;
        if !acquire(&file).map_err(failed)? {
            return Err(LockError::Held { root: folder.root().to_owned(), holder: holder(&file) });
        }
        // For the message only: a full disk must not keep the daemon from its work.
        let _ = file.set_len(0).and_then(|()| writeln!(file, "process {} on host {}", std::process::id(), host()));
        Ok(Self { file, path, lease: None })
    }

    /// Who holds the lock on a watched folder now, as that process wrote, escaped; none where nobody does.
    ///
    /// # Errors
    /// The lock file cannot be used.
    pub fn holder(folder: &Folder) -> Result<Option<String>, LockError> {
        let path = folder.own().join(NAME);
        let failed = |source| LockError::Failed { path: path.clone(), source };
        let file = match open_plain(&path) {
            Ok(file) => file,
            Err(error) if error.kind() == io::ErrorKind::NotFound => return Ok(None),
            Err(error) => return Err(failed(error)),
        };
        // Shared, so that two who ask do not take each other for a daemon.
        match file.try_lock_shared() {
            Ok(()) => Ok(None),
            Err(TryLockError::WouldBlock) => Ok(Some(holder(&file))),
            Err(TryLockError::Error(source)) => Err(failed(source)),
        }
    }

    /// Whether the lock file is still the one that is held: false once somebody has removed it or the folder, so that a second daemon could
    /// start, and once another host has taken over.
    #[must_use]
    pub fn stands(&self) -> bool {
        let held = self.file.metadata().map(|metadata| (metadata.dev(), metadata.ino()));
        let there = std::fs::symlink_metadata(&self.path).map(|metadata| (metadata.dev(), metadata.ino()));
        let is_there = matches!((held, there), (Ok(held), Ok(there)) if held == there);
        is_there && self.lease.as_ref().is_none_or(Lease::stands)
    }

    /// When the lock was taken by the clock of the file system, in nanoseconds since 1970: what the stamps of files there compare with.
    #[must_use]
    pub fn taken(&self) -> Option<i128> {
        let metadata = self.file.metadata().ok()?;
        Some(i128::from(metadata.mtime()) * 1_000_000_000 + i128::from(metadata.mtime_nsec()))
    }
}

/// Locks a file, unless somebody else keeps it. Whoever only asks for the holder has it for an instant, which is waited for too.
fn acquire(file: &File) -> io::Result<bool> {
    let until = Instant::now() + PATIENCE;
    loop {
        match file.try_lock() {
            Ok(()) => return Ok(true),
            Err(TryLockError::WouldBlock) if Instant::now() < until => thread::park_timeout(LOOK_EVERY),
            Err(TryLockError::WouldBlock) => return Ok(false),
            Err(TryLockError::Error(source)) => return Err(source),
        }
    }
}

/// Who holds the lock, as that process wrote into it.
fn holder(file: &File) -> String {
    let mut text = String::new();
    match file.take(LONGEST).read_to_string(&mut text) {
        Ok(_) if !text.trim().is_empty() => Plain(text.trim()).to_string(),
        _ => "another process".to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_second_taker_is_told_who_holds_it_and_gets_it_afterwards() {
        let root = tempfile::tempdir().unwrap();
        let folder = Folder::open(root.path(), None).unwrap();
        let first = Lock::take(&folder).unwrap();
        assert!(first.stands() && first.taken().is_some());
        let told = Lock::take(&folder).unwrap_err().to_string();
        assert!(told.contains(&format!("process {} on host ", std::process::id())), "{told}");
        assert!(Lock::holder(&folder).unwrap().unwrap().starts_with("process "));
        drop(first);
        assert_eq!(Lock::holder(&folder).unwrap(), None);
        assert!(Lock::take(&folder).is_ok());
    }

    #[test]
    fn a_removed_lock_file_is_noticed() {
        let root = tempfile::tempdir().unwrap();
        let folder = Folder::open(root.path(), None).unwrap();
        let lock = Lock::take(&folder).unwrap();
        std::fs::remove_file(folder.own().join(NAME)).unwrap();
        assert!(!lock.stands());
        let second = Lock::take(&folder).unwrap();
        assert!(second.stands() && !lock.stands());
    }
}
