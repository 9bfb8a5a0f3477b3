//! The parts of a model as one run of bytes: what a record keeps, and what tells whether anything was edited.
//!
//! Layout: a line that says so, then for each part, in byte order of names, a line with the lengths of its name and of its text in bytes,
//! the name and the text.

use std::ffi::{OsStr, OsString};
use std::os::unix::ffi::OsStrExt;

/// Begins every bundle. A NUL byte is in no text, so no model in one file is taken for a bundle.
const MAGIC: &[u8] = b"\0millreeve parts 1\n";

/// The bytes of parts, given in byte order of their names.
pub(in crate::model::read) fn bundled<'a>(parts: impl Iterator<Item = (&'a OsStr, &'a [u8])> + Clone) -> Vec<u8> {
    let mut bytes = Vec::with_capacity(parts.clone().map(|(name, text)| name.len() + text.len() + 24).sum());
    bytes.extend_from_slice(MAGIC);
    for (name, text) in parts {
        bytes.extend_from_slice(format!("{} {}\n", name.len(), text.len()).as_bytes());
        bytes.extend_from_slice(name.as_bytes());
        bytes.extend_from_slice(text);
    }
    bytes
}

/// Whether bytes are those of parts, by how they begin.
pub(in crate::model::read) fn is_bundle(bytes: &[u8]) -> bool {
    bytes.starts_with(MAGIC)
}

/// The names and texts of parts. What is damaged ends the list; a record's hash sees to it that nothing is.
pub(in crate::model::read) fn parts(bytes: &[u8]) -> Vec<(OsString, &[u8])> {
    let mut rest = bytes.strip_prefix(MAGIC).unwrap_or_default();
    let mut parts = Vec::new();
    while let Some((name, text, left)) = first(rest) {
        parts.push((OsStr::from_bytes(name).to_owned(), text));
        rest = left;
    }
    parts
}

fn first(bytes: &[u8]) -> Option<(&[u8], &[u8], &[u8])> {
    let end = bytes.iter().position(|&byte| byte == b'\n')?;
    let (name, text) = std::str::from_utf8(&bytes[..end]).ok()?.split_once(' ')?;
    let (name, left) = bytes[end + 1..].split_at_checked(name.parse().ok()?)?;
    let (text, left) = left.split_at_checked(text.parse().ok()?)?;
    Some((name, text, left))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn parts_come_back_as_they_were() {
        let texts: [(&[u8], &[u8]); 3] = [(b"a\xff.csv", b"name\n"), (b"b\n7 3.toml", b""), (b"c.toml", b"\n1 1\n\0")];
        let bytes = bundled(texts.iter().map(|&(name, text)| (OsStr::from_bytes(name), text)));
        let back = parts(&bytes);
        assert!(is_bundle(&bytes) && !is_bundle(b"format = 1\n"));
        let back: Vec<_> = back.iter().map(|(name, text)| (name.as_bytes(), *text)).collect();
        assert_eq!(back, texts);
        assert_eq!(parts(&bytes[..bytes.len() - 1]).len(), 2);
        assert_eq!(parts(b"format = 1\n"), []);
    }
}
