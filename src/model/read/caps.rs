//! How large a model may be. Each cap is far above what planning is meant for, and keeps a hostile file from taking the machine.

use super::findings::{Findings, Span};
use super::known::Tags;
use super::toml_types::Table;
use crate::model::types::{Model, Term};

/// The largest file, in bytes.
pub const MOST_BYTES: usize = 16 * 1024 * 1024;
/// The most parts of a model.
pub const MOST_PARTS: usize = 1000;
/// The most lines in a file.
pub const MOST_LINES: usize = 500_000;
/// The most words and signs in a file: what the parser takes memory for, some 100 bytes each.
pub const MOST_TOKENS: usize = 6_000_000;
/// The most activities in a model.
pub const MOST_ACTIVITIES: usize = 25_000;
/// The most resources in a model.
pub const MOST_RESOURCES: usize = 25_000;
/// The most limits in a model.
pub const MOST_LIMITS: usize = 25_000;
/// The most coefficients in a model, every tag counted as the activities that carry it.
pub const MOST_COEFFICIENTS: usize = 2_000_000;

/// Adds a fault for each cap that the model exceeds.
pub(super) fn check(root: &Table<'_>, model: &Model, tags: &Tags, findings: &mut Findings) {
    let counts = [
        ("resources", model.resources.len(), MOST_RESOURCES),
        ("activities", model.activities.len(), MOST_ACTIVITIES),
        ("limits", model.limits.len(), MOST_LIMITS),
    ];
    for (section, count, most) in counts {
        if count > most {
            let message = format!("{count} {section} are more than the {most} that one model may have");
            findings.add(&span(root, section), "too-many", message, "split the model");
        }
    }
    let count = coefficients(model, tags);
    if count > MOST_COEFFICIENTS {
        let message = format!("{count} coefficients are more than the {MOST_COEFFICIENTS} that one model may have");
        findings.add(&span(root, "limits"), "too-many", message, "split the model, or sum fewer tags");
    }
}

fn span(root: &Table<'_>, section: &str) -> Span {
    root.get_key_value(section).map(|(key, _)| key.span()).unwrap_or_default()
}

/// The coefficients of a model, where so many activities carry each tag.
pub(super) fn coefficients(model: &Model, tags: &Tags) -> usize {
    let wide = |term: &Term| match term {
        Term::Activity(_) | Term::Material(..) | Term::Surge(..) => 1,
        Term::Tag(tag) => tags.get(tag).copied().unwrap_or(0),
        Term::All => model.activities.len(),
    };
    let used: usize = model.activities.values().map(|activity| activity.uses.len()).sum();
    let sums = model.limits.values().flat_map(|limit| std::iter::once(&limit.terms).chain(limit.per.as_ref()));
    used + sums.flat_map(|sum| sum.keys().map(wide)).sum::<usize>()
}
