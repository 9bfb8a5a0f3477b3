//! Each finding, brought about and told.

use millreeve::plan::text;
use millreeve::plan::types::{FORMAT, RULES};
use serde_json::{Value, json};

use crate::support::{TILES, Works};

/// The status and the only object.
fn only(works: &Works) -> (i32, String, Value) {
    let (status, text, objects) = works.verify();
    let [object] = &objects[..] else { panic!("{text}") };
    (status, text, object.clone())
}

/// What is found, and whether `once` on the model then makes it verified.
fn found(works: &Works, finding: &str, lines: &[&str]) -> Value {
    let (status, text, object) = only(works);
    assert_eq!((object["finding"].as_str(), status), (Some(finding), 1), "{text}");
    for line in lines {
        assert!(text.lines().any(|told| told.trim() == *line), "{line:?} in {text}");
    }
    object
}

/// As [`found`], of something that the cure it tells mends.
fn mended(works: &Works, finding: &str, lines: &[&str]) -> Value {
    let object = found(works, finding, lines);
    assert!(object["help"].as_str().unwrap().starts_with("millreeve once ./tiles.model.toml "), "{object}");
    assert_eq!(works.run(&["once", "./tiles.model.toml"]).0, 0);
    assert_eq!(only(works).2["finding"], "verified");
    object
}

#[test]
fn a_plan_as_it_should_be_is_verified_and_its_paths_may_be_any() {
    let works = Works::planned();
    let (status, text, object) = only(&works);
    assert_eq!((status, text.as_str()), (0, "./tiles.model.toml: verified\n"));
    assert_eq!(object["aim"], 1900.0);
    for path in ["tiles.model.toml", "tiles.plan.toml"] {
        assert_eq!(works.run(&["verify", path]), (0, "tiles.model.toml: verified\n".to_owned(), String::new()));
    }
    // Told once, however often it is named.
    assert_eq!(works.run(&["verify", "tiles.plan.toml", "tiles.model.toml"]).1, "tiles.model.toml: verified\n");
    // A folder without the state of any daemon is as good.
    std::fs::remove_dir_all(works.path(".millreeve")).unwrap();
    assert_eq!(only(&works).0, 0);
}

#[test]
fn nothing_to_verify_is_a_mistake_of_the_command_line() {
    let works = Works::with(&[("notes.txt", ""), ("odd.plan.toml", "x = 1\n")]);
    for path in [".", "none.model.toml", "none.plan.toml", "notes.txt", "odd.plan.toml"] {
        assert_eq!(works.run(&["verify", path]).0, 2, "{path}");
    }
}

#[test]
fn an_edited_model_makes_its_plan_stale() {
    let works = Works::planned();
    works.replace("tiles.model.toml", "capacity = 90", "capacity = 91");
    mended(
        &works,
        "stale",
        &[
            "./tiles.model.toml: stale: the model has been edited since the plan was made",
            "millreeve once ./tiles.model.toml brings it up to date",
        ],
    );
    // Wording moves no number.
    works.replace("tiles.model.toml", "Two tiles", "Two tiles and a slab");
    assert_eq!(only(&works).2["finding"], "verified");
}

#[test]
fn an_edited_plan_is_told_by_its_seal_and_what_was_changed_is_shown() {
    let works = Works::planned();
    works.replace("tiles.plan.toml", "level       = 42\n", "level       = 43.5\n");
    let object = mended(
        &works,
        "edited",
        &["./tiles.model.toml: edited by hand: its seal does not fit", "x: 43.5 in the file, 42 afresh"],
    );
    assert_eq!(object["differences"]["moved"], json!([{ "name": "x", "file": 43.5, "afresh": 42.0 }]));
    // What was edited against another model is not compared.
    works.replace("tiles.plan.toml", "level       = 42\n", "level       = 43.5\n");
    works.replace("tiles.model.toml", "capacity = 90", "capacity = 91");
    assert_eq!(found(&works, "edited", &[])["differences"], Value::Null);
}

/// The plan's text with a change that its seal vouches for, as only a mistake of the program could make it.
fn forged(works: &Works, changes: &[(&str, &str)]) {
    let mut plan = works.read("tiles.plan.toml");
    for (from, to) in changes {
        assert_eq!(plan.matches(from).count(), 1, "{from:?} in {plan}");
        plan = plan.replace(from, to);
    }
    let seal = text::seal(&plan).unwrap().to_owned();
    works.save("tiles.plan.toml", plan.replace(&seal, &text::seal_for(&plan)));
}

