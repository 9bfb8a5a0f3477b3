//! `check`: reads models and points at every fault.

use std::path::{Path, PathBuf};

use serde::Serialize;

use super::Setting;
use super::exit::{Error, Outcome, text};
use super::models::{self, Ignored};
use super::screen::{BAD, GOOD, Screen, WARN};
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
    warnings: &'a [Fault],
}

pub(super) fn run(screen: &mut Screen, setting: &Setting<'_>, paths: &[PathBuf]) -> Result<Outcome, Error> {
    let mut tally = Tally::default();
    for path in paths {
        let settings = setting.for_path(path)?;
        for model in models::under(path, &Ignored::new(&settings.ignore)?)? {
            tally.models += 1;
            one(screen, &model, &mut tally)?;
        }
    }
    if tally.models == 0 {
        let help = format!("a model is a file whose name ends in {}", models::MODEL);
        return Err(Error::usage("there is no model to check", help));
    }
    if screen.out_is_terminal() && !screen.json() {
        screen.say(tally.words());
    }
    Ok(Outcome::good_if(tally.faults == 0))
}

#[derive(Default)]
struct Tally {
    models: usize,
    faulty: usize,
    faults: usize,
}

impl Tally {
    fn words(&self) -> String {
        let models = counted(self.models, "model");
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

fn one(screen: &mut Screen, path: &Path, tally: &mut Tally) -> Result<(), Error> {
    let bytes = match read::file(path) {
        Ok(bytes) => bytes,
        Err(problem) => return Err(unreadable(&problem)),
    };
    let (faults, warnings) = match read::text(path, &bytes) {
        Ok(Reading { warnings, .. }) => (Faults::default(), warnings),
        Err(faults) => (faults, Vec::new()),
    };
    let count = faults.reported.len() + faults.more;
    tally.faults += count;
    tally.faulty += usize::from(count > 0);
    if screen.json() {
        let name = models::stem(path).file_name().unwrap_or_default().to_string_lossy().into_owned();
        let Faults { reported, more } = &faults;
        screen.object(&Checked { model: name, path: text(path), faults: reported, more: *more, warnings: &warnings });
        return Ok(());
    }
    if count > 0 {
        // The screen takes the colours out again where they are not wanted.
        screen.say(faults.terminal(true).to_string().trim_end_matches('\n'));
        screen.say("");
    }
    for warning in &warnings {
        screen.aside(format_args!("{WARN}odd, but no fault:{WARN:#} {}\n", warning.terminal(false)));
    }
    Ok(())
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
