//! The tables of a plan without named periods: one row for each thing.

use super::super::Shown;
use super::super::number::{range, value};
use super::{Sheet, plain};
use crate::model::{Bound, Value};
use crate::plan::{Each, Span};

pub(super) fn sheets(shown: &Shown) -> [(&'static str, Sheet); 4] {
    let (materials, limits) = (materials(shown), limits(shown));
    [("Activities", activities(shown)), ("Resources", resources(shown)), ("Limits", limits), ("Materials", materials)]
}

fn activities(shown: &Shown) -> Sheet {
    let (range_head, even_head) =
        if shown.plan.minimise { ("cost may be", "enters below") } else { ("price may be", "enters above") };
    let mut sheet = Sheet::new(&[
        ("name", false),
        ("level", true),
        ("unit", false),
        ("state", false),
        ("level may be", false),
        (range_head, false),
        (even_head, true),
        ("loses", true),
        ("label", false),
    ]);
    for activity in &shown.plan.activities {
        let known = shown.model.as_ref().and_then(|model| model.activities.get(&activity.name));
        sheet.rows.push(vec![
            activity.name.to_string(),
            value(&activity.level),
            plain(known.and_then(|known| known.unit.as_deref())),
            activity.state.words(),
            span(activity.may_vary.as_ref()),
            span(activity.price_range.as_ref()),
            number(activity.break_even.as_ref()),
            number(activity.loses.as_ref()),
            plain(known.and_then(|known| known.label.as_deref())),
        ]);
    }
    sheet
}

fn resources(shown: &Shown) -> Sheet {
    let mut sheet = Sheet::new(&[
        ("name", false),
        ("used", true),
        ("capacity", true),
        ("extra", true),
        ("spare", true),
        ("unit", false),
        ("worth of more", true),
        ("loss of less", true),
        ("holds for capacities", false),
        ("label", false),
    ]);
    for resource in &shown.plan.resources {
        let known = shown.model.as_ref().and_then(|model| model.resources.get(&resource.name));
        sheet.rows.push(vec![
            resource.name.to_string(),
            value(&resource.used),
            known.map(|known| bound(&known.capacity)).unwrap_or_default(),
            number(resource.surge.as_ref()),
            number(resource.spare.as_ref()),
            plain(known.and_then(|known| known.unit.as_deref())),
            number(resource.worth_of_more.as_ref()),
            differing(resource.loss_of_less.as_ref(), resource.worth_of_more.as_ref()),
            span(resource.holds_between.as_ref()),
            plain(known.and_then(|known| known.label.as_deref())),
        ]);
    }
    sheet
}

fn limits(shown: &Shown) -> Sheet {
    let mut sheet = Sheet::new(&[
        ("name", false),
        ("value", true),
        ("at least", true),
        ("at most", true),
        ("spare", true),
        ("worth of more", true),
        ("loss of less", true),
        ("holds for bounds", false),
        ("label", false),
    ]);
    for limit in &shown.plan.limits {
        let known = shown.model.as_ref().and_then(|model| model.limits.get(&limit.name));
        let (least, most) = known.map(|known| bounds(&known.bound)).unwrap_or_default();
        sheet.rows.push(vec![
            limit.name.to_string(),
            limit.value.as_ref().map(value).unwrap_or_default(),
            least,
            most,
            limit.spare.as_ref().map(value).unwrap_or_default(),
            number(limit.worth_of_more.as_ref()),
            differing(limit.loss_of_less.as_ref(), limit.worth_of_more.as_ref()),
            span(limit.holds_between.as_ref()),
            plain(known.and_then(|known| known.label.as_deref())),
        ]);
    }
    sheet
}

/// At least and at most, as text.
fn bounds(of: &Bound) -> (String, String) {
    match of {
        Bound::Between(least, most) => (bound(least), bound(most)),
        Bound::Equals(both) => (bound(both), bound(both)),
    }
}

/// A bound; nothing where there is none.
fn bound(of: &Value) -> String {
    if of.numbers().iter().all(|number| number.is_infinite()) { String::new() } else { value(of) }
}

fn number(number: Option<&Value>) -> String {
    number.map(value).unwrap_or_default()
}

fn span(spans: Option<&Each<Span>>) -> String {
    spans.and_then(|spans| spans.all().first()).map(|&span| range(span)).unwrap_or_default()
}

/// The loss of less, where it is another number than the worth of more.
fn differing(loss: Option<&Value>, worth: Option<&Value>) -> String {
    if loss == worth { String::new() } else { number(loss) }
}

fn materials(shown: &Shown) -> Sheet {
    let mut sheet = Sheet::new(&[
        ("name", false),
        ("bought", true),
        ("made", true),
        ("drawn", true),
        ("sold", true),
        ("late", true),
        ("thrown away", true),
        ("left", true),
        ("unit", false),
        ("worth of more", true),
        ("loss of less", true),
        ("label", false),
    ]);
    for material in &shown.plan.materials {
        let known = shown.model.as_ref().and_then(|model| model.materials.get(&material.name));
        sheet.rows.push(vec![
            material.name.to_string(),
            number(material.purchase.as_ref()),
            value(&material.made),
            value(&material.drawn),
            number(material.sale.as_ref()),
            number(material.late.as_ref()),
            number(material.discard.as_ref()),
            number(material.stock.as_ref()),
            plain(known.and_then(|known| known.unit.as_deref())),
            number(material.worth_of_more.as_ref()),
            differing(material.loss_of_less.as_ref(), material.worth_of_more.as_ref()),
            plain(known.and_then(|known| known.label.as_deref())),
        ]);
    }
    sheet
}
