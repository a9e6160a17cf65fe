//! The command line: reads arguments, calls a study, hands the result to a report.
//!
//! The only place with output, exit statuses and threads. One file a command.

mod args;
mod budget;
mod check;
mod diagnostics;
mod generate;
mod new;
mod output;
mod station_file;
mod structures;

use std::ffi::OsString;

use clap::{CommandFactory, Parser};

use args::{Arguments, Command};
use output::Failure;

/// Exit status of a question that was answered.
const ANSWERED: u8 = 0;
/// Exit status of bad input or usage, or of something that cannot be read or written.
const BAD_INPUT: u8 = 2;
/// Exit status of a question that cannot be answered for this station.
const CANNOT_BE_STATED: u8 = 3;

/// Runs the program and gives its exit status.
pub fn run(arguments: impl IntoIterator<Item = OsString>) -> u8 {
    let arguments = match Arguments::try_parse_from(arguments) {
        Ok(arguments) => arguments,
        Err(error) => {
            // Help and version are answers; everything else is bad usage. A closed pipe is no error.
            let _ = error.print();
            return if error.use_stderr() { BAD_INPUT } else { ANSWERED };
        }
    };
    let outcome = match arguments.command {
        Command::Budget(command) => budget::run(&command),
        Command::Check(command) => check::run(&command),
        Command::Structures(command) => structures::run(&command),
        Command::New(command) => new::run(&command),
        Command::Completions { shell } => generate::completions(shell, Arguments::command()),
        Command::Manual => generate::manual(Arguments::command()),
        Command::Schema => generate::schema(),
    };
    match outcome {
        Ok(()) => ANSWERED,
        Err(failure) => {
            failure.report();
            match failure {
                Failure::CannotBeStated(_) => CANNOT_BE_STATED,
                _ => BAD_INPUT,
            }
        }
    }
}
