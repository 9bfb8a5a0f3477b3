//! Ending a running solve early, and seeing how far it is.

use std::sync::Arc;
use std::sync::atomic::{AtomicBool, AtomicUsize, Ordering};

/// Asked now and then by a running solve whether to go on; counts what it has done.
#[derive(Clone, Debug, Default)]
pub struct Stop {
    stop: Arc<AtomicBool>,
    pivots: Arc<AtomicUsize>,
}

impl Stop {
    /// One that is asked to end by raising `flag`.
    #[must_use]
    pub fn watching(flag: Arc<AtomicBool>) -> Self {
        Self { stop: flag, pivots: Arc::default() }
    }

    /// Asks the solve to end as soon as it looks.
    pub fn stop(&self) {
        self.stop.store(true, Ordering::Relaxed);
    }

    /// Whether it has been asked to end.
    #[must_use]
    pub fn is_stopped(&self) -> bool {
        self.stop.load(Ordering::Relaxed)
    }

    /// Simplex iterations of the run under way, as of its last look.
    #[must_use]
    pub fn pivots(&self) -> usize {
        self.pivots.load(Ordering::Relaxed)
    }

    /// Tells how many simplex iterations the run under way has made.
    pub(crate) fn count(&self, pivots: usize) {
        self.pivots.store(pivots, Ordering::Relaxed);
    }
}
