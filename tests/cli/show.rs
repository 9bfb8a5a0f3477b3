//! `show`: whether a plan may be worked to, and its table, CSV and JSON.

use std::fs;
use std::path::Path;
use std::time::Duration;

use millreeve::lp::build::build;
use millreeve::model::meaning::Meaning;
use millreeve::model::{Model, read};
use millreeve::plan::text;
use millreeve::plan::{Plan, Standing, make};
use millreeve::solver::message::Outcome;
use millreeve::solver::session::Session;
use millreeve::solver::stop::Stop;
use tempfile::TempDir;

use super::{folder_with, objects, run};

/// Two activities, two resources and a prospect, small enough to check by hand. The rows meet at 2x + y = 100 and
/// x + 3y = 90, so x = 42 and y = 16; their worths solve 2k + p = 30 and k + 3p = 40, so k = p = 10; the aim is
/// 30·42 + 40·16 = 10·100 + 10·90 = 1900. The prospect takes 1.5·10 + 1.2·10 = 27 and earns 25.
pub(super) const SMALL: &str = r#"
format   = 1
title    = "Two tiles"
currency = "EUR"
[resources.kiln]
unit     = "h"
capacity = 100
[resources.press]
unit     = "h"
capacity = 90
[activities.x]
label    = "=2+3"
unit     = "m2"
price    = 31
cost     = 1
uses     = { kiln = 2, press = 1 }
[activities.y]
price    = 40
uses     = { kiln = 1, press = 3 }
[activities.z]
prospect = true
price    = 25
uses     = { kiln = 1.5, press = 1.2 }
[limits.wide]
terms    = { x = 1, y = 1 }
at_most  = 1000
"#;

/// The plan of a model, solved here.
pub(super) fn planned(model: &Model) -> Plan {
    let program = build(model);
    let answer = Session::default().solve(program.clone(), Duration::from_secs(60), &Stop::default());
    let Outcome::Optimal(optimum) = answer.outcome else { panic!("{:?}", answer.outcome) };
    make(model, Meaning::of(model), &program, &optimum).unwrap()
}

/// A folder with `tiles.model.toml` and its plan.
pub(super) fn works(model: &str) -> TempDir {
    let folder = folder_with(&[("tiles.model.toml", model)]);
    let read = read::text(Path::new("tiles.model.toml"), model.as_bytes()).unwrap().model;
    fs::write(folder.path().join("tiles.plan.toml"), text::write(&planned(&read))).unwrap();
    folder
}

#[test]
fn any_file_of_a_model_leads_to_its_plan() {
    let folder = works(SMALL);
    let (_, expected, _) = run(folder.path(), &["show", "tiles"]);
    for name in ["tiles.model.toml", "tiles.plan.toml", "./tiles"] {
        let (status, out, err) = run(folder.path(), &["show", name]);
        assert_eq!((status, out.as_str(), err.as_str()), (0, expected.as_str(), ""), "{name}");
    }
    insta::assert_snapshot!("show_small", expected);
}

#[test]
fn the_object_says_what_the_plan_says() {
    let folder = works(SMALL);
    let (status, out, _) = run(folder.path(), &["--json", "show", "tiles"]);
    assert_eq!(status, 0);
    let [told] = &objects(&out)[..] else { panic!("{out}") };
    assert_eq!(told["standing"], "current");
    assert_eq!(told["aim"], 1900.0);
    assert_eq!(told["activities"][0]["level"], 42.0);
    assert_eq!(told["activities"][2]["break_even"], 27.0);
    assert_eq!(told["activities"][2]["loses"], 2.0);
    assert_eq!(told["resources"][0]["worth_of_more"], 10.0);
    // The kiln's worth holds while both levels stay positive: x = 0 at 30 h, y = 0 at 180 h.
    assert_eq!(told["resources"][0]["holds_between"], serde_json::json!([30.0, 180.0]));
    assert_eq!(told["limits"][0]["holds_between"][1], "inf");
}

#[test]
fn a_spreadsheet_gets_numbers_and_no_formulas() {
    let folder = works(SMALL);
    let (status, out, _) = run(folder.path(), &["show", "tiles", "--csv"]);
    assert_eq!(status, 0);
    assert!(out.lines().count() == 7 && out.ends_with("\r\n"), "{out}");
    let mut reader = csv::Reader::from_reader(out.as_bytes());
    let rows: Vec<csv::StringRecord> = reader.records().map(Result::unwrap).collect();
    let x = rows.iter().find(|row| &row[1] == "x").unwrap();
    assert_eq!((&x[0], &x[2], &x[3], &x[5]), ("activity", "'=2+3", "m2", "42"));
    assert!(rows.iter().all(|row| row.len() == 17));
    assert_eq!((&x[15], &x[16]), ("", ""));
}

