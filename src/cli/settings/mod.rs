//! The settings: their keys, their defaults, and how one is set.

mod load;
mod units;

use std::num::NonZeroUsize;
use std::path::PathBuf;
use std::time::Duration;

use globset::Glob;
use tracing::level_filters::LevelFilter;

pub(crate) use load::{Wrong, load, load_for_folder};
use units::{duration, size};

/// All settings, with their defaults where nothing else is said. `config/millreeve.toml` says what each means.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Settings {
    /// How edits are noticed.
    pub(crate) by: WatchBy,
    /// The least time between two scans of the folder.
    pub(crate) scan_every: Duration,
    /// Globs of what is not looked at, relative to the folder.
    pub(crate) ignore: Vec<Glob>,
    /// How many models are solved at a time; `None`: one per processor.
    pub(crate) workers: Option<NonZeroUsize>,
    /// How long one solve may take.
    pub(crate) time_limit: Duration,
    /// How many bytes the live models may take together.
    pub(crate) memory_limit: u64,
    /// Where the daemon's own state lies, relative to the kept folder.
    pub(crate) state_dir: PathBuf,
    /// How the log is written.
    pub(crate) log_format: LogFormat,
    /// What is logged.
    pub(crate) log_level: LevelFilter,
}

/// How edits are noticed.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum WatchBy {
    /// By events of the file system, with a scan now and then.
    Events,
    /// By scanning alone.
    Poll,
}

/// How the log is written.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum LogFormat {
    /// One line per record, for people.
    Text,
    /// One JSON object per record.
    Json,
}

impl Default for Settings {
    fn default() -> Self {
        Self {
            by: WatchBy::Events,
            scan_every: Duration::from_secs(2),
            ignore: Vec::new(),
            workers: None,
            time_limit: Duration::from_secs(60),
            memory_limit: 1 << 30,
            state_dir: PathBuf::from(".millreeve"),
            log_format: LogFormat::Text,
            log_level: LevelFilter::INFO,
        }
    }
}

/// One key of the settings.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Key {
    WatchBy,
    WatchScanEvery,
    WatchIgnore,
    SolveWorkers,
    SolveTimeLimit,
    SolveMemoryLimit,
    StateDir,
    LogFormat,
    LogLevel,
}

impl Key {
    const ALL: [Self; 9] = [
        Self::WatchBy,
        Self::WatchScanEvery,
        Self::WatchIgnore,
        Self::SolveWorkers,
        Self::SolveTimeLimit,
        Self::SolveMemoryLimit,
        Self::StateDir,
        Self::LogFormat,
        Self::LogLevel,
    ];

    /// The group and the key within it.
    fn parts(self) -> (&'static str, &'static str) {
        match self {
            Self::WatchBy => ("watch", "by"),
            Self::WatchScanEvery => ("watch", "scan_every"),
            Self::WatchIgnore => ("watch", "ignore"),
            Self::SolveWorkers => ("solve", "workers"),
            Self::SolveTimeLimit => ("solve", "time_limit"),
            Self::SolveMemoryLimit => ("solve", "memory_limit"),
            Self::StateDir => ("state", "dir"),
            Self::LogFormat => ("log", "format"),
            Self::LogLevel => ("log", "level"),
        }
    }

    /// `watch.scan_every`.
    fn address(self) -> String {
        let (group, key) = self.parts();
        format!("{group}.{key}")
    }

    /// `MILLREEVE_WATCH_SCAN_EVERY`.
    fn variable(self) -> String {
        let (group, key) = self.parts();
        format!("{PREFIX}{group}_{key}").to_uppercase()
    }
}

/// What the environment variables that hold settings begin with.
const PREFIX: &str = "MILLREEVE_";

/// A value as it stands in a file or in the environment.
#[derive(Clone, Debug, PartialEq)]
enum Given {
    Text(String),
    Number(u64),
    Texts(Vec<String>),
    /// Something no key takes, with the word for it.
    Other(&'static str),
}

impl Given {
    fn text(&self) -> Option<&str> {
        match self {
            Self::Text(text) => Some(text),
            _ => None,
        }
    }

