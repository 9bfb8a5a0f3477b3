//! Plans and notes of a small tileworks, as their readers see them.

#![expect(clippy::unwrap_used, clippy::panic, reason = "a test that cannot go on fails")]

mod hostile;
mod notes;
mod tileworks;
mod weeks;

use millreeve::plan::compare::{Event, compare, events};
use millreeve::plan::{Standing, text};
use tileworks::{model, name, planned};

/// By hand: f = (0.02·120 − 0.015·100) / 0.00025 = 3600 and w = (0.02·100 − 0.01·120) / 0.00025 = 3200, so the aim is
/// 14.5·3600 + 13·3200 = 93800; worths 640 and 170. A slab is charged 0.045·640 + 0.02·170 = 32.2 and costs 2.
#[test]
fn the_plan_of_the_tileworks() {
    insta::assert_snapshot!(text::write(&planned(&model())));
}

#[test]
fn a_held_plan_keeps_its_numbers() {
    let text = text::write(&planned(&model()));
    let held = text::marked(&text, &Standing::Held("line 3: no resource `kilm`".to_owned())).unwrap();
    let (old, new): (Vec<_>, Vec<_>) = (text.lines().collect(), held.lines().collect());
    let fresh: Vec<_> =
        new.iter().filter(|line| !old.contains(line)).map(|line| line.split('"').next().unwrap()).collect();
    assert_eq!(fresh, ["seal     = ", "standing = ", "held     = "]);
    assert_eq!(new.len(), old.len() + 1);
}

#[test]
fn more_kiln_moves_both_tiles_and_nothing_else() {
    let before = planned(&model());
    let mut edited = model();
    edited.resources.get_mut("kiln").unwrap().capacity = 130.0.into();
    let told = compare(&before, &planned(&edited));
    let moved: Vec<&str> = told.moved.iter().map(|told| told.name.as_str()).collect();
    assert_eq!(moved, ["floor_tile", "wall_tile"]);
    // 10 hours more at 640 each.
    let (aim, better) = told.aim.unwrap();
    assert!((better - aim - 6400.0).abs() < 1e-6);
    assert!(told.entered.is_empty() && told.left.is_empty() && told.binds.is_empty() && told.eases.is_empty());
}

#[test]
fn events_tell_what_turns() {
    let before = planned(&model());
    let mut edited = model();
    edited.activities.get_mut("terrace_slab").unwrap().price = 35.0.into();
    let after = planned(&edited);
    let told: Vec<_> =
        events(Some(&before), &after, 0.01).iter().map(|event| serde_json::to_value(event).unwrap()).collect();
    assert_eq!(told.len(), 1);
    assert_eq!((&told[0]["event"], &told[0]["name"]), (&"would_enter".into(), &"terrace_slab".into()));
    assert!((told[0]["break_even"].as_f64().unwrap() - 34.2).abs() < 1e-9);
    assert_eq!(events(Some(&after), &after, 0.01), []);

    let mut gone = after.clone();
    gone.standing = Standing::Held("why".to_owned());
    gone.activities[0].level = 0.0.into();
    gone.resources[1].spare = Some(3.0.into());
    gone.aim *= 0.5;
    let named = |events: Vec<Event>| {
        events.iter().map(|event| serde_json::to_value(event).unwrap()["event"].to_string()).collect::<Vec<_>>()
    };
    assert_eq!(named(events(Some(&after), &gone, 0.01)), ["\"held\"", "\"left\"", "\"eases\"", "\"moved\""]);
    assert_eq!(named(events(Some(&gone), &after, 0.01)), ["\"mended\"", "\"entered\"", "\"binds\"", "\"moved\""]);
    assert_eq!(named(events(None, &after, 0.01)), ["\"would_enter\""]);
    assert_eq!(compare(&after, &gone).left, [name("floor_tile")]);
}
