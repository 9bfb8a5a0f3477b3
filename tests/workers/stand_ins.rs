//! Programs that are no worker of this release, in place of one: what they are is told once, and planning goes on without.

use std::fs;
use std::io::Write as _;
use std::os::unix::fs::PermissionsExt as _;
use std::path::{Path, PathBuf};
use std::process::Stdio;
use std::sync::{Arc, Mutex};

use millreeve::keep::workers::{Limits, Workers};
use millreeve::keep::{Replanned, Settings, once, replan};

use crate::support::{Works, aim, command, tiles, write};

/// What is logged while something is done in this thread and those that it starts.
#[derive(Clone, Default)]
struct Log(Arc<Mutex<Vec<u8>>>);

impl std::io::Write for Log {
    fn write(&mut self, bytes: &[u8]) -> std::io::Result<usize> {
        self.0.lock().unwrap().write(bytes)
    }

    fn flush(&mut self) -> std::io::Result<()> {
        Ok(())
    }
}

/// Plans two models one after the other with workers that are `program`; gives what was logged at warning level.
fn plan_with(program: &Path) -> String {
    let works = Works::new(&[("a", &tiles(1)), ("b", &tiles(2))]);
    let settings = Settings { workers: 1, ..Settings::default() };
    let log = Log::default();
    let writer = log.clone();
    tracing_subscriber::fmt().with_ansi(false).with_writer(move || writer.clone()).init();
    let factory = replan::factory_apart(&settings, Workers::of(program.to_owned(), Limits::for_live(1 << 20)));
    once(&[works.root().to_owned()], &settings, &factory, |_, outcome| {
        assert!(matches!(outcome, Replanned::Done(report) if report.standing == "current"), "{outcome:?}");
    })
    .unwrap();
    assert_eq!(works.standing("a"), ("current".to_owned(), aim(1)));
    assert_eq!(works.standing("b"), ("current".to_owned(), aim(2)));
    String::from_utf8(log.0.lock().unwrap().clone()).unwrap()
}

fn script(works: &Works, text: &str) -> PathBuf {
    let path = works.outside("stand-in");
    write(&path, format!("#!/bin/sh\n{text}\n"));
    fs::set_permissions(&path, fs::Permissions::from_mode(0o755)).unwrap();
    path
}

#[test]
fn a_worker_of_another_release_is_told_once_and_planning_goes_on() {
    let works = Works::new(&[]);
    // A greeting of 26 bytes: the mark, version 7, release 9.9.9.
    let greeting = r"printf '\032\000\000\000millreeve worker\n\007\000\000\0009.9.9'; cat >/dev/null";
    let log = plan_with(&script(&works, greeting));
    let told = "no worker process: what answered is millreeve 9.9.9 and speaks version 7; this is";
    assert_eq!(log.matches(told).count(), 1, "{log}");
    assert!(log.contains("until there is one, solving goes on without its protection"), "{log}");
    assert_eq!(log.matches("no worker process").count(), 1, "{log}");
}

/// The other way round: a worker does not take orders from a daemon of another release.
#[test]
fn a_worker_takes_no_orders_from_another_release() {
    for (greeting, why) in [
        (
            &b"\x1a\0\0\0millreeve worker\n\x07\0\0\x009.9.9"[..],
            "what answered is millreeve 9.9.9 and speaks version 7",
        ),
        (b"GET / HTTP/1.1\r\n\r\n", "what answered is not millreeve"),
        (b"", "what answered is not millreeve"),
    ] {
        let mut worker = command(&["worker", "1000000", "4000000000"]);
        worker.stdin(Stdio::piped()).stdout(Stdio::piped()).stderr(Stdio::piped());
        let mut worker = worker.spawn().unwrap();
        worker.stdin.take().unwrap().write_all(greeting).unwrap();
        let output = worker.wait_with_output().unwrap();
        assert_eq!(output.status.code(), Some(3), "{output:?}");
        let told = String::from_utf8(output.stderr).unwrap();
        assert!(told.starts_with(why), "{told}");
    }
}

#[test]
fn a_worker_is_in_no_help_and_of_no_use_to_people() {
    for arguments in [&["--help"][..], &["-h"], &["completions", "bash"], &["completions", "fish"]] {
        let output = command(arguments).output().unwrap();
        let told = String::from_utf8(output.stdout).unwrap();
        assert!(output.status.success() && !told.contains("worker "), "{told}");
    }
    for arguments in [&["worker"][..], &["worker", "1"], &["worker", "one", "two"]] {
        let output = command(arguments).stdin(Stdio::null()).output().unwrap();
        assert_eq!(output.status.code(), Some(2), "{output:?}");
    }
}
