//! Writing results and failures.

use std::io::{IsTerminal, Write};
use std::path::{Path, PathBuf};

use super::diagnostics;
use crate::diagnostic::Diagnostic;
use crate::station::Refusal;

/// Why a command gives no answer.
#[derive(Debug)]
pub(super) enum Failure {
    /// Faults in a file: its name, its text, what was found.
    Findings { path: PathBuf, text: String, list: Vec<Diagnostic> },
    /// A question that does not fit the station, or bad usage.
    BadQuestion(String),
    /// Something that cannot be written.
    CannotWrite(String),
    /// The station gives no answer here.
    CannotBeStated(Refusal),
}

impl From<Refusal> for Failure {
    fn from(refusal: Refusal) -> Self {
        match refusal {
            Refusal::NoHead
            | Refusal::HeadNotRead
            | Refusal::NoTailwater
            | Refusal::TailwaterNotRead
            | Refusal::Equation(_) => Self::BadQuestion(refusal.to_string()),
            Refusal::Dry(_)
            | Refusal::NoSolution(_)
            | Refusal::NoPublishedSize(_)
            | Refusal::TailwaterAbove { .. }
            | Refusal::FlowJumps { .. }
            | Refusal::NoHeadForFlow { .. } => Self::CannotBeStated(refusal),
        }
    }
}

impl Failure {
    /// Says on standard error what is wrong.
    pub(super) fn report(&self) {
        let words = match self {
            Self::Findings { path, text, list } => {
                return diagnostics::print(path, text, list);
            }
            Self::BadQuestion(words) | Self::CannotWrite(words) => words.clone(),
            Self::CannotBeStated(refusal) => format!("cannot be stated: {refusal}"),
        };
        let red = anstyle::AnsiColor::Red.on_default().bold();
        let _ = writeln!(anstream::stderr(), "{red}error{red:#}: {words}");
    }
}

/// Width of tables where the output is no terminal.
const PLAIN_WIDTH: u16 = 120;
/// Narrower tables cannot be read, wider ones neither.
const WIDTHS: std::ops::RangeInclusive<u16> = 60..=160;

/// The width to draw tables for.
pub(super) fn width() -> u16 {
    if !std::io::stdout().is_terminal() {
        return PLAIN_WIDTH;
    }
    let width = terminal_size::terminal_size().map_or(PLAIN_WIDTH, |(width, _)| width.0);
    width.clamp(*WIDTHS.start(), *WIDTHS.end())
}

/// Writes a result to standard output. A reader that has closed the pipe is no error.
pub(super) fn print(text: &str) -> Result<(), Failure> {
    let mut out = anstream::stdout();
    match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        Err(error) if error.kind() != std::io::ErrorKind::BrokenPipe => {
            Err(Failure::CannotWrite(format!("standard output: {error}")))
        }
        _ => Ok(()),
    }
}

/// Writes a new file, aside first and then under its name, so that none is ever half written. A file
/// that exists is left alone.
pub(super) fn write_new(path: &Path, text: &str) -> Result<(), Failure> {
    let failed = |error: std::io::Error| {
        Failure::CannotWrite(format!("cannot write {}: {error}", path.display()))
    };
    if path.symlink_metadata().is_ok() {
        return Err(Failure::CannotWrite(format!(
            "{} exists already and is left as it is: choose another name",
            path.display()
        )));
    }
    let mut name = path.file_name().unwrap_or_default().to_os_string();
    name.push(format!(".{}.part", std::process::id()));
    let aside = path.with_file_name(name);
    let written = std::fs::File::create_new(&aside)
        .and_then(|mut file| file.write_all(text.as_bytes()).and_then(|()| file.sync_all()))
        // Unlike a rename, a link fails if the name has been taken in the meantime.
        .and_then(|()| std::fs::hard_link(&aside, path).or_else(|_| std::fs::rename(&aside, path)));
    let _ = std::fs::remove_file(&aside);
    written.map_err(failed)
}
