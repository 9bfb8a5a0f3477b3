//! Where settings come from: a file, then the folder's own file, then the environment.

use std::ffi::OsString;
use std::fmt;
use std::io;
use std::path::{Path, PathBuf};

use toml::de::{DeTable, DeValue};

use super::{Given, Key, PREFIX, Settings};
use crate::model::escape::Plain;

/// Where settings lie unless `--config` names another file.
const SYSTEM: &str = "/etc/millreeve/millreeve.toml";

/// The folder's own settings.
const FOLDER: &str = ".millreeve.toml";

/// The largest settings file that is read, in bytes.
const LARGEST: u64 = 1 << 20;

/// What is wrong with a setting: where it stands, which, and what would do.
#[derive(Debug, PartialEq, Eq)]
pub(crate) struct Wrong {
    place: Place,
    message: String,
    help: String,
}

#[derive(Clone, Debug, PartialEq, Eq)]
enum Place {
    Line(PathBuf, usize),
    File(PathBuf),
    Environment,
}

impl Wrong {
    /// What would mend it; empty where nothing can be said.
    pub(crate) fn help(&self) -> &str {
        &self.help
    }
}

impl fmt::Display for Wrong {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match &self.place {
            Place::Line(path, line) => write!(f, "{}:{line}: ", Plain(&path.to_string_lossy()))?,
            Place::File(path) => write!(f, "{}: ", Plain(&path.to_string_lossy()))?,
            Place::Environment => f.write_str("in the environment: ")?,
        }
        f.write_str(&self.message)
    }
}

/// The settings of the program: the defaults, then the file (`config`, else the system's where there is one), then `environment`.
pub(crate) fn load(
    config: Option<&Path>,
    environment: impl IntoIterator<Item = (OsString, OsString)>,
) -> Result<Settings, Wrong> {
    load_layers(config, None, environment)
}

/// The settings for the models in one folder: as [`load`], with the folder's own file between file and environment.
pub(crate) fn load_for_folder(
    config: Option<&Path>,
    folder: &Path,
    environment: impl IntoIterator<Item = (OsString, OsString)>,
) -> Result<Settings, Wrong> {
    load_layers(config, Some(folder), environment)
}

fn load_layers(
    config: Option<&Path>,
    folder: Option<&Path>,
    environment: impl IntoIterator<Item = (OsString, OsString)>,
) -> Result<Settings, Wrong> {
    let mut settings = Settings::default();
    let system = config.unwrap_or(Path::new(SYSTEM));
    if let Some(text) = read(system, config.is_some())? {
        from_file(&mut settings, system, &text, |_| true)?;
    }
    if let Some(folder) = folder {
        let path = folder.join(FOLDER);
        if let Some(text) = read(&path, false)? {
            from_file(&mut settings, &path, &text, |group| matches!(group, "watch" | "solve"))?;
        }
    }
    from_environment(&mut settings, environment)?;
    Ok(settings)
}

/// The text of a settings file; `None` where it is not there and need not be.
fn read(path: &Path, needed: bool) -> Result<Option<String>, Wrong> {
    let wrong = |message: String| Wrong { place: Place::File(path.to_owned()), message, help: String::new() };
    match std::fs::metadata(path) {
        Ok(data) if data.is_file() && data.len() <= LARGEST => {}
        Ok(data) if data.is_file() => return Err(wrong("the file is larger than 1 MiB".to_owned())),
        Ok(_) => return Err(wrong("this is not a file".to_owned())),
        Err(error) if error.kind() == io::ErrorKind::NotFound && !needed => return Ok(None),
        Err(error) => return Err(wrong(format!("cannot be read: {error}"))),
    }
    std::fs::read_to_string(path).map(Some).map_err(|error| wrong(format!("cannot be read: {error}")))
}

fn from_file(settings: &mut Settings, path: &Path, text: &str, may_set: impl Fn(&str) -> bool) -> Result<(), Wrong> {
    let text = text.strip_prefix('\u{feff}').unwrap_or(text);
    let wrong = |at: usize, message: String, help: String| Wrong {
        place: Place::Line(path.to_owned(), line_of(text, at)),
        message,
        help,
    };
    let document = DeTable::parse(text).map_err(|error| {
        let at = error.span().map_or(0, |span| span.start);
        wrong(at, Plain(error.message()).to_string(), String::new())
    })?;
    for (group, entries) in document.get_ref() {
        let at = group.span().start;
        let group = group.get_ref();
        if !Key::ALL.iter().any(|key| key.parts().0 == group) {
            return Err(wrong(at, format!("no group [{}] in the settings", Plain(group)), nearest_group(group)));
        }
        if !may_set(group) {
            let help = "settle it in the file named by --config, or in /etc/millreeve/millreeve.toml";
            return Err(wrong(at, format!("a folder's own settings cannot set [{group}]"), help.to_owned()));
        }
        let DeValue::Table(entries) = entries.get_ref() else {
            return Err(wrong(at, format!("[{group}] is a group of keys, not a value"), String::new()));
        };
        for (key, value) in entries {
            let address = format!("{group}.{}", key.get_ref());
            let Some(known) = Key::ALL.into_iter().find(|known| known.address() == address) else {
                return Err(wrong(key.span().start, format!("no setting `{}`", Plain(&address)), nearest(&address)));
            };
            let given = given(value.get_ref());
            settings.set(known, &given).map_err(|takes| {
                let message = format!("`{address}` cannot be {}: {takes}", told(&given));
                wrong(value.span().start, message, String::new())
            })?;
        }
    }
    Ok(())
}