#[test]
fn a_sealed_plan_with_other_numbers_is_shown_as_a_difference_of_plans() {
    let works = Works::planned();
    forged(
        &works,
        &[
            ("aim      = 1900", "aim      = 1350"),
            ("level       = 16\nstate       = \"in the mix\"", "level       = 0\nstate       = \"idle\""),
            ("level       = 42\n", "level       = 45\n"),
        ],
    );
    let object = found(
        &works,
        "differs",
        &[
            "./tiles.model.toml: differs from the plan worked out afresh",
            "aim: 1350 in the file, 1900 afresh",
            "x: 45 in the file, 42 afresh",
            "y: 0 in the file, 16 afresh",
            "y: idle in the file, in the mix afresh",
            "made afresh, not in the file: y",
            "delete ./tiles.plan.toml and the folder .millreeve, then millreeve once ./tiles.model.toml works it out again",
        ],
    );
    assert_eq!(object["differences"]["aim"], json!({ "file": 1350.0, "afresh": 1900.0 }));
    assert_eq!(object["differences"]["states"], json!([{ "name": "y", "file": "idle", "afresh": "in the mix" }]));
    assert_eq!(object["differences"]["entered"], json!(["y"]));
    works.remove("tiles.plan.toml");
    std::fs::remove_dir_all(works.path(".millreeve")).unwrap();
    assert_eq!(works.run(&["once", "."]).0, 0);
    assert_eq!(only(&works).0, 0);
}

#[test]
fn where_only_bytes_differ_the_lines_are_shown() {
    let works = Works::planned();
    forged(&works, &[("break_even  = 27\n", "break_even  = 26.5\n")]);
    let object = found(
        &works,
        "differs",
        &["./tiles.model.toml: differs in its bytes only; aim, levels and states are those worked out afresh"],
    );
    let [line] = &object["differences"]["lines"].as_array().unwrap()[1..] else { panic!("{object}") };
    assert_eq!(
        (line["file"].as_str(), line["afresh"].as_str()),
        (Some("break_even  = 26.5"), Some("break_even  = 27"))
    );
    let works = Works::planned();
    works.save("tiles.plan.toml", works.read("tiles.plan.toml").replace('\n', "\r\n"));
    mended(
        &works,
        "differs",
        &["./tiles.model.toml: differs in its line ends only; the plan is the one worked out afresh"],
    );
}

#[test]
fn a_plan_of_other_rules_or_a_newer_version_is_told_as_such() {
    let works = Works::planned();
    let rules = format!("rules    = {RULES}\n");
    forged(&works, &[(&rules, &format!("rules    = {}\n", RULES - 1))]);
    // The record, too, could be of an earlier version.
    std::fs::remove_dir_all(works.path(".millreeve")).unwrap();
    let told = format!("./tiles.model.toml: made under earlier rules; this millreeve follows rules {RULES}");
    mended(&works, "old_rules", &[&told]);
    for (what, key, known) in [("rules", "rules   ", RULES), ("format", "format  ", FORMAT)] {
        let works = Works::planned();
        forged(&works, &[(&format!("{key} = {known}\n"), &format!("{key} = 90\nnew = 1\n"))]);
        let told = format!("./tiles.model.toml: made by a newer millreeve: {what} 90, this one knows up to {known}");
        found(&works, "newer", &[&told]);
    }
}

#[test]
fn what_is_no_whole_plan_is_told_and_made_again() {
    let works = Works::planned();
    let plan = works.read("tiles.plan.toml");
    works.save("tiles.plan.toml", &plan[..plan.len() / 2]);
    mended(&works, "damaged", &[]);
    works.save("tiles.plan.toml", plan.replacen("[[", "\u{1b}[31m[[", 1));
    mended(&works, "damaged", &[]);
    works.save("tiles.plan.toml", plan.replacen("standing", "<<<<<<< ours\nstanding", 1));
    mended(
        &works,
        "unmerged",
        &["./tiles.model.toml: not merged: ./tiles.plan.toml holds the marks of a merge conflict, from line 6 on"],
    );
    works.save("tiles.plan.toml", "my plan\n");
    let told = "./tiles.model.toml: not ours: ./tiles.plan.toml was not written by millreeve and is left alone";
    found(&works, "foreign", &[told, "move it away, or rename the model"]);
}

