//! `check`: reads models and points at every fault.

use std::path::{Path, PathBuf};

use serde::Serialize;

use super::Setting;
use super::exit::{Error, Outcome, shown, text};
use super::models;
use super::screen::{BAD, GOOD, Screen, WARN};
use crate::keep::Ignore;
use crate::model::read::{self, FileProblem, Reading};
use crate::model::{Fault, Faults};

/// The object of one model.
#[derive(Serialize)]
struct Checked<'a> {
    model: String,
    path: String,
    faults: &'a [Fault],
    /// How many more faults there are than are told.
    more: usize,
    /// What is odd, though no fault.
    warnings: &'a [Fault],
    /// How many more of these there are than are told.
    more_warnings: usize,
    /// Why the file could not be read.
    #[serde(skip_serializing_if = "Option::is_none")]
    unread: Option<String>,
}

pub(super) fn run(screen: &mut Screen, setting: &Setting<'_>, paths: &[PathBuf]) -> Result<Outcome, Error> {
    let mut tally = Tally::default();
    for path in paths {
        let folder = if path.is_dir() { path } else { path.parent().unwrap_or(path) };
        let settings = setting.for_folder(folder)?;
        let ignore = Ignore::new(&settings.keep.ignore).map_err(|error| Error::usage(error, ""))?;
        let found = models::under(path, &ignore)?;
        for folder in &found.unread {
            tally.refused = true;
            screen.error(&Error::failure(format_args!("cannot read the folder {}", shown(folder)), ""));
        }
        for model in &found.models {
            tally.models += 1;
            one(screen, model, &mut tally);
        }
    }
    if tally.models == 0 && !tally.refused {
        let help = format!("a model is a file whose name ends in {}", models::MODEL);
        return Err(Error::usage("there is no model to check", help));
    }
    if screen.out_is_terminal() && !screen.json() {
        let gap = if tally.faulty > 0 { "\n" } else { "" };
        screen.say(format_args!("{gap}{}", tally.words()));
    }
    Ok(tally.outcome())
}

#[derive(Default)]
struct Tally {
    models: usize,
    faulty: usize,
    faults: usize,
    /// Files that are no models, or that the system would not let us read.
    unread: usize,
    refused: bool,
}

impl Tally {
    fn outcome(&self) -> Outcome {
        if self.refused { Outcome::Failed } else { Outcome::good_if(self.faults + self.unread == 0) }
    }

    fn words(&self) -> String {
        let models = counted(self.models, "model");
        if self.unread > 0 {
            return format!("{BAD}{models}, {} not read, {}{BAD:#}", self.unread, counted(self.faults, "fault"));
        }
        if self.faults == 0 {
            return format!("{GOOD}{models}, no faults{GOOD:#}");
        }
        let faults = counted(self.faults, "fault");
        if self.models == 1 {
            return format!("{BAD}1 model, {faults}{BAD:#}");
        }
        format!("{BAD}{models}, {faults} in {} of them{BAD:#}", self.faulty)
    }
}

/// `1 model`, `3 models`.
pub(super) fn counted(count: usize, what: &str) -> String {
    format!("{count} {what}{}", if count == 1 { "" } else { "s" })
}

fn one(screen: &mut Screen, path: &Path, tally: &mut Tally) {
    let (faults, warnings, unread) = match read::file(path).map(|bytes| read::text(path, &bytes)) {
        Ok(Ok(Reading { warnings, .. })) => (Faults::default(), warnings, None),
        Ok(Err(faults)) => (faults, Faults::default(), None),
        Err(problem) => {
            let error = unreadable(&problem);
            tally.unread += 1;
            tally.refused |= error.is_failure();
            if !screen.json() {
                screen.error(&error);
            }
            (Faults::default(), Faults::default(), Some(error.message().to_owned()))
        }
    };
    let count = faults.reported.len() + faults.more;
    tally.faults += count;
    tally.faulty += usize::from(count > 0);
    if screen.json() {
        let model = models::stem(path).file_name().unwrap_or_default().to_string_lossy().into_owned();
        let Faults { reported, more } = &faults;
        screen.object(&Checked {
            model,
            path: text(path),
            faults: reported,
            more: *more,
            warnings: &warnings.reported,
            more_warnings: warnings.more,
            unread,
        });
        return;
    }
    if count > 0 {
        // The screen takes the colours out again where they are not wanted.
        let gap = if tally.faulty > 1 { "\n" } else { "" };
        screen.say(format_args!("{gap}{}", faults.terminal(true).to_string().trim_end_matches('\n')));
    }
    for warning in &warnings.reported {
        screen.aside(format_args!("{WARN}odd, but no fault:{WARN:#} {}\n", warning.terminal(false)));
    }
    if warnings.more > 0 {
        screen.aside(format_args!("and {} more that are odd\n", warnings.more));
    }
}

/// What is wrong with a file that cannot be read: the command line where it is not there or is no file, else the system.
pub(super) fn unreadable(problem: &FileProblem) -> Error {
    match problem {
        FileProblem::Forbidden(_) | FileProblem::Other { .. } => Error::failure(problem, ""),
        FileProblem::Missing(_) | FileProblem::Link(_) | FileProblem::NotAFile { .. } | FileProblem::TooLarge(_) => {
            Error::usage(problem, "")
        }
    }
}
