//! One worker process that runs: what goes to it, what comes from it, and how it ends.

use std::io::{self, Read, Write};
use std::os::unix::process::{CommandExt as _, ExitStatusExt as _};
use std::process::{self, ExitStatus, Stdio};
use std::sync::mpsc::{self, Receiver, RecvTimeoutError, Sender, TryRecvError};
use std::thread::{self, JoinHandle};
use std::time::{Duration, Instant};

use rustix::process::Signal;

use super::Workers;
use super::said::Said;
use crate::solver::wire::frame::{self, LARGEST};
use crate::solver::wire::{WireError, Word, decode, greet, meet};
use crate::store::error::reason;

/// A worker that has not greeted for so long will not do so any more: even on a busy machine that takes a hundredth of it.
const GREETS_WITHIN: Duration = Duration::from_secs(20);

/// Why there is no worker.
#[derive(Debug, thiserror::Error)]
pub(super) enum StartError {
    #[error("it cannot be started: {}", reason(.0))]
    System(#[from] io::Error),
    #[error("{0}")]
    Wire(WireError),
    #[error("it does not answer")]
    Silent,
}

/// What comes from a worker.
enum Heard {
    Greeting,
    Word(Word),
    /// Nothing more; why, where it was not simply its end.
    End(Option<WireError>),
}

/// A worker process; killed when dropped.
pub(super) struct Child {
    process: process::Child,
    /// What is to be written to it, by a thread of its own: a process that does not read must hold nobody up.
    orders: Sender<Vec<u8>>,
    heard: Receiver<Heard>,
    said: Option<JoinHandle<Said>>,
}

/// How a worker ended.
#[derive(Debug)]
pub(super) struct Ended {
    /// In a few words.
    pub(super) how: String,
}

/// What was waited for, or what came instead.
pub(super) enum Next {
    Word(Word),
    Ended,
    Nothing,
}

impl Child {
    /// Starts a worker and exchanges greetings with it.
    pub(super) fn start(workers: &Workers, number: usize) -> Result<Self, StartError> {
        let mut command = workers.command();
        // A group of its own: what is typed at a terminal is meant for the daemon alone.
        command.process_group(0).stdin(Stdio::piped()).stdout(Stdio::piped()).stderr(Stdio::piped());
        let mut process = command.spawn()?;
        let pipes = (process.stdin.take(), process.stdout.take(), process.stderr.take());
        let (Some(stdin), Some(stdout), Some(stderr)) = pipes else { return Err(StartError::Silent) };
        let (orders, outbox) = mpsc::channel();
        let (heard, inbox) = mpsc::channel();
        // From here on the process is killed and waited for whatever comes in between.
        let mut child = Self { process, orders, heard: inbox, said: None };
        let named = |what: &str| thread::Builder::new().name(format!("worker-{number}-{what}"));
        named("in").spawn(move || write(stdin, &outbox))?;
        named("out").spawn(move || hear(stdout, &heard))?;
        child.said = Some(named("log").spawn(move || Said::listen(stderr, number))?);
        match child.heard.recv_timeout(GREETS_WITHIN) {
            Ok(Heard::Greeting) => Ok(child),
            Ok(Heard::End(Some(error))) => Err(StartError::Wire(error)),
            Ok(Heard::End(None) | Heard::Word(_)) | Err(_) => Err(StartError::Silent),
        }
    }

    pub(super) fn id(&self) -> u32 {
        self.process.id()
    }

    /// Sends it a frame; whether that arrives is seen by what comes back.
    pub(super) fn send(&self, frame: Vec<u8>) {
        let _ = self.orders.send(frame);
    }

    /// Waits so long for the next word.
    pub(super) fn next(&self, time: Duration) -> Next {
        match self.heard.recv_timeout(time) {
            Ok(Heard::Word(word)) => Next::Word(word),
            Ok(Heard::Greeting) | Err(RecvTimeoutError::Timeout) => Next::Nothing,
            Ok(Heard::End(error)) => {
                if let Some(error) = error {
                    tracing::warn!("a worker cannot be understood: {error}");
                }
                Next::Ended
            }
            Err(RecvTimeoutError::Disconnected) => Next::Ended,
        }
    }

    /// Whether it has come to its end, now that it has nothing to do. What it may still have said of its last answer is left aside.
    pub(super) fn is_gone(&mut self) -> bool {
        // The system knows before its pipes have been read to their end.
        if matches!(self.process.try_wait(), Ok(Some(_))) {
            return true;
        }
        loop {
            match self.heard.try_recv() {
                Ok(Heard::Greeting | Heard::Word(_)) => {}
                Ok(Heard::End(_)) | Err(TryRecvError::Disconnected) => return true,
                Err(TryRecvError::Empty) => return false,
            }
        }
    }

    /// Makes an end of it, if it is not there yet, and tells how it ended.
    pub(super) fn end(mut self) -> Ended {
        // A process that closed its pipes is about to end by itself, and then tells how; one that does not is helped.
        let status = self.wait_for_a_moment().or_else(|| {
            let _ = self.process.kill();
            self.process.wait().ok()
        });
        let said = self.said.take().and_then(|said| said.join().ok()).unwrap_or_default();
        Ended { how: said.out_of_memory().map_or_else(|| words(status), str::to_owned) }
    }

    fn wait_for_a_moment(&mut self) -> Option<ExitStatus> {
        let until = Instant::now() + Duration::from_millis(500);
        while Instant::now() < until {
            if let Ok(Some(status)) = self.process.try_wait() {
                return Some(status);
            }
            thread::park_timeout(Duration::from_millis(1));
        }
        None
    }
}

impl Drop for Child {
    fn drop(&mut self) {
        let _ = self.process.kill();
        // Killed, it is gone in a moment; not waited for, it would stay in the system's list.
        let _ = self.process.wait();
    }
}

fn write(mut to: impl Write, frames: &Receiver<Vec<u8>>) {
    if greet(&mut to).is_err() {
        return;
    }
    // Where the pipe fails, the process is gone, and its other pipe says so.
    while let Ok(frame) = frames.recv()
        && frame::write(&mut to, &frame).is_ok()
    {}
}

fn hear(mut from: impl Read, to: &Sender<Heard>) {
    let listened = || -> Result<(), WireError> {
        meet(&mut from)?;
        let _ = to.send(Heard::Greeting);
        while let Some(bytes) = frame::read(&mut from, LARGEST)? {
            if to.send(Heard::Word(decode(&bytes)?)).is_err() {
                break;
            }
        }
        Ok(())
    };
    let _ = to.send(Heard::End({ listened }().err()));
}

fn words(status: Option<ExitStatus>) -> String {
    let Some(status) = status else { return "nobody knows how it ended".to_owned() };
    let signal = status.signal().map(|signal| match Signal::from_named_raw(signal) {
        Some(Signal::SEGV) => "SIGSEGV".to_owned(),
        Some(Signal::ABORT) => "SIGABRT".to_owned(),
        Some(Signal::KILL) => "SIGKILL".to_owned(),
        Some(Signal::BUS) => "SIGBUS".to_owned(),
        Some(Signal::FPE) => "SIGFPE".to_owned(),
        Some(Signal::ILL) => "SIGILL".to_owned(),
        _ => signal.to_string(),
    });
    match (signal, status.code()) {
        (Some(signal), _) => format!("signal {signal}"),
        (None, Some(code)) => format!("status {code}"),
        (None, None) => "nobody knows how it ended".to_owned(),
    }
}
