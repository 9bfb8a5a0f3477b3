//! JSON on one line, with nothing in it that could steer a terminal.

use std::fmt::Write as _;

use serde::Serialize;

use crate::model::escape::is_unsafe;

/// `value` as one line of JSON, without the line's end. What a reader could not see is written as `\u` escapes, which every
/// parser reads back as it was.
pub(crate) fn line(value: &impl Serialize) -> String {
    // Our own objects have text keys and plain values, so they cannot fail; numbers that are not finite become null.
    let text = serde_json::to_string(value).unwrap_or_else(|error| format!("{{\"error\":\"{error}\"}}"));
    if !text.chars().any(is_unsafe) {
        return text;
    }
    let mut escaped = String::with_capacity(text.len() + 16);
    for character in text.chars() {
        if is_unsafe(character) {
            for unit in character.encode_utf16(&mut [0; 2]) {
                let _ = write!(escaped, "\\u{unit:04x}");
            }
        } else {
            escaped.push(character);
        }
    }
    escaped
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_cannot_be_seen_is_escaped_and_reads_back() {
        for text in ["plain é", "\u{1b}[31m\r\n\"", "\u{202e}\u{9b}\u{e0041}"] {
            let line = line(&text);
            assert!(!line.chars().any(is_unsafe), "{line}");
            assert_eq!(serde_json::from_str::<String>(&line).unwrap(), text);
        }
    }
}
