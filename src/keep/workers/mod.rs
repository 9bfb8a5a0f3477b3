//! Worker processes: our own program started again, so that a crash, a hang or a blow-up of memory inside the solver costs one of them
//! and never the daemon.
//!
//! Each planner has one, and with it the live instances of the models that it plans. What a lost one held is made again: the last
//! optimal basis of each model is remembered on this side.

mod apart;
mod child;
mod said;

use std::path::PathBuf;
use std::process::Command;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, AtomicUsize, Ordering};

pub use apart::Apart;

/// The word on the command line that makes the program a worker; two numbers follow, see [`Limits`].
pub const WORD: &str = "worker";

/// What makes a worker do on purpose what a solver may do by accident, for tests: the only variable that is handed on to it.
pub const FAULT: &str = "_MILLREEVE_FAULT";

/// The program that is running, by a path that stays good when its file is replaced by another release.
const THIS_PROGRAM: &str = "/proc/self/exe";

/// Address space that a worker may take beyond twice its share for live models, in bytes: for the program itself, for what is reserved and never
/// touched, and because the model in hand is solved whatever it takes.
const HEADROOM: u64 = 2 << 30;

/// What a worker may take.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Limits {
    /// Memory for live models, in bytes: beyond, those used least recently are let go.
    pub live: u64,
    /// Address space, in bytes: beyond, the worker ends.
    pub space: u64,
}

impl Limits {
    /// The limits of a worker whose share for live models is `live` bytes.
    #[must_use]
    pub fn for_live(live: u64) -> Self {
        Self { live, space: live.saturating_mul(2).saturating_add(HEADROOM) }
    }
}

/// How workers are started; shared by all of them.
#[derive(Clone, Debug)]
pub struct Workers {
    program: PathBuf,
    limits: Limits,
    number: Arc<AtomicUsize>,
    /// Whether it was said that there are none.
    missed: Arc<AtomicBool>,
}

impl Workers {
    /// Workers that are `program`, which is Millreeve.
    #[must_use]
    pub fn of(program: PathBuf, limits: Limits) -> Self {
        Self { program, limits, number: Arc::default(), missed: Arc::default() }
    }

    /// Workers that are the program that is running.
    #[must_use]
    pub fn of_this_program(limits: Limits) -> Self {
        let lasting = PathBuf::from(THIS_PROGRAM);
        let program = if lasting.exists() { lasting } else { std::env::current_exe().unwrap_or(lasting) };
        Self::of(program, limits)
    }

    /// Makes one more; it is started when it is first needed.
    #[must_use]
    pub fn one_more(&self) -> Apart {
        Apart::new(self.clone(), self.number.fetch_add(1, Ordering::Relaxed) + 1)
    }

    /// The command that starts one: no shell, none of our environment, in no folder that somebody may want to unmount.
    fn command(&self) -> Command {
        let mut command = Command::new(&self.program);
        command.arg(WORD).arg(self.limits.live.to_string()).arg(self.limits.space.to_string());
        command.env_clear().current_dir("/");
        if let Some(fault) = std::env::var_os(FAULT) {
            command.env(FAULT, fault);
        }
        command
    }
}
