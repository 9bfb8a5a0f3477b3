//! What an operator sees and does: the status, settings that change, a service manager, fairness.

use std::fs;
use std::io::Read;
use std::os::unix::net::UnixDatagram;
use std::process::{Command, Stdio};
use std::time::Duration;

use millreeve::plan::{note, text};
use rustix::process::{Pid, Signal, kill_process};
use serde_json::Value;

use crate::lab::PROGRAM;
use crate::support::{Daemon, Works, aim, command, heavy, pause, tiles, wait_until, within, write};

fn status(works: &Works) -> Value {
    let (code, out, err) = works.run(&["--json", "keep", ".", "--status"]);
    assert_eq!(code, Some(0), "{err}");
    serde_json::from_str(&out).unwrap()
}

#[test]
fn a_status_says_how_the_daemon_is() {
    let works = Works::new(&[]);
    let (code, out, err) = works.run(&["keep", ".", "--status"]);
    assert_eq!((code, out.as_str()), (Some(3), ""));
    assert!(err.contains("nothing keeps `.`") && !works.path(".millreeve").exists(), "{err}");
    let mut daemon = works.keep();
    works.save("good", &tiles(1));
    works.save("bad", "format = 1\n[activities.tile]\nprize = 3\n");
    daemon.wait_told(&["good", "bad"]);
    wait_until("both models in the status", || status(&works)["models"]["held"] == 1);
    let told = status(&works);
    assert_eq!((&told["models"]["current"], &told["watching"]["by"]), (&1.into(), &"events".into()), "{told}");
    assert_eq!(told["process"], daemon.pid().as_raw_nonzero().get(), "{told}");
    assert_eq!(told["amiss"][0]["path"], "bad.model.toml");
    assert!(told["amiss"][0]["why"].as_str().unwrap().starts_with("line 3: "), "{told}");
    let (code, out, _) = works.run(&["keep", ".", "--status"]);
    assert_eq!(code, Some(0));
    for words in [
        "kept by   process ",
        "edits are noticed by file events",
        "2: 1 current, 1 held, 0 waiting",
        "bad.model.toml: line 3: ",
    ] {
        assert!(out.contains(words), "{words}: {out}");
    }
    daemon.stop();
    assert_eq!(works.run(&["keep", ".", "--status"]).0, Some(3));
}

#[test]
fn f7_sighup_reads_the_settings_again() {
    let works = Works::new(&[("m", &tiles(1))]);
    let config = works.outside("settings.toml");
    write(&config, "[log]\nlevel = \"info\"\n");
    fs::create_dir(works.path("old")).unwrap();
    let mut daemon = Daemon::spawn(command(&["--json", "keep", "--config"]).arg(&config).arg(works.root()));
    daemon.wait_current("m", aim(1));
    write(&config, "[watch]\nignore = [\"old\"]\nby = \"poll\"\n[solve]\nworkers = 3\n");
    daemon.signal(Signal::HUP);
    daemon.wait_log("watch.ignore has changed and holds from now on");
    daemon.wait_log("watch.by has changed and holds from now on");
    daemon.wait_log("solve.workers has changed; it holds after the daemon is started again");
    daemon.wait_log("found by scanning, as the settings say");
    works.save("old/x", &tiles(2));
    daemon.wait_scan(&works);
    assert!(daemon.told("x").is_empty());
    // A file that cannot be read changes nothing.
    write(&config, "[watch]\nignored = []\n");
    daemon.signal(Signal::HUP);
    daemon.wait_log("the settings stay as they were: ");
    assert_eq!(
        daemon.logged("settings.toml:2: no setting `watch.ignored`; did you mean `watch.ignore`?"),
        1,
        "{:#?}",
        daemon.log
    );
    daemon.wait_scan(&works);
    assert!(daemon.told("x").is_empty());
    write(&config, "");
    daemon.signal(Signal::HUP);
    daemon.wait_current("x", aim(2));
    daemon.signal(Signal::HUP);
    daemon.wait_log("none has changed");
    works.check();
    daemon.stop();
}

