//! The release through the real program: what is pinned, what is refused, and what notes and `show` then say.

#![expect(clippy::disallowed_methods, reason = "tests lay out files as other programs would")]
#![expect(clippy::unwrap_used, reason = "helpers of tests fail the test")]

#[path = "verify/support.rs"]
mod support;

use std::fs;

use millreeve::plan::{release, text};
use serde_json::{Value, json};
use support::{TILES, Works, contents};

/// What the note says of the release, without the mark.
fn part(works: &Works) -> String {
    let note = works.read("tiles.note.md");
    let Some((_, after)) = note.split_once("\n## Since the release\n") else { return String::new() };
    let (part, _) = after.split_once("\nA plan is advice").unwrap();
    part.lines().filter(|line| !line.starts_with("<!--") && !line.is_empty()).collect::<Vec<_>>().join("\n")
}

fn released() -> Works {
    let works = Works::planned();
    let told = "tiles.release.toml: released; earns 1900 EUR\n";
    assert_eq!(works.run(&["release", "tiles"]), (0, told.to_owned(), String::new()));
    works
}

fn since(works: &Works) -> Value {
    let (_, out, _) = works.run(&["--json", "show", "tiles"]);
    serde_json::from_str::<Value>(&out).unwrap()["since_release"].clone()
}

#[test]
fn a_release_pins_levels_aim_and_which_plan_that_was() {
    let works = released();
    // Which plan that was is held against the plan below.
    let written = works.read("tiles.release.toml");
    let masked = written.lines().map(|line| match line.split_once(" = ") {
        Some((key @ ("pins    " | "seal    "), _)) => format!("{key} = …\n"),
        _ => format!("{line}\n"),
    });
    insta::assert_snapshot!(masked.collect::<String>());
    let pinned = release::read(&works.read("tiles.release.toml")).unwrap();
    let plan = text::read(&works.read("tiles.plan.toml")).unwrap();
    assert_eq!((pinned.pins, pinned.plan.answers), (plan.seal, plan.plan.answers));
    // Again changes nothing, not even the file's times; under any of the model's names.
    let before = contents(works.root());
    for name in ["tiles", "tiles.model.toml", "tiles.plan.toml", "./tiles"] {
        let (status, out, _) = works.run(&["release", name]);
        assert!(status == 0 && out.ends_with("tiles.release.toml: this plan is released already\n"), "{out}");
    }
    assert!(contents(works.root()) == before);
    let (status, out, _) = works.run(&["--json", "release", "tiles"]);
    let told: Value = serde_json::from_str(&out).unwrap();
    assert_eq!((status, &told["written"], &told["aim"]), (0, &json!("same"), &json!(1900.0)));
}

#[test]
fn what_is_not_current_and_whole_is_not_released() {
    let refused = |spoil: fn(&Works), told: &str, cure: &str| {
        let works = Works::planned();
        spoil(&works);
        let (status, out, err) = works.run(&["release", "tiles"]);
        assert_eq!((status, out.as_str()), (1, ""), "{err}");
        assert!(err.contains(told) && err.contains(cure), "{told}: {err}");
        assert!(!works.path("tiles.release.toml").exists(), "{told}");
    };
    refused(|works| works.remove("tiles.plan.toml"), "has no plan yet", "millreeve once tiles.model.toml");
    refused(
        |works| works.replace("tiles.model.toml", "capacity = 90", "capacity = 91"),
        "nothing is released: the model has been edited since this plan was worked out",
        "millreeve once tiles.model.toml",
    );
    refused(
        |works| works.replace("tiles.plan.toml", "level       = 42\n", "level       = 43\n"),
        "nothing is released: tiles.plan.toml has been edited by hand",
        "millreeve once tiles.model.toml",
    );
    refused(
        |works| {
            works.save("tiles.model.toml", format!("{TILES}[limits.never]\nterms = {{ x = 1 }}\nat_least = 500\n"));
            assert_eq!(works.run(&["once", "."]).0, 1);
        },
        "nothing is released: this is the last good plan; the model as it stands cannot be planned",
        "tiles.note.md says more",
    );
    refused(
        |works| works.replace("tiles.model.toml", "kiln = 1, press", "kilm = 1, press"),
        "the model as it stands has 1 fault",
        "millreeve check tiles.model.toml",
    );
    refused(|works| works.remove("tiles.model.toml"), "there is no tiles.model.toml any more", "");
}

