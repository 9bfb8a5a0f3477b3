//! Runs the program under ptrace(2) and meddles with its k-th system call: kills it just before, or has the call fail.
//!
//! Counted are the calls on files of one folder (`calls.rs`), by all threads and processes of the program together, in the order in
//! which they are made. That is what a tool such as strace does not do: it counts for each thread and each call by itself, so that
//! what a later thread does lies in the shadow of the first.

use std::collections::BTreeMap;
use std::fs::{self, File};
use std::os::unix::fs::FileExt;
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};

use nix::errno::Errno;
use nix::libc::user_regs_struct;
use nix::sys::ptrace::{self, Options};
use nix::sys::signal::{Signal, kill};
use nix::sys::wait::{WaitPidFlag, WaitStatus, waitpid};
use nix::unistd::Pid;

use crate::calls::{About, Call, by_number};
use crate::disk::Change;
use crate::recorder::Recorder;

const PROGRAM: &str = env!("CARGO_BIN_EXE_millreeve");

/// What is done to a call.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Fault {
    /// The process is killed before it.
    Kill,
    /// It fails, and all others work; the number picks an error that fits it.
    Once(usize),
    /// It and all calls after it fail.
    Always(usize),
    /// It and all calls after it fail that put something on the disk.
    Full,
}

/// A fault and where it strikes, counted from 1.
#[derive(Clone, Copy, Debug)]
pub(crate) struct At {
    pub(crate) fault: Fault,
    pub(crate) call: usize,
}

/// How a run ended.
#[derive(Debug)]
pub(crate) enum End {
    Exit(i32),
    Signal(Signal),
}

/// What came of a run.
#[derive(Debug)]
pub(crate) struct Run {
    pub(crate) end: End,
    /// The calls on files of the folder.
    pub(crate) calls: usize,
    /// The calls that were meddled with.
    pub(crate) struck: Vec<String>,
    /// What it said on standard output and standard error.
    pub(crate) said: String,
}

/// One pass over `root`, undisturbed and not followed. Answers its exit status and what it said.
pub(crate) fn pass(root: &Path) -> (Option<i32>, String) {
    let output = without_settings(Command::new(PROGRAM).arg("once").arg(root)).output().unwrap();
    (output.status.code(), [output.stdout, output.stderr].map(|told| String::from_utf8(told).unwrap()).concat())
}

/// The same with nothing of the caller's environment that could change what it does.
fn without_settings(command: &mut Command) -> &mut Command {
    for (name, _) in std::env::vars_os().filter(|(name, _)| name.to_string_lossy().starts_with("MILLREEVE_")) {
        command.env_remove(name);
    }
    command.stdin(Stdio::null())
}

/// Runs the program with these arguments, which concern `root`. `keep` is asked to end once it has told of `until_told` models.
pub(crate) fn run(root: &Path, arguments: &[&str], until_told: usize, at: Option<At>) -> Run {
    follow(root, arguments, until_told, at).0
}

/// The same, undisturbed; answers what it changes in the folder.
pub(crate) fn record(root: &Path, arguments: &[&str], until_told: usize) -> Vec<Change> {
    let (run, recorder) = follow(root, arguments, until_told, None);
    assert!(matches!(run.end, End::Exit(_)), "{run:?}");
    recorder.changes
}

#[expect(clippy::zombie_processes, reason = "the tracer waits for it, as for all its threads")]
fn follow(root: &Path, arguments: &[&str], until_told: usize, at: Option<At>) -> (Run, Recorder) {
    let folder = root.parent().unwrap();
    let [out, err] = ["out", "err"].map(|name| folder.join(name));
    let mut command = Command::new("sh");
    // The shell waits until it is traced, and then becomes the program.
    command.args(["-c", "kill -STOP $$; exec \"$0\" \"$@\"", PROGRAM]).args(arguments).arg(root);
    let [to_out, to_err] = [&out, &err].map(|path| File::create(path).unwrap());
    let child = without_settings(&mut command).stdout(to_out).stderr(to_err).spawn().unwrap();
    let root = root.canonicalize().unwrap();
    let mut tracer = Tracer {
        main: Pid::from_raw(child.id().cast_signed()),
        recorder: Recorder::new(&root),
        out: out.canonicalize().unwrap(),
        root,
        at,
        until_told,
        program: false,
        calls: 0,
        told: 0,
        struck: Vec::new(),
        inside: BTreeMap::new(),
    };
    let end = tracer.follow();
    let said = [out, err].map(|path| fs::read_to_string(path).unwrap()).concat();
    (Run { end, calls: tracer.calls, struck: tracer.struck, said }, tracer.recorder)
}

struct Tracer {
    main: Pid,
    root: PathBuf,
    /// Where standard output goes.
    out: PathBuf,
    recorder: Recorder,
    at: Option<At>,
    until_told: usize,
    /// Whether the shell has become the program.
    program: bool,
    calls: usize,
    told: usize,
    struck: Vec<String>,
    /// The threads that are within a call, with the error it is to fail with.
    inside: BTreeMap<i32, Option<Errno>>,
}