#[test]
fn what_is_ignored_is_not_planned_by_an_event_either() {
    let works = Works::new(&[("m", &tiles(1))]);
    let config = works.outside("settings.toml");
    write(&config, "[watch]\nignore = [\"**/draft-*.model.toml\", \"old\", \"**/spare.model\"]\n");
    for folder in ["old", "spare.model", "draft-3.model"] {
        fs::create_dir(works.path(folder)).unwrap();
    }
    let mut daemon = Daemon::spawn(command(&["--json", "keep", "--config"]).arg(&config).arg(works.root()));
    daemon.wait_current("m", aim(1));
    daemon.wait_watching();
    works.save("draft-1", &tiles(2));
    works.save("old/x", &tiles(3));
    write(&works.path("spare.model/works.toml"), tiles(4));
    write(&works.path("draft-3.model/works.toml"), tiles(5));
    write(&works.path("new"), tiles(6));
    fs::rename(works.path("new"), works.model("draft-2")).unwrap();
    // The events of these come after those.
    works.save("m", &tiles(7));
    daemon.wait_current("m", aim(7));
    daemon.wait_scan(&works);
    daemon.wait_scan(&works);
    for model in ["draft-1", "x", "spare", "draft-3", "draft-2"] {
        assert!(daemon.told(model).is_empty() && !works.plan(model).exists(), "{model}: {:#?}", daemon.objects);
    }
    daemon.stop();
}

#[test]
fn f8_signs_of_life() {
    let works = Works::new(&[("m", &tiles(1))]);
    let socket = works.outside("notify");
    let listener = UnixDatagram::bind(&socket).unwrap();
    listener.set_read_timeout(Some(Duration::from_secs(20))).unwrap();
    let hear = || {
        let mut buffer = [0; 200];
        let length = listener.recv(&mut buffer).unwrap();
        String::from_utf8(buffer[..length].to_vec()).unwrap()
    };
    let hear_until = |word: &str| while !hear().starts_with(word) {};
    let mut keep = command(&["--json", "keep"]);
    keep.arg(works.root()).env("NOTIFY_SOCKET", &socket).env("WATCHDOG_USEC", "200000");
    let mut daemon = Daemon::spawn(&mut keep);
    assert_eq!(hear(), "READY=1");
    for _ in 0..3 {
        assert_eq!(hear(), "WATCHDOG=1");
    }
    daemon.wait_current("m", aim(1));
    daemon.signal(Signal::HUP);
    hear_until("RELOADING=1\nMONOTONIC_USEC=");
    hear_until("READY=1");
    // A daemon that hangs gives none, and one that goes on does again.
    daemon.signal(Signal::STOP);
    listener.set_nonblocking(true).unwrap();
    while listener.recv(&mut [0; 200]).is_ok() {}
    listener.set_nonblocking(false).unwrap();
    daemon.signal(Signal::CONT);
    hear_until("WATCHDOG=1");
    daemon.signal(Signal::TERM);
    hear_until("STOPPING=1");
    assert_eq!(daemon.wait_end(Duration::from_secs(20)).unwrap().code(), Some(0));
}

#[test]
fn e12_a_model_that_takes_for_ever_delays_no_other() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let heavy = heavy();
    for capacity in 100..110 {
        // Saved over and over, so that its solve is interrupted and begins anew.
        works.save("heavy", &format!("{heavy}# {capacity}\n"));
        works.save("m", &tiles(capacity));
        daemon.wait_current("m", aim(capacity));
    }
    let done = daemon.objects.iter().position(|object| object["model"] == "heavy").unwrap_or(daemon.objects.len());
    let before = daemon.objects[..done].iter().filter(|object| object["model"] == "m").count();
    assert!(before > 5, "{:#?}", daemon.objects);
    works.save("heavy", &heavy.replace("price = ", "price = 1"));
    wait_until("word of what runs", || status(&works)["running"][0]["path"] == "heavy.model.toml");
}

#[test]
fn e9_events_are_taken_in_while_models_are_solved() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    works.save("heavy", &heavy());
    // More events than the system's queue holds.
    for save in 0..6000 {
        works.save("m", &tiles(1 + save));
        if save % 100 == 0 {
            pause(1);
        }
    }
    daemon.wait_current("m", aim(6000));
    daemon.wait_events(&works);
    assert_eq!(status(&works)["done"]["events_lost"], 0);
    works.check();
}

