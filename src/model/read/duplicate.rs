//! Keys given twice: both places.

use toml::de::{DeTable, DeValue};

use super::findings::{Findings, Span, shown};
use super::source::Source;
use super::toml_types::{Key, Table};

/// The largest text that is looked through for the first of two places.
const MOST_SEARCHED: usize = 1024 * 1024;
/// Stands for the second key while the first is looked for. No name can hold its sign.
const STAND_IN: &str = "\u{1}second";

/// Adds the fault that the key at `second` stands twice.
pub(super) fn tell(source: Source<'_>, second: &Span, findings: &mut Findings) {
    let key = source.text.get(second.clone()).unwrap_or_default();
    let key = key.trim_matches(['"', '\'']);
    let message = match first(source, second) {
        Some(first) if source.line(first) == source.line(second.start) => {
            format!("`{}` is given twice on this line", shown(key))
        }
        Some(first) => format!(
            "`{}` is given twice: on line {} and on line {}",
            shown(key),
            source.line(first),
            source.line(second.start)
        ),
        None => format!("`{}` is given twice", shown(key)),
    };
    findings.add(second, "duplicate-key", message, "keep one of the two");
}

/// Where the key was given first.
///
/// The parser tells the second place only. So the second key is renamed, the text parsed again, and the first looked up in the
/// table in which the renamed one then lies.
fn first(source: Source<'_>, second: &Span) -> Option<usize> {
    if source.text.len() > MOST_SEARCHED {
        return None;
    }
    let (line_start, line) = source.line_at(second.start);
    let ends = [line_start + line.len(), source.text.len()];
    ends.into_iter().find_map(|end| first_within(source.text.get(..end)?, second))
}

fn first_within(text: &str, second: &Span) -> Option<usize> {
    let written = text.get(second.clone())?;
    let renamed = format!("{}\"\\u0001second\"{}", &text[..second.start], &text[second.end..]);
    let (root, _) = DeTable::parse_recoverable(&renamed);
    let key = spelt(written);
    let table = table_with_stand_in(root.get_ref())?;
    table.get_key_value(key.as_str()).map(|(first, _)| first.span().start).filter(|&at| at < second.start)
}

/// The text that a key spells, without quotes and escapes.
fn spelt(written: &str) -> String {
    let document = format!("{written} = 0");
    let (root, _) = DeTable::parse_recoverable(&document);
    root.get_ref().keys().next().map(|key: &Key<'_>| key.get_ref().to_string()).unwrap_or_default()
}

fn table_with_stand_in<'a, 'i>(table: &'a Table<'i>) -> Option<&'a Table<'i>> {
    if table.contains_key(STAND_IN) {
        return Some(table);
    }
    table.values().find_map(|node| in_value(node.get_ref()))
}

fn in_value<'a, 'i>(value: &'a DeValue<'i>) -> Option<&'a Table<'i>> {
    match value {
        DeValue::Table(table) => table_with_stand_in(table),
        DeValue::Array(list) => list.iter().find_map(|node| in_value(node.get_ref())),
        _ => None,
    }
}
