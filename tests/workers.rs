//! The real program and its worker processes: whatever becomes of one, the daemon lives, and every model comes to its plan or is held.

#![expect(clippy::unwrap_used, clippy::panic, reason = "a test that cannot go on has failed")]

#[path = "support/instances.rs"]
mod instances;
#[path = "workers/stand_ins.rs"]
mod stand_ins;
#[expect(dead_code, reason = "made for the tests of faults, which use more of it")]
#[path = "faults/support.rs"]
mod support;

use std::fs;
use std::time::{Duration, Instant};

use millreeve::keep::workers::FAULT;
use millreeve::model::meaning::Meaning;
use millreeve::model::read;
use millreeve::plan::text;
use rustix::process::{Pid, Signal, kill_process};
use support::{Daemon, Works, aim, command, pause, stat, tiles};

/// Far longer than anything waited for takes.
const DEADLINE: Duration = Duration::from_secs(20);

/// The words of the log for a worker that ended over a question.
const IN_MID_SOLVE: &str = "ended in the middle of a solve";

/// A daemon over `works` whose workers have these faults, with so many of them.
fn keep_faulty(works: &Works, faults: &str, workers: usize) -> Daemon {
    let mut keep = command(&["--json", "keep"]);
    keep.env(FAULT, faults).env("MILLREEVE_SOLVE_WORKERS", workers.to_string());
    Daemon::spawn(keep.arg(works.root()))
}

/// [`tiles`] with an activity of this name beside.
fn with_activity(capacity: u32, name: &str) -> String {
    format!("{}[activities.{name}]\nprice = 1\nuses = {{ kiln = 1 }}\n", tiles(capacity))
}

/// Waits until something is so.
fn until(what: &str, mut is_so: impl FnMut() -> bool) {
    let end = Instant::now() + DEADLINE;
    while !is_so() {
        assert!(Instant::now() < end, "waited in vain until {what}");
        pause(1);
    }
}

/// The time that the first thread of a process, which in a worker is the one that solves, has been running, in nanoseconds.
fn busy(process: Pid) -> Option<u64> {
    let path = format!("/proc/{}/schedstat", process.as_raw_nonzero());
    fs::read_to_string(path).ok()?.split(' ').next()?.parse().ok()
}

fn lives(process: Pid) -> bool {
    stat(process).first().is_some_and(|state| state != "Z")
}

fn count(daemon: &Daemon, words: &str) -> usize {
    daemon.log.iter().filter(|line| line.contains(words)).count()
}

/// A model that takes the solver some tens of milliseconds, with other prices for each seed.
fn long(seed: u64) -> String {
    let (activities, resources) = (400_u64, 200_u64);
    let random = |mut state: u64| {
        move |most: u64| {
            state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
            (state >> 33) % most
        }
    };
    let (mut recipe, mut price) = (random(1), random(seed.wrapping_mul(0x9e37_79b9_7f4a_7c15)));
    let mut model = String::from("format = 1\n");
    for resource in 0..resources {
        model.push_str(&format!("[resources.r{resource}]\ncapacity = {}\n", 1000 + recipe(9000)));
    }
    for activity in 0..activities {
        let used: std::collections::BTreeSet<_> = (0..20).map(|_| recipe(resources)).collect();
        let uses: Vec<_> = used.iter().map(|used| format!("r{used} = {}.{}", 1 + recipe(9), recipe(1000))).collect();
        let price = 10 + price(1000);
        model.push_str(&format!("[activities.a{activity}]\nprice = {price}\nuses = {{ {} }}\n", uses.join(", ")));
    }
    model
}

/// Whether the plan on disk is current and answers the model beside it.
fn answers(works: &Works, name: &str) -> bool {
    let model = works.model(name);
    let reading = read::text(&model, &fs::read(&model).unwrap()).unwrap();
    let plan = text::read(&works.plan_text(name)).unwrap().plan;
    plan.standing.word() == "current" && plan.answers == Meaning::of(&reading.model)
}

