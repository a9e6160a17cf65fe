//! `nappe check`.

use super::args::CheckArgs;
use super::output::{self, Failure};
use super::station_file;
use crate::report::{check_document, text};
use crate::study::check;

pub(super) fn run(arguments: &CheckArgs) -> Result<(), Failure> {
    let station = station_file::open(&arguments.station)?;
    let page = check_document(&check(&station), arguments.units.into());
    output::print(&text(&page, output::width()))
}
