//! When the system runs out: of watches, of open files, of threads, of file entries, of quota; and disks that fail.

use std::fs::{self, File};
use std::io::Read;
use std::os::unix::fs::PermissionsExt;
use std::os::unix::process::CommandExt;
use std::process::{Command, Stdio};

use millreeve::store::atomic::is_temp;
use rustix::process::{Resource, Rlimit, Signal, getrlimit, getuid, kill_process, prlimit};

use crate::lab::{Mount, NOBODY, PROGRAM, Tampered, as_a_user_with_rights, cannot, does, limited};
use crate::support::{Daemon, Works, aim, identity, pause, tiles, wait_until, within, write};

#[test]
fn e2_no_file_entries_left() {
    let works = Works::new(&[]);
    let Some(_mount) = Mount::small(works.root(), "size=4m,nr_inodes=40") else {
        // `causes_are_told_in_plain_words` and a failure of each call stand in, beside the store.
        return cannot("mounting");
    };
    works.save("m", &tiles(1));
    let mut daemon = works.keep();
    daemon.wait_current("m", aim(1));
    let plan = identity(&works.plan("m"));
    let fillers: Vec<_> = (0..)
        .map(|number| works.path(&format!("filler-{number}")))
        .map_while(|path| File::create(&path).ok().map(|_| path))
        .collect();
    works.save("m", &tiles(2));
    let failed = daemon.wait_standing("m", "failed");
    assert!(failed["error"].as_str().unwrap().contains("full (of data or of file entries)"), "{failed}");
    assert_eq!(identity(&works.plan("m")), plan);
    fillers.iter().for_each(|path| fs::remove_file(path).unwrap());
    daemon.wait_current("m", aim(2));
    assert_eq!(daemon.logged("the disk is full"), 1, "{:#?}", daemon.log);
    works.check();
}

/// Lets every sync fail for a while.
fn syncs_fail(error: &str, words: &str) {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let plan = identity(&works.plan("m"));
    let Some(failing) = Tampered::calls(&works, &daemon, "fsync", &format!("error={error}")) else {
        // `a_failure_at_any_step_leaves_the_old_file_or_the_new_one_and_no_temporary_file`, beside the store, fails each call in turn.
        return cannot("strace, to let system calls fail");
    };
    works.save("m", &tiles(2));
    let failed = daemon.wait_standing("m", "failed");
    assert!(failed["error"].as_str().unwrap().contains(words), "{failed}");
    assert_eq!(identity(&works.plan("m")), plan);
    let left = fs::read_dir(works.root()).unwrap().flatten().filter(|entry| is_temp(&entry.file_name())).count();
    assert_eq!(left, 0);
    let calls = fs::read_to_string(&failing.calls).unwrap();
    drop(failing);
    daemon.wait_current("m", aim(2));
    works.check();
    // Whoever syncs the same file again may be told that all is well, and it is not.
    let mut temps: Vec<_> = calls.split(['<', '>']).filter(|part| part.ends_with(".tmp")).collect();
    let all = temps.len();
    temps.sort_unstable();
    temps.dedup();
    assert!(all > 0 && temps.len() == all, "{calls}");
}

#[test]
fn e2_the_quota_used_up() {
    syncs_fail("EDQUOT", "the disk quota is used up");
}

#[test]
fn e3_a_disk_that_fails() {
    syncs_fail("EIO", "cannot sync a temporary file");
}

#[test]
fn e5_no_more_open_files() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let folder = format!("/proc/{}/fd", daemon.pid().as_raw_nonzero());
    let open = || fs::read_dir(&folder).unwrap().count();
    // At rest, for a scan opens folders; the limit is on numbers, and these are given from the lowest.
    let before =
        prlimit(Some(daemon.pid()), Resource::Nofile, Rlimit { current: Some(3), ..getrlimit(Resource::Nofile) });
    let before = before.unwrap();
    works.save("m", &tiles(2));
    let failed = daemon.wait_standing("m", "failed");
    assert!(failed["error"].as_str().unwrap().contains("open files"), "{failed}");
    daemon.wait_log("cannot be read; its plans are left as they are until it can: too many files are open");
    prlimit(Some(daemon.pid()), Resource::Nofile, before).unwrap();
    daemon.wait_current("m", aim(2));
    daemon.wait_grace(&works);
    assert!(daemon.logged("too many files are open") <= 2, "{:#?}", daemon.log);
    works.check();
    // However many models and edits there are, few files are open.
    for number in 0..40 {
        works.save(&format!("n{number}"), &tiles(number));
    }
    daemon.wait_scan(&works);
    wait_until("files to be closed", || open() < 40);
}

#[test]
fn e6_no_more_watchers() {
    let works = Works::new(&[("m", &tiles(1))]);
    let Some(mut keep) = limited(&works, "echo 0 >/proc/sys/user/max_inotify_instances") else {
        // What is said then is tested beside the watcher.
        return cannot("user namespaces");
    };
    let mut daemon = Daemon::spawn(&mut keep);
    daemon.wait_current("m", aim(1));
    daemon.wait_log("the system allows no more file watchers; raise user.max_inotify_instances (sysctl), which is 0");
    works.save("m", &tiles(2));
    daemon.wait_current("m", aim(2));
    fs::create_dir(works.path("sub")).unwrap();
    works.save("sub/n", &tiles(3));
    daemon.wait_current("n", aim(3));
    assert_eq!(daemon.logged("max_inotify_instances"), 1, "{:#?}", daemon.log);
    works.check();
}

