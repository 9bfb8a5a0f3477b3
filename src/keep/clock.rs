//! The time by which the loop goes: the runtime's, which tests may hold still.

use std::time::Instant;

pub(super) fn now() -> Instant {
    tokio::time::Instant::now().into_std()
}
