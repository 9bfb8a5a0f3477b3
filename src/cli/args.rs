//! What the command line may say.

use std::path::PathBuf;

use clap::{ArgAction, Args, Parser, Subcommand, ValueEnum, ValueHint};
use clap_complete::Shell;

/// What stands under the help of the program as a whole.
const AFTER_HELP: &str = "\
Examples:
  millreeve demo works            lay out a small works to try things on
  millreeve check works           read its models and point at every fault
  millreeve keep works            keep its plans optimal while people edit the models
  millreeve show works/tileworks  look at the plan
  millreeve verify works          is each plan what its model gives? work it out afresh and compare
  millreeve show works/tileworks --why terrace_slab
                                  the sum behind one figure, line by line

Files:
  NAME.model.toml   a model, written by people
  NAME.model/       or a folder of parts: every *.toml and *.csv in it, one for each team
  NAME.plan.toml    its plan, written by millreeve next to the model
  NAME.note.md      what the last edit did to the plan, and why
  NAME.release.toml the plan that the floor works to, pinned by `millreeve release`
  DIR/.millreeve/   the daemon's own state; it can be deleted, and is made again
  DIR/.millreeve.toml
                    settings for one folder: [watch] and [solve] only
  /etc/millreeve/millreeve.toml
                    settings, unless --config names another file; each key can be overridden
                    in the environment: MILLREEVE_SOLVE_WORKERS=2 for `workers` in [solve]

Exit status:
  0  every plan is current, every model without fault
  1  a model is held or faulty, or its plan is not what it should be
  2  the command line or the settings are wrong
  3  something else failed: disk full, no permission, another daemon keeps the folder";

/// Keeps production plans optimal while people edit the models behind them.
///
/// A model is a text file that says what a works can make, what that earns and uses, and what there is a limited amount of.
/// Millreeve works out the plan that earns the most (or costs the least), proves it, and writes it next to the model, with a
/// note on what each edit changed and why.
#[derive(Debug, Parser)]
#[command(name = "millreeve", version, after_long_help = AFTER_HELP, max_term_width = 100, infer_long_args = false)]
pub(crate) struct Cli {
    /// What holds for every command.
    #[command(flatten)]
    pub(crate) common: Common,
    /// What to do.
    #[command(subcommand)]
    pub(crate) command: Command,
}

/// What holds for every command.
#[derive(Args, Debug)]
#[command(next_help_heading = "Options for every command")]
pub(crate) struct Common {
    /// Read settings from FILE instead of /etc/millreeve/millreeve.toml
    #[arg(long, global = true, value_name = "FILE", value_hint = ValueHint::FilePath)]
    pub(crate) config: Option<PathBuf>,
    /// Answer with one JSON object per line on standard output; everything else goes to standard error
    #[arg(long, global = true)]
    pub(crate) json: bool,
    /// Whether to use colours; `auto` does on a terminal, unless NO_COLOR is set
    #[arg(long, global = true, value_name = "WHEN", default_value = "auto", hide_default_value = true)]
    pub(crate) color: Color,
    /// Log more: -v for debug, -vv for trace
    #[arg(short, long, global = true, action = ArgAction::Count)]
    pub(crate) verbose: u8,
}

/// Whether to use colours.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub(crate) enum Color {
    /// On a terminal, unless NO_COLOR is set.
    #[default]
    Auto,
    /// Even in a pipe.
    Always,
    /// Not at all.
    Never,
}

/// The commands.
#[derive(Debug, Subcommand)]
pub(crate) enum Command {
    /// Keep the plans of every model under a folder optimal until told to stop
    ///
    /// The daemon. Brings every model under DIR up to date, then watches and replans after every edit. SIGTERM or Ctrl-C ends
    /// it; SIGHUP makes it read its settings again. It logs to standard error; with --json it also writes one object per replan
    /// to standard output.
    Keep {
        /// The folder to keep
        #[arg(value_hint = ValueHint::DirPath)]
        dir: PathBuf,
        /// Only say how the daemon is that keeps DIR now; exit status 3 where none does
        #[arg(long)]
        status: bool,
    },
    /// Bring the plans of models up to date once, and exit
    ///
    /// A model whose plan is current is left as it is. Writes plans and notes, like `keep`.
    Once {
        /// Models, or folders to look through for models
        #[arg(required = true, value_name = "PATH")]
        paths: Vec<PathBuf>,
    },
    /// Read models and point at every fault; solve and write nothing
    Check {
        /// Models, or folders to look through for models
        #[arg(required = true, value_name = "PATH")]
        paths: Vec<PathBuf>,
    },
    /// Work plans out afresh and compare them with their files, byte by byte; write nothing
    ///
    /// For a check before a commit, or in continuous integration: nothing but the models is gone by, no record and no earlier
    /// plan. Says of each plan whether it is what its model gives, what differs if not, and what to do about it.
    Verify {
        /// Models or their plans, or folders to look through for both
        #[arg(required = true, value_name = "PATH")]
        paths: Vec<PathBuf>,
    },
    /// Pin the current plan as the one that the floor works to
    ///
    /// Writes NAME.release.toml. From then on every note, and `show`, says what has moved since. Only a plan that is current and
    /// unharmed is released.
    Release {
        /// The model: NAME.model.toml or NAME.model, its plan NAME.plan.toml, or NAME alone
        #[arg(value_hint = ValueHint::FilePath)]
        model: PathBuf,
    },
    /// Show a plan, or why one thing in it is as it is
    Show(Show),
    /// Turn an MPS file into a model, or a model into an MPS file
    ///
    /// The ending of each name tells which is which: `.mps` (fixed or free), `.model.toml` or, to read, `.model`. Names that MPS
    /// or a model cannot hold are changed so that they can be told apart, and kept as labels.
    Convert {
        /// The file to read
        #[arg(value_hint = ValueHint::FilePath)]
        from: PathBuf,
        /// The file to write
        #[arg(value_hint = ValueHint::FilePath)]
        to: PathBuf,
        /// Replace TO if it is there already
        #[arg(long)]
        force: bool,
    },
    /// Lay out the models of a small works to try things on
    Demo {
        /// Where to; made if it is not there
        #[arg(default_value = "tileworks", value_hint = ValueHint::DirPath)]
        dir: PathBuf,
    },
    /// Write a completion script for a shell
    ///
    /// For bash: millreeve completions bash > ~/.local/share/bash-completion/completions/millreeve
    Completions {
        /// The shell
        shell: Shell,
    },
}

/// What `show` is asked.
#[derive(Args, Debug)]
pub(crate) struct Show {
    /// The model: NAME.model.toml or NAME.model, its plan NAME.plan.toml, or NAME alone
    #[arg(value_hint = ValueHint::FilePath)]
    pub(crate) model: PathBuf,
    /// Write the plan as CSV, for a spreadsheet
    #[arg(long, conflicts_with_all = ["why", "json"])]
    pub(crate) csv: bool,
    /// Explain one activity, resource, limit or material as a sum anyone can check: NAME, or NAME.PERIOD
    #[arg(long, value_name = "NAME")]
    pub(crate) why: Option<String>,
}