#[test]
fn e7_no_more_watches() {
    let works = Works::new(&[]);
    let model = |number: u32| format!("sub-{number:02}/m{number}");
    for number in 0..12 {
        fs::create_dir(works.path(&format!("sub-{number:02}"))).unwrap();
        works.save(&model(number), &tiles(number));
    }
    let Some(mut keep) = limited(&works, "echo 5 >/proc/sys/user/max_inotify_watches") else {
        // The dispatcher is told so in `a_want_of_watches_is_told_once_however_many_folders_it_costs`.
        return cannot("user namespaces");
    };
    let mut daemon = Daemon::spawn(&mut keep);
    daemon.wait_log(
        "8 of 13 folders send no file events: the system allows no more file watches; \
         raise user.max_inotify_watches (sysctl), which is 5",
    );
    for number in [0, 11] {
        works.save(&model(number), &tiles(100 + number));
        daemon.wait_current(&format!("m{number}"), aim(100 + number));
    }
    for number in 20..30 {
        fs::create_dir(works.path(&format!("sub-{number:02}"))).unwrap();
        works.save(&model(number), &tiles(number));
    }
    daemon.wait_told(&["m20", "m29"]);
    assert_eq!(daemon.logged("max_inotify_watches"), 1, "{:#?}", daemon.log);
    // Once there is room all folders are watched, without anybody telling the daemon.
    let process = daemon.pid().as_raw_nonzero().to_string();
    let raise =
        ["-U", "--preserve-credentials", "-t", &process, "sh", "-c", "echo 500 >/proc/sys/user/max_inotify_watches"];
    if does("nsenter", &raise.map(AsRef::as_ref)) {
        daemon.wait_log("file events come from all folders again");
    }
    works.check();
}

/// The daemon with a log that goes where `log` says, until a second edit is planned.
fn works_without_a_log(log: Stdio, out: Stdio) {
    let works = Works::new(&[("m", &tiles(1))]);
    let mut daemon = within(Command::new(PROGRAM), &["--json", "keep"]);
    let mut daemon = daemon.arg(works.root()).stdin(Stdio::null()).stdout(out).stderr(log).spawn().unwrap();
    for (name, capacity) in [("m", 1), ("n", 2)] {
        works.save(name, &tiles(capacity));
        wait_until("a plan", || works.note(name).exists());
    }
    if let Some(mut end) = daemon.stderr.take() {
        // Somebody reads a little, and goes.
        let _ = end.read(&mut [0; 10]);
    }
    drop(daemon.stdout.take());
    works.save("broken", "format = ");
    works.save("m", &tiles(3));
    wait_until("the edit", || works.standing("m") == ("current".to_owned(), aim(3)));
    let process = rustix::process::Pid::from_child(&daemon);
    kill_process(process, Signal::TERM).unwrap();
    assert_eq!(daemon.wait().unwrap().code(), Some(0));
    works.check();
}

#[test]
fn e13_a_log_that_nobody_takes() {
    let full = || File::options().write(true).open("/dev/full").unwrap();
    works_without_a_log(full().into(), Stdio::null());
    works_without_a_log(Stdio::piped(), Stdio::piped());
    let works = Works::new(&[("m", &tiles(1))]);
    let mut shell = within(Command::new("sh"), &["-c", "exec \"$0\" keep \"$1\" 2>&- >&- <&-", PROGRAM]);
    let mut daemon = shell.arg(works.root()).spawn().unwrap();
    wait_until("a plan", || works.note("m").exists());
    kill_process(rustix::process::Pid::from_child(&daemon), Signal::TERM).unwrap();
    assert_eq!(daemon.wait().unwrap().code(), Some(0));
    works.check();
}

#[test]
fn e14_no_more_threads() {
    let works = Works::new(&[]);
    let mut daemon = Daemon::spawn(&mut as_a_user_with_rights(&works, &[]));
    daemon.wait_watching();
    works.save("m", &tiles(1));
    fs::set_permissions(works.model("m"), fs::Permissions::from_mode(0o644)).unwrap();
    daemon.wait_current("m", aim(1));
    // Only that user may limit itself.
    let mut limit = Command::new("prlimit");
    limit.args(["--nproc=1", "--pid", &daemon.pid().as_raw_nonzero().to_string()]);
    if getuid().is_root() {
        limit.uid(NOBODY).gid(NOBODY);
    }
    assert!(limit.status().unwrap().success());
    works.save("m", &tiles(2));
    daemon.wait_current("m", aim(2));
    // Another folder in its place: the watcher, too, would need a thread.
    let old = works.outside("old");
    fs::rename(works.root(), &old).unwrap();
    fs::rename(old.join("m.model.toml"), works.outside("m")).unwrap();
    fs::create_dir(works.root()).unwrap();
    fs::set_permissions(works.root(), fs::Permissions::from_mode(0o777)).unwrap();
    write(&works.model("m"), tiles(3));
    daemon.wait_current("m", aim(3));
    daemon.wait_log("there are no file events: the system allows no more threads; raise the limit on processes");
    works.save("m", &tiles(4));
    daemon.wait_current("m", aim(4));
    // Bounded looks, so that a process that was about to die has done so.
    pause(100);
    works.check();
    daemon.stop();
}
