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
mod screen;
mod settings;
mod show;
mod told;

use std::path::Path;
use std::process::ExitCode;

use clap::Parser as _;
use tracing::level_filters::LevelFilter;

use args::{Cli, Command, Common};
use exit::{Error, Outcome};
use screen::Screen;
use settings::{Settings, Wrong};

/// Runs the command line of this process.
#[must_use]
pub fn main() -> ExitCode {
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
    let setting = Setting { common };
    match command {
        Command::Check { paths } => {
            setting.log(LevelFilter::WARN)?;
            check::run(screen, &setting, &paths)
        }
        Command::Show(asked) => show::run(screen, &asked),
        Command::Convert { from, to, force } => convert::run(screen, &from, &to, force),
        Command::Demo { dir } => demo::run(screen, &dir),
        Command::Completions { shell } => completions::run(screen, shell),
        Command::Keep { dir } => keep::run(screen, &setting, &dir),
        Command::Once { paths } => {
            setting.log(LevelFilter::WARN)?;
            once::run(screen, &setting, &paths)
        }
    }
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
