//! `keep`: the daemon.

use std::path::Path;

use tracing::level_filters::LevelFilter;

use super::exit::{Error, Outcome, shown};
use super::once::locked;
use super::screen::Screen;
use super::worker::planners;
use super::{Setting, logging, told};
use crate::keep::{self, KeepError, Replanned};

pub(super) fn run(screen: &mut Screen, setting: &Setting<'_>, dir: &Path) -> Result<Outcome, Error> {
    let about = std::fs::metadata(dir).map_err(|error| Error::reading(dir, &error))?;
    if !about.is_dir() {
        return Err(Error::usage(
            format_args!("{} is not a folder", shown(dir)),
            "`millreeve once` plans a single model",
        ));
    }
    let settings = setting.for_folder(dir)?;
    logging::start(settings.log_format, settings.level(LevelFilter::TRACE, setting.common.verbose));
    tracing::info!("keeping {}", shown(dir));
    let kept = keep::keep(dir, &settings.keep, planners(&settings.keep), |model, replanned| {
        // A look that found all as it was is told too, without a start, so that a reader knows from the beginning where each model
        // stands. What was given up or has vanished is looked at again, and told then.
        if screen.json() && !matches!(replanned, Replanned::Interrupted | Replanned::Vanished) {
            told::object(screen, model, replanned);
        }
    });
    match kept {
        Ok(()) => {
            tracing::info!("stopped");
            Ok(Outcome::Good)
        }
        Err(KeepError::Lock(error)) => Err(locked(&error)),
        Err(error @ KeepError::Ignore(_)) => Err(Error::usage(error, "")),
        Err(error @ (KeepError::Store(_) | KeepError::System(_))) => Err(Error::failure(error, "")),
    }
}
