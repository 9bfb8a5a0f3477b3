//! Ways to bring faults about: file systems of one's own, limits, other users, failing system calls, git.

use std::ffi::OsStr;
use std::os::unix::fs::chown;
use std::os::unix::process::CommandExt;
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};

use rustix::process::getuid;

use crate::support::{Daemon, Works, command, wait_until, within};

/// A user who owns nothing here.
pub(crate) const NOBODY: u32 = 65_534;

/// The program under test.
pub(crate) const PROGRAM: &str = env!("CARGO_BIN_EXE_millreeve");

/// Whether a program ends well; not, where it is not there or not allowed.
pub(crate) fn does(program: &str, arguments: &[&OsStr]) -> bool {
    Command::new(program).args(arguments).output().is_ok_and(|output| output.status.success())
}

/// Says that a fault cannot be brought about here. The table of faults says what stands in for it.
pub(crate) fn cannot(what: &str) {
    let _ = std::io::Write::write_all(&mut std::io::stderr(), format!("not possible here: {what}\n").as_bytes());
}

/// A file system of its own in place of a folder; unmounted when dropped.
pub(crate) struct Mount(PathBuf);

impl Mount {
    /// A small one in memory; `None` where mounting is not allowed.
    pub(crate) fn small(at: &Path, options: &str) -> Option<Self> {
        let words = ["-t", "tmpfs", "-o", options, "millreeve-test"].map(OsStr::new);
        does("mount", &[&words[..], &[at.as_os_str()]].concat()).then(|| Self(at.to_owned()))
    }

    /// Another folder, as if a disk were mounted.
    pub(crate) fn of(folder: &Path, at: &Path) -> Option<Self> {
        does("mount", &["--bind".as_ref(), folder.as_os_str(), at.as_os_str()]).then(|| Self(at.to_owned()))
    }

    /// Mounts it anew with other options.
    pub(crate) fn remount(&self, options: &str) {
        assert!(does("mount", &["-o".as_ref(), format!("remount,{options}").as_ref(), self.0.as_os_str()]));
    }
}

impl Drop for Mount {
    fn drop(&mut self) {
        does("umount", &["-l".as_ref(), self.0.as_os_str()]);
    }
}

/// The daemon over a folder, run by somebody whom permissions bind: the superuser may read and write anywhere.
pub(crate) fn as_a_user_with_rights(works: &Works, own: &[&Path]) -> Command {
    if !getuid().is_root() {
        let mut keep = command(&["--json", "keep"]);
        keep.arg(works.root());
        return keep;
    }
    for path in [&works.outside(""), works.root()].into_iter().chain(own.iter().copied()) {
        chown(path, Some(NOBODY), Some(NOBODY)).unwrap();
    }
    // The target folder may be out of that user's reach.
    std::fs::copy(PROGRAM, works.outside("millreeve")).unwrap();
    let mut keep = within(Command::new(works.outside("millreeve")), &["--json", "keep"]);
    keep.arg(works.root()).uid(NOBODY).gid(NOBODY);
    keep
}

/// The daemon in a user namespace of its own, where a shell first sets a limit; `None` where that is not allowed.
pub(crate) fn limited(works: &Works, set: &str) -> Option<Command> {
    let allowed = does("unshare", &["-Ur", "sh", "-c", set].map(OsStr::new));
    let script = format!("{set}; exec \"$0\" \"$@\"");
    let mut keep = within(Command::new("unshare"), &["-Ur", "sh", "-c", &script, PROGRAM, "--json", "keep"]);
    keep.arg(works.root());
    allowed.then_some(keep)
}

/// System calls of a running process that are tampered with, until this is dropped.
pub(crate) struct Tampered {
    tracer: Child,
    /// All of these calls, one a line, as strace writes them.
    pub(crate) calls: PathBuf,
}

impl Tampered {
    /// `how` as strace has it: `error=EIO`, `delay_enter=500000`. `None` where no process may be traced.
    pub(crate) fn calls(works: &Works, daemon: &Daemon, call: &str, how: &str) -> Option<Self> {
        let process = daemon.pid().as_raw_nonzero();
        let calls = works.outside("calls");
        let mut strace = Command::new("strace");
        strace.args(["-f", "-y", "-qq", "-p", &process.to_string(), "-o"]).arg(&calls);
        strace.args(["-e", &format!("trace={call}"), "-e", &format!("inject={call}:{how}")]);
        let mut tracer = strace.stderr(Stdio::null()).spawn().ok()?;
        let traced = || {
            let status = std::fs::read_dir(format!("/proc/{process}/task")).unwrap();
            status.flatten().all(|task| {
                let told = std::fs::read_to_string(task.path().join("status")).unwrap_or_default();
                !told.contains("TracerPid:\t0\n")
            })
        };
        let mut refused = false;
        wait_until("a tracer", || {
            refused = tracer.try_wait().unwrap().is_some();
            refused || traced()
        });
        (!refused).then_some(Self { tracer, calls })
    }
}

impl Drop for Tampered {
    fn drop(&mut self) {
        // Told so, it lets go of the process; killed, it would leave it stopped.
        let _ =
            rustix::process::kill_process(rustix::process::Pid::from_child(&self.tracer), rustix::process::Signal::INT);
        let _ = self.tracer.wait();
    }
}

/// Runs git in a folder, with nothing of the caller's configuration.
pub(crate) fn git(folder: &Path, arguments: &[&str]) -> bool {
    let fixed = ["-c", "user.name=Tiler", "-c", "user.email=tiler@example.org", "-c", "init.defaultBranch=main"];
    let mut git = Command::new("git");
    git.env("GIT_CONFIG_GLOBAL", "/dev/null").env("GIT_CONFIG_SYSTEM", "/dev/null").current_dir(folder);
    git.args(fixed).args(arguments).output().unwrap().status.success()
}

/// Commits all models.
pub(crate) fn commit(works: &Works, message: &str) {
    assert!(git(works.root(), &["add", "*.model.toml"]) && git(works.root(), &["commit", "-qm", message]));
}
