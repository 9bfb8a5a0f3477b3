//! Who has how large a part in something.

use serde_json::{Value as Json, json};

use super::super::number::{range, short};
use super::super::object::number;
use super::super::table::Sheet;
use crate::model::Period;
use crate::plan::Span;

/// A part in something: so much for each unit of a level, in one period or over several.
pub(super) struct Share {
    /// The name of an activity, or an address.
    pub(super) name: String,
    /// For each unit; `None` where it differs by period.
    pub(super) rate: Option<f64>,
    /// The level; `None` where the plan does not say it.
    pub(super) level: Option<f64>,
    /// What they come to.
    pub(super) taken: f64,
}

impl Share {
    /// The part of what has these rates and levels in these periods; `None` where it has none in any.
    pub(super) fn over(
        name: String,
        periods: &[Period],
        rate: impl Fn(Period) -> f64,
        level: impl Fn(Period) -> Option<f64>,
    ) -> Option<Self> {
        let rates: Vec<f64> = periods.iter().map(|&period| rate(period)).collect();
        if rates.iter().all(|&rate| rate == 0.0) {
            return None;
        }
        let levels: Option<Vec<f64>> = periods.iter().map(|&period| level(period)).collect();
        let first = rates.first().copied().filter(|first| rates.iter().all(|rate| rate.to_bits() == first.to_bits()));
        let taken = levels.iter().flatten().zip(&rates).map(|(level, rate)| level * rate).sum();
        Some(Self { name, rate: first, level: levels.map(|levels| levels.iter().sum()), taken })
    }
}

/// Who takes how much, most first; those that would take some, if they were made, last.
pub(super) fn most_first(mut shares: Vec<Share>) -> Vec<Share> {
    shares.sort_by(|a, b| b.taken.abs().total_cmp(&a.taken.abs()).then_with(|| a.name.cmp(&b.name)));
    shares
}

/// The table of the parts; the heads name the columns of rates and of what is taken.
pub(super) fn sheet(shares: &[Share], rate: &str, taken: &str, whole: f64) -> String {
    let mut sheet = Sheet::new(&[("name", false), ("level", true), (rate, true), (taken, true), ("share", true)]);
    for share in shares {
        let part = if whole > 0.0 { format!("{:.1} %", 100.0 * share.taken / whole) } else { String::new() };
        sheet.rows.push(vec![
            share.name.clone(),
            share.level.map_or("not told".to_owned(), short),
            share.rate.map_or("differs".to_owned(), short),
            short(share.taken),
            part,
        ]);
    }
    sheet.text()
}

pub(super) fn objects(shares: &[Share]) -> Vec<Json> {
    let object = |share: &Share| json!({ "name": share.name, "rate": share.rate, "level": share.level, "takes": number(share.taken) });
    shares.iter().map(object).collect()
}

/// `of 141 to 203.5`, `from 141 on`, `up to 203.5`.
pub(super) fn span(between: Span) -> String {
    match between {
        (least, most) if least.is_finite() && most.is_finite() => format!("of {}", range(between)),
        (least, _) if least.is_finite() => format!("from {} on", short(least)),
        _ => range(between),
    }
}
