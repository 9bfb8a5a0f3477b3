//! The plan as one JSON object, with the keys of the plan's file.

use serde_json::{Map, Value as Json, json};

use super::super::exit::text;
use super::{Shown, Standing};
use crate::keep::pinned::Pinned;
use crate::model::{Name, Value};
use crate::plan::number::rounded;
use crate::plan::release::since;
use crate::plan::{Each, Plan, Span, State};

/// The object. A number that has no limit is the text `"inf"` or `"-inf"`; what the plan does not say is left out.
pub(super) fn of(shown: &Shown) -> Json {
    let plan = &shown.plan;
    let mut object = Map::new();
    object.insert("model".into(), json!(shown.name));
    object.insert("path".into(), json!(text(&shown.model_path)));
    object.insert("plan".into(), json!(text(&shown.plan_path)));
    object.insert("standing".into(), json!(shown.standing.key()));
    if let Standing::Held(reason) = &shown.standing {
        object.insert("held".into(), json!(reason));
    }
    object.insert("answers".into(), json!(plan.answers.to_string()));
    object.insert("aim".into(), number(plan.aim));
    object.insert("minimise".into(), json!(plan.minimise));
    put(&mut object, "currency", plan.currency.as_ref().map(|currency| json!(currency)));
    let periods = Some(&plan.periods).filter(|periods| !periods.is_empty());
    put(&mut object, "periods", periods.map(|periods| names(periods)));
    object.insert("exact".into(), json!(plan.exact));
    object.insert("ties".into(), json!(plan.ties));
    put(
        &mut object,
        "may_vary_left_out",
        Some(plan.may_vary_left_out).filter(|&many| many > 0).map(|many| json!(many)),
    );
    object.insert("complete".into(), json!(plan.complete));
    put(&mut object, "since_release", shown.pinned.as_ref().map(|pinned| since_release(pinned, plan)));
    object.insert("activities".into(), activities(shown));
    object.insert("resources".into(), resources(shown));
    object.insert("limits".into(), limits(shown));
    put(&mut object, "materials", Some(materials(shown)).filter(|_| !plan.materials.is_empty()));
    Json::Object(object)
}

/// What has become of aim and levels since a release; where that cannot be told, `error` says why.
pub(in crate::cli) fn since_release(pinned: &Pinned, plan: &Plan) -> Json {
    let release = match pinned.release() {
        Ok(release) => release,
        Err(why) => return json!({ "error": why }),
    };
    let since = since(release, plan);
    let told = &since.comparison;
    let moved = told.moved.iter().map(|one| {
        let side = |level: &Option<Value>| level.as_ref().map_or(Json::Null, value);
        json!({ "name": one.name.as_str(), "released": side(&one.before), "now": side(&one.after) })
    });
    let mut object = json!({
        "aim": told.aim.map(|(before, after)| {
            json!({ "released": number(before), "now": number(after), "change": number(rounded(after - before)) })
        }),
        "moved": moved.collect::<Json>(),
        "entered": names(&told.entered),
        "left": names(&told.left),
        "new": since.new,
        "gone": since.gone,
    });
    if !told.overlap.is_whole()
        && let Some(object) = object.as_object_mut()
    {
        object.insert("periods".into(), names(&told.overlap.shared));
    }
    object
}

fn names(names: &[Name]) -> Json {
    names.iter().map(|name| json!(name.as_str())).collect()
}

fn activities(shown: &Shown) -> Json {
    let of = shown.plan.activities.iter().map(|activity| {
        let mut object = Map::new();
        object.insert("name".into(), json!(activity.name.as_str()));
        object.insert("level".into(), value(&activity.level));
        object.insert("state".into(), state(&activity.state));
        put(&mut object, "may_vary", activity.may_vary.as_ref().map(spans));
        put(&mut object, "price_range", activity.price_range.as_ref().map(spans));
        put(&mut object, "break_even", activity.break_even.as_ref().map(value));
        put(&mut object, "loses", activity.loses.as_ref().map(value));
        Json::Object(object)
    });
    of.collect()
}

fn resources(shown: &Shown) -> Json {
    let of = shown.plan.resources.iter().map(|resource| {
        let mut object = Map::new();
        object.insert("name".into(), json!(resource.name.as_str()));
        object.insert("used".into(), value(&resource.used));
        put(&mut object, "surge", resource.surge.as_ref().map(value));
        put(&mut object, "spare", resource.spare.as_ref().map(value));
        put(&mut object, "worth_of_more", resource.worth_of_more.as_ref().map(value));
        put(&mut object, "loss_of_less", resource.loss_of_less.as_ref().map(value));
        put(&mut object, "holds_between", resource.holds_between.as_ref().map(spans));
        Json::Object(object)
    });
    of.collect()
}

fn limits(shown: &Shown) -> Json {
    let of = shown.plan.limits.iter().map(|limit| {
        let mut object = Map::new();
        object.insert("name".into(), json!(limit.name.as_str()));
        put(&mut object, "value", limit.value.as_ref().map(value));
        put(&mut object, "spare", limit.spare.as_ref().map(value));
        put(&mut object, "worth_of_more", limit.worth_of_more.as_ref().map(value));
        put(&mut object, "loss_of_less", limit.loss_of_less.as_ref().map(value));
        put(&mut object, "holds_between", limit.holds_between.as_ref().map(spans));
        Json::Object(object)
    });
    of.collect()
}

fn materials(shown: &Shown) -> Json {
    let of = shown.plan.materials.iter().map(|material| {
        let mut object = Map::new();
        object.insert("name".into(), json!(material.name.as_str()));
        put(&mut object, "purchase", material.purchase.as_ref().map(value));
        put(&mut object, "sale", material.sale.as_ref().map(value));
        put(&mut object, "late", material.late.as_ref().map(value));
        put(&mut object, "stock", material.stock.as_ref().map(value));
        put(&mut object, "discard", material.discard.as_ref().map(value));
        object.insert("made".into(), value(&material.made));
        object.insert("drawn".into(), value(&material.drawn));
        put(&mut object, "worth_of_more", material.worth_of_more.as_ref().map(value));
        put(&mut object, "loss_of_less", material.loss_of_less.as_ref().map(value));
        Json::Object(object)
    });
    of.collect()
}

fn put(object: &mut Map<String, Json>, key: &str, value: Option<Json>) {
    if let Some(value) = value {
        object.insert(key.into(), value);
    }
}

/// JSON has no word for "no limit", so a text stands for it.
pub(in crate::cli) fn number(number: f64) -> Json {
    if number.is_finite() { json!(number) } else { json!(if number > 0.0 { "inf" } else { "-inf" }) }
}

fn value(value: &Value) -> Json {
    match value {
        Value::Every(one) => number(*one),
        Value::Listed(list) => list.iter().copied().map(number).collect(),
    }
}

fn state(state: &Each<State>) -> Json {
    match state {
        Each::One(state) => json!(state.words()),
        Each::Listed(states) => states.iter().map(|state| json!(state.words())).collect(),
    }
}

fn spans(spans: &Each<Span>) -> Json {
    match spans {
        Each::One(span) => range(*span),
        Each::Listed(list) => list.iter().copied().map(range).collect(),
    }
}

pub(in crate::cli) fn range((least, most): (f64, f64)) -> Json {
    Json::Array(vec![number(least), number(most)])
}
