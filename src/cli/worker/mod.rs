//! A worker: the program as it is started by itself, to solve in a process of its own. Stands in no help, for nobody types it.

mod fault;

use std::ffi::OsString;
use std::fs::File;
use std::io::{self, IsTerminal as _, Write as _};
use std::os::fd::AsFd as _;
use std::process::ExitCode;

use rustix::process::{Resource, Rlimit, Signal, getpid, getrlimit, kill_process, setrlimit};

use super::outlive;
use crate::keep::workers::{Limits, WORD, Workers};
use crate::keep::{self, Factory, replan};
use crate::model::escape::Plain;
use crate::solver::wire::{WireError, serve};
use crate::solver::worker::Worker;
use fault::Faulty;

/// What is added to the score by which the system picks what to end when memory runs out: half of what there is.
const EASILY_SPARED: &[u8] = b"500";

/// The planners of this program: each solves in a worker process.
pub(super) fn planners(settings: &keep::Settings) -> Factory {
    replan::factory_apart(settings, Workers::of_this_program(replan::limits(settings)))
}

/// Is a worker, if that is what the arguments ask for.
pub(super) fn main(mut arguments: impl Iterator<Item = OsString>) -> Option<ExitCode> {
    if arguments.next()? != WORD {
        return None;
    }
    let mut number = || arguments.next()?.to_str()?.parse().ok();
    let limits = number().zip(number()).map(|(live, space)| Limits { live, space });
    let Some(limits) = limits.filter(|_| !io::stdin().is_terminal()) else {
        say("a worker is started by `keep` and `once` alone, and speaks with nobody else");
        return Some(ExitCode::from(2));
    };
    Some(match work(limits) {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            say(&error.to_string());
            ExitCode::from(3)
        }
    })
}

fn work(limits: Limits) -> Result<(), WireError> {
    // The daemon ends its workers by closing their pipes; what is sent to all processes at once is meant for it.
    outlive(&[Signal::INT, Signal::TERM, Signal::HUP, Signal::XFSZ])?;
    confine(limits)?;
    let answers = answers_alone()?;
    let live = usize::try_from(limits.live).unwrap_or(usize::MAX);
    let mut solver = Faulty::new(Worker::new(live));
    serve::serve(io::stdin(), answers, &mut solver, |error| {
        if let Some(error) = error {
            say(&error.to_string());
        }
        // Nobody waits for what is being solved. An ordinary end would take the solver's memory apart under its hands.
        let _ = kill_process(getpid(), Signal::KILL);
    })
}

/// The pipe that answers go into. Whatever else is written to standard output, by whichever library, goes where errors go.
fn answers_alone() -> io::Result<File> {
    let answers = io::stdout().as_fd().try_clone_to_owned()?;
    rustix::stdio::dup2_stdout(io::stderr())?;
    Ok(File::from(answers))
}

/// Sees to it that this process, and not the daemon, goes without when memory runs out, and that it leaves no core behind.
fn confine(limits: Limits) -> io::Result<()> {
    for (resource, most) in [(Resource::As, limits.space), (Resource::Core, 0)] {
        let most = getrlimit(resource).maximum.map_or(most, |maximum| maximum.min(most));
        setrlimit(resource, Rlimit { current: Some(most), maximum: Some(most) })?;
    }
    // A kernel that knows no such thing does without.
    if let Ok(mut score) = File::options().write(true).open("/proc/self/oom_score_adj") {
        let _ = score.write_all(EASILY_SPARED);
    }
    Ok(())
}

fn say(text: &str) {
    let _ = writeln!(io::stderr(), "{}", Plain(text));
}
