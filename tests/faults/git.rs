//! Version control: many versions at once, stale locks, plans that are committed, a clean sweep.

use std::fs;

use serde_json::Value;

use crate::lab::{commit, git};
use crate::support::{Works, aim, identity, tiles, wait_until, write};

#[test]
fn c3_a_rebase_of_fifty_commits_beside_a_stale_lock() {
    let (works, mut daemon) = Works::kept(&[("m", 1), ("n", 1)]);
    assert!(git(works.root(), &["init", "-q"]));
    commit(&works, "one");
    assert!(git(works.root(), &["checkout", "-qb", "other"]));
    for capacity in 2..=50 {
        works.save("m", &tiles(capacity));
        commit(&works, "more");
    }
    assert!(git(works.root(), &["checkout", "-q", "main"]));
    works.save("n", &tiles(7));
    commit(&works, "beside");
    daemon.wait_current("n", aim(7));
    assert!(git(works.root(), &["checkout", "-q", "other"]) && git(works.root(), &["rebase", "-q", "main"]));
    // Whoever left this behind is gone; it stops nobody but git.
    write(&works.path(".git/index.lock"), "");
    daemon.wait_scan(&works);
    wait_until("the last version", || {
        ["m", "n"].map(|name| works.standing(name)) == [50, 7].map(|of| ("current".to_owned(), aim(of)))
    });
    let aims = daemon.aims("m");
    let committed: Vec<_> = (1..=50).map(aim).collect();
    assert!(aims.iter().all(|of| committed.contains(of)), "{aims:?}");
    works.save("m", &tiles(60));
    daemon.wait_current("m", aim(60));
    works.check();
}

#[test]
fn c4_plans_that_are_committed_and_change_with_their_models() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let all = |message: &str| {
        assert!(git(works.root(), &["add", "-A"]) && git(works.root(), &["commit", "-qm", message]));
    };
    assert!(git(works.root(), &["init", "-q"]));
    all("one");
    assert!(git(works.root(), &["checkout", "-qb", "other"]));
    works.save("m", &tiles(2));
    daemon.wait_current("m", aim(2));
    all("two");
    for (branch, capacity) in [("main", 1), ("other", 2)] {
        // It gives up where the daemon replaces a plan under its hands.
        wait_until("the checkout", || git(works.root(), &["checkout", "-qf", branch]));
        daemon.wait_current("m", aim(capacity));
        daemon.wait_scan(&works);
        // As committed, the plan answers its model: whatever was done about it, it is the same to the byte.
        let _ = git(works.root(), &["update-index", "-q", "--refresh"]);
        assert!(git(works.root(), &["diff", "--quiet", "*.plan.toml"]), "{branch}");
        assert_eq!(works.standing("m"), ("current".to_owned(), aim(capacity)));
    }
    // Nothing of ours but what people want to see: no state, no temporary files.
    let untracked = git(works.root(), &["ls-files", "--others", "--exclude-standard", "--error-unmatch", ".millreeve"]);
    assert!(!untracked);
    works.check();
}

#[test]
fn c5_c6_a_clean_sweep_takes_plans_notes_and_state() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    assert!(git(works.root(), &["init", "-q"]));
    commit(&works, "models");
    let plan = works.plan_text("m");
    let before = identity(&works.plan("m"));
    // It fails where the daemon writes into a folder that is being removed.
    wait_until("the sweep", || git(works.root(), &["clean", "-qfdx"]));
    wait_until("plan and note", || works.note("m").exists() && works.plan("m").exists());
    assert_ne!(identity(&works.plan("m")), before);
    assert_eq!(works.plan_text("m"), plan);
    // The lock went with the state, and is held anew.
    wait_until("the lock", || works.run(&["keep", ".", "--status"]).0 == Some(0));
    daemon.wait_scan(&works);
    assert_eq!(works.run(&["keep", "."]).0, Some(3));
    works.check();
    daemon.stop();
}

#[test]
fn g3_a_lock_that_is_removed() {
    let (works, mut first) = Works::kept(&[("m", 1)]);
    let lock = works.path(".millreeve/lock");
    fs::remove_file(&lock).unwrap();
    wait_until("the lock to be made again", || lock.exists());
    wait_until("the lock to be held", || works.run(&["keep", ".", "--status"]).0 == Some(0));
    assert_eq!(works.run(&["keep", "."]).0, Some(3));
    first.wait_events(&works);
    // Somebody else takes it while the daemon cannot look: then that one keeps the folder.
    first.signal(rustix::process::Signal::STOP);
    fs::remove_file(&lock).unwrap();
    let mut second = works.keep();
    second.wait_told(&["m"]);
    first.signal(rustix::process::Signal::CONT);
    let ended = first.wait_end(std::time::Duration::from_secs(20)).expect("the first to give way");
    assert_eq!(ended.code(), Some(3), "{:#?}", first.log);
    assert_eq!(first.logged("is already kept by process "), 1, "{:#?}", first.log);
    second.wait_events(&works);
    let told: Vec<&Value> = second.told("m");
    assert_eq!(told.len(), 1, "{told:#?}");
    works.check();
}
