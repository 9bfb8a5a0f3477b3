//! A finding as one JSON object.

use serde_json::{Map, Value as Json, json};

use super::super::exit::text;
use super::super::models;
use super::super::show::object::number;
use super::words;
use crate::keep::verify::{Finding, Pair};
use crate::model::{Name, Value};
use crate::plan::difference::Difference;
use crate::plan::number::rounded;

/// The object: `model`, `path`, `plan`, `finding` (a word), `good`, `message`, `help`, and what belongs to the finding.
pub(super) fn of(pair: &Pair, finding: &Finding) -> Json {
    let mut object = Map::new();
    let name = models::stem(&pair.model).file_name().unwrap_or_default().to_string_lossy().into_owned();
    object.insert("model".into(), json!(name));
    object.insert("path".into(), json!(text(&pair.model)));
    object.insert("plan".into(), json!(text(&pair.plan)));
    object.insert("finding".into(), json!(finding.word()));
    object.insert("good".into(), json!(finding.is_good()));
    object.insert("message".into(), json!(words::sentence(pair, finding)));
    object.insert("help".into(), json!(words::cure(pair, finding)));
    match finding {
        Finding::Verified(plan) => drop(object.insert("aim".into(), kept(plan.aim))),
        Finding::Overtaken { afresh, .. } | Finding::Missing(afresh) => {
            object.insert("aim_afresh".into(), kept(afresh.aim));
        }
        Finding::Differs(difference) | Finding::Edited(Some(difference)) => {
            object.insert("differences".into(), differences(difference));
        }
        Finding::Held { reason, .. } => drop(object.insert("held".into(), json!(reason))),
        Finding::Faulty(faults) => {
            object.insert("faults".into(), json!(faults.reported));
            object.insert("more".into(), json!(faults.more));
        }
        _ => {}
    }
    Json::Object(object)
}

fn differences(difference: &Difference) -> Json {
    let told = &difference.comparison;
    let names = |names: &[Name]| names.iter().map(|name| json!(name.as_str())).collect::<Json>();
    let moved = told.moved.iter().map(|one| {
        let side = |level: &Option<Value>| level.as_ref().map_or(Json::Null, value);
        json!({ "name": one.name.as_str(), "file": side(&one.before), "afresh": side(&one.after) })
    });
    let states = difference
        .states
        .iter()
        .map(|(name, before, after)| json!({ "name": name.as_str(), "file": before.words(), "afresh": after.words() }));
    let lines =
        difference.lines.iter().map(|pair| json!({ "line": pair.number, "file": pair.written, "afresh": pair.afresh }));
    json!({
        "aim": told.aim.map(|(before, after)| json!({ "file": kept(before), "afresh": kept(after) })),
        "moved": moved.collect::<Json>(),
        "states": states.collect::<Json>(),
        "entered": names(&told.entered),
        "left": names(&told.left),
        "lines": lines.collect::<Json>(),
        "more_lines": difference.more_lines,
    })
}

/// A number with the digits that a plan keeps, as what was worked out has more.
fn kept(full: f64) -> Json {
    number(rounded(full))
}

fn value(value: &Value) -> Json {
    match value {
        Value::Every(one) => kept(*one),
        Value::Listed(list) => list.iter().copied().map(kept).collect(),
    }
}