    fn word(&self) -> &'static str {
        match self {
            Self::Text(_) => "a text",
            Self::Number(_) => "a number",
            Self::Texts(_) => "a list",
            Self::Other(word) => word,
        }
    }
}

impl Settings {
    /// Sets one key. On failure says what the key takes instead.
    fn set(&mut self, key: Key, given: &Given) -> Result<(), String> {
        match key {
            Key::WatchBy => self.by = choice(given, &[("events", WatchBy::Events), ("poll", WatchBy::Poll)])?,
            Key::WatchScanEvery => self.scan_every = duration(given)?,
            Key::WatchIgnore => self.ignore = globs(given)?,
            Key::SolveWorkers => self.workers = workers(given)?,
            Key::SolveTimeLimit => self.time_limit = duration(given)?,
            Key::SolveMemoryLimit => self.memory_limit = size(given)?,
            Key::StateDir => self.state_dir = folder(given)?,
            Key::LogFormat => {
                self.log_format = choice(given, &[("text", LogFormat::Text), ("json", LogFormat::Json)])?;
            }
            Key::LogLevel => self.log_level = choice(given, &LEVELS)?,
        }
        Ok(())
    }

    /// The level that is logged at when `-v` is given so many times, for a command that by itself logs from `least` on.
    pub(crate) fn level(&self, least: LevelFilter, verbose: u8) -> LevelFilter {
        match verbose {
            0 => self.log_level.min(least),
            1 => self.log_level.max(LevelFilter::DEBUG),
            _ => LevelFilter::TRACE,
        }
    }
}

const LEVELS: [(&str, LevelFilter); 5] = [
    ("error", LevelFilter::ERROR),
    ("warn", LevelFilter::WARN),
    ("info", LevelFilter::INFO),
    ("debug", LevelFilter::DEBUG),
    ("trace", LevelFilter::TRACE),
];

fn choice<T: Copy>(given: &Given, choices: &[(&str, T)]) -> Result<T, String> {
    let words = || choices.iter().map(|(word, _)| format!("\"{word}\"")).collect::<Vec<_>>().join(" or ");
    let found = given.text().and_then(|text| choices.iter().find(|(word, _)| *word == text));
    found.map(|&(_, value)| value).ok_or_else(|| format!("it is one of {}", words()))
}

fn workers(given: &Given) -> Result<Option<NonZeroUsize>, String> {
    let number = match given {
        Given::Number(number) => usize::try_from(*number).ok(),
        Given::Text(text) => text.parse().ok(),
        _ => None,
    };
    let number =
        number.filter(|&number| number <= 1024).ok_or("it is a whole number up to 1024; 0 is one per processor")?;
    Ok(NonZeroUsize::new(number))
}

fn folder(given: &Given) -> Result<PathBuf, String> {
    match given.text() {
        Some(text) if !text.is_empty() => Ok(PathBuf::from(text)),
        _ => Err("it is the path of a folder, as a text".to_owned()),
    }
}

fn globs(given: &Given) -> Result<Vec<Glob>, String> {
    let texts = match given {
        Given::Texts(texts) => texts.as_slice(),
        Given::Text(text) => std::slice::from_ref(text),
        _ => return Err("it is a list of globs, such as [\"old/**\"]".to_owned()),
    };
    texts.iter().map(|text| Glob::new(text).map_err(|error| format!("{:?}: {}", error.glob(), error.kind()))).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn more_v_logs_more_and_quiet_commands_stay_quiet() {
        let settings = Settings::default();
        assert_eq!(settings.level(LevelFilter::TRACE, 0), LevelFilter::INFO);
        assert_eq!(settings.level(LevelFilter::WARN, 0), LevelFilter::WARN);
        assert_eq!(settings.level(LevelFilter::WARN, 1), LevelFilter::DEBUG);
        let silent = Settings { log_level: LevelFilter::ERROR, ..settings };
        assert_eq!(silent.level(LevelFilter::WARN, 0), LevelFilter::ERROR);
        assert_eq!(silent.level(LevelFilter::WARN, 2), LevelFilter::TRACE);
    }
}
