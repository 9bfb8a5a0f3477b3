//! Short names for the parser's types, and what its values are called in messages.

use toml::Spanned;
use toml::de::{DeString, DeTable, DeValue};

/// A key and where it stands.
pub(super) type Key<'i> = Spanned<DeString<'i>>;
/// A value and where it stands.
pub(super) type Node<'i> = Spanned<DeValue<'i>>;
/// A table.
pub(super) type Table<'i> = DeTable<'i>;

/// What a value is, with its article.
pub(super) fn kind(node: &Node<'_>) -> &'static str {
    match node.get_ref() {
        DeValue::String(_) => "a text",
        DeValue::Integer(_) | DeValue::Float(_) => "a number",
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a date",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}