/// A value as a message names it.
fn told(given: &Given) -> String {
    match given {
        Given::Text(text) => format!("\"{}\"", Plain(text)),
        Given::Number(number) => number.to_string(),
        Given::Texts(_) => "this list".to_owned(),
        Given::Other(words) => (*words).to_owned(),
    }
}

fn given(value: &DeValue<'_>) -> Given {
    match value {
        DeValue::String(text) => Given::Text(text.to_string()),
        DeValue::Integer(number) => match u64::from_str_radix(number.as_str(), number.radix()) {
            Ok(number) => Given::Number(number),
            Err(_) => Given::Other("such a number"),
        },
        DeValue::Float(_) => Given::Other("such a number"),
        DeValue::Boolean(_) => Given::Other("true or false"),
        DeValue::Datetime(_) => Given::Other("a date"),
        DeValue::Table(_) => Given::Other("a table"),
        DeValue::Array(items) => {
            let texts = items.iter().map(|item| match item.get_ref() {
                DeValue::String(text) => Some(text.to_string()),
                _ => None,
            });
            texts.collect::<Option<_>>().map_or(Given::Other("such a list"), Given::Texts)
        }
    }
}

/// A variable that begins with our prefix and is no setting is a mistake that nobody would notice otherwise.
fn from_environment(
    settings: &mut Settings,
    environment: impl IntoIterator<Item = (OsString, OsString)>,
) -> Result<(), Wrong> {
    let ours = environment.into_iter().filter_map(|(name, value)| {
        let name = name.to_string_lossy().into_owned();
        name.starts_with(PREFIX).then_some((name, value))
    });
    for (name, value) in ours {
        let wrong = |message: String, help: String| Wrong { place: Place::Environment, message, help };
        let Some(key) = Key::ALL.into_iter().find(|key| key.variable() == name) else {
            let help = closest(&name, Key::ALL.into_iter().map(Key::variable));
            return Err(wrong(format!("no setting `{}`", Plain(&name)), help));
        };
        let Some(value) = value.to_str() else {
            return Err(wrong(format!("the value of `{name}` is not UTF-8"), String::new()));
        };
        let given = match key {
            Key::WatchIgnore if value.trim_start().starts_with('[') => list(value),
            _ => Given::Text(value.to_owned()),
        };
        settings
            .set(key, &given)
            .map_err(|takes| wrong(format!("`{name}` cannot be \"{}\": {takes}", Plain(value)), String::new()))?;
    }
    Ok(())
}

/// A list in the environment is written as in a file.
fn list(text: &str) -> Given {
    DeValue::parse(text.trim()).map_or(Given::Other("such a list"), |value| given(value.get_ref()))
}

fn nearest(address: &str) -> String {
    closest(address, Key::ALL.into_iter().map(Key::address))
}

fn nearest_group(group: &str) -> String {
    closest(group, Key::ALL.into_iter().map(|key| key.parts().0.to_owned()))
}

fn closest(given: &str, known: impl Iterator<Item = String>) -> String {
    let scored = known.map(|known| (strsim::damerau_levenshtein(given, &known), known));
    match scored.min() {
        Some((distance, known)) if distance <= 3 => format!("did you mean `{known}`?"),
        _ => "config/millreeve.toml in the source, or --help, says which there are".to_owned(),
    }
}

fn line_of(text: &str, at: usize) -> usize {
    1 + text.bytes().take(at).filter(|&byte| byte == b'\n').count()
}

#[cfg(test)]
#[expect(clippy::disallowed_methods, reason = "tests lay out files as other programs would")]
mod tests {
    use super::*;
    use crate::cli::settings::LogFormat;
    use crate::keep::By;
    use std::time::Duration;

    fn parsed(text: &str) -> Result<Settings, String> {
        let mut settings = Settings::default();
        from_file(&mut settings, Path::new("s.toml"), text, |_| true)
            .map_err(|wrong| format!("{wrong} / {}", wrong.help()))?;
        Ok(settings)
    }

    fn environment(pairs: &[(&str, &str)]) -> Vec<(OsString, OsString)> {
        pairs.iter().map(|&(name, value)| (name.into(), value.into())).collect()
    }

    #[test]
    fn the_commented_default_says_the_defaults_and_names_every_key() {
        let text = include_str!("../../../config/millreeve.toml");
        assert_eq!(format!("{:?}", parsed(text).unwrap()), format!("{:?}", Settings::default()));
        let document: toml::Table = text.parse().unwrap();
        for key in Key::ALL {
            let (group, name) = key.parts();
            assert!(document[group].get(name).is_some(), "{} is missing", key.address());
        }
    }

