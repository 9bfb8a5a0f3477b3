//! Editors' habits, git, and models that come and go.

use std::fs::{self, File};
use std::io::Write;
use std::process::Command;

use crate::lab::{commit, git};
use crate::support::{Works, aim, identity, tiles, write};

#[test]
fn b1_the_dance_of_vim() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    // What vim does outside /tmp with its default settings: swap files, a probe, the model moved to its backup and written anew.
    write(&works.path(".m.model.toml.swx"), "");
    write(&works.path(".m.model.toml.swp"), "swap");
    fs::remove_file(works.path(".m.model.toml.swx")).unwrap();
    write(&works.path("4913"), "");
    fs::remove_file(works.path("4913")).unwrap();
    fs::rename(works.model("m"), works.path("m.model.toml~")).unwrap();
    works.save("m", &tiles(2));
    fs::remove_file(works.path("m.model.toml~")).unwrap();
    fs::remove_file(works.path(".m.model.toml.swp")).unwrap();
    daemon.wait_current("m", aim(2));
    daemon.wait_grace(&works);
    assert_eq!(daemon.told("m").len(), 2, "{:#?}", daemon.told("m"));
    works.check();
}

#[test]
fn b2_the_dance_of_emacs() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    // A lock that points nowhere, an automatic save, a backup, and the model closed twice.
    std::os::unix::fs::symlink("somebody@somewhere.4711:1700000000", works.path(".#m.model.toml")).unwrap();
    write(&works.path("#m.model.toml#"), "format = ");
    fs::rename(works.model("m"), works.path("m.model.toml~")).unwrap();
    works.save("m", &tiles(2));
    drop(File::options().append(true).open(works.model("m")).unwrap());
    fs::remove_file(works.path("#m.model.toml#")).unwrap();
    fs::remove_file(works.path(".#m.model.toml")).unwrap();
    daemon.wait_current("m", aim(2));
    daemon.wait_grace(&works);
    assert_eq!(daemon.aims("m"), [aim(1), aim(2)], "{:#?}", daemon.told("m"));
    assert!(daemon.log.iter().all(|line| !line.contains("WARN") || line.contains("mark-")), "{:#?}", daemon.log);
    works.check();
}

#[test]
fn b3_replaced_by_a_tool() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let edited = Command::new("sed").args(["-i", "s/^capacity = .*/capacity = 2/"]).arg(works.model("m")).status();
    assert!(edited.unwrap().success());
    daemon.wait_current("m", aim(2));
    let beside = works.path(".m.model.toml.Xy12Za");
    write(&beside, tiles(3));
    fs::rename(&beside, works.model("m")).unwrap();
    daemon.wait_current("m", aim(3));
    daemon.wait_scan(&works);
    assert_eq!(daemon.told("m").len(), 3, "{:#?}", daemon.told("m"));
    works.check();
}

#[test]
fn b5_a_model_renamed() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    fs::rename(works.model("m"), works.model("n")).unwrap();
    daemon.wait_current("n", aim(1));
    assert_eq!(works.standing("m"), ("current".to_owned(), aim(1)));
    daemon.wait_standing("m", "retired");
    assert_eq!(works.standing("m"), ("retired".to_owned(), aim(1)));
    works.check();
}

#[test]
fn c2_a_merge_conflict() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    assert!(git(works.root(), &["init", "-q"]));
    commit(&works, "one");
    assert!(git(works.root(), &["checkout", "-qb", "other"]));
    works.save("m", &tiles(2));
    commit(&works, "two");
    assert!(git(works.root(), &["checkout", "-q", "main"]));
    works.save("m", &tiles(3));
    commit(&works, "three");
    daemon.wait_current("m", aim(3));
    let plan = works.plan_text("m");
    assert!(!git(works.root(), &["merge", "-q", "other"]));
    let held = daemon.wait_standing("m", "held");
    assert!(held["held"].as_str().unwrap().contains("merge conflict"), "{held}");
    assert_eq!(held["faults"][0]["line"], 3, "{held}");
    assert_eq!(works.standing("m"), ("held".to_owned(), aim(3)));
    works.check();
    assert!(git(works.root(), &["merge", "--abort"]));
    daemon.wait_current("m", aim(3));
    assert_eq!(works.plan_text("m"), plan);
    works.check();
}

#[test]
fn a_checkout_of_two_hundred_models() {
    let name = |number: u32| format!("m{number:03}");
    let works = Works::new(&[]);
    assert!(git(works.root(), &["init", "-q"]));
    (0..200).for_each(|number| works.save(&name(number), &tiles(1000 + number)));
    commit(&works, "one");
    assert!(git(works.root(), &["checkout", "-qb", "other"]));
    (0..200).for_each(|number| works.save(&name(number), &tiles(2000 + number)));
    commit(&works, "two");
    assert!(git(works.root(), &["checkout", "-q", "main"]));
    let mut daemon = works.keep();
    while daemon.objects.len() < 200 {
        daemon.wait("the first plans", |_| true);
    }
    assert!(git(works.root(), &["checkout", "-q", "other"]));
    let mut missing: Vec<_> = (0..200).collect();
    while !missing.is_empty() {
        let object = daemon.wait("the other branch", |_| true);
        missing.retain(|&number| object["model"] != name(number) || object["aim"] != aim(2000 + number));
    }
    daemon.wait_grace(&works);
    for number in 0..200 {
        let told = daemon.told(&name(number));
        assert_eq!(told.len(), 2, "one plan for each content: {told:#?}");
        assert_eq!(daemon.aims(&name(number)), [aim(1000 + number), aim(2000 + number)]);
        assert!(told.iter().all(|object| object["standing"] == "current"), "{told:#?}");
    }
    works.check();
}

