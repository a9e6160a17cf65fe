//! A check as a page.

use super::UnitSystem;
use super::document::Document;
use crate::study::{Check, CheckedEnd};
use crate::units::{Unit, significant};

/// Lays out a check.
pub fn check_document(check: &Check, units: UnitSystem) -> Document {
    let mut page = Document::default();
    page.title(check.station.clone());
    page.paragraph(format!(
        "The file reads without error: {}, {} stated sources and {} published ones.",
        check.kind, check.stated_sources, check.automatic_sources
    ));
    let rows: Vec<Vec<String>> = check.ends.iter().map(|end| row(end, check, units)).collect();
    if rows.is_empty() {
        page.paragraph(
            "No range of heads is stated: [head] range would have it checked at both ends.",
        );
    } else {
        page.table(&["#indicated head", "#result", "limits of use that are not kept"], rows);
    }
    page.warnings(&check.warnings);
    page
}

fn row(end: &CheckedEnd, check: &Check, units: UnitSystem) -> Vec<String> {
    let unit = units.head();
    let head = end.head.map_or_else(
        || "-".to_owned(),
        |metres| format!("{} {unit}", significant(unit.from_si(metres), 4)),
    );
    let result = match &end.result {
        Ok((value, si)) => {
            let dimension = Unit::parse(si).map(|unit| unit.dimension());
            let unit = dimension.map_or_else(
                |_| Unit::one(),
                |dimension| units.result(dimension, *value, check.stated_unit.as_ref()),
            );
            format!("{} {unit}", significant(unit.from_si(*value), 4))
        }
        Err(refusal) => refusal.to_string(),
    };
    let broken: Vec<String> = end
        .broken
        .iter()
        .map(|limit| {
            let unit = if limit.unit == "1" { String::new() } else { format!(" {}", limit.unit) };
            format!(
                "{} = {}{unit}, limit {} {}{unit} ({})",
                limit.quantity,
                significant(limit.value, 3),
                limit.sign,
                significant(limit.bound, 3),
                limit.standard
            )
        })
        .collect();
    let broken = if broken.is_empty() { "none".to_owned() } else { broken.join("; ") };
    vec![head, result, broken]
}
