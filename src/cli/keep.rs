//! `keep`: the daemon.

use std::path::Path;
use std::time::Instant;

use tracing::level_filters::LevelFilter;

use super::demo::quoted;
use super::exit::{Error, Outcome, shown};
use super::logging::Log;
use super::once::locked;
use super::outbox::Outbox;
use super::screen::Screen;
use super::worker::planners;
use super::{Setting, logging, status, told};
use crate::keep::{self, KeepError, Manager, Operating, Replanned};
use crate::model::read;
use crate::store::error::reason;

pub(super) fn run(screen: &mut Screen, setting: &Setting<'_>, dir: &Path, asked: bool) -> Result<Outcome, Error> {
    let about = std::fs::metadata(dir).map_err(|error| Error::reading(dir, &error))?;
    if !about.is_dir() {
        return Err(Error::usage(
            format_args!("{} is not a folder", shown(dir)),
            "`millreeve once` plans a single model",
        ));
    }
    refuse_a_model(dir)?;
    let settings = setting.for_folder(dir)?;
    if asked {
        return status::tell(screen, dir, settings.keep.state_dir.as_deref());
    }
    let log = logging::start(settings.log_format, settings.level(LevelFilter::TRACE, setting.common.verbose));
    let manager = Manager::named(Instant::now(), |name| std::env::var_os(name))
        .map_err(|error| Error::failure(format_args!("cannot use the address in NOTIFY_SOCKET: {error}"), ""))?;
    tracing::info!("keeping {}", shown(dir));
    let reread = || reread(setting, dir, log.as_ref());
    let operating = Operating { reread: Some(Box::new(reread)), manager };
    let outbox = screen.json().then(Outbox::to_stdout).transpose();
    let outbox = outbox.map_err(|error| Error::failure(format_args!("cannot start: {}", reason(&error)), ""))?;
    let kept = keep::keep(dir, &settings.keep, planners(&settings.keep), operating, |model, replanned| {
        // A look that found all as it was is told too, without a start, so that a reader knows from the beginning where each model
        // stands. What was given up or has vanished is looked at again, and told then.
        if let Some(outbox) = &outbox
            && !matches!(replanned, Replanned::Interrupted | Replanned::Vanished)
        {
            outbox.send(told::object_line(model, replanned));
        }
    });
    if let Some(outbox) = outbox {
        screen.note(outbox.finish());
    }
    match kept {
        Ok(()) => {
            tracing::info!("stopped");
            Ok(Outcome::Good)
        }
        Err(KeepError::Lock(error)) => Err(locked(&error)),
        Err(error @ KeepError::Ignore(_)) => Err(Error::usage(error, "")),
        Err(error @ KeepError::RemoteState { .. }) => {
            let help = "name a local folder: `dir` in [state] of the settings, or MILLREEVE_STATE_DIR";
            Err(Error::usage(error, help))
        }
        Err(error @ (KeepError::Store(_) | KeepError::System(_))) => Err(Error::failure(error, "")),
    }
}

/// Refuses a folder that is a model: its plan and note lie beside it, in the folder that is to be kept.
fn refuse_a_model(dir: &Path) -> Result<(), Error> {
    let whole = dir.canonicalize().map_err(|error| Error::reading(dir, &error))?;
    match whole.parent().filter(|_| whole.file_name().is_some_and(read::is_folder_name)) {
        Some(above) => Err(Error::usage(
            format_args!("{} is a model in parts, not a folder of models", shown(dir)),
            format_args!("keep the folder that it lies in: millreeve keep {}", quoted(above)),
        )),
        None => Ok(()),
    }
}

/// Reads the settings again. Those of the log are the command line's own, and are taken over here.
fn reread(setting: &Setting<'_>, dir: &Path, log: Option<&Log>) -> Result<keep::Settings, String> {
    let settings = setting.for_folder(dir).map_err(|error| match error.help() {
        "" => error.message().to_owned(),
        help => format!("{}; {help}", error.message()),
    })?;
    if let Some(log) = log {
        let level = settings.level(LevelFilter::TRACE, setting.common.verbose);
        if log.change(level) {
            tracing::info!("log.level has changed and holds from now on");
        }
        if log.format() != settings.log_format {
            tracing::info!("log.format has changed; it holds after the daemon is started again");
        }
    }
    Ok(settings.keep)
}
