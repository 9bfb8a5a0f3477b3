//! Over which periods a limit holds.

use std::collections::BTreeSet;

use toml::de::DeValue;

use super::fields::{Fields, Given};
use super::findings::{Among, Cure, shown};
use super::number::Role;
use super::toml_types::{Node, kind};
use crate::model::types::Over;
use crate::model::value::Period;

/// The periods under `over`. In a model of one nameless period, all of them together are each.
pub(super) fn read(fields: &mut Fields<'_, '_>) -> Over {
    let Some(node) = fields.node("over") else { return Over::Each };
    let horizon = fields.calendar().horizon();
    let over = match node.get_ref() {
        DeValue::String(text) if text == "each" => Over::Each,
        DeValue::String(text) if text == "all" => Over::All,
        DeValue::Array(list) => {
            let periods: BTreeSet<Period> = list.iter().filter_map(|item| period(fields, item)).collect();
            if list.is_empty() {
                let message = "`over` names no period".to_owned();
                fields.findings().add(
                    &node.span(),
                    "bad-over",
                    message,
                    "name some, or write over = \"each\" or \"all\"",
                );
            }
            match periods.len() == horizon.count() {
                true => Over::All,
                false => Over::Some(periods.into_iter().collect()),
            }
        }
        other => {
            let given = other.as_str().map_or_else(|| kind(node).to_owned(), |text| format!("`{}`", shown(text)));
            let message = format!("`over` is \"each\", \"all\" or a list of periods, not {given}");
            let help = match other.as_str().and_then(|text| fields.calendar().period(text)) {
                Some(period) => format!("write over = [\"{}\"]", horizon.label(period).unwrap_or_default()),
                None => "write over = \"all\", or take it out: then the limit holds in each period".to_owned(),
            };
            fields.findings().add(&node.span(), "bad-over", message, help);
            Over::Each
        }
    };
    if horizon.is_named() { over } else { Over::Each }
}

fn period(fields: &mut Fields<'_, '_>, item: &Node<'_>) -> Option<Period> {
    let Some(text) = item.get_ref().as_str() else {
        let message = format!("`over` holds names of periods, not {}", kind(item));
        fields.findings().add(&item.span(), "wrong-type", message, "put each name in double quotes");
        return None;
    };
    let calendar = fields.calendar();
    let found = calendar.period(text);
    if found.is_none() && !calendar.is_faulty() {
        let cure = match calendar.horizon().is_named() {
            true => Cure::Nearest(shown(text), Among::Periods(calendar.told())),
            false => {
                "name the periods in the model, as in periods = [\"2027-W01\", \"2027-W02\"], or take `over` out".into()
            }
        };
        fields.findings().add(&item.span(), "unknown-period", format!("no period `{}`", shown(text)), cure);
    }
    found
}

/// The bound of a limit under `key`: where the limit sums several periods, a single number.
pub(super) fn bound(fields: &mut Fields<'_, '_>, key: &str, role: Role, over: &Over) -> Option<Given> {
    let node = fields.node(key)?;
    if *over == Over::Each || !matches!(node.get_ref(), DeValue::Array(_) | DeValue::Table(_)) {
        return fields.value(key, role);
    }
    let message = format!("`{key}` must be one number, as the limit holds over several periods together");
    let help = "give the number for all of them, or write over = \"each\"";
    fields.findings().add(&node.span(), "bound-by-period", message, help);
    None
}
