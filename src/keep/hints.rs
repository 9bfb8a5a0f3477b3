//! Hints on their way from the system to the loop: a queue that is bounded, and that knows when it has lost something.

use std::path::PathBuf;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

use tokio::sync::mpsc::error::TrySendError;
use tokio::sync::mpsc::{Receiver, Sender};

use super::stamp::Stamp;

/// How many hints may wait. The system's own queue is as long, unless it was changed.
const MOST: usize = 16_384;

/// A hint that something may have changed. Paths are absolute; what an event means for a model is for settling to say.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Hint {
    /// A file was closed by somebody who could write to it.
    Closed(PathBuf),
    /// A file was moved here: whoever did that had finished it. With how it looks now.
    Arrived(PathBuf, Option<Stamp>),
    /// Somebody is writing to a file.
    Writing(PathBuf),
    /// A file was removed or moved away.
    Gone(PathBuf),
    /// A folder appeared; what was written into it before it was watched brought no event.
    Folder(PathBuf),
    /// A folder, or something that was not told apart from one, was removed or moved away.
    FolderGone(PathBuf),
    /// Events were lost: nothing that was told before can be relied on.
    Rescan,
}

/// Where hints are put. Never blocks.
#[derive(Clone, Debug)]
pub struct HintSender {
    queue: Sender<Hint>,
    lost: Arc<AtomicBool>,
}

/// Where hints are taken out.
#[derive(Debug)]
pub struct Hints {
    queue: Receiver<Hint>,
    lost: Arc<AtomicBool>,
}

/// A queue of hints.
#[must_use]
pub fn channel() -> (HintSender, Hints) {
    let (sender, receiver) = tokio::sync::mpsc::channel(MOST);
    let lost = Arc::new(AtomicBool::new(false));
    (HintSender { queue: sender, lost: lost.clone() }, Hints { queue: receiver, lost })
}

impl HintSender {
    /// Puts a hint; one that does not fit is lost, and that is remembered.
    pub fn send(&self, hint: Hint) {
        // Where nobody listens any more the daemon has ended.
        if let Err(TrySendError::Full(_)) = self.queue.try_send(hint) {
            self.lost.store(true, Ordering::Release);
        }
    }
}

impl Hints {
    /// Waits for hints and takes what is there, `most` at a time. Where some were lost a [`Hint::Rescan`] comes last.
    pub async fn receive(&mut self, hints: &mut Vec<Hint>, most: usize) {
        self.queue.recv_many(hints, most).await;
        // Looked at after some were taken: what is lost from now on is lost to a full queue, which brings us back here.
        if self.lost.swap(false, Ordering::AcqRel) {
            hints.push(Hint::Rescan);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[tokio::test]
    async fn what_does_not_fit_is_lost_and_told() {
        let (sender, mut hints) = channel();
        for number in 0..=MOST {
            sender.send(Hint::Closed(number.to_string().into()));
        }
        let mut taken = Vec::new();
        hints.receive(&mut taken, MOST).await;
        assert_eq!((taken.len(), taken.last()), (MOST + 1, Some(&Hint::Rescan)));
        assert_eq!(taken[0], Hint::Closed("0".into()));
        sender.send(Hint::Rescan);
        taken.clear();
        hints.receive(&mut taken, MOST).await;
        assert_eq!(taken, [Hint::Rescan]);
    }
}
