//! A sign of life beside the lock, for folders on a network: there a lock may hold among the processes of one host only.
//!
//! Whoever keeps the folder renews a counter in a file. Another host takes over only when it has seen, by its own clock, the counter stand
//! still for three renewals; clocks of different hosts are never compared. A daemon that could not renew for as long stops writing by
//! itself. Between two that begin at the same instant the later writer wins, and the other stops at its next look.

use std::fs;
use std::io;
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, Mutex, PoisonError};
use std::thread::{self, Thread};
use std::time::{Duration, Instant};

use serde::{Deserialize, Serialize};

use super::atomic::{self, Durability};
use super::host::host;
use super::reading;

const NAME: &str = "lease.json";
const VERSION: u32 = 1;

/// How often the counter is raised.
const RENEWED_EVERY: Duration = Duration::from_secs(10);

/// So many renewals must be missed before another host takes over.
const MISSED: u32 = 3;

/// Names a host and milliseconds between renewals, `mill-2:50`: for tests, that are two hosts on one machine.
const PRETENDED: &str = "_MILLREEVE_HOST";

/// What a lease is taken by: who takes it, and how often it is renewed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Terms {
    host: String,
    /// Tells one run of a host from the next.
    boot: String,
    every: Duration,
}

/// What stands in the file.
#[derive(Clone, Debug, PartialEq, Eq, Deserialize, Serialize)]
struct Sign {
    version: u32,
    host: String,
    boot: String,
    process: u32,
    /// Tells one holder from the next.
    nonce: String,
    /// Raised with each renewal.
    counter: u64,
}

/// The sign of another host as it was first seen, and when.
#[derive(Clone, Debug, Default)]
pub struct Watched(Option<(Sign, Instant)>);

/// What came of asking for a lease.
#[derive(Debug)]
pub(super) enum Asked {
    /// It is ours.
    Taken(Lease),
    /// It is another host's, which has renewed it: who, as that process wrote.
    Held(String),
    /// It is another host's, and whether that is alive remains to be seen.
    Unsure(String),
}

/// A lease, renewed until it is dropped.
#[derive(Debug)]
pub(super) struct Lease {
    shared: Arc<Shared>,
    thread: Thread,
}

#[derive(Debug)]
struct Shared {
    path: PathBuf,
    sign: Sign,
    every: Duration,
    renewed: Mutex<Instant>,
    ended: AtomicBool,
}

impl Terms {
    /// Those of this host.
    #[must_use]
    pub fn of_this_host() -> Self {
        let boot = fs::read_to_string("/proc/sys/kernel/random/boot_id").unwrap_or_default().trim().to_owned();
        Self { host: host(), boot, every: RENEWED_EVERY }
    }

    /// How often it is looked whether another host shows signs of life.
    pub(super) fn look_every(&self) -> Duration {
        self.every / 4
    }

    /// Those that a test pretends, if it does.
    #[must_use]
    pub fn pretended() -> Option<Self> {
        let text = std::env::var(PRETENDED).ok()?;
        let (host, every) = text.split_once(':')?;
        Some(Self { host: host.to_owned(), boot: host.to_owned(), every: Duration::from_millis(every.parse().ok()?) })
    }

    /// The name of the lock that holds on this host alone, where hosts are pretended: as if it were not seen by others.
    pub(super) fn own_lock(&self) -> Option<String> {
        (self.every != RENEWED_EVERY).then(|| format!("lock.{}", self.host))
    }
}

impl Lease {
    /// Asks for the lease in `folder`, where the lock is ours already.
    pub(super) fn ask(folder: &Path, terms: &Terms, watched: &mut Watched, now: Instant) -> io::Result<Asked> {
        let path = folder.join(NAME);
        // On our own host the lock tells, so whoever wrote that sign has ended.
        let other = read(&path)?.filter(|sign| (&sign.host, &sign.boot) != (&terms.host, &terms.boot));
        if let Some(sign) = other {
            let holder = format!("process {} on host {}", sign.process, sign.host);
            match &watched.0 {
                Some((seen, _)) if seen.nonce == sign.nonce && seen.counter != sign.counter => {
                    return Ok(Asked::Held(holder));
                }
                Some((seen, since)) if *seen == sign => {
                    if now.saturating_duration_since(*since) < terms.every * MISSED {
                        return Ok(Asked::Unsure(holder));
                    }
                }
                _ => {
                    watched.0 = Some((sign, now));
                    return Ok(Asked::Unsure(holder));
                }
            }
        }
        watched.0 = None;
        let nonce = blake3::hash(format!("{terms:?} {} {:?}", std::process::id(), Instant::now()).as_bytes()).to_hex();
        let sign = Sign {
            version: VERSION,
            host: terms.host.clone(),
            boot: terms.boot.clone(),
            process: std::process::id(),
            nonce: nonce[..32].to_owned(),
            counter: 0,
        };
        write(&path, &sign)?;
        let renewed = Mutex::new(Instant::now());
        let shared = Arc::new(Shared { path, sign, every: terms.every, renewed, ended: AtomicBool::new(false) });
        let of_thread = shared.clone();
        let thread = thread::Builder::new().name("lease".to_owned()).spawn(move || of_thread.renew())?;
        Ok(Asked::Taken(Self { shared, thread: thread.thread().clone() }))
    }

