//! Giving a written plan another standing without touching its numbers.

use super::error::PlanError;
use super::write::{seal_line, standing};
use super::{HEADER, head, seal, seal_for, value_of};
use crate::plan::types::Standing;

/// The plan that `text` says, standing otherwise: only the lines that say its standing and its seal differ.
///
/// Marking it back gives the first text again, byte for byte.
///
/// # Errors
/// Refuses a text that is not ours or has been edited, as a fresh seal would vouch for what nobody has proven.
pub fn marked(text: &str, to: &Standing) -> Result<String, PlanError> {
    if text.lines().next() != Some(HEADER) {
        return Err(PlanError::NotOurs);
    }
    if seal(text) != Some(seal_for(text).as_str()) {
        return Err(PlanError::Edited);
    }
    let text = if text.contains('\r') { text.replace("\r\n", "\n") } else { text.to_owned() };
    let mut out = String::with_capacity(text.len() + 256);
    let mut length = 0;
    let mut sealed_from = 0;
    for line in head(&text) {
        length += line.len() + 1;
        if value_of(line, "standing").is_some() {
            standing(&mut out, to);
        } else if value_of(line, "seal").is_some() {
            sealed_from = out.len();
        } else if value_of(line, "held").is_none() {
            out.push_str(line);
            out.push('\n');
        }
    }
    out.push_str(text.get(length..).unwrap_or_default());
    let seal = seal_line(&seal_for(&out));
    out.insert_str(sealed_from, &seal);
    Ok(out)
}
