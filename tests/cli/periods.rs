//! `show` and `show --why` of a plan over several periods.

use std::path::Path;

use millreeve::model::read;
use millreeve::plan::Plan;
use serde_json::Value;
use tempfile::TempDir;

use super::show::{planned, works};
use super::{millreeve, objects, run};

const EIGHT: &str = include_str!("../plan/eight_weeks.model.toml");

fn plan_of(model: &str) -> Plan {
    planned(&read::text(Path::new("m"), model.as_bytes()).unwrap().model)
}

fn shown(folder: &TempDir, columns: &str) -> String {
    let output = millreeve(folder.path()).args(["show", "tiles"]).env("COLUMNS", columns).output().unwrap();
    assert!(output.status.success() && output.stderr.is_empty(), "{output:?}");
    String::from_utf8(output.stdout).unwrap()
}

#[test]
fn periods_are_columns_where_they_fit_and_sums_where_they_do_not() {
    let folder = works(EIGHT);
    let (_, unlimited, _) = run(folder.path(), &["show", "tiles"]);
    let wide = shown(&folder, "130");
    assert_eq!(unlimited, wide);
    let narrow = shown(&folder, "100");
    assert!(!narrow.contains("2027-W01  2027-W02") && narrow.contains("--csv"), "{narrow}");
    insta::assert_snapshot!("show_eight_weeks", format!("{wide}========\n{narrow}"));
}

#[test]
fn a_spreadsheet_gets_a_row_for_each_name_and_period() {
    let folder = works(EIGHT);
    let plan = plan_of(EIGHT);
    let (status, out, _) = run(folder.path(), &["show", "tiles", "--csv"]);
    assert_eq!(status, 0);
    let mut reader = csv::Reader::from_reader(out.as_bytes());
    let heads = reader.headers().unwrap().clone();
    let column = |name: &str| heads.iter().position(|head| head == name).unwrap();
    let rows: Vec<csv::StringRecord> = reader.records().map(Result::unwrap).collect();
    // Two of the three limits are over several weeks together.
    let things = plan.activities.len() + plan.resources.len() + plan.materials.len() + 1;
    assert_eq!(rows.len(), 8 * things + 2);
    let cell = |kind: &str, name: &str, period: &str, head: &str| {
        let mut found = rows.iter().filter(|row| (&row[0], &row[1], &row[2]) == (kind, name, period));
        let row = found.next().unwrap();
        assert!(found.next().is_none());
        row[column(head)].to_owned()
    };
    assert_eq!(cell("activity", "mosaic", "2027-W08", "state"), "at its most");
    assert_eq!(cell("activity", "mosaic", "2027-W08", "level"), "300");
    assert_eq!(cell("limit", "mosaic_in_all", "", "spare"), "200");
    assert_eq!(cell("material", "slip", "2027-W08", "stock"), "10");
    assert_eq!(cell("resource", "kiln", "2027-W01", "surge"), "14");
}

#[test]
fn the_object_has_lists_and_names_their_periods() {
    let folder = works(EIGHT);
    let (_, out, _) = run(folder.path(), &["--json", "show", "tiles"]);
    let told = &objects(&out)[0];
    assert_eq!(told["periods"][7], "2027-W08");
    assert_eq!(told["activities"][1]["level"].as_array().unwrap().len(), 8);
    assert_eq!(told["activities"][1]["state"][7], "at its most");
    assert_eq!(told["activities"][2]["state"], "prospect");
    assert_eq!(told["limits"][0]["spare"], 200.0);
    assert_eq!(told["materials"][1]["stock"][7], 10.0);
    assert_eq!(told["resources"][0]["holds_between"][0].as_array().unwrap().len(), 2);
}

fn why(folder: &TempDir, name: &str) -> Vec<Value> {
    let (status, out, err) = run(folder.path(), &["--json", "show", "tiles", "--why", name]);
    assert_eq!(status, 0, "{err}");
    objects(&out)
}

fn sum(told: &Value) -> f64 {
    told["lines"].as_array().unwrap().iter().map(|line| line["amount"].as_f64().unwrap()).sum()
}