    /// Whether it is still ours, as far as can be told, and was renewed in time.
    pub(super) fn stands(&self) -> bool {
        let renewed = *self.shared.renewed.lock().unwrap_or_else(PoisonError::into_inner);
        renewed.elapsed() < self.shared.every * MISSED && self.shared.is_ours() != Some(false)
    }
}

impl Shared {
    /// Whether the sign in the file is ours; `None` where it cannot be read just now.
    fn is_ours(&self) -> Option<bool> {
        read(&self.path).ok().map(|sign| sign.is_some_and(|sign| sign.nonce == self.sign.nonce))
    }

    fn renew(&self) {
        let mut sign = self.sign.clone();
        loop {
            let due = Instant::now() + self.every;
            while let Some(left) = due.checked_duration_since(Instant::now()).filter(|left| !left.is_zero()) {
                thread::park_timeout(left);
                if self.ended.load(Ordering::Acquire) {
                    return;
                }
            }
            match self.is_ours() {
                // Somebody else has it, or it was removed: never written over.
                Some(false) => return,
                None => continue,
                Some(true) => {}
            }
            sign.counter += 1;
            if write(&self.path, &sign).is_ok() {
                *self.renewed.lock().unwrap_or_else(PoisonError::into_inner) = Instant::now();
            }
        }
    }
}

impl Drop for Lease {
    fn drop(&mut self) {
        self.shared.ended.store(true, Ordering::Release);
        self.thread.unpark();
        // So that the next one need not wait.
        if self.shared.is_ours() == Some(true) {
            let _ = fs::remove_file(&self.shared.path);
        }
    }
}

/// The sign in a file; `None` where there is none that can be understood.
fn read(path: &Path) -> io::Result<Option<Sign>> {
    match reading::text(path) {
        Ok(text) => Ok(serde_json::from_str(&text).ok()),
        Err(error) if matches!(error.kind(), io::ErrorKind::NotFound | io::ErrorKind::InvalidData) => Ok(None),
        Err(error) => Err(error),
    }
}

fn write(path: &Path, sign: &Sign) -> io::Result<()> {
    let text = serde_json::to_string(sign)?;
    atomic::write(path, text.as_bytes(), |_| true, Durability::Cached).map(drop).map_err(io::Error::other)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn terms(host: &str) -> Terms {
        // Never renewed within a test.
        Terms { host: host.to_owned(), boot: "1".to_owned(), every: Duration::from_secs(1000) }
    }

    fn raise(folder: &Path) {
        let sign = read(&folder.join(NAME)).unwrap().unwrap();
        write(&folder.join(NAME), &Sign { counter: sign.counter + 1, ..sign }).unwrap();
    }

    #[test]
    fn another_host_waits_for_three_missed_renewals_by_its_own_clock() {
        let folder = tempfile::tempdir().unwrap();
        let (start, mut first, mut second) = (Instant::now(), Watched::default(), Watched::default());
        let after = |seconds| start + Duration::from_secs(seconds);
        let Asked::Taken(lease) = Lease::ask(folder.path(), &terms("a"), &mut first, start).unwrap() else { panic!() };
        assert!(lease.stands());
        let mut ask = |seconds| Lease::ask(folder.path(), &terms("b"), &mut second, after(seconds)).unwrap();
        assert!(matches!(ask(0), Asked::Unsure(holder) if holder.ends_with("on host a")));
        assert!(matches!(ask(2999), Asked::Unsure(_)));
        let Asked::Taken(other) = ask(3000) else { panic!() };
        assert!(other.stands() && !lease.stands());
        // What is no longer ours is left alone.
        drop(lease);
        assert!(other.stands());
        drop(other);
        assert!(!folder.path().join(NAME).exists());
    }

    #[test]
    fn a_sign_of_life_is_seen_and_one_of_the_same_host_is_not_waited_for() {
        let folder = tempfile::tempdir().unwrap();
        let (start, mut watched) = (Instant::now(), Watched::default());
        let Asked::Taken(lease) = Lease::ask(folder.path(), &terms("a"), &mut watched, start).unwrap() else {
            panic!()
        };
        assert!(matches!(Lease::ask(folder.path(), &terms("b"), &mut watched, start).unwrap(), Asked::Unsure(_)));
        raise(folder.path());
        assert!(matches!(Lease::ask(folder.path(), &terms("b"), &mut watched, start).unwrap(), Asked::Held(_)));
        assert!(lease.stands());
        // On one host the lock tells, and that was just given to whoever asks.
        let again = Lease::ask(folder.path(), &terms("a"), &mut Watched::default(), start).unwrap();
        assert!(matches!(again, Asked::Taken(_)) && !lease.stands());
    }

    #[test]
    fn a_removed_or_damaged_sign_is_no_lease() {
        let folder = tempfile::tempdir().unwrap();
        let ask = |host| Lease::ask(folder.path(), &terms(host), &mut Watched::default(), Instant::now()).unwrap();
        let Asked::Taken(first) = ask("a") else { panic!() };
        fs::remove_file(folder.path().join(NAME)).unwrap();
        assert!(!first.stands());
        atomic::write(&folder.path().join(NAME), b"{", |_| true, Durability::Cached).unwrap();
        assert!(!first.stands() && matches!(ask("b"), Asked::Taken(_)));
    }
}
