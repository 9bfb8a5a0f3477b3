//! The daemon over a real folder with the real watcher, and a planner that only records what it read.

#![expect(clippy::unwrap_used, reason = "a test that cannot go on has failed")]

mod keep_support;

use std::fs;
use std::io::Write;
use std::os::unix::ffi::OsStrExt;
use std::os::unix::fs::{MetadataExt, symlink};
use std::path::Path;
use std::time::Duration;

use keep_support::{Daemon, Event, settings};
use millreeve::keep::{By, KeepError, Settings, What};
use millreeve::store::LockError;

fn save(path: &Path, text: &str) {
    fs::File::create(path).unwrap().write_all(text.as_bytes()).unwrap();
}

#[test]
fn a_save_in_place_with_a_pause_in_the_middle_is_read_whole() {
    let daemon = Daemon::start(settings());
    let path = daemon.path("m.model.toml");
    let mut file = fs::File::create(&path).unwrap();
    file.write_all(b"first half, ").unwrap();
    file.sync_all().unwrap();
    // Another model, saved in one go, shows that the daemon has come past the half.
    save(&daemon.path("other.model.toml"), "other");
    daemon.wait_planned("other", "other");
    file.write_all(b"second half").unwrap();
    drop(file);
    daemon.wait_planned("m", "first half, second half");
    assert_eq!(daemon.read("m"), ["first half, second half"]);
}

#[test]
fn a_rename_over_the_model_is_read_once() {
    let daemon = Daemon::start(settings());
    let path = daemon.path("m.model.toml");
    save(&path, "one");
    daemon.wait_planned("m", "one");
    let beside = daemon.path(".m.model.toml.Xy12Za");
    save(&beside, "two");
    fs::rename(&beside, &path).unwrap();
    daemon.wait_planned("m", "two");
    assert_eq!(daemon.planned("m"), ["one", "two"]);
}

#[test]
fn an_editor_that_moves_the_model_away_retires_nothing() {
    let daemon = Daemon::start(settings());
    let path = daemon.path("m.model.toml");
    save(&path, "one");
    daemon.wait_planned("m", "one");
    save(&daemon.path(".m.model.toml.swp"), "swap");
    save(&daemon.path("4913"), "");
    fs::remove_file(daemon.path("4913")).unwrap();
    fs::rename(&path, daemon.path("m.model.toml~")).unwrap();
    save(&path, "two");
    fs::remove_file(daemon.path("m.model.toml~")).unwrap();
    fs::remove_file(daemon.path(".m.model.toml.swp")).unwrap();
    daemon.wait_planned("m", "two");
    daemon.wait_rounds();
    assert_eq!(daemon.planned("m"), ["one", "two"]);
    assert_eq!(daemon.count(|event| matches!(event, Event::Began { what: What::Retire, .. })), 0);
}

#[test]
fn thirty_saves_run_one_at_a_time_and_end_with_the_last() {
    let daemon = Daemon::start(settings());
    let path = daemon.path("m.model.toml");
    daemon.hold();
    for save_number in 0..30 {
        save(&path, &format!("save {save_number}"));
        if save_number == 0 {
            daemon.wait_for("the first run", |events| events.iter().any(|event| matches!(event, Event::Began { .. })));
        }
    }
    daemon.release();
    daemon.wait_planned("m", "save 29");
    daemon.wait_rounds();
    assert_eq!(daemon.most_at_once("m"), 1);
    assert_eq!(daemon.planned("m").last().unwrap(), "save 29");
    // Three interruptions in a row at most, then runs to their ends: never a run for each save.
    assert!(daemon.read("m").len() < 30, "{:?}", daemon.read("m"));
}

