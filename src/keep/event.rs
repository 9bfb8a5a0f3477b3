//! What can happen to the daemon, and what it can do about it: two closed sets.

use std::collections::BTreeSet;
use std::path::PathBuf;
use std::time::{Duration, Instant};

use super::hints::Hint;
use super::path::ModelPath;
use super::pool::{Job, Replanned, Word, Worker};
use super::scan::{FolderId, Scan};
use super::status::Status;
use super::watch::Followed;

/// All that can happen to the daemon.
#[derive(Debug)]
#[expect(clippy::large_enum_variant, reason = "there are two words for each job, and none is kept")]
pub enum Event {
    /// The system says that something may have changed.
    Hint(Hint),
    /// A scan is done.
    Scanned(Scanned),
    /// The folder was claimed: locked and, where events are used, its root watched.
    Claimed(FolderId),
    /// The folder could not be claimed again: why. The next scan asks anew.
    Unclaimed(String),
    /// The folders that a scan found are watched, as far as can be.
    Followed(Followed),
    /// The time from one scan to the next was set anew, and what is left out perhaps too.
    ScanEvery(Duration),
    /// A worker says something.
    Word(Word),
    /// The time that [`Dispatcher::wake`](super::daemon::Dispatcher::wake) named has come.
    Tick,
    /// The daemon is to end.
    Stop,
}

/// A scan that is done.
#[derive(Debug)]
pub struct Scanned {
    /// When it began.
    pub began: Instant,
    /// What it found, or why the folder cannot be read.
    pub found: Result<Scan, String>,
    /// Whether the lock on the folder was still in place.
    pub locked: bool,
}

/// What the loop around the dispatcher is to do.
#[derive(Debug)]
pub enum Action {
    /// Scan the folder.
    Scan,
    /// Watch just these folders, given relative to the root.
    Follow(BTreeSet<PathBuf>),
    /// Write down how the daemon is.
    Note(Box<Status>),
    /// Give a worker a job.
    Run(Worker, Job),
    /// Raise the stop flag of the job that a worker has in hand.
    Interrupt(Worker),
    /// Remove those of these temporary files that are orphans.
    Sweep(Vec<PathBuf>),
    /// Claim the folder again: another one stands in its place, or the lock is gone.
    Claim,
    /// Pass on what came of a job.
    Tell(ModelPath, Replanned),
    /// Log a line.
    Say(Weight, String),
    /// End.
    End,
}

/// How much a log line weighs.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Weight {
    /// As it should be.
    Info,
    /// Somebody should look at it.
    Warning,
}