#[test]
fn k5_a_worker_killed_in_mid_solve_two_hundred_times() {
    const KILLS: usize = 200;
    let works = Works::new(&[("long", &long(0)), ("other", &tiles(1))]);
    let mut daemon = keep_faulty(&works, "", 1);
    daemon.wait_told(&["long", "other"]);
    let mut seed = 0;
    while count(&daemon, IN_MID_SOLVE) < KILLS {
        seed += 1;
        assert!(seed < 5 * KILLS as u64, "too few of the kills hit a solve: {:#?}", daemon.log);
        let workers = daemon.workers();
        assert!(workers.len() < 2, "{workers:?}");
        let before = workers.first().and_then(|&worker| busy(worker)).unwrap_or_default();
        works.save("long", &long(seed));
        // There is none where the last kill came after the answer.
        if let &[worker] = workers.as_slice() {
            // Some milliseconds past what reading the question takes; or the answer has come meanwhile.
            until("the worker solves", || busy(worker).is_none_or(|now| now > before + 3_000_000));
            // It may be gone: killed in the last round, and waited for in this one.
            let _ = kill_process(worker, Signal::KILL);
        }
        daemon.wait("a plan", |object| object["model"] == "long" && object["standing"] == "current");
    }
    while !answers(&works, "long") {
        daemon.wait("the last plan", |object| object["model"] == "long");
    }
    works.save("other", &tiles(2));
    daemon.wait_current("other", aim(2));
    daemon.stop();
    works.check();
    let held = daemon.objects.iter().filter(|object| object["standing"] != "current").count();
    assert_eq!(held, 0, "{:#?}", daemon.objects);
    let fresh = Works::new(&[("long", &long(seed))]);
    assert_eq!(fresh.run(&["once", "."]).0, Some(0));
    assert_eq!(works.plan_text("long"), fresh.plan_text("long"), "the plan of a first start over the same bytes");
}

#[test]
fn f9_two_crashes_over_one_content_hold_the_model_and_the_next_edit_frees_it() {
    let works = Works::new(&[("bad", &tiles(1)), ("good", &tiles(2))]);
    let faults = "abort=activities.poison";
    let mut daemon = keep_faulty(&works, faults, 1);
    daemon.wait_current("bad", aim(1));
    let before = works.plan_text("bad");
    works.save("bad", &with_activity(5, "poison"));
    let held = daemon.wait_standing("bad", "held");
    let reason = held["held"].as_str().unwrap();
    assert!(reason.contains("crashed 2 times over this model (signal SIGABRT)"), "{reason}");
    assert!(reason.contains("asked again once the model is edited"), "{reason}");
    assert_eq!(count(&daemon, IN_MID_SOLVE), 2, "{:#?}", daemon.log);
    let seal = |plan: &str| plan.lines().find(|line| line.starts_with("answers")).unwrap().to_owned();
    assert_eq!(seal(&works.plan_text("bad")), seal(&before), "the last good plan stays");
    assert!(works.note_text("bad").contains("crashed 2 times"), "{}", works.note_text("bad"));
    works.save("good", &tiles(3));
    daemon.wait_current("good", aim(3));
    works.check();
    daemon.stop();
    // The next start knows it too, and writes nothing.
    let held = (works.plan_text("bad"), works.note_text("bad"));
    let mut daemon = keep_faulty(&works, faults, 1);
    daemon.wait_told(&["bad", "good"]);
    assert_eq!(daemon.told("bad")[0]["standing"], "held");
    assert_eq!(count(&daemon, IN_MID_SOLVE), 0, "{:#?}", daemon.log);
    assert_eq!((works.plan_text("bad"), works.note_text("bad")), held);
    works.save("bad", &with_activity(5, "harmless"));
    daemon.wait_current("bad", aim(5));
    // What has had a plan since is counted anew.
    works.save("bad", &with_activity(5, "poison"));
    daemon.wait_standing("bad", "held");
    assert_eq!(count(&daemon, IN_MID_SOLVE), 2, "{:#?}", daemon.log);
    works.save("bad", &tiles(1));
    daemon.wait_current("bad", aim(1));
    assert_eq!(works.plan_text("bad"), before);
    daemon.stop();
    works.check();
    assert_eq!(fs::read_dir(works.path(".millreeve/records")).unwrap().count(), 2, "no tries are left behind");
}

#[test]
fn k5_the_call_that_crashes_the_solver_over_klein1_and_vol1() {
    let works = Works::new(&[("good", &tiles(1))]);
    let mut faults = Vec::new();
    for name in ["klein1", "vol1"] {
        let (from, to) = (instances::netlib(name), works.outside(&format!("{name}.model.toml")));
        let converted = works.run(&["convert", from.to_str().unwrap(), to.to_str().unwrap()]);
        assert_eq!(converted.0, Some(0), "{converted:?}");
        let model = fs::read_to_string(to).unwrap();
        let activity = model.lines().find_map(|line| line.strip_prefix("[activities.")?.strip_suffix(']'));
        faults.push(format!("conflict=activities.{}", activity.unwrap()));
        works.save(name, &model);
    }
    let mut daemon = keep_faulty(&works, &faults.join(","), 2);
    daemon.wait_told(&["klein1", "vol1", "good"]);
    for (name, capacity) in [("klein1", 2), ("vol1", 3)] {
        let held = daemon.told(name)[0]["held"].as_str().unwrap().to_owned();
        assert!(held.contains("crashed 2 times over this model (signal SIGSEGV)"), "{name}: {held}");
        works.save(name, &tiles(capacity));
        daemon.wait_current(name, aim(capacity));
    }
    assert_eq!(count(&daemon, IN_MID_SOLVE), 4, "{:#?}", daemon.log);
    works.save("good", &tiles(4));
    daemon.wait_current("good", aim(4));
    daemon.stop();
    works.check();
}

