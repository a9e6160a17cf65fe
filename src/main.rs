//! The command line of Nappe. All of it is in the library; this maps its answer to an exit status.

use std::process::ExitCode;

fn main() -> ExitCode {
    ExitCode::from(nappe::cli::run(std::env::args_os()))
}
