//! `completions`: a completion script for a shell.

use clap::CommandFactory as _;
use clap_complete::Shell;

use super::args::Cli;
use super::exit::{Error, Outcome};
use super::screen::Screen;

#[expect(clippy::unnecessary_wraps, reason = "every command has this shape")]
pub(super) fn run(screen: &mut Screen, shell: Shell) -> Result<Outcome, Error> {
    let mut script = Vec::new();
    clap_complete::generate(shell, &mut Cli::command(), "millreeve", &mut script);
    screen.raw(&script);
    Ok(Outcome::Good)
}
