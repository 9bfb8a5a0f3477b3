//! Models that have no plan, and models of nothing.

use millreeve::plan::text;

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

/// Two resources that are nearly one: the second takes a billionth more for each board, which earns a tenth of that more. Worked out by
/// hand, with e = 1e-9: on the second resource one board less lets 1 + e tiles more be made, which earn more than the board's 1 + e/10.
#[test]
fn k4_resources_that_are_nearly_the_same() {
    let works = Works::new(&[]);
    let mut daemon = works.keep();
    works.save(
        "m",
        "format = 1\n[resources.kiln]\ncapacity = 1\n[resources.press]\ncapacity = 1\n\
         [activities.tile]\nprice = 1\nuses = { kiln = 1, press = 1 }\n\
         [activities.board]\nprice = 1.0000000001\nuses = { kiln = 1, press = 1.000000001 }\n",
    );
    let told = daemon.wait_standing("m", "current");
    assert_eq!(told["aim"], 1.0, "{told}");
    let plan = text::read(&works.plan_text("m")).unwrap().plan;
    let level =
        |name: &str| plan.activities.iter().find(|planned| planned.name.as_str() == name).unwrap().level.numbers()[0];
    assert_eq!((level("tile"), level("board")), (1.0, 0.0));
    works.check();
}

/// Numbers from 1e-6 to 1e9 in one model whose optimum can be told at sight: each thing has a resource of its own, and is made as far as
/// that reaches.
#[test]
fn k4_numbers_of_very_different_sizes() {
    let works = Works::new(&[]);
    let mut daemon = works.keep();
    let things = [("grain", 1e9, 1e-3), ("tile", 4096.0, 8.0), ("kiln", 1e-3, 1e3), ("spark", 1e3, 1e6)];
    let mut model = "format = 1\n".to_owned();
    for (name, capacity, uses) in things {
        model.push_str(&format!(
            "[resources.for_{name}]\ncapacity = {capacity}\n[activities.{name}]\nprice = {}\nuses = {{ for_{name} = {uses} }}\n",
            uses / capacity
        ));
    }
    works.save("m", &model);
    daemon.wait_standing("m", "current");
    let plan = text::read(&works.plan_text("m")).unwrap().plan;
    for (name, capacity, uses) in things {
        let level = plan.activities.iter().find(|planned| planned.name.as_str() == name).unwrap().level.numbers()[0];
        assert!((level / (capacity / uses) - 1.0).abs() < 1e-9, "{name}: {level}");
    }
    works.check();
}
