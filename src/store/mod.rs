//! What lies on disk and how it gets there: whole files, the record of each model, the folder and its lock.
//!
//! Knows plans and bases as values, but neither watches nor plans.

pub mod atomic;
pub mod error;
pub mod folder;
mod host;
pub mod lease;
pub mod lock;
mod place;
pub mod publish;
pub mod reading;
pub mod state;
pub mod tries;

pub use atomic::{Durability, Written};
pub use error::{Step, StoreError};
pub use folder::Folder;
pub use lease::{Terms, Watched};
pub use lock::{Lock, LockError};
pub use publish::{Finished, Output, Outputs, Published};
pub use state::{Lost, Record, Records};
pub use tries::Tries;