/// Minimum loads and changes that bind have no worth in the plan: their line is what is left. What that leaves to be checked is whether
/// all other lines alone come to the gain where nothing of the kind binds.
#[test]
fn the_lines_of_every_activity_in_every_period_add_up() {
    let models = [EIGHT.to_owned(), EIGHT.replace("per_day = 11", "per_day = 9"), turned_round()];
    let (mut whole, mut left) = (0, 0);
    for model in models {
        let (folder, plan) = (works(&model), plan_of(&model));
        for activity in &plan.activities {
            let told = why(&folder, activity.name.as_str());
            assert_eq!(told.len(), plan.periods.len());
            for (told, period) in told.iter().zip(plan.horizon().periods()) {
                let Some(gain) = told["gain"].as_f64() else { continue };
                assert!((sum(told) - gain).abs() <= 1e-6, "{told}");
                let loses = activity.loses.as_ref().map(|loses| loses.at(period));
                match activity.state.at(period).unwrap().words() {
                    "in the mix" => assert!(gain.abs() <= 1e-6, "{told}"),
                    "at its most" => assert!(gain >= -1e-6, "{told}"),
                    "at its least" => assert!(gain <= 1e-6, "{told}"),
                    _ => assert!((gain + loses.unwrap()).abs() <= 1e-6, "{told}"),
                }
                if let Some(loses) = loses {
                    assert!((gain + loses).abs() <= 1e-6, "{told}");
                }
                let has_left = told["lines"].as_array().unwrap().iter().any(|line| line["what"] == "change");
                if has_left { left += 1 } else { whole += 1 }
            }
        }
    }
    assert!(whole > 80 && left > 0, "{whole} whole, {left} with something left");
}

/// The same weeks as costs that are to be small, with what is firmly sold as all that must be made.
fn turned_round() -> String {
    let text = EIGHT.replace("currency = \"EUR\"", "currency = \"EUR\"\naim = \"minimise\"");
    let text = text.replace("price    = { each = 24, \"2027-W06\" = 31 }\n", "").replace("price    = 34\n", "");
    let text = text.replace("price    = 15.5\n", "at_least = { each = 200, \"2027-W05\" = 500 }\n");
    // What is left at the end is then not by chance what must be bought.
    let text = text.replace("price = 34, at_least = 5", "price = 34, at_least = 3");
    assert!(text.contains("minimise") && text.contains("each = 200") && text.contains("at_least = 3,"));
    text
}

#[test]
fn what_comes_in_and_goes_out_of_a_material_adds_up_to_what_is_left() {
    let folder = works(EIGHT);
    for material in &plan_of(EIGHT).materials {
        for told in why(&folder, &format!("materials.{}", material.name)) {
            assert!((sum(&told) - told["left"].as_f64().unwrap()).abs() <= 1e-6, "{told}");
        }
    }
}

#[test]
fn why_can_be_read_by_people() {
    let folder = works(EIGHT);
    let mut page = String::new();
    for name in [
        "mosaic",
        "kiln",
        "slip",
        "wall_share",
        "floor_tile.2027-W03",
        "wall_tile.2027-W07",
        "activities.mosaic.2027-W06",
        "kiln.2027-W04",
        "floor_stock.2027-W04",
        "slip.2027-W08",
        "limits.wall_share.2027-W08",
        "slip_early",
    ] {
        let (status, out, err) = run(folder.path(), &["show", "tiles", "--why", name]);
        assert_eq!((status, err.as_str()), (0, ""), "{name}");
        page.push_str(&format!("{out}========\n"));
    }
    insta::assert_snapshot!("why_eight_weeks", page);
}

#[test]
fn a_period_that_is_not_there_gets_the_nearest() {
    let folder = works(EIGHT);
    for (asked, told) in [
        ("kiln.2027-W9", "did you mean `2027-W0"),
        ("kiln.spring", "it plans 2027-W01 to 2027-W08"),
        ("klin.2027-W01", "the plan has no `klin.2027-W01`"),
        ("a.b.c.d", "the plan has no `a.b.c.d`"),
    ] {
        let (status, _, err) = run(folder.path(), &["show", "tiles", "--why", asked]);
        assert_eq!(status, 2, "{asked}");
        assert!(err.contains(told), "{err}");
    }
    let folder = works(super::show::SMALL);
    let (status, _, err) = run(folder.path(), &["show", "tiles", "--why", "kiln.2027-W01"]);
    assert_eq!(status, 2);
    assert!(err.contains("it plans a single period without a name"), "{err}");
}

/// A name is letters of any script, and a spreadsheet takes one that begins with a sign for a formula.
#[test]
fn periods_may_be_called_anything_a_name_can_be() {
    let model = EIGHT.replace("2027-W01", "-W01").replace("2027-W02", "неделя_2").replace("2027-W03", "週3");
    let folder = works(&model);
    let (status, out, err) = run(folder.path(), &["show", "tiles", "--csv"]);
    assert_eq!((status, err.as_str()), (0, ""));
    assert!(out.contains(",'-W01,") && out.contains(",週3,"), "{out}");
    let (status, out, _) = run(folder.path(), &["show", "tiles", "--why", "slip.週3"]);
    assert!(status == 0 && out.contains("in 週3"), "{out}");
}
