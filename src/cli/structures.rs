//! `nappe structures`.

use super::args::{Format, StructuresArgs};
use super::output::{self, Failure};
use crate::diagnostic::nearest;
use crate::model::structures::{CATALOGUE, Structure, find};
use crate::report;
use crate::study::{Sheet, sheet};

pub(super) fn run(arguments: &StructuresArgs) -> Result<(), Failure> {
    let (page, json) = if let Some(kind) = &arguments.kind {
        let sheet = sheet(find_structure(kind)?);
        (report::sheet_document(&sheet), report::sheet_json(&sheet))
    } else {
        let sheets: Vec<Sheet> = CATALOGUE.iter().map(|structure| sheet(structure)).collect();
        (report::catalogue_document(&sheets), report::sheets_json(&sheets))
    };
    output::print(&match arguments.format {
        Format::Table => report::text(&page, output::width()),
        Format::Markdown => report::markdown(&page),
        Format::Json => json,
        Format::Csv => {
            let words = "the catalogue has no CSV: choose table, json or markdown";
            return Err(Failure::BadQuestion(words.to_owned()));
        }
    })
}

/// The structure of a kind, or the nearest kind as a hint.
pub(super) fn find_structure(kind: &str) -> Result<&'static Structure, Failure> {
    find(kind).ok_or_else(|| {
        let kinds = CATALOGUE.iter().map(|structure| structure.kind);
        let hint = match (kind, nearest(kind, kinds.clone())) {
            ("equation", _) => {
                "an equation of your own has no sheet: `nappe new equation` shows its keys"
                    .to_owned()
            }
            (_, Some(near)) => format!("the nearest is `{near}`"),
            (_, None) => format!("kinds: {}, equation", kinds.collect::<Vec<_>>().join(", ")),
        };
        let shown: String = kind.chars().filter(|c| !c.is_control()).take(60).collect();
        Failure::BadQuestion(format!("`{shown}` is no kind with a sheet; {hint}"))
    })
}