#[test]
fn somebody_elses_file_and_a_newer_release_are_left_alone() {
    let newer = |works: &Works| works.read("tiles.release.toml").replace("format   = 1", "format   = 2");
    for spoil in [|_: &Works| "what the floor works to\n".to_owned(), newer] {
        let works = released();
        let there = spoil(&works);
        works.save("tiles.release.toml", &there);
        let (status, _, err) = works.run(&["release", "tiles"]);
        assert_eq!(status, 2);
        assert!(err.contains("it is left alone"), "{err}");
        assert_eq!(works.read("tiles.release.toml"), there);
    }
    // One of ours is replaced even if it was edited.
    let works = released();
    works.replace("tiles.release.toml", "level = 42\n", "level = 43\n");
    assert_eq!(works.run(&["release", "tiles"]).0, 0);
    assert!(release::read(&works.read("tiles.release.toml")).is_ok());
}

#[test]
fn every_note_says_what_has_moved_since() {
    let works = Works::planned();
    assert_eq!((part(&works).as_str(), since(&works)), ("", Value::Null));
    assert_eq!(works.run(&["release", "tiles"]).0, 0);
    works.replace("tiles.model.toml", "capacity = 90", "capacity = 100");
    assert_eq!(works.run(&["once", "."]).0, 0);
    // Ten press hours more at 10 each: x = 40, y = 20.
    let moved = "+100 EUR, two moves.\n\
                 | activity | released | now | change |\n\
                 | --- | ---: | ---: | ---: |\n\
                 | y | 16 | 20 | +4 |\n\
                 | x (Tile X) | 42 | 40 | -2 m2 |";
    assert_eq!(part(&works), moved);
    let shown = works.run(&["show", "tiles"]).1;
    assert!(shown.contains("\nSince the release: +100 EUR; x 42 → 40, y 16 → 20.\n"), "{shown}");
    let told = since(&works);
    assert_eq!(told["aim"], json!({ "released": 1900.0, "now": 2000.0, "change": 100.0 }));
    assert_eq!(told["moved"][0], json!({ "name": "x", "released": 42.0, "now": 40.0 }));
    // A note about wording, and one about a fault, say it too.
    works.replace("tiles.model.toml", "Two tiles", "Two tiles again");
    works.run(&["once", "."]);
    assert_eq!(part(&works), moved);
    works.replace("tiles.model.toml", "kiln = 1, press", "kilm = 1, press");
    works.run(&["once", "."]);
    assert!(part(&works).starts_with("+100 EUR, two moves.\n"), "{}", part(&works));
    works.replace("tiles.model.toml", "kilm = 1, press", "kiln = 1, press");
    works.run(&["once", "."]);
    let (status, out, _) = works.run(&["release", "tiles"]);
    assert_eq!(status, 0);
    assert_eq!(out, "tiles.release.toml: released; since the last release: +100 EUR; x 42 → 40, y 16 → 20\n");
}

