//! Models that have no plan, and models of nothing.

use crate::support::{Works, aim, tiles};

#[test]
fn k1_rules_that_contradict_each_other() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    let plan = works.plan_text("m");
    works.save("m", &tiles(1).replace("price", "at_least = 5\nprice"));
    let held = daemon.wait_standing("m", "held");
    let reason = held["held"].as_str().unwrap();
    assert!(reason.contains("kiln") && reason.contains("tile"), "{reason}");
    assert_eq!(held["events"][0]["event"], "held", "{held}");
    assert_eq!(works.standing("m"), ("held".to_owned(), aim(1)));
    let note = works.note_text("m");
    assert!(note.contains("kiln") && note.contains("tile"), "{note}");
    works.check();
    works.save("m", &tiles(1));
    daemon.wait_current("m", aim(1));
    assert_eq!(works.plan_text("m"), plan);
    works.check();
}

#[test]
fn k2_an_aim_without_limit() {
    let (works, mut daemon) = Works::kept(&[("m", 1)]);
    works.save("m", &tiles(1).replace("uses = { kiln = 1 }", ""));
    let held = daemon.wait_standing("m", "held");
    assert!(held["held"].as_str().unwrap().contains("tile"), "{held}");
    assert_eq!(works.standing("m"), ("held".to_owned(), aim(1)));
    assert!(works.note_text("m").contains("tile"), "{}", works.note_text("m"));
    works.check();
}

// K8, an answer that is not a number, -0 or a tiny negative, needs a solver that gives one: the tests beside `plan::number` and
// `solver::proof` do. Every plan that these tests write is checked for them.

#[test]
fn k9_models_of_nothing() {
    let nothing = [
        ("empty", "format = 1\n", 0.0),
        ("no-activities", "format = 1\n[resources.kiln]\ncapacity = 5\n", 0.0),
        ("no-resources", "format = 1\n[activities.tile]\nprice = 3\nat_most = 7\n", 21.0),
        ("aim-of-nothing", "format = 1\n[resources.kiln]\ncapacity = 5\n[activities.tile]\nuses = { kiln = 1 }\n", 0.0),
        ("constant", "format = 1\nconstant = 12.5\n", 12.5),
        (
            "nothing-to-share",
            "format = 1\n[resources.kiln]\ncapacity = 0\n[activities.tile]\nprice = 1\nuses = { kiln = 1 }\n",
            0.0,
        ),
    ];
    let (works, mut daemon) = Works::kept(&[]);
    for (name, text, aim) in nothing {
        works.save(name, text);
        daemon.wait_current(name, aim);
        assert_eq!(works.standing(name), ("current".to_owned(), aim));
    }
    // From a model of something to one of nothing, and back.
    works.save("m", &tiles(3));
    daemon.wait_current("m", aim(3));
    works.save("m", "format = 1\n");
    daemon.wait_current("m", 0.0);
    works.save("m", &tiles(3));
    daemon.wait_current("m", aim(3));
    works.check();
}
