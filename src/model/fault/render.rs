//! Faults as people and programs read them: on a terminal, on one line, in a note, as JSON.

use std::fmt::{self, Display, Write as _};

use anstyle::{AnsiColor, Style};
use serde::ser::{Serialize, SerializeStruct as _, Serializer};
use unicode_width::UnicodeWidthStr as _;

use super::{Excerpt, Fault, Faults, Place};
use crate::model::escape::Plain;

/// The most that is written of a message, of a cure and of a path, in bytes.
const LONGEST_PART: usize = 600;

impl Fault {
    /// The fault for a terminal: where and what, the line, a caret and the cure. No line end at its end.
    #[must_use]
    pub fn terminal(&self, colour: bool) -> impl Display {
        Terminal { fault: self, look: if colour { COLOURED } else { PLAIN } }
    }

    /// The fault on one line: `path:line:column: message; help`.
    #[must_use]
    pub fn line(&self) -> impl Display {
        Line(self)
    }
}

impl Faults {
    /// All faults for a terminal, each followed by an empty line, and how many more there are.
    #[must_use]
    pub fn terminal(&self, colour: bool) -> impl Display {
        fmt::from_fn(move |f| {
            for fault in &self.reported {
                writeln!(f, "{}\n", fault.terminal(colour))?;
            }
            if self.more > 0 {
                writeln!(f, "{}", More(self.more))?;
            }
            Ok(())
        })
    }

    /// All faults as a Markdown code block, indented, in which nothing they hold has a meaning.
    #[must_use]
    pub fn markdown(&self) -> impl Display {
        fmt::from_fn(move |f| {
            let text = self.terminal(false).to_string();
            for line in text.trim_end().lines() {
                if line.is_empty() {
                    writeln!(f)?;
                } else {
                    writeln!(f, "    {line}")?;
                }
            }
            Ok(())
        })
    }
}

/// One line for each fault.
impl Display for Faults {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (at, fault) in self.reported.iter().enumerate() {
            write!(f, "{}{}", if at > 0 { "\n" } else { "" }, fault.line())?;
        }
        if self.more > 0 {
            write!(f, "\n{}", More(self.more))?;
        }
        Ok(())
    }
}

impl std::error::Error for Faults {}

struct More(usize);

impl Display for More {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.0 {
            1 => f.write_str("and 1 more fault"),
            more => write!(f, "and {more} more faults"),
        }
    }
}

/// How the parts of a fault look on a terminal.
#[derive(Clone, Copy)]
struct Look {
    at: Style,
    wrong: Style,
    cure: Style,
    quiet: Style,
}

const PLAIN: Look = Look { at: Style::new(), wrong: Style::new(), cure: Style::new(), quiet: Style::new() };
const COLOURED: Look = Look {
    at: Style::new().bold(),
    wrong: AnsiColor::Red.on_default().bold(),
    cure: AnsiColor::Cyan.on_default(),
    quiet: Style::new().dimmed(),
};

struct Terminal<'a> {
    fault: &'a Fault,
    look: Look,
}

impl Display for Terminal<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self { fault, look: Look { at, wrong, cure, quiet } } = self;
        write!(f, "{at}{}{at:#}: {wrong}{}{wrong:#}", At(fault), Part(&fault.message))?;
        let Some(place) = &fault.place else {
            return if fault.help.is_empty() { Ok(()) } else { write!(f, "\n  {cure}{}{cure:#}", Part(&fault.help)) };
        };
        let number = place.line.to_string();
        let (text, indent, carets) = drawn(place);
        write!(f, "\n  {quiet}{number} |{quiet:#} {text}")?;
        write!(f, "\n  {:width$} {quiet}|{quiet:#} {:indent$}", "", "", width = number.len())?;
        write!(f, "{wrong}{}{wrong:#}", "^".repeat(carets))?;
        if fault.help.is_empty() { Ok(()) } else { write!(f, " {cure}{}{cure:#}", Part(&fault.help)) }
    }
}

/// The excerpt as it is shown, how far the carets are from its start, and how many there are, in terminal columns.
fn drawn(place: &Place) -> (String, usize, usize) {
    let Excerpt { text, before, cut_left, cut_right } = &place.excerpt;
    let mut shown = String::from(if *cut_left { "…" } else { "" });
    let mut indent = 0;
    let mut end = 0;
    for (at, character) in text.chars().enumerate() {
        if at == *before {
            indent = shown.width();
        }
        match character {
            '\t' => shown.push_str("    "),
            _ => drop(write!(shown, "{}", Plain(character.encode_utf8(&mut [0; 4])))),
        }
        if at < before + place.width {
            end = shown.width();
        }
    }
    if *before >= text.chars().count() {
        indent = shown.width();
    }
    if *cut_right {
        shown.push('…');
    }
    (shown, indent, end.saturating_sub(indent).max(1))
}

/// Where a fault is: `path:line:column`.
struct At<'a>(&'a Fault);

impl Display for At<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}", Part(&self.0.path.to_string_lossy()))?;
        match &self.0.place {
            Some(place) => write!(f, ":{}:{}", place.line, place.column),
            None => Ok(()),
        }
    }
}

struct Line<'a>(&'a Fault);

impl Display for Line<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Fault { message, help, .. } = self.0;
        write!(f, "{}: {}", At(self.0), Part(message))?;
        if help.is_empty() { Ok(()) } else { write!(f, "; {}", Part(help)) }
    }
}

/// A text escaped and cut to [`LONGEST_PART`].
struct Part<'a>(&'a str);

impl Display for Part<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (text, more) = cut(self.0);
        write!(f, "{}{more}", Plain(text))
    }
}

fn cut(text: &str) -> (&str, &'static str) {
    let end = text.floor_char_boundary(LONGEST_PART);
    (&text[..end], if end < text.len() { "…" } else { "" })
}

/// For `--json`: `path`, `line`, `column`, `code`, `message`, `help`; line and column are null where the fault is the whole file.
impl Serialize for Fault {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        let bounded = |text: &str| {
            let (text, more) = cut(text);
            format!("{text}{more}")
        };
        let mut fields = serializer.serialize_struct("Fault", 6)?;
        fields.serialize_field("path", &bounded(&self.path.to_string_lossy()))?;
        fields.serialize_field("line", &self.place.as_ref().map(|place| place.line))?;
        fields.serialize_field("column", &self.place.as_ref().map(|place| place.column))?;
        fields.serialize_field("code", self.code)?;
        fields.serialize_field("message", &bounded(&self.message))?;
        fields.serialize_field("help", &bounded(&self.help))?;
        fields.end()
    }
}
