//! Names as they are spelt in a model.

use super::findings::{Findings, Span, shown};
use crate::model::name::Name;

/// The name that `text` spells.
pub(super) fn name(text: &str, span: &Span, findings: &mut Findings) -> Option<Name> {
    match Name::new(text) {
        Ok(name) => Some(name),
        Err(error) => {
            findings.add(span, "bad-name", format!("`{}` is not a name", shown(text)), error.to_string());
            None
        }
    }
}
