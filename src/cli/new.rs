//! `nappe new`.

use super::args::NewArgs;
use super::output::{self, Failure};
use super::structures::find_structure;
use crate::station::{equation_template, template};

pub(super) fn run(arguments: &NewArgs) -> Result<(), Failure> {
    let text = match arguments.kind.as_str() {
        "equation" => equation_template(),
        kind => template(find_structure(kind)?),
    };
    match &arguments.output {
        None => output::print(&text),
        Some(path) => output::write_new(path, &text),
    }
}
