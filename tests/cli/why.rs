//! `show --why`: sums that add up.

use std::fs;
use std::path::Path;

use millreeve::model::read;
use serde_json::Value;

use super::show::{SMALL, planned, works};
use super::{objects, run};

const TILEWORKS: &str = include_str!("../../examples/tileworks/fortnight.model.toml");
const BODY: &str = include_str!("../../examples/tileworks/clay/body_mix.model.toml");

fn why(folder: &Path, name: &str) -> Value {
    let (status, out, err) = run(folder, &["--json", "show", "tiles", "--why", name]);
    assert_eq!(status, 0, "{err}");
    objects(&out).remove(0)
}

fn added_up(told: &Value) -> f64 {
    told["lines"].as_array().unwrap().iter().map(|line| line["amount"].as_f64().unwrap()).sum()
}

#[test]
fn the_lines_of_every_activity_add_up_to_what_its_state_says() {
    for model in [SMALL, TILEWORKS, BODY] {
        let folder = works(model);
        let plan = planned(&read::text(Path::new("m"), model.as_bytes()).unwrap().model);
        for activity in &plan.activities {
            let told = why(folder.path(), activity.name.as_str());
            let gain = told["gain"].as_f64().unwrap();
            assert!((added_up(&told) - gain).abs() <= 1e-6, "{told}");
            match activity.state.words().as_str() {
                "in the mix" => assert!(gain.abs() <= 1e-6, "{told}"),
                "at its most" => assert!(gain >= -1e-6, "{told}"),
                "at its least" => assert!(gain <= 1e-6, "{told}"),
                _ => assert!((gain + activity.loses.as_ref().unwrap().numbers()[0]).abs() <= 1e-6, "{told}"),
            }
        }
    }
}

#[test]
fn a_binding_minimum_load_is_told_as_what_is_left() {
    // The kiln must run 100 h though nothing pays: of two losing activities the one that loses less per hour fills it.
    let model = "format = 1\n[resources.kiln]\ncapacity = 200\nat_least = 100\n\
        [activities.a]\nprice = 1\ncost = 3\nuses = { kiln = 1 }\n[activities.b]\nprice = 1\ncost = 9\nuses = { kiln = 2 }\n";
    let folder = works(model);
    // a loses 2 an hour, b 4 an hour: by the load's worth of 2, b's 8 less 4 leave a loss of 4.
    let told = why(folder.path(), "b");
    assert_eq!(told["gain"], -4.0);
    assert_eq!(told["lines"][3]["what"], "minimum load");
    assert_eq!(told["lines"][3]["amount"], 4.0);
    assert!((why(folder.path(), "a")["gain"].as_f64().unwrap()).abs() < 1e-9);
}

#[test]
fn a_sum_can_be_read_by_people() {
    let folder = works(TILEWORKS);
    let mut page = String::new();
    for name in ["terrace_slab", "floor_tile", "mosaic", "kiln", "dryer", "limits.glazed_share", "paving_contract"] {
        let (status, out, err) = run(folder.path(), &["show", "tiles", "--why", name]);
        assert_eq!((status, err.as_str()), (0, ""), "{name}");
        page.push_str(&out);
        page.push_str("========\n");
    }
    insta::assert_snapshot!("why_tileworks", page);
    let folder = works(BODY);
    let (_, sand, _) = run(folder.path(), &["show", "tiles", "--why", "quartz_sand"]);
    let (_, shown, _) = run(folder.path(), &["show", "tiles"]);
    insta::assert_snapshot!("why_body", format!("{shown}========\n{sand}"));
}

#[test]
fn a_name_that_is_not_there_gets_the_nearest() {
    let folder = works(SMALL);
    let (status, _, err) = run(folder.path(), &["show", "tiles", "--why", "kilm"]);
    assert_eq!(status, 2);
    assert!(err.contains("did you mean `kiln`?"), "{err}");
}

#[test]
fn no_sum_is_made_of_a_plan_and_another_model() {
    let folder = works(SMALL);
    fs::write(folder.path().join("tiles.model.toml"), SMALL.replace("price    = 25", "price    = 26")).unwrap();
    let (status, out, err) = run(folder.path(), &["show", "tiles", "--why", "z"]);
    assert_eq!((status, out.as_str()), (1, ""));
    assert!(err.contains("edited since"), "{err}");
}
