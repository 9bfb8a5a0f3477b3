//! What the system tells the daemon to do.

use tokio::signal::unix::{Signal, SignalKind, signal};

/// What the daemon is told from outside.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Order {
    /// Read the settings again.
    Reread,
    /// End.
    Stop,
}

/// The signals that are listened to, from the moment it is made.
pub(super) struct Signals {
    terminate: Signal,
    interrupt: Signal,
    hang_up: Signal,
}

impl Signals {
    pub(super) fn listen() -> std::io::Result<Self> {
        Ok(Self {
            terminate: signal(SignalKind::terminate())?,
            interrupt: signal(SignalKind::interrupt())?,
            hang_up: signal(SignalKind::hangup())?,
        })
    }

    /// Waits for the next one. Nothing is lost where the waiting is given up.
    pub(super) async fn next(&mut self) -> Order {
        tokio::select! {
            _ = self.terminate.recv() => Order::Stop,
            _ = self.interrupt.recv() => Order::Stop,
            _ = self.hang_up.recv() => Order::Reread,
        }
    }
}