#[test]
fn what_does_not_change_the_bytes_plans_nothing() {
    let daemon = Daemon::start(settings());
    let path = daemon.path("m.model.toml");
    save(&path, "one");
    daemon.wait_planned("m", "one");
    let plan = fs::metadata(daemon.path("m.plan.toml")).unwrap();
    let file = fs::File::options().append(true).open(&path).unwrap();
    let long_ago = std::time::SystemTime::UNIX_EPOCH + Duration::from_secs(1_000_000);
    for _ in 0..100 {
        file.set_modified(long_ago).unwrap();
    }
    drop(file);
    fs::set_permissions(&path, std::os::unix::fs::PermissionsExt::from_mode(0o600)).unwrap();
    daemon.wait_unchanged("m");
    daemon.wait_rounds();
    assert_eq!(daemon.planned("m"), ["one"]);
    let now = fs::metadata(daemon.path("m.plan.toml")).unwrap();
    assert_eq!((plan.ino(), plan.mtime_nsec(), plan.ctime_nsec()), (now.ino(), now.mtime_nsec(), now.ctime_nsec()));
}

#[test]
fn an_older_file_of_the_same_size_is_noticed_without_events() {
    let daemon = Daemon::start(Settings { by: By::Poll, ..settings() });
    let path = daemon.path("m.model.toml");
    save(&path, "one");
    daemon.wait_planned("m", "one");
    let beside = daemon.path("older");
    save(&beside, "two");
    let long_ago = std::time::SystemTime::UNIX_EPOCH + Duration::from_secs(1_000_000);
    fs::File::options().append(true).open(&beside).unwrap().set_modified(long_ago).unwrap();
    fs::rename(&beside, &path).unwrap();
    daemon.wait_planned("m", "two");
}

#[test]
fn a_write_through_a_link_from_outside_is_found_by_the_scan() {
    let daemon = Daemon::start(settings());
    let outside = tempfile::tempdir_in(daemon.path("..")).unwrap();
    let path = daemon.path("m.model.toml");
    save(&path, "one");
    daemon.wait_planned("m", "one");
    let link = outside.path().join("link");
    fs::hard_link(&path, &link).unwrap();
    save(&link, "two");
    daemon.wait_planned("m", "two");
}

#[test]
fn a_checkout_of_two_hundred_models_plans_each_content_once() {
    let daemon = Daemon::start(settings());
    let names: Vec<_> = (0..200).map(|number| format!("m{number}")).collect();
    let check_out = |branch: &str| {
        for name in &names {
            let path = daemon.path(&format!("{name}.model.toml"));
            let _ = fs::remove_file(&path);
            save(&path, &format!("{name} on {branch}"));
        }
    };
    for branch in ["main", "other"] {
        check_out(branch);
        for name in &names {
            daemon.wait_planned(name, &format!("{name} on {branch}"));
        }
    }
    daemon.wait_rounds();
    for name in &names {
        assert_eq!(daemon.planned(name), [format!("{name} on main"), format!("{name} on other")]);
    }
    assert_eq!(daemon.count(|event| matches!(event, Event::Began { what: What::Retire, .. })), 0);
}

#[test]
fn a_model_written_at_once_into_a_new_folder_is_found() {
    let daemon = Daemon::start(settings());
    for number in 0..30 {
        let folder = daemon.path(&format!("new{number}/deep"));
        fs::create_dir_all(&folder).unwrap();
        save(&folder.join(format!("n{number}.model.toml")), "one");
    }
    for number in 0..30 {
        daemon.wait_planned(&format!("n{number}"), "one");
    }
}

#[test]
fn a_removed_model_is_retired_and_one_that_returns_is_planned_again() {
    let daemon = Daemon::start(settings());
    let path = daemon.path("m.model.toml");
    save(&path, "one");
    daemon.wait_planned("m", "one");
    fs::remove_file(&path).unwrap();
    daemon.wait_for("the retirement", |events| {
        events.iter().any(|event| matches!(event, Event::Began { model, what: What::Retire } if model == "m"))
    });
    save(&path, "two");
    daemon.wait_planned("m", "two");
}

