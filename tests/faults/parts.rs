//! Models in parts: what editors, git and people do to a folder that is one model.

use std::fs::{self, File};
use std::io::Write;
use std::os::unix::fs::symlink;
use std::path::PathBuf;

use crate::lab::git;
use crate::support::{Daemon, Works, aim, identity, tiles, wait_until, write};

/// The part that says how much there is of the kiln.
fn capacity(hours: u32) -> String {
    format!("format = 1\n[resources.kiln]\ncapacity = {hours}\n")
}

/// The part that says what a tile earns.
fn price(price: u32) -> String {
    format!("[activities.tile]\nprice = {price}\n")
}

const USES: &str = "activity,resource,rate\ntile,kiln,1\n";

/// Somebody's model `m` in three parts. Its aim is what a tile earns, times the hours of the kiln.
fn save_parts(works: &Works, hours: u32, earned: u32) {
    fs::create_dir_all(works.path("m.model")).unwrap();
    write(&part(works, "works.toml"), capacity(hours));
    write(&part(works, "sales.toml"), price(earned));
    write(&part(works, "uses.csv"), USES);
}

fn part(works: &Works, name: &str) -> PathBuf {
    works.path("m.model").join(name)
}

/// A folder with a daemon at work that has planned the model `m`, with 10 hours and 3 earned.
fn kept() -> (Works, Daemon) {
    let works = Works::new(&[]);
    let mut daemon = works.keep();
    save_parts(&works, 10, 3);
    daemon.wait_current("m", 30.0);
    (works, daemon)
}

#[test]
fn an_edit_of_one_part_is_an_edit_of_the_model() {
    let (works, mut daemon) = kept();
    let told = daemon.told("m")[0].clone();
    assert_eq!(told["path"], "m.model");
    write(&part(&works, "sales.toml"), price(4));
    let told = daemon.wait_current("m", 40.0);
    assert_eq!(told["edit"], serde_json::json!(["price"]));
    let beside = works.path("m.model/.sales.toml.Xy12Za");
    write(&beside, price(5));
    fs::rename(&beside, part(&works, "sales.toml")).unwrap();
    daemon.wait_current("m", 50.0);
    // What vim does: the part is away for a moment.
    write(&works.path("m.model/.works.toml.swp"), "swap");
    fs::rename(part(&works, "works.toml"), part(&works, "works.toml~")).unwrap();
    write(&part(&works, "works.toml"), capacity(20));
    fs::remove_file(part(&works, "works.toml~")).unwrap();
    fs::remove_file(works.path("m.model/.works.toml.swp")).unwrap();
    daemon.wait_current("m", 100.0);
    daemon.wait_scan(&works);
    assert_eq!(daemon.aims("m"), [30.0, 40.0, 50.0, 100.0]);
    assert!(daemon.log.iter().all(|line| !line.contains("WARN")), "{:#?}", daemon.log);
    works.check();
}

#[test]
fn parts_come_and_go() {
    let (works, mut daemon) = kept();
    write(&part(&works, "more.toml"), "[activities.slab]\nprice = 7\nuses = { kiln = 1 }\n");
    daemon.wait_current("m", 70.0);
    fs::remove_file(part(&works, "more.toml")).unwrap();
    daemon.wait_current("m", 30.0);
    // A part that is called otherwise is the same model.
    let plan = identity(&works.plan("m"));
    fs::rename(part(&works, "sales.toml"), part(&works, "prices.toml")).unwrap();
    daemon.wait_scan(&works);
    assert_eq!((works.standing("m"), identity(&works.plan("m"))), (("current".to_owned(), 30.0), plan));
    // What is in a folder within, or no part, is nothing to the model.
    fs::create_dir(works.path("m.model/old")).unwrap();
    write(&works.path("m.model/old/x.model.toml"), tiles(1));
    write(&works.path("m.model/notes.md"), "# Notes\n");
    daemon.wait_scan(&works);
    assert!(daemon.told("x").is_empty() && !works.path("m.model/old/x.plan.toml").exists());
    assert_eq!(daemon.aims("m"), [30.0, 70.0, 30.0]);
    works.check();
}

