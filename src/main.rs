//! The command line.

use std::process::ExitCode;

fn main() -> ExitCode {
    millreeve::cli::main()
}
