//! The plan as the text of `NAME.plan.toml`: writing it, reading it, and telling whether it is ours and unharmed.

pub(super) mod entry;
mod error;
mod mark;
pub(super) mod read;
pub(super) mod write;

pub use error::PlanError;
pub use mark::marked;
pub use read::{Head, Written, read, read_head};
pub use write::write;

use super::types::{FORMAT, RULES};

/// The first line of every plan file.
pub const HEADER: &str = "# Written by millreeve. Do not edit: the next plan replaces it.";

/// What the first line of every note begins with.
pub const NOTE_HEADER: &str = "<!-- Written by millreeve. Do not edit: the next note replaces it.";

/// Whether a file that begins with `bytes` is a plan or note of ours, and may be replaced. A plan of a newer version may not: what
/// it holds beyond what this version knows would be lost.
#[must_use]
pub fn is_ours(bytes: &[u8]) -> bool {
    let mut lines = bytes.split(|&byte| byte == b'\n').map(|line| line.strip_suffix(b"\r").unwrap_or(line));
    let line = lines.next().unwrap_or_default();
    // Two notes that git could not merge differ from their first lines on.
    let note_line = if line.starts_with(b"<<<<<<< ") { lines.next().unwrap_or_default() } else { line };
    let is_note = note_line.starts_with(NOTE_HEADER.as_bytes()) && note_line.ends_with(b"-->");
    is_note || (line == HEADER.as_bytes() && !is_newer(&String::from_utf8_lossy(bytes)))
}

/// Whether a plan that begins with `text` is of a version that this one does not know.
fn is_newer(text: &str) -> bool {
    VERSIONS.iter().any(|&(what, known)| version(text, what).is_some_and(|found| found > known))
}

/// The versions that a plan states, with the highest that is known of each.
const VERSIONS: [(&str, u32); 2] = [("format", FORMAT), ("rules", RULES)];

/// The version of `what` that a plan states.
pub(super) fn version(text: &str, what: &str) -> Option<u32> {
    head(text).find_map(|line| value_of(line, what)).and_then(|value| value.parse().ok())
}

/// Whether a plan's text says that it may be worked to, and was made under the rules of this version.
#[must_use]
pub fn is_current(text: &str) -> bool {
    head(text).find_map(|line| value_of(line, "standing")) == Some("\"current\"") && follows_rules(text)
}

/// Whether a plan's text was made under the rules of this version: under others the same model may have got other bytes.
#[must_use]
pub fn follows_rules(text: &str) -> bool {
    version(text, "rules") == Some(RULES)
}

/// The seal that a plan's text carries, whether or not it is right.
#[must_use]
pub fn seal(text: &str) -> Option<&str> {
    head(text).find_map(|line| value_of(line, "seal")).map(|value| value.trim_matches('"'))
}

/// The seal that `text` should carry: the hash of all its lines but the one that says it. Line ends do not count.
#[must_use]
pub fn seal_for(text: &str) -> String {
    let mut hasher = blake3::Hasher::new();
    let mut rest = text;
    // Only the head is gone through line by line: the seal stands there, and the rest may be long.
    while !rest.starts_with('[')
        && let Some((line, after)) = rest.split_once('\n')
    {
        rest = after;
        if value_of(line, "seal").is_some() {
            break;
        }
        hasher.update(line.trim_end_matches('\r').as_bytes());
        hasher.update(b"\n");
    }
    if rest.contains('\r') {
        hasher.update(rest.replace("\r\n", "\n").as_bytes());
    } else {
        hasher.update(rest.as_bytes());
    }
    hasher.finalize().to_hex().to_string()
}

/// The lines before the first table.
fn head(text: &str) -> impl Iterator<Item = &str> {
    text.lines().take_while(|line| !line.starts_with('['))
}

/// What stands after `key =` on a line.
fn value_of<'a>(line: &'a str, key: &str) -> Option<&'a str> {
    line.strip_prefix(key)?.trim_start().strip_prefix('=').map(str::trim)
}

#[cfg(test)]
#[path = "text/tests.rs"]
mod tests;
