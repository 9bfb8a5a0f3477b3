//! The daemon: watching, settling, one queue per model and the pool of workers.
//!
//! An event is a hint to look; what is planned is what the files say when they are read. A scan of the folder is what correctness
//! rests on, events only cut the delay.

pub mod afresh;
mod clock;
pub mod daemon;
pub mod error;
pub mod event;
pub mod hints;
mod keeper;
pub mod manager;
pub mod once;
pub mod path;
pub mod pinned;
pub mod pool;
pub mod queue;
pub mod remote;
pub mod replan;
pub mod report;
pub mod run;
pub mod sayings;
pub mod scan;
pub mod settings;
pub mod settle;
mod signals;
pub mod stamp;
pub mod status;
mod twins;
pub mod verify;
pub mod watch;
pub mod workers;

pub use error::KeepError;
pub use manager::Manager;
pub use once::{OnceError, once};
pub use path::{Ignore, IgnoreError, ModelPath};
pub use pool::{Factory, Job, Planner, Replanned, Stop, What};
pub use report::{FaultLine, Infeasible, Milliseconds, Report};
pub use run::{Operating, keep, keep_until};
pub use settings::{By, Pace, Settings};
pub use status::Status;