impl Tracer {
    /// Follows all threads and processes until none is left.
    fn follow(&mut self) -> End {
        let stopped = waitpid(self.main, Some(WaitPidFlag::WUNTRACED)).unwrap();
        assert!(matches!(stopped, WaitStatus::Stopped(_, Signal::SIGSTOP)), "{stopped:?}");
        let options = Options::PTRACE_O_TRACESYSGOOD
            | Options::PTRACE_O_TRACECLONE
            | Options::PTRACE_O_TRACEFORK
            | Options::PTRACE_O_TRACEVFORK
            | Options::PTRACE_O_TRACEEXEC
            | Options::PTRACE_O_EXITKILL;
        ptrace::seize(self.main, options).unwrap();
        kill(self.main, Signal::SIGCONT).unwrap();
        let mut end = None;
        loop {
            // Of this thread only: other tests follow other programs at the same time.
            match waitpid(None, Some(WaitPidFlag::__WALL | WaitPidFlag::__WNOTHREAD)) {
                Ok(WaitStatus::Exited(pid, status)) if pid == self.main => end = Some(End::Exit(status)),
                Ok(WaitStatus::Signaled(pid, signal, _)) if pid == self.main => end = Some(End::Signal(signal)),
                Ok(WaitStatus::Exited(..) | WaitStatus::Signaled(..)) => {}
                Ok(WaitStatus::PtraceSyscall(pid)) => {
                    // A thread may be gone before it is asked: the process was killed.
                    let _ = self.call(pid);
                    let _ = ptrace::syscall(pid, None);
                }
                Ok(WaitStatus::PtraceEvent(pid, _, event)) => {
                    self.program |= event == ptrace::Event::PTRACE_EVENT_EXEC as i32;
                    let _ = ptrace::syscall(pid, None);
                }
                Ok(WaitStatus::Stopped(pid, signal)) => {
                    let _ = ptrace::syscall(pid, signal);
                }
                Ok(other) => panic!("{other:?}"),
                Err(Errno::ECHILD) => return end.expect("the end of the program itself"),
                Err(error) => panic!("{error}"),
            }
        }
    }

    /// A thread enters a call or comes back from one.
    fn call(&mut self, pid: Pid) -> nix::Result<()> {
        let registers = ptrace::getregs(pid)?;
        if let Some(error) = self.inside.remove(&pid.as_raw()) {
            if let Some(error) = error {
                let rax = i64::from(-(error as i32)).cast_unsigned();
                ptrace::setregs(pid, user_regs_struct { rax, ..registers })?;
            } else if self.program && self.at.is_none() && registers.rax.cast_signed() >= 0 {
                self.recorder.made(pid, &registers);
            }
            return Ok(());
        }
        // A new thread comes back from the call that made it without having entered it: on entry the result is "no such call".
        if registers.rax.cast_signed() != -i64::from(Errno::ENOSYS as i32) {
            return Ok(());
        }
        let fails = if self.program { self.entered(pid, &registers)? } else { None };
        self.inside.insert(pid.as_raw(), fails);
        Ok(())
    }

    fn entered(&mut self, pid: Pid, registers: &user_regs_struct) -> nix::Result<Option<Errno>> {
        let Some(call) = by_number(registers.orig_rax) else { return Ok(None) };
        let Some(file) = file(pid, registers, call.about) else { return Ok(None) };
        if call.name == "write" && file == self.out {
            self.told += 1;
            if self.told == self.until_told {
                kill(self.main, Signal::SIGTERM)?;
            }
            return Ok(None);
        }
        if !file.starts_with(&self.root) {
            return Ok(None);
        }
        self.calls += 1;
        let Some(error) = self.strike(call) else { return Ok(None) };
        self.struck.push(format!("call {}: {} of {}", self.calls, call.name, file.display()));
        let Some(error) = error else {
            kill(self.main, Signal::SIGKILL)?;
            return Ok(None);
        };
        // No call has this number, so none is made; the error is put in its place afterwards.
        ptrace::setregs(pid, user_regs_struct { orig_rax: u64::MAX, ..*registers })?;
        Ok(Some(error))
    }

    /// Whether the call that was just counted is meddled with: it fails, or (inner `None`) the process is killed.
    fn strike(&self, call: &Call) -> Option<Option<Errno>> {
        let At { fault, call: at } = self.at?;
        let error = |pick: usize| Some(call.errors[pick % call.errors.len()]);
        match fault {
            Fault::Kill => (self.calls == at).then_some(None),
            Fault::Once(pick) => (self.calls == at).then(|| error(pick)),
            Fault::Always(pick) => (self.calls >= at).then(|| error(pick)),
            Fault::Full => (self.calls >= at && call.fills).then_some(Some(Errno::ENOSPC)),
        }
    }
}

/// The file that a call is about.
pub(crate) fn file(pid: Pid, registers: &user_regs_struct, about: About) -> Option<PathBuf> {
    let arguments = [registers.rdi, registers.rsi, registers.rdx, registers.r10];
    match about {
        About::Path(path) => text(pid, arguments[path]),
        About::Descriptor(descriptor) => opened(pid, arguments[descriptor]),
        About::Below(folder, path) => match text(pid, arguments[path])? {
            path if path.as_os_str().is_empty() => opened(pid, arguments[folder]),
            path if path.is_absolute() => Some(path),
            path => Some(opened(pid, arguments[folder])?.join(path)),
        },
    }
}

/// What a descriptor of a process is open on.
fn opened(pid: Pid, descriptor: u64) -> Option<PathBuf> {
    fs::read_link(format!("/proc/{pid}/fd/{}", descriptor.cast_signed())).ok()
}

/// A path in the memory of a process.
fn text(pid: Pid, address: u64) -> Option<PathBuf> {
    use std::os::unix::ffi::OsStringExt;
    let memory = File::open(format!("/proc/{pid}/mem")).ok()?;
    let mut bytes = vec![0; 4096];
    // Shorter where the page after it is not there.
    let there = memory.read_at(&mut bytes, address).ok()?;
    bytes.truncate(there);
    let end = bytes.iter().position(|&byte| byte == 0)?;
    bytes.truncate(end);
    Some(std::ffi::OsString::from_vec(bytes).into())
}