/// By hand: 100 h make 100 m2 of either tile at 20 EUR, 80 m2 of floor tiles at most, so that of these there are 0 to 80 and of wall
/// tiles 20 to 100. A mosaic earns 9 for an hour that is worth 20.
pub(super) const TIED: &str = r#"
format   = 1
title    = "Tiles that earn alike"
currency = "EUR"
[resources.kiln]
unit     = "h"
capacity = 100
[activities.floor_tile]
unit     = "m2"
price    = 20
at_most  = 80
uses     = { kiln = 1 }
[activities.mosaic]
unit     = "m2"
price    = 9
uses     = { kiln = 1 }
[activities.wall_tile]
unit     = "m2"
price    = 20
uses     = { kiln = 1 }
"#;

#[test]
fn levels_that_may_differ_without_loss_are_told() {
    let folder = works(TIED);
    let (_, table, _) = run(folder.path(), &["show", "tiles"]);
    let (_, why, _) = run(folder.path(), &["show", "tiles", "--why", "wall_tile"]);
    insta::assert_snapshot!("show_tied", format!("{table}\n{why}"));

    let (_, out, _) = run(folder.path(), &["--json", "show", "tiles"]);
    let told = &objects(&out)[0];
    assert_eq!((&told["exact"], &told["ties"]), (&true.into(), &true.into()));
    let vary = [0, 1, 2].map(|at| told["activities"][at]["may_vary"].clone());
    assert_eq!(vary, [serde_json::json!([0.0, 80.0]), serde_json::Value::Null, serde_json::json!([20.0, 100.0])]);
    assert_eq!(told.get("may_vary_left_out"), None);

    let (_, out, _) = run(folder.path(), &["show", "tiles", "--csv"]);
    let mut reader = csv::Reader::from_reader(out.as_bytes());
    let ends = |row: csv::StringRecord| (row[15].to_owned(), row[16].to_owned());
    let rows: Vec<_> = reader.records().map(|row| ends(row.unwrap())).take(3).collect();
    assert_eq!(rows, [("0", "80"), ("", ""), ("20", "100")].map(|(from, to)| (from.to_owned(), to.to_owned())));

    let (_, out, _) = run(folder.path(), &["--json", "show", "tiles", "--why", "wall_tile"]);
    assert_eq!(objects(&out)[0]["may_vary"], serde_json::json!([20.0, 100.0]));
}

/// Something done to a folder.
type Edit = fn(&Path);

#[test]
fn a_plan_that_may_not_be_worked_to_says_why() {
    let edits: [(&str, Edit); 5] = [
        ("edited since", |folder| {
            let model = folder.join("tiles.model.toml");
            fs::write(&model, SMALL.replace("capacity = 100", "capacity = 120")).unwrap();
        }),
        ("its seal does not fit", |folder| {
            let plan = folder.join("tiles.plan.toml");
            let text = fs::read_to_string(&plan).unwrap();
            assert_eq!(text.matches("= 42\n").count(), 1);
            fs::write(&plan, text.replace("= 42\n", "= 43\n")).unwrap();
        }),
        ("has 1 fault", |folder| {
            let model = folder.join("tiles.model.toml");
            fs::write(&model, SMALL.replace("capacity = 100", "capcity = 100")).unwrap();
        }),
        ("nothing fits", |folder| {
            let plan = folder.join("tiles.plan.toml");
            let held = Standing::Held("nothing fits".to_owned());
            fs::write(&plan, text::marked(&fs::read_to_string(&plan).unwrap(), &held).unwrap()).unwrap();
        }),
        ("any more", |folder| fs::remove_file(folder.join("tiles.model.toml")).unwrap()),
    ];
    for (reason, edit) in edits {
        let folder = works(SMALL);
        edit(folder.path());
        let (status, out, err) = run(folder.path(), &["show", "tiles"]);
        assert_eq!(status, 1, "{reason}");
        assert!(err.contains(reason), "{reason}: {err}");
        assert!(!out.contains("current"), "{reason}: {out}");
        let (status, out, _) = run(folder.path(), &["--json", "show", "tiles"]);
        assert_eq!(status, 1, "{reason}");
        assert_ne!(objects(&out)[0]["standing"], "current", "{reason}");
    }
}

#[test]
fn what_is_no_plan_is_not_shown_as_one() {
    let folder = folder_with(&[("a.model.toml", super::GOOD), ("b.plan.toml", "x = 1\n")]);
    let (status, _, err) = run(folder.path(), &["show", "a"]);
    assert_eq!(status, 1);
    assert!(err.contains("no plan yet"), "{err}");
    assert_eq!(run(folder.path(), &["show", "b"]).0, 1);
    assert_eq!(run(folder.path(), &["show", "."]).0, 2);
    assert_eq!(run(folder.path(), &["show", "c"]).0, 2);
    assert_eq!(run(folder.path(), &["show", "a", "--csv", "--json"]).0, 2);
}
