//! Where in a text the oddities of its model are.

use super::findings::{Findings, Span};
use super::toml_types::{Node, Table};
use crate::model::odd;
use crate::model::types::Model;

/// The oddities of the model that was read from a document.
pub(super) fn find(root: &Table<'_>, model: &Model) -> Findings {
    let mut warnings = Findings::default();
    for oddity in odd::find(model) {
        warnings.add(&span(root, &oddity.place), oddity.code, oddity.message, oddity.help);
    }
    warnings
}

/// Where the last of some keys stands, each in the table of the one before; the last that is there.
fn span(root: &Table<'_>, keys: &[String]) -> Span {
    let mut span = Span::default();
    let mut table = Some(root);
    for key in keys {
        let Some((found, node)) = table.and_then(|table| table.get_key_value(key.as_str())) else { break };
        span = found.span();
        table = inner(node);
    }
    span
}

fn inner<'a, 'i>(node: &'a Node<'i>) -> Option<&'a Table<'i>> {
    node.get_ref().as_table()
}
