//! `nappe completions`, `nappe manual`, `nappe schema`: texts about the program itself.

use super::output::{self, Failure};
use crate::report::budget_schema;

pub(super) fn completions(
    shell: clap_complete::Shell,
    mut command: clap::Command,
) -> Result<(), Failure> {
    let mut out = Vec::new();
    clap_complete::generate(shell, &mut command, "nappe", &mut out);
    output::print(&String::from_utf8_lossy(&out))
}

/// The page of the program, followed by those of its commands.
pub(super) fn manual(mut command: clap::Command) -> Result<(), Failure> {
    command.build();
    let mut out = Vec::new();
    let pages = std::iter::once(&command).chain(command.get_subcommands());
    for page in pages.filter(|page| page.get_name() != "help") {
        let title = page.get_display_name().unwrap_or(page.get_name()).to_owned();
        clap_mangen::Man::new(page.clone())
            .title(title)
            .render(&mut out)
            .map_err(|error| Failure::CannotWrite(format!("the manual page: {error}")))?;
    }
    output::print(&String::from_utf8_lossy(&out))
}

pub(super) fn schema() -> Result<(), Failure> {
    output::print(&budget_schema())
}
