//! The command line: what it says is done by the layers below; what they answer is shown, and becomes an exit status.

mod args;
mod check;
mod completions;
mod convert;
mod demo;
mod exit;
mod json;
mod keep;
mod logging;
mod models;
mod once;
mod outbox;
mod release;
mod screen;
mod settings;
mod show;
mod status;
mod told;
mod verify;
mod worker;

use std::path::Path;
use std::process::ExitCode;

use clap::Parser as _;
use rustix::process::Signal;
use tokio::signal::unix::SignalKind;
use tracing::level_filters::LevelFilter;

use args::{Cli, Command, Common};
use exit::{Error, Outcome};
use screen::Screen;
use settings::{Settings, Wrong};

use crate::store::error::reason;

/// Runs the command line of this process.
#[must_use]
pub fn main() -> ExitCode {
    if let Some(status) = worker::main(std::env::args_os().skip(1)) {
        return status;
    }
    // Help and mistakes of the command line are told here, with statuses 0 and 2.
    let Cli { common, command } = Cli::parse();
    let mut screen = Screen::new(common.color, common.json);
    let done = run(&mut screen, &common, command);
    match screen.finish().and(done) {
        Ok(outcome) => outcome.into(),
        Err(error) => {
            screen.error(&error);
            error.into()
        }
    }
}

fn run(screen: &mut Screen, common: &Common, command: Command) -> Result<Outcome, Error> {
    outlive_file_size_limit().map_err(|error| Error::failure(format_args!("cannot start: {}", reason(&error)), ""))?;
    let setting = Setting { common };
    match command {
        Command::Check { paths } => {
            setting.log(LevelFilter::WARN)?;
            check::run(screen, &setting, &paths)
        }
        Command::Verify { paths } => {
            setting.log(LevelFilter::WARN)?;
            verify::run(screen, &setting, &paths)
        }
        Command::Release { model } => release::run(screen, &model),
        Command::Show(asked) => show::run(screen, &asked),
        Command::Convert { from, to, force } => convert::run(screen, &from, &to, force),
        Command::Demo { dir } => demo::run(screen, &dir),
        Command::Completions { shell } => completions::run(screen, shell),
        Command::Keep { dir, status } => keep::run(screen, &setting, &dir, status),
        Command::Once { paths } => {
            setting.log(LevelFilter::WARN)?;
            once::run(screen, &setting, &paths)
        }
    }
}

/// Lets a write past the limit on file sizes fail, instead of killing the process with half a file on disk.
fn outlive_file_size_limit() -> std::io::Result<()> {
    outlive(&[Signal::XFSZ])
}

/// Lets nothing come of these signals from now on.
fn outlive(signals: &[Signal]) -> std::io::Result<()> {
    // A handler is the process's, and stays when the runtime that it takes to set one is gone.
    let runtime = tokio::runtime::Builder::new_current_thread().enable_all().build()?;
    let _inside = runtime.enter();
    signals.iter().try_for_each(|signal| tokio::signal::unix::signal(SignalKind::from_raw(signal.as_raw())).map(drop))
}

/// Where the settings of this run come from.
struct Setting<'a> {
    common: &'a Common,
}

impl Setting<'_> {
    /// The settings for the models in a folder, which may have some of its own.
    fn for_folder(&self, folder: &Path) -> Result<Settings, Error> {
        let config = self.common.config.as_deref();
        settings::load_for_folder(config, folder, std::env::vars_os()).map_err(|wrong| misset(&wrong))
    }

    /// Starts the log of a command that by itself logs from `least` on, and gives the settings without any folder's own.
    fn log(&self, least: LevelFilter) -> Result<Settings, Error> {
        let settings =
            settings::load(self.common.config.as_deref(), std::env::vars_os()).map_err(|wrong| misset(&wrong))?;
        logging::start(settings.log_format, settings.level(least, self.common.verbose));
        Ok(settings)
    }
}

fn misset(wrong: &Wrong) -> Error {
    Error::usage(wrong, wrong.help())
}