#[test]
fn a_held_plan_is_as_it_should_be_as_long_as_there_is_none() {
    let works = Works::planned();
    let never = "[limits.never]\nterms = { x = 1 }\nat_least = 500\n";
    works.save("tiles.model.toml", format!("{TILES}{never}"));
    found(&works, "stale", &[]);
    assert_eq!(works.run(&["once", "."]).0, 1);
    let (status, text, object) = only(&works);
    assert_eq!((status, object["finding"].as_str()), (0, Some("held")), "{text}");
    assert!(text.starts_with("./tiles.model.toml: held, as it should be: these cannot all be kept: "), "{text}");
    assert!(object["held"].as_str().unwrap().contains("limit never (at least 500)"), "{object}");
    works.save("tiles.model.toml", TILES);
    let told = "./tiles.model.toml: stale: held, though there is a plan now, with an aim of 1900";
    assert_eq!(mended(&works, "stale", &[told])["aim_afresh"], 1900.0);
}

#[test]
fn a_missing_plan_is_missed_only_where_there_could_be_one() {
    let works = Works::with(&[("tiles.model.toml", TILES)]);
    mended(
        &works,
        "none",
        &[
            "./tiles.model.toml: no plan, though there could be one with an aim of 1900",
            "millreeve once ./tiles.model.toml makes it",
        ],
    );
    let works = Works::with(&[("free.model.toml", "format = 1\n[activities.x]\nprice = 1\n")]);
    let (status, text, object) = only(&works);
    assert_eq!((status, object["finding"].as_str()), (0, Some("none")));
    assert_eq!(text, "./free.model.toml: no plan, as it should be: nothing limits x\n");
}

#[test]
fn a_faulty_model_is_shown_as_check_shows_it() {
    let works = Works::planned();
    works.replace("tiles.model.toml", "kiln = 1, press", "kilm = 1, press");
    let check = works.run(&["check", "."]).1;
    let (status, text, object) = only(&works);
    assert_eq!((status, object["finding"].as_str()), (1, Some("faulty")));
    assert_eq!(text, format!("./tiles.model.toml: model faulty: 1 fault\n{check}"));
    assert_eq!(object["faults"][0]["help"], "did you mean `kiln`?");
}

#[test]
fn a_plan_without_a_model_should_be_retired() {
    let works = Works::planned();
    works.remove("tiles.model.toml");
    let told = "./tiles.model.toml: the model is gone, and ./tiles.plan.toml does not say so";
    found(&works, "orphaned", &[told, "millreeve once . marks it as retired; or delete it"]);
    let plan = works.read("tiles.plan.toml");
    works.save("tiles.plan.toml", plan.replacen("42", "43", 1));
    found(&works, "orphaned", &[told]);
    works.save("tiles.plan.toml", plan);
    assert_eq!(works.run(&["once", "."]).0, 0);
    let (status, text, _) = only(&works);
    assert_eq!((status, text.as_str()), (0, "./tiles.model.toml: retired, as it should be: the model is gone\n"));
    works.save("tiles.model.toml", TILES);
    let told = "./tiles.model.toml: stale: marked as retired, though the model is there, with an aim of 1900";
    mended(&works, "stale", &[told]);
}

#[test]
fn what_cannot_be_read_is_a_failure_and_keeps_nothing_else_from_being_verified() {
    let works = Works::planned();
    works.save("other.model.toml", TILES);
    std::os::unix::fs::symlink("nowhere", works.path("other.plan.toml")).unwrap();
    let (status, text, err) = works.run(&["verify", "."]);
    assert_eq!((status, err.as_str()), (3, ""));
    assert!(text.contains("./other.model.toml: its plan cannot be read: "), "{text}");
    assert!(text.contains("./tiles.model.toml: verified\n"), "{text}");
}

#[test]
fn findings_come_in_the_order_of_paths_whatever_the_number_of_workers() {
    let names: Vec<String> = (0..30).map(|number| format!("works/{:02}/m{number}.model.toml", number % 7)).collect();
    let works = Works::with(&[]);
    for (number, name) in names.iter().enumerate() {
        works.save(name, TILES.replace("capacity = 90", &format!("capacity = {}", 90 + number)));
    }
    assert_eq!(works.run(&["once", "."]).0, 0);
    let told: Vec<String> = ["1", "2", "8"]
        .map(|workers| {
            works.save("millreeve.toml", format!("[solve]\nworkers = {workers}\n"));
            let (status, text, _) = works.run(&["verify", "works", "--config", "millreeve.toml"]);
            assert_eq!(status, 0);
            text
        })
        .to_vec();
    assert!(told.iter().all(|text| *text == told[0]), "{told:?}");
    let mut sorted = names;
    sorted.sort();
    let expected: String = sorted.iter().map(|name| format!("{name}: verified\n")).collect();
    assert_eq!(told[0], expected);
}
