//! Edits as a failing test shows them.

use millreeve::edits::Edit;

/// The edits, one a line.
pub(crate) fn told(edits: &[Edit]) -> String {
    let lines = edits.iter().map(|e| format!("  {} {:?} -> {:?} ({:?})", e.address, e.old, e.new, e.kind));
    lines.collect::<Vec<_>>().join("\n")
}