#[test]
fn d6_a_model_deleted_and_brought_back() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let plan = works.plan_text("m");
    fs::remove_file(works.model("m")).unwrap();
    daemon.wait_standing("m", "retired");
    assert_eq!(works.standing("m"), ("retired".to_owned(), aim(1)));
    works.check();
    works.save("m", &tiles(1));
    let back = daemon.wait_current("m", aim(1));
    assert_eq!((&back["pivots"], &back["start"]), (&0.into(), &"none".into()), "{back}");
    assert_eq!(works.plan_text("m"), plan);
    works.check();
}

#[test]
fn a_fault_and_its_mending_leave_the_plan_as_it_was() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let plan = works.plan_text("m");
    works.save("m", &tiles(1).replace("price", "prise"));
    let held = daemon.wait_standing("m", "held");
    assert_eq!(held["faults"][0]["line"], 5, "{held}");
    assert_eq!(works.standing("m"), ("held".to_owned(), aim(1)));
    assert!(works.note_text("m").contains("prise"), "{}", works.note_text("m"));
    works.check();
    works.save("m", &tiles(1));
    let mended = daemon.wait_current("m", aim(1));
    assert_eq!(mended["start"], "none", "{mended}");
    assert_eq!(works.plan_text("m"), plan);
    works.check();
}

#[test]
fn a_fault_mended_after_the_state_was_lost() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let plan = works.plan_text("m");
    works.save("m", &tiles(1).replace("price", "prise"));
    daemon.wait_standing("m", "held");
    daemon.stop();
    let held = [works.plan("m"), works.note("m")].map(|path| identity(&path));
    fs::remove_dir_all(works.path(".millreeve")).unwrap();
    let mut daemon = works.keep();
    daemon.wait_standing("m", "held");
    assert_eq!([works.plan("m"), works.note("m")].map(|path| identity(&path)), held);
    works.save("m", &tiles(1));
    let mended = daemon.wait_current("m", aim(1));
    assert_eq!(mended["start"], "none", "{mended}");
    assert_eq!(works.plan_text("m"), plan);
    works.check();
}

#[test]
fn wording_solves_nothing_and_layout_writes_nothing() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let plan = identity(&works.plan("m"));
    let note = identity(&works.note("m"));
    works.save("m", &tiles(1).replace("[activities.tile]\n", "\n# The tile.\n[activities.tile] # here\n\n"));
    daemon.wait_events(&works);
    assert_eq!((identity(&works.plan("m")), identity(&works.note("m"))), (plan, note), "a comment");
    works.save("m", &tiles(1).replace("price", "label = \"Floor tile\"\nprice"));
    let told = daemon.wait_current("m", aim(1));
    assert_eq!((&told["pivots"], &told["edit"]), (&0.into(), &serde_json::json!(["wording"])), "{told}");
    assert_eq!(identity(&works.plan("m")), plan, "a label");
    assert_eq!(daemon.solves("m"), 1);
    works.check();
}

#[test]
fn a_save_in_place_with_a_pause_in_the_middle() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let model = tiles(2);
    let (half, rest) = model.split_at(model.len() / 2);
    let mut file = File::create(works.model("m")).unwrap();
    file.write_all(half.as_bytes()).unwrap();
    daemon.wait_scan(&works);
    assert_eq!(works.standing("m"), ("current".to_owned(), aim(1)));
    file.write_all(rest.as_bytes()).unwrap();
    drop(file);
    daemon.wait_current("m", aim(2));
    assert_eq!(daemon.told("m").len(), 2, "{:#?}", daemon.told("m"));
    works.check();
}

#[test]
fn a_release_that_comes_and_goes_is_told_in_the_note_and_a_model_that_goes_rests() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let (plan, plain) = (identity(&works.plan("m")), works.note_text("m"));
    assert_eq!(works.run(&["release", "m"]).0, Some(0));
    daemon.wait_current("m", aim(1));
    assert!(works.note_text("m").contains("\nAs released: nothing moves.\n"), "{}", works.note_text("m"));
    fs::remove_file(works.path("m.release.toml")).unwrap();
    daemon.wait_current("m", aim(1));
    assert_eq!((works.note_text("m"), identity(&works.plan("m"))), (plain, plan));
    // A release beside no model is no reason to look again and again.
    assert_eq!(works.run(&["release", "m"]).0, Some(0));
    fs::remove_file(works.model("m")).unwrap();
    daemon.wait_standing("m", "retired");
    let told = daemon.told("m").len();
    daemon.wait_grace(&works);
    daemon.wait_grace(&works);
    assert_eq!(daemon.told("m").len(), told, "{:#?}", daemon.told("m"));
    works.check();
}
