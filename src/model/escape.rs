//! Making text from people safe to show: nothing a name holds may steer a terminal, forge a log line or hide in a page.

use std::fmt::{self, Display, Write as _};

/// Shows a text with every control character, line break and direction mark as a visible `\u{…}` escape.
///
/// For terminals and logs, one record per line. Markdown and TOML escape further on top of it.
#[derive(Clone, Copy, Debug)]
pub struct Plain<'a>(pub &'a str);

impl Display for Plain<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mut rest = self.0;
        while let Some(at) = rest.find(is_unsafe) {
            let (clean, tail) = rest.split_at(at);
            f.write_str(clean)?;
            let mut characters = tail.chars();
            if let Some(character) = characters.next() {
                write!(f, "\\u{{{:x}}}", u32::from(character))?;
            }
            rest = characters.as_str();
        }
        f.write_str(rest)
    }
}

/// Whether a character could do more than be read: controls, line and paragraph separators, zero-width and direction marks.
#[must_use]
pub fn is_unsafe(character: char) -> bool {
    character.is_control()
        || matches!(character,
            '\u{ad}' | '\u{61c}' | '\u{180e}' | '\u{200b}'..='\u{200f}' | '\u{2028}'..='\u{202e}'
            | '\u{2060}'..='\u{206f}' | '\u{feff}' | '\u{fff9}'..='\u{fffb}' | '\u{e0000}'..='\u{e007f}')
}

/// Shows a text inside Markdown prose or a table cell: escaped as [`Plain`], with every sign Markdown or HTML gives a meaning disarmed.
#[derive(Clone, Copy, Debug)]
pub struct Markdown<'a>(pub &'a str);

impl Display for Markdown<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mut characters = self.0.chars().peekable();
        let mut before = ' ';
        while let Some(character) = characters.next() {
            // Inside a word, as in most names, an underscore means nothing.
            let inside_word = before.is_alphanumeric() && characters.peek().is_some_and(|next| next.is_alphanumeric());
            before = character;
            match character {
                '_' if inside_word => f.write_char('_')?,
                '&' => f.write_str("&amp;")?,
                '<' => f.write_str("&lt;")?,
                '>' => f.write_str("&gt;")?,
                '\\' | '`' | '*' | '_' | '[' | ']' | '|' | '!' | '#' | '~' => {
                    f.write_char('\\')?;
                    f.write_char(character)?;
                }
                _ if is_unsafe(character) => write!(f, "\\\\u{{{:x}}}", u32::from(character))?,
                _ => f.write_char(character)?,
            }
        }
        Ok(())
    }
}

/// A text as a TOML basic string, with its quotes.
#[derive(Clone, Copy, Debug)]
pub struct Toml<'a>(pub &'a str);

impl Display for Toml<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_char('"')?;
        for character in self.0.chars() {
            match character {
                '"' => f.write_str("\\\"")?,
                '\\' => f.write_str("\\\\")?,
                '\n' => f.write_str("\\n")?,
                '\t' => f.write_str("\\t")?,
                _ if is_unsafe(character) && u32::from(character) > 0xffff => {
                    write!(f, "\\U{:08X}", u32::from(character))?;
                }
                _ if is_unsafe(character) => write!(f, "\\u{:04X}", u32::from(character))?,
                _ => f.write_char(character)?,
            }
        }
        f.write_char('"')
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn nothing_that_steers_a_terminal_gets_through() {
        let hostile = "a\u{1b}]0;x\u{7}b\r\nc\u{202e}d\u{9b}e";
        let shown = Plain(hostile).to_string();
        assert_eq!(shown, "a\\u{1b}]0;x\\u{7}b\\u{d}\\u{a}c\\u{202e}d\\u{9b}e");
    }

    #[test]
    fn markdown_signs_lose_their_meaning() {
        assert_eq!(Markdown("<b>|`x`").to_string(), "&lt;b&gt;\\|\\`x\\`");
        assert_eq!(Markdown("floor_tile __bold__ _a").to_string(), "floor_tile \\_\\_bold\\_\\_ \\_a");
    }

    #[test]
    fn toml_strings_read_back_as_they_were() {
        for text in ["plain", "q\"b\\s", "line\nbreak\ttab\r", "\u{202e}\u{e0041}\u{0}\u{7f}"] {
            let document = format!("x = {}", Toml(text));
            let table: toml::Table = document.parse().unwrap();
            assert_eq!(table["x"].as_str(), Some(text));
        }
    }
}