#[test]
fn e10_a_worker_that_takes_all_memory() {
    let works = Works::new(&[("bad", &with_activity(1, "poison")), ("good", &tiles(2))]);
    let mut keep = command(&["--json", "keep"]);
    keep.env(FAULT, "memory=activities.poison").env("MILLREEVE_SOLVE_MEMORY_LIMIT", "1 MiB");
    let mut daemon = Daemon::spawn(keep.env("MILLREEVE_SOLVE_WORKERS", "2").arg(works.root()));
    daemon.wait_told(&["bad", "good"]);
    let told = daemon.told("bad")[0];
    let why = told["held"].as_str().unwrap();
    assert!(why.contains("(it ran out of the memory that it may take)"), "{told}");
    works.save("bad", &tiles(1));
    daemon.wait_current("bad", aim(1));
    works.save("good", &tiles(3));
    daemon.wait_current("good", aim(3));
    daemon.stop();
    works.check();
}

#[test]
fn k3_a_worker_that_hangs_is_killed_and_the_model_held() {
    let works = Works::new(&[("bad", &with_activity(1, "poison"))]);
    let mut keep = command(&["--json", "keep"]);
    keep.env(FAULT, "hang=activities.poison").env("MILLREEVE_SOLVE_TIME_LIMIT", "1 s");
    let mut daemon = Daemon::spawn(keep.arg(works.root()));
    let told = daemon.wait("bad held", |object| object["model"] == "bad");
    assert!(told["held"].as_str().unwrap().contains("the time limit of 1 s was reached"), "{told}");
    assert_eq!(count(&daemon, "did not stop when told to, and was killed"), 1, "{:#?}", daemon.log);
    works.save("bad", &tiles(1));
    daemon.wait_current("bad", aim(1));
    daemon.stop();
}

#[test]
fn k6_what_a_solver_prints_is_no_answer() {
    let works = Works::new(&[("loud", &with_activity(1, "poison"))]);
    let mut daemon = keep_faulty(&works, "print=activities.poison", 1);
    daemon.wait_current("loud", aim(1));
    daemon.stop();
    let line = daemon.log.iter().find(|line| line.contains("Coefficients are")).unwrap();
    assert!(line.contains("worker 1: Coefficients are\\u{1b}[2J in trouble"), "{line}");
    assert_eq!(count(&daemon, IN_MID_SOLVE), 0);
}

#[test]
fn a_killed_daemon_leaves_no_worker() {
    let works = Works::new(&[("a", &tiles(1)), ("b", &tiles(2)), ("hung", &with_activity(1, "poison"))]);
    let mut daemon = keep_faulty(&works, "hang=activities.poison", 3);
    daemon.wait_told(&["a", "b"]);
    until("all have started", || daemon.workers().len() == 3);
    let workers = daemon.workers();
    daemon.kill();
    until("the workers are gone", || !workers.iter().any(|&worker| lives(worker)));
}

#[test]
fn what_is_sent_to_all_processes_does_not_end_a_worker() {
    let works = Works::new(&[("m", &tiles(1))]);
    let mut daemon = keep_faulty(&works, "", 1);
    daemon.wait_current("m", aim(1));
    let workers = daemon.workers();
    for signal in [Signal::INT, Signal::TERM, Signal::HUP] {
        kill_process(workers[0], signal).unwrap();
    }
    works.save("m", &tiles(2));
    daemon.wait_current("m", aim(2));
    assert_eq!(daemon.workers(), workers);
    // One that is killed while it has nothing to do costs nothing but the telling.
    kill_process(workers[0], Signal::KILL).unwrap();
    until("it is gone", || !lives(workers[0]));
    works.save("m", &tiles(3));
    daemon.wait_current("m", aim(3));
    daemon.stop();
    assert_eq!(count(&daemon, IN_MID_SOLVE), 0, "{:#?}", daemon.log);
    works.check();
}

#[test]
fn once_solves_in_workers_too() {
    let works = Works::new(&[("bad", &with_activity(1, "poison")), ("good", &tiles(2))]);
    let output =
        command(&["once", "."]).env(FAULT, "abort=activities.poison").current_dir(works.root()).output().unwrap();
    assert_eq!(output.status.code(), Some(1), "{output:?}");
    let told = String::from_utf8(output.stdout).unwrap();
    assert!(told.contains("crashed 2 times over this model"), "{told}");
    assert_eq!(works.standing("good"), ("current".to_owned(), aim(2)));
}