    #[test]
    fn every_default_in_the_file_is_read_rather_than_passed_over() {
        let text = "[watch]\nby = \"poll\"\nscan_every = \"5 s\"\nignore = [\"old/**\"]\n\
            [solve]\nworkers = 3\ntime_limit = \"7 s\"\nmemory_limit = \"9 MiB\"\n\
            [state]\ndir = \"/var/lib/m\"\n[log]\nformat = \"json\"\nlevel = \"warn\"\n";
        let settings = parsed(text).unwrap();
        assert_eq!(settings.keep.by, By::Poll);
        assert_eq!(settings.keep.scan_every, Duration::from_secs(5));
        assert_eq!(settings.keep.ignore, ["old/**"]);
        assert_eq!(settings.keep.workers, 3);
        assert_eq!(settings.keep.time_limit, Duration::from_secs(7));
        assert_eq!(settings.keep.memory_limit, Some(9 << 20));
        assert_eq!(settings.keep.state_dir.as_deref(), Some(Path::new("/var/lib/m")));
        assert_eq!(settings.log_format, LogFormat::Json);
        assert_eq!(settings.log_level, tracing::level_filters::LevelFilter::WARN);
    }

    #[test]
    fn a_wrong_setting_is_named_with_its_line() {
        let cases = [
            ("[watch]\nbye = \"poll\"", "s.toml:2: no setting `watch.bye` / did you mean `watch.by`?"),
            ("\n[wach]\n", "s.toml:2: no group [wach] in the settings / did you mean `watch`?"),
            (
                "[log]\n\nlevel = 3",
                "s.toml:3: `log.level` cannot be 3: it is one of \"error\", \"warn\", \"info\", \"debug\", \"trace\" / ",
            ),
            (
                "[solve]\nworkers = -1",
                "s.toml:2: `solve.workers` cannot be such a number: it is a whole number up to 1024; 0 is one per processor / ",
            ),
            ("watch = 3", "s.toml:1: [watch] is a group of keys, not a value / "),
        ];
        for (text, expected) in cases {
            assert_eq!(parsed(text).unwrap_err(), expected);
        }
        assert!(parsed("[watch]\nby = ").unwrap_err().starts_with("s.toml:2: "));
        assert!(parsed("[watch]\nignore = [\"a[\"]").unwrap_err().contains("watch.ignore"));
    }

    #[test]
    fn the_environment_wins_over_the_folder_and_the_folder_over_the_file() {
        let folder = tempfile::tempdir().unwrap();
        let config = folder.path().join("config.toml");
        std::fs::write(&config, "[solve]\nworkers = 1\ntime_limit = \"1 s\"\nmemory_limit = \"1 MiB\"\n").unwrap();
        std::fs::write(folder.path().join(FOLDER), "[solve]\ntime_limit = \"2 s\"\nmemory_limit = \"2 MiB\"\n")
            .unwrap();
        let given = environment(&[("MILLREEVE_SOLVE_MEMORY_LIMIT", "3 MiB"), ("OTHER", "x")]);
        let settings = load_for_folder(Some(&config), folder.path(), given).unwrap();
        assert_eq!(settings.keep.workers, 1);
        assert_eq!(settings.keep.time_limit, Duration::from_secs(2));
        assert_eq!(settings.keep.memory_limit, Some(3 << 20));
    }

    #[test]
    fn a_folder_sets_only_how_it_is_watched_and_solved() {
        let folder = tempfile::tempdir().unwrap();
        std::fs::write(folder.path().join(FOLDER), "[solve]\nworkers = 2\n[log]\nlevel = \"trace\"\n").unwrap();
        let wrong = load_for_folder(None, folder.path(), []).unwrap_err();
        assert!(wrong.to_string().ends_with(".millreeve.toml:3: a folder's own settings cannot set [log]"), "{wrong}");
    }

    #[test]
    fn variables_are_checked_like_keys() {
        let of = |name: &str, value: &str| {
            let mut settings = Settings::default();
            from_environment(&mut settings, environment(&[(name, value)])).map(|()| settings)
        };
        assert_eq!(of("MILLREEVE_SOLVE_WORKERS", "4").unwrap().keep.workers, 4);
        assert_eq!(of("MILLREEVE_WATCH_IGNORE", "a/**").unwrap().keep.ignore.len(), 1);
        assert_eq!(of("MILLREEVE_WATCH_IGNORE", "[\"a\", \"b\"]").unwrap().keep.ignore.len(), 2);
        let wrong = of("MILLREEVE_SOLVE_WORKER", "4").unwrap_err();
        assert_eq!(wrong.help(), "did you mean `MILLREEVE_SOLVE_WORKERS`?");
        assert!(
            of("MILLREEVE_LOG_LEVEL", "loud")
                .unwrap_err()
                .to_string()
                .starts_with("in the environment: `MILLREEVE_LOG_LEVEL`")
        );
    }

    #[test]
    fn a_named_file_must_be_there() {
        let wrong = load(Some(Path::new("no/such.toml")), []).unwrap_err();
        assert!(wrong.to_string().starts_with("no/such.toml: cannot be read"), "{wrong}");
    }
}