#[test]
fn links_and_pipes_named_as_models_are_left_alone() {
    let daemon = Daemon::start(settings());
    let secret = daemon.path("secret");
    save(&secret, "secret");
    symlink(&secret, daemon.path("l.model.toml")).unwrap();
    symlink("nowhere", daemon.path("d.model.toml")).unwrap();
    rustix::fs::mknodat(
        rustix::fs::CWD,
        daemon.path("p.model.toml"),
        rustix::fs::FileType::Fifo,
        rustix::fs::Mode::RUSR | rustix::fs::Mode::WUSR,
        0,
    )
    .unwrap();
    symlink(daemon.path("."), daemon.path("loop")).unwrap();
    save(&daemon.path("m.model.toml"), "one");
    daemon.wait_planned("m", "one");
    daemon.wait_rounds();
    assert_eq!(daemon.count(|event| matches!(event, Event::Began { model, .. } if model != "m")), 0);
}

#[test]
fn names_are_bytes() {
    let daemon = Daemon::start(settings());
    let name = std::ffi::OsStr::from_bytes(b"-a \n\x1b[1m\xff.model.toml");
    let path = daemon.path(".").join(name);
    save(&path, "one");
    daemon.wait_planned("-a \n\u{1b}[1m\u{fffd}", "one");
    let plan = daemon.path(".").join(std::ffi::OsStr::from_bytes(b"-a \n\x1b[1m\xff.plan.toml"));
    assert!(plan.exists());
}

#[test]
fn a_panic_costs_one_model_only() {
    let daemon = Daemon::start(settings());
    let path = daemon.path("m.model.toml");
    save(&path, "panic");
    daemon.wait_for("the failure", |events| {
        events.iter().any(|event| matches!(event, Event::Failed { model, .. } if model == "m"))
    });
    save(&daemon.path("n.model.toml"), "one");
    daemon.wait_planned("n", "one");
    save(&path, "mended");
    daemon.wait_planned("m", "mended");
}

#[test]
fn a_folder_removed_and_made_again_is_kept_again() {
    let daemon = Daemon::start(settings());
    save(&daemon.path("m.model.toml"), "one");
    daemon.wait_planned("m", "one");
    fs::remove_dir_all(daemon.path("")).unwrap();
    fs::create_dir(daemon.path("")).unwrap();
    save(&daemon.path("m.model.toml"), "two");
    daemon.wait_planned("m", "two");
    daemon.wait_for("the lock in the new folder", |_| daemon.path(".millreeve/lock").exists());
}

#[test]
fn a_second_daemon_is_told_who_keeps_the_folder() {
    let daemon = Daemon::start(settings());
    save(&daemon.path("m.model.toml"), "one");
    daemon.wait_planned("m", "one");
    let refused = daemon.second().unwrap_err();
    assert!(matches!(&refused, KeepError::Lock(LockError::Held { .. })), "{refused}");
    assert!(refused.to_string().contains(&format!("process {} on host", std::process::id())), "{refused}");
}

#[test]
fn a_start_over_current_plans_plans_nothing() {
    let mut daemon = Daemon::start(settings());
    for number in 0..20 {
        save(&daemon.path(&format!("m{number}.model.toml")), "one");
    }
    for number in 0..20 {
        daemon.wait_planned(&format!("m{number}"), "one");
    }
    daemon.restart();
    for number in 0..20 {
        daemon.wait_unchanged(&format!("m{number}"));
    }
    daemon.wait_rounds();
    let again = daemon.count(|event| matches!(event, Event::Planned { .. }));
    assert_eq!(again, 0);
    // Each was looked at once.
    let looks = daemon.count(|event| matches!(event, Event::Began { .. }));
    assert_eq!(looks, 20);
}

#[test]
fn a_stop_interrupts_the_solve_in_hand() {
    let daemon = Daemon::start(settings());
    daemon.hold();
    save(&daemon.path("m.model.toml"), "one");
    daemon.wait_for("the run", |events| events.iter().any(|event| matches!(event, Event::Began { .. })));
    let events = daemon.stop();
    assert!(events.iter().any(|event| matches!(event, Event::Interrupted { model } if model == "m")), "{events:?}");
    assert!(!events.iter().any(|event| matches!(event, Event::Planned { .. })), "{events:?}");
}