#[test]
fn one_message_for_many_models_and_none_too_long() {
    let works = Works::new(&[]);
    for number in 0..60 {
        std::os::unix::fs::symlink("nowhere", works.model(&format!("link-{number}"))).unwrap();
    }
    works.save("m", &format!("format = 1\n{} = 1\n", "k".repeat(1 << 20)));
    let mut daemon = works.keep();
    daemon.wait_told(&["m"]);
    daemon.wait_log("40 more are not plain files");
    daemon.wait_scan(&works);
    daemon.stop();
    assert_eq!(daemon.logged("is a link"), 20, "{:#?}", daemon.log);
    assert!(daemon.log.iter().all(|line| line.len() <= 2048), "{:#?}", daemon.log);
}

#[test]
fn e13_a_reader_that_never_reads() {
    let works = Works::new(&[]);
    // More than a pipe holds is told of so many models with so long names.
    let names: Vec<_> = (0..120).map(|number| format!("{}-{number}", "n".repeat(200))).collect();
    for (name, capacity) in names.iter().zip(1..) {
        works.save(name, &tiles(capacity));
    }
    let mut keep = command(&["--json", "keep"]);
    keep.arg(works.root()).stdin(Stdio::null()).stdout(Stdio::piped()).stderr(Stdio::null());
    let mut daemon = keep.spawn().unwrap();
    wait_until("all plans", || names.iter().all(|name| works.note(name).exists()));
    works.save("m", &tiles(7));
    wait_until("a plan of a later save", || works.note("m").exists());
    kill_process(Pid::from_child(&daemon), Signal::TERM).unwrap();
    assert_eq!(daemon.wait().unwrap().code(), Some(0));
    // What it begins to read then is whole lines.
    let mut told = String::new();
    daemon.stdout.take().unwrap().read_to_string(&mut told).unwrap();
    let whole: Vec<_> = told.lines().take(20).map(|line| serde_json::from_str::<Value>(line).unwrap()).collect();
    assert!(whole.len() == 20 && whole.iter().all(|object| object["standing"] == "current"), "{whole:?}");
    works.check();
}

/// E11: the system's killer of processes strikes with kill -9, and a supervisor starts the daemon again.
#[test]
fn e11_killed_again_and_again_under_a_supervisor() {
    let works = Works::new(&[("m", &tiles(1))]);
    let end = works.outside("end");
    let script = "until test -e \"$2\"; do \"$0\" keep \"$1\"; done";
    let mut shell = within(Command::new("sh"), &["-c", script, PROGRAM]);
    shell.arg(works.root()).arg(&end).stdin(Stdio::null()).stdout(Stdio::null()).stderr(Stdio::null());
    let mut supervisor = shell.spawn().unwrap();
    let lock = works.path(".millreeve/lock");
    let mut last = None;
    // Of a daemon that has just begun, before, while or after it plans.
    let mut next = || {
        wait_until("a daemon", || {
            let told = fs::read_to_string(&lock).unwrap_or_default();
            let found = told.strip_prefix("process ").and_then(|rest| rest.split(' ').next()?.parse().ok());
            found.is_some() && std::mem::replace(&mut last, found) != found
        });
        Pid::from_raw(last.unwrap()).unwrap()
    };
    for capacity in 2..=6 {
        let daemon = next();
        works.save("m", &tiles(capacity));
        if capacity % 2 == 0 {
            wait_until("its plan", || {
                works.plan("m").exists() && works.standing("m").1.to_bits() == aim(capacity).to_bits()
            });
        }
        kill_process(daemon, Signal::KILL).unwrap();
    }
    let daemon = next();
    wait_until("the last plan and its note", || {
        works.note("m").exists()
            && works.standing("m") == ("current".to_owned(), aim(6))
            && note::speaks_of(&works.note_text("m")) == text::seal(&works.plan_text("m"))
    });
    write(&end, "");
    kill_process(daemon, Signal::TERM).unwrap();
    assert!(supervisor.wait().unwrap().success());
    works.check();
}
