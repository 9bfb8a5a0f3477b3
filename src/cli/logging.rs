//! The log: one record a line on standard error, for people or for programs, with nothing in it that could forge a line.

use std::fmt::{self, Write as _};
use std::io::{self, Write as _};

use serde_json::{Map, Value};
use tracing::field::{Field, Visit};
use tracing::level_filters::LevelFilter;
use tracing::{Event, Subscriber};
use tracing_subscriber::fmt::format::Writer;
use tracing_subscriber::fmt::time::{FormatTime, SystemTime};
use tracing_subscriber::layer::{Context, SubscriberExt as _};
use tracing_subscriber::util::SubscriberInitExt as _;
use tracing_subscriber::{Layer, Registry, reload};

use super::json;
use super::settings::LogFormat;
use crate::model::escape::{Plain, is_unsafe};

/// The longest message and the longest value of a field in a record, in bytes; what is longer is cut.
const LONGEST: usize = 1024;

/// The longest escape of one character, in bytes: two units of UTF-16.
const LONGEST_ESCAPE: usize = 12;

/// The running log.
#[derive(Debug)]
pub(crate) struct Log {
    format: LogFormat,
    level: reload::Handle<LevelFilter, Registry>,
}

/// Starts logging for the rest of the process. A second call changes nothing and gives none.
pub(crate) fn start(format: LogFormat, level: LevelFilter) -> Option<Log> {
    let (filter, level) = reload::Layer::new(level);
    let subscriber = tracing_subscriber::registry().with(Lines { format }.with_filter(filter));
    // It fails only where a log was started before, which then goes on.
    subscriber.try_init().ok().map(|()| Log { format, level })
}

impl Log {
    /// How it is written.
    pub(crate) fn format(&self) -> LogFormat {
        self.format
    }

    /// Logs from this level on. Answers whether that is a change.
    pub(crate) fn change(&self, level: LevelFilter) -> bool {
        let changed = self.level.with_current(|now| *now != level).unwrap_or(false);
        changed && self.level.reload(level).is_ok()
    }
}

struct Lines {
    format: LogFormat,
}

impl<S: Subscriber> Layer<S> for Lines {
    fn on_event(&self, event: &Event<'_>, _context: Context<'_, S>) {
        let mut record = Record::default();
        event.record(&mut record);
        let level = event.metadata().level().as_str();
        let mut line = match self.format {
            LogFormat::Text => record.text(&now(), level),
            LogFormat::Json => record.json(&now(), level),
        };
        line.push('\n');
        // One write per record, so that records of several threads do not mix. A log that nobody takes must not stop the work.
        let _ = io::stderr().lock().write_all(line.as_bytes());
    }
}

fn now() -> String {
    let mut time = String::new();
    let _ = SystemTime.format_time(&mut Writer::new(&mut time));
    time
}

/// The fields of one event.
#[derive(Default)]
struct Record {
    message: String,
    fields: Map<String, Value>,
}

impl Record {
    /// `2027-01-04T08:31:02.123456Z INFO tileworks: current, … path=works/tileworks.model.toml`.
    fn text(&self, time: &str, level: &str) -> String {
        let mut line = format!("{time} {level:<5} {}", Plain(&self.message));
        for (name, value) in &self.fields {
            let shown = match value {
                Value::String(text) if !text.contains([' ', '"', '=']) => text.clone(),
                other => other.to_string(),
            };
            let _ = write!(line, " {name}={}", Plain(&shown));
        }
        line
    }

    /// `{"fields…", "level", "message", "time"}`.
    fn json(mut self, time: &str, level: &str) -> String {
        self.fields.insert("time".to_owned(), time.into());
        self.fields.insert("level".to_owned(), level.to_lowercase().into());
        self.fields.insert("message".to_owned(), self.message.into());
        json::line(&self.fields)
    }

    fn put(&mut self, field: &Field, value: Value) {
        let value = match value {
            Value::String(text) => Value::String(cut(text)),
            other => other,
        };
        if field.name() == "message" {
            self.message = match value {
                Value::String(text) => text,
                other => other.to_string(),
            };
        } else {
            self.fields.insert(field.name().to_owned(), value);
        }
    }
}

/// A text of bounded length, also when it is shown escaped, with a mark where it was cut.
fn cut(mut text: String) -> String {
    let mut length = 0;
    let end = text.char_indices().find(|&(_, character)| {
        length += if is_unsafe(character) { LONGEST_ESCAPE } else { character.len_utf8() };
        length > LONGEST
    });
    if let Some((end, _)) = end {
        text.truncate(end);
        text.push('…');
    }
    text
}

impl Visit for Record {
    fn record_f64(&mut self, field: &Field, value: f64) {
        self.put(field, value.into());
    }

    fn record_i64(&mut self, field: &Field, value: i64) {
        self.put(field, value.into());
    }

    fn record_u64(&mut self, field: &Field, value: u64) {
        self.put(field, value.into());
    }

    fn record_bool(&mut self, field: &Field, value: bool) {
        self.put(field, value.into());
    }

    fn record_str(&mut self, field: &Field, value: &str) {
        self.put(field, value.into());
    }

    fn record_debug(&mut self, field: &Field, value: &dyn fmt::Debug) {
        self.put(field, format!("{value:?}").into());
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn hostile() -> Record {
        let mut fields = Map::new();
        fields.insert("path".to_owned(), "a\n2027 INFO forged\u{1b}[2J".into());
        fields.insert("pivots".to_owned(), 3.into());
        Record { message: "na\u{202e}me\r: current".to_owned(), fields }
    }

    #[test]
    fn a_record_is_one_line_that_cannot_be_forged() {
        let line = hostile().text("2027-01-04T08:31:02Z", "INFO");
        assert_eq!(
            line,
            "2027-01-04T08:31:02Z INFO  na\\u{202e}me\\u{d}: current path=\"a\\n2027 INFO forged\\u001b[2J\" pivots=3"
        );
    }

    #[test]
    fn a_long_message_is_cut_between_two_characters() {
        assert_eq!(cut("é".repeat(512)), "é".repeat(512));
        assert_eq!(cut(format!("x{}", "é".repeat(512))), format!("x{}…", "é".repeat(511)));
        assert_eq!(cut("\u{1b}".repeat(512)), format!("{}…", "\u{1b}".repeat(85)));
    }

    #[test]
    fn a_json_record_reads_back_as_it_was() {
        let line = hostile().json("2027-01-04T08:31:02Z", "INFO");
        assert!(line.is_ascii() && !line.contains('\n'));
        let read: Value = serde_json::from_str(&line).unwrap();
        assert_eq!(read["message"], "na\u{202e}me\r: current");
        assert_eq!(read["pivots"], 3);
        assert_eq!(read["level"], "info");
    }
}