#[test]
fn a_part_broken_and_mended() {
    let (works, mut daemon) = kept();
    let before = works.plan_text("m");
    write(&part(&works, "sales.toml"), "[activities.tile]\nprice = \n");
    let told = daemon.wait_standing("m", "held");
    let fault = &told["faults"][0];
    assert_eq!(
        (&fault["path"], &fault["line"], &fault["column"]),
        (&"m.model/sales.toml".into(), &2.into(), &9.into())
    );
    assert!(works.note_text("m").contains("sales.toml, line 2, column 9"), "{}", works.note_text("m"));
    write(&part(&works, "sales.toml"), price(3));
    daemon.wait_current("m", 30.0);
    assert_eq!(works.plan_text("m"), before);
    // Two parts that give one key.
    write(&part(&works, "twice.toml"), price(3));
    let told = daemon.wait_standing("m", "held");
    let message = told["faults"][0]["message"].as_str().unwrap();
    assert!(message.contains("in sales.toml on line 2") && message.contains("in twice.toml on line 2"), "{message}");
    fs::remove_file(part(&works, "twice.toml")).unwrap();
    daemon.wait_current("m", 30.0);
    assert_eq!(works.plan_text("m"), before);
    works.check();
}

#[test]
fn a_part_that_is_open_for_writing_is_waited_for() {
    let (works, mut daemon) = kept();
    let mut open = File::create(part(&works, "works.toml")).unwrap();
    open.write_all(capacity(20).as_bytes()).unwrap();
    // Another part is closed meanwhile. What there is now is not what anybody meant.
    write(&part(&works, "sales.toml"), price(4));
    daemon.wait_scan(&works);
    assert_eq!(daemon.aims("m"), [30.0]);
    open.write_all(b"cost = 1\n").unwrap();
    drop(open);
    daemon.wait_current("m", 60.0);
    assert_eq!(daemon.aims("m"), [30.0, 60.0]);
    works.check();
}

#[test]
fn a_checkout_of_several_parts_is_one_edit() {
    let (works, mut daemon) = kept();
    assert!(git(works.root(), &["init", "-q"]));
    let commit = |message| {
        assert!(git(works.root(), &["add", "m.model"]) && git(works.root(), &["commit", "-qm", message]));
    };
    commit("one");
    assert!(git(works.root(), &["checkout", "-qb", "other"]));
    // By each part alone the aim would be another one.
    save_parts(&works, 20, 4);
    daemon.wait_current("m", 80.0);
    commit("two");
    for (branch, expected) in [("@{-1}", 30.0), ("@{-1}", 80.0), ("@{-1}", 30.0)] {
        assert!(git(works.root(), &["checkout", "-q", "-f", branch]));
        daemon.wait("the branch", |object| object["model"] == "m" && object["aim"] == expected);
    }
    daemon.wait_scan(&works);
    assert_eq!(daemon.aims("m"), [30.0, 80.0, 30.0, 80.0, 30.0]);
    works.check();
}

#[test]
fn an_edit_without_an_event_is_found_by_a_scan() {
    let (works, mut daemon) = kept();
    fs::hard_link(part(&works, "sales.toml"), works.outside("sales")).unwrap();
    write(&works.outside("sales"), price(4));
    daemon.wait_current("m", 40.0);
    works.check();
}

#[test]
fn a_folder_moved_removed_and_brought_back() {
    let (works, mut daemon) = kept();
    let before = works.plan_text("m");
    fs::rename(works.path("m.model"), works.path("n.model")).unwrap();
    // Which of the two is told first is open.
    daemon.wait_standing("m", "retired");
    wait_until("the plan of n", || works.plan("n").exists());
    assert_eq!((works.standing("m").0.as_str(), works.standing("n")), ("retired", ("current".to_owned(), 30.0)));
    fs::rename(works.path("n.model"), works.path("m.model")).unwrap();
    daemon.wait_current("m", 30.0);
    assert_eq!(works.plan_text("m"), before);
    wait_until("n to retire", || works.standing("n").0 == "retired");
    fs::remove_dir_all(works.path("m.model")).unwrap();
    let told = daemon.wait_standing("m", "retired");
    assert_eq!(told["path"], "m.model");
    works.check();
}

#[test]
fn a_model_divided_into_parts_and_put_together_again_keeps_its_plan() {
    let (works, mut daemon) = Works::kept(&[("m", 10)]);
    let before = works.plan_text("m");
    fs::create_dir(works.path("m.model")).unwrap();
    write(&part(&works, "works.toml"), capacity(10));
    write(&part(&works, "sales.toml"), price(3));
    write(&part(&works, "uses.csv"), USES);
    // Both are there now, and nobody can tell which of them is meant.
    let told = daemon.wait_standing("m", "held");
    let message = told["faults"][0]["message"].as_str().unwrap();
    assert!(message.contains("`m.model.toml`") && message.contains("`m.model`"), "{message}");
    fs::remove_file(works.model("m")).unwrap();
    daemon.wait_current("m", aim(10));
    assert_eq!(works.plan_text("m"), before);
    let other = works.outside("m.model");
    fs::rename(works.path("m.model"), &other).unwrap();
    works.save("m", &tiles(10));
    let told = daemon.wait("the file", |object| object["path"] == "m.model.toml");
    assert_eq!(told["standing"], "current");
    daemon.wait_grace(&works);
    assert!(daemon.told("m").iter().all(|object| object["standing"] != "retired"), "{:#?}", daemon.told("m"));
    assert_eq!(works.plan_text("m"), before);
    works.check();
}

