//! `verify`: works plans out afresh and compares them with their files.

mod object;
mod words;

use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};

use super::Setting;
use super::check::counted;
use super::exit::{Error, Outcome, shown};
use super::models::{self, Found, PLAN};
use super::screen::{BAD, GOOD, Screen};
use crate::keep::Ignore;
use crate::keep::verify::{Finding, Pair, verify};

pub(super) fn run(screen: &mut Screen, setting: &Setting<'_>, paths: &[PathBuf]) -> Result<Outcome, Error> {
    let mut tally = Tally::default();
    let mut seen = BTreeSet::new();
    for path in paths {
        let settings = setting.for_folder(models::folder_of(path))?.keep;
        let ignore = Ignore::new(&settings.ignore).map_err(|error| Error::usage(error, ""))?;
        let Found { mut models, gone, unread } = found(path, &ignore)?;
        for folder in &unread {
            tally.unread_folders += 1;
            screen.error(&Error::failure(format_args!("cannot read the folder {}", shown(folder)), ""));
        }
        models.extend(gone);
        let pairs: Vec<Pair> = models.into_iter().filter(|model| seen.insert(model.clone())).map(pair).collect();
        screen.progress(format_args!("verifying {} …", counted(pairs.len(), "plan")));
        verify(&pairs, &settings, |pair, finding| {
            tally.add(&finding);
            if screen.json() {
                screen.object(&object::of(pair, &finding));
            } else {
                words::tell(screen, pair, &finding);
            }
            screen.progress(format_args!("{} of {} …", tally.plans, seen.len()));
        });
    }
    if tally.plans == 0 && tally.unread_folders == 0 {
        return Err(Error::usage("there is no model to verify", models::WHAT_A_MODEL_IS));
    }
    if screen.out_is_terminal() && !screen.json() {
        screen.say(format_args!("\n{}", tally.words()));
    }
    Ok(tally.outcome())
}

/// The models that `path` means; a plan stands for its model, even for one that is gone.
fn found(path: &Path, ignore: &Ignore) -> Result<Found, Error> {
    let is_plan = path.file_name().is_some_and(|name| name.to_string_lossy().ends_with(PLAN)) && !path.is_dir();
    if !is_plan {
        return models::under(path, ignore);
    }
    fs::symlink_metadata(path).map_err(|error| Error::reading(path, &error))?;
    Ok(Found { models: BTreeSet::from([models::model_of(&models::stem(path))]), ..Found::default() })
}

fn pair(model: PathBuf) -> Pair {
    Pair { plan: models::with_ending(&models::stem(&model), PLAN), model }
}

#[derive(Default)]
struct Tally {
    plans: usize,
    amiss: usize,
    untold: usize,
    unread_folders: usize,
}

impl Tally {
    fn add(&mut self, finding: &Finding) {
        self.plans += 1;
        self.untold += usize::from(finding.is_failure());
        self.amiss += usize::from(!finding.is_failure() && !finding.is_good());
    }

    fn outcome(&self) -> Outcome {
        if self.untold + self.unread_folders > 0 { Outcome::Failed } else { Outcome::good_if(self.amiss == 0) }
    }

    fn words(&self) -> String {
        let plans = counted(self.plans, "plan");
        if self.amiss + self.untold == 0 {
            return format!("{GOOD}{plans}, all as they should be{GOOD:#}");
        }
        let untold = if self.untold > 0 { format!(", {} could not be told", self.untold) } else { String::new() };
        format!("{BAD}{plans}, {} not as it should be{untold}{BAD:#}", self.amiss)
    }
}
