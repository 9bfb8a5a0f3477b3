//! The settings: their keys, their defaults, and how one is set.

mod load;
mod units;

use std::num::NonZeroUsize;
use std::path::{Path, PathBuf};

use tracing::level_filters::LevelFilter;

use crate::keep::{self, By, Ignore};
use crate::store::folder::OWN;
pub(crate) use load::{Wrong, load, load_for_folder};
use units::{duration, size};

/// All settings, with their defaults where nothing else is said. `config/millreeve.toml` says what each means.
#[derive(Clone, Debug)]
pub(crate) struct Settings {
    /// How models are watched and solved, and where the state lies.
    pub(crate) keep: keep::Settings,
    /// How the log is written.
    pub(crate) log_format: LogFormat,
    /// What is logged.
    pub(crate) log_level: LevelFilter,
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
        let keep = keep::Settings { memory_limit: Some(1 << 30), ..keep::Settings::default() };
        Self { keep, log_format: LogFormat::Text, log_level: LevelFilter::INFO }
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
    /// Something no key takes, with the words for it.
    Other(&'static str),
}

impl Given {
    fn text(&self) -> Option<&str> {
        match self {
            Self::Text(text) => Some(text),
            _ => None,
        }
    }
}

impl Settings {
    /// Sets one key. On failure says what the key takes instead.
    fn set(&mut self, key: Key, given: &Given) -> Result<(), String> {
        match key {
            Key::WatchBy => self.keep.by = choice(given, &[("events", By::Events), ("poll", By::Poll)])?,
            Key::WatchScanEvery => self.keep.scan_every = duration(given)?,
            Key::WatchIgnore => self.keep.ignore = globs(given)?,
            Key::SolveWorkers => {
                self.keep.workers = workers(given)?.map_or_else(|| keep::Settings::default().workers, usize::from);
            }
            Key::SolveTimeLimit => self.keep.time_limit = duration(given)?,
            Key::SolveMemoryLimit => self.keep.memory_limit = Some(size(given)?),
            Key::StateDir => self.keep.state_dir = folder(given)?,
            Key::LogFormat => {
                self.log_format = choice(given, &[("text", LogFormat::Text), ("json", LogFormat::Json)])?;
            }
            Key::LogLevel => self.log_level = choice(given, &LEVELS)?,
        }
        Ok(())
    }

    /// The level that is logged at when `-v` is given so many times, for a command that by itself logs at `least` severity.
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
    let words = || choices.iter().map(|(word, _)| format!("\"{word}\"")).collect::<Vec<_>>().join(", ");
    let found = given.text().and_then(|text| choices.iter().find(|(word, _)| *word == text));
    found.map(|&(_, value)| value).ok_or_else(|| format!("it is one of {}", words()))
}

/// How many workers; `None` for 0, which leaves it to the machine.
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

/// A folder of its own for the state; `None` for the one in the kept folder.
fn folder(given: &Given) -> Result<Option<PathBuf>, String> {
    match given.text() {
        Some(OWN) => Ok(None),
        Some(text) if Path::new(text).is_absolute() => Ok(Some(PathBuf::from(text))),
        _ => Err(format!("it is \"{OWN}\", which is in the kept folder, or the absolute path of another folder")),
    }
}

fn globs(given: &Given) -> Result<Vec<String>, String> {
    let texts = match given {
        Given::Texts(texts) => texts.as_slice(),
        Given::Text(text) => std::slice::from_ref(text),
        _ => return Err("it is a list of globs, such as [\"old/**\"]".to_owned()),
    };
    Ignore::new(texts).map_err(|error| error.to_string())?;
    Ok(texts.to_vec())
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