#[test]
fn an_empty_folder_says_what_to_do() {
    let works = Works::new(&[]);
    let mut daemon = works.keep();
    fs::create_dir(works.path("m.model")).unwrap();
    let told = daemon.wait_standing("m", "held");
    assert_eq!(told["faults"][0]["code"], "no-parts");
    assert!(works.note_text("m").contains("directly into it"), "{}", works.note_text("m"));
    save_parts(&works, 10, 3);
    daemon.wait_current("m", 30.0);
    works.check();
}

#[test]
fn links_are_not_followed() {
    let works = Works::new(&[]);
    let mut daemon = works.keep();
    fs::create_dir(works.outside("far.model")).unwrap();
    write(&works.outside("far.model").join("far.toml"), capacity(1));
    symlink(works.outside("far.model"), works.path("far.model")).unwrap();
    daemon.wait_log("far.model is a link");
    save_parts(&works, 10, 3);
    daemon.wait_current("m", 30.0);
    // A part that is a link holds the model: without it the others say something else.
    fs::rename(part(&works, "sales.toml"), works.outside("sales.toml")).unwrap();
    symlink(works.outside("sales.toml"), part(&works, "sales.toml")).unwrap();
    let told = daemon.wait_standing("m", "held");
    assert_eq!(
        (&told["faults"][0]["path"], &told["faults"][0]["code"]),
        (&"m.model/sales.toml".into(), &"not-a-file".into())
    );
    fs::remove_file(part(&works, "sales.toml")).unwrap();
    fs::rename(works.outside("sales.toml"), part(&works, "sales.toml")).unwrap();
    daemon.wait_current("m", 30.0);
    assert!(daemon.told("far").is_empty());
    works.check();
}

#[test]
fn a_start_over_current_plans_solves_nothing() {
    let (works, mut daemon) = kept();
    daemon.stop();
    let plan = identity(&works.plan("m"));
    let mut daemon = works.keep();
    daemon.wait_scan(&works);
    daemon.wait_grace(&works);
    assert_eq!((daemon.solves("m"), identity(&works.plan("m"))), (0, plan));
    // An edit made while nobody watched is found, and starts from the last basis.
    daemon.stop();
    write(&part(&works, "sales.toml"), price(4));
    let mut daemon = works.keep();
    let told = daemon.wait_current("m", 40.0);
    assert_eq!((&told["edit"], &told["start"]), (&serde_json::json!(["price"]), &"none".into()));
    works.check();
}

#[test]
fn every_command_takes_a_folder_of_parts() {
    let works = Works::new(&[]);
    save_parts(&works, 10, 3);
    for model in ["m.model", "m.model/", "./m.model"] {
        let told = |arguments: &[&str], status: i32| {
            let (code, out, err) = works.run(&[arguments, &[model]].concat());
            assert_eq!(code, Some(status), "{arguments:?} {model}: {out}{err}");
            out + &err
        };
        told(&["check"], 0);
        told(&["once"], 0);
        told(&["verify"], 0);
        assert!(told(&["show"], 0).contains("tile"));
        assert!(told(&["--json", "show"], 0).contains("\"path\":\"m.model\"") || model.starts_with('.'));
        told(&["release"], 0);
        let (code, _, err) = works.run(&["convert", "--force", model, "m.mps"]);
        assert_eq!(code, Some(0), "{err}");
    }
    assert!(works.path("m.release.toml").exists() && works.path("m.plan.toml").exists());
    assert!(!works.path("m.model/.millreeve").exists() && works.path(".millreeve").exists());
    let (code, out, _) = works.run(&["--json", "check", "."]);
    assert_eq!((code, out.lines().count()), (Some(0), 1));
    let (code, _, err) = works.run(&["convert", "m.mps", "n.model"]);
    assert_eq!(code, Some(2), "{err}");
    // Its plan lies beside it, so what is kept is the folder above.
    for arguments in [["keep", "m.model"], ["keep", "./m.model/"]] {
        let (code, _, err) = works.run(&arguments);
        assert_eq!(code, Some(2), "{err}");
        assert!(err.contains("is a model in parts") && err.contains("millreeve keep /"), "{err}");
    }
    works.save("m", &tiles(1));
    for command in ["check", "once", "verify"] {
        let (code, out, _) = works.run(&[command, "m.model"]);
        assert_eq!(code, Some(1), "{command}: {out}");
        assert!(out.contains("are both there"), "{command}: {out}");
    }
}