#[test]
fn a_change_of_the_release_alone_refreshes_the_note_and_nothing_else() {
    let works = Works::planned();
    works.replace("tiles.model.toml", "capacity = 90", "capacity = 100");
    works.run(&["once", "."]);
    let (plan, plain) = (works.read("tiles.plan.toml"), works.read("tiles.note.md"));
    let refreshed = |expected: &str| {
        let (status, out, _) = works.run(&["once", "."]);
        assert_eq!((status, out.as_str()), (0, "tiles: as before; aim 2000\n"));
        assert_eq!(part(&works), expected);
        assert_eq!(works.read("tiles.plan.toml"), plan);
        assert_eq!(works.run(&["once", "."]).1, "tiles: unchanged\n");
    };
    works.run(&["release", "tiles"]);
    refreshed("As released: nothing moves.");
    let release = works.read("tiles.release.toml");
    works.save("tiles.release.toml", release.replace("= 40\n", "= 41\n"));
    refreshed("Nothing is compared with it: its file has been edited by hand: its seal does not fit.");
    works.save("tiles.release.toml", release.replace("format   = 1", "format   = 7"));
    refreshed(
        "Nothing is compared with it: its file was written by a newer millreeve: format 7, this one knows up to 1.",
    );
    works.save("tiles.release.toml", "{\u{1b}[31m");
    refreshed("Nothing is compared with it: its file was not written by millreeve.");
    let shown = works.run(&["show", "tiles"]).1;
    assert!(
        shown.contains("\nNothing is compared with the release: its file was not written by millreeve.\n"),
        "{shown}"
    );
    assert_eq!(since(&works), json!({ "error": "its file was not written by millreeve" }));
    works.remove("tiles.release.toml");
    fs::create_dir(works.path("tiles.release.toml")).unwrap();
    let (status, _, _) = works.run(&["once", "."]);
    assert_eq!(status, 0);
    assert!(part(&works).starts_with("Nothing is compared with it: its file cannot be read: "), "{}", part(&works));
    fs::remove_dir(works.path("tiles.release.toml")).unwrap();
    refreshed("");
    assert_eq!(works.read("tiles.note.md"), plain);
    // The same where the daemon's state was lost.
    works.save("tiles.release.toml", &release);
    fs::remove_dir_all(works.path(".millreeve")).unwrap();
    works.run(&["once", "."]);
    assert_eq!(part(&works), "As released: nothing moves.");
}

#[test]
fn a_release_of_a_model_with_other_activities_is_compared_by_name() {
    let works = released();
    let model = works.read("tiles.model.toml").replace("activities.y", "activities.w").replace("EUR", "CHF");
    works.save("tiles.model.toml", model);
    works.run(&["once", "."]);
    let told = part(&works);
    assert!(told.starts_with("The aim cannot be compared, as it or its currency was changed; two moves.\n"), "{told}");
    assert!(told.contains("| w | none | 16 | +16 |") && told.contains("| y | 16 | none | -16 |"), "{told}");
    assert!(
        told.ends_with("The release is of a model with other activities: 1 activity is new since, 1 activity is gone."),
        "{told}"
    );
    assert_eq!((&since(&works)["new"], &since(&works)["aim"]), (&json!(1), &Value::Null));
}

#[test]
fn where_costs_are_to_be_small_more_is_said_to_cost_more() {
    let model = "format = 1\naim = \"minimise\"\ncurrency = \"EUR\"\n[activities.x]\ncost = 3\nat_least = 10\n";
    let works = Works::with(&[("tiles.model.toml", model)]);
    works.run(&["once", "."]);
    assert_eq!(works.run(&["release", "tiles"]).1, "tiles.release.toml: released; costs 30 EUR\n");
    works.replace("tiles.model.toml", "at_least = 10", "at_least = 12");
    works.run(&["once", "."]);
    assert!(part(&works).starts_with("Costs 6 EUR more, one move.\n"), "{}", part(&works));
    let shown = works.run(&["show", "tiles"]).1;
    assert!(shown.contains("\nSince the release: costs +6 EUR; x 10 → 12.\n"), "{shown}");
}

#[test]
fn the_release_moves_no_byte_of_the_plan() {
    let works = released();
    works.replace("tiles.model.toml", "capacity = 90", "capacity = 100");
    works.run(&["once", "."]);
    let with = works.read("tiles.plan.toml");
    let without = Works::with(&[("tiles.model.toml", &works.read("tiles.model.toml"))]);
    without.run(&["once", "."]);
    assert_eq!(without.read("tiles.plan.toml"), with);
    assert_eq!(works.verify().0, 0);
}
