//! The sheet of a structure, and the list of all, as pages.

use super::FROM_MEMORY;
use super::document::Document;
use crate::study::{NumberLine, RegimeSheet, Sheet, TableSheet};
use crate::units::significant;

/// Lays out the sheet of a structure.
pub fn sheet_document(sheet: &Sheet) -> Document {
    let mut page = Document::default();
    page.title(format!("{}: {}", sheet.kind, sheet.title));
    page.paragraph(sheet.standard.clone());
    if let Some(example) = &sheet.example {
        page.paragraph(example.clone());
    }
    page.heading("Inputs");
    page.table(
        &["key", "symbol", "SI unit", "meaning"],
        sheet.inputs.iter().map(|cells| cells.to_vec()).collect(),
    );
    page.paragraph(format!("Velocity of approach: {}.", sheet.velocity_of_approach));
    for regime in &sheet.regimes {
        regime_part(&mut page, regime, sheet.regimes.len() > 1);
    }
    if !sheet.drowned.is_empty() {
        page.heading("Drowned flow, with [tailwater]");
    }
    for drowned in &sheet.drowned {
        page.paragraph(format!(
            "drowned_flow = \"{}\": {}. {}, {}.",
            drowned.name, drowned.when, drowned.source, drowned.confidence
        ));
        page.lines(drowned.equations.iter().map(|line| format!("{} = {}", line.name, line.text)));
    }
    page.heading("Checks besides the limits of use");
    page.table(NUMBER_COLUMNS, sheet.checks.iter().map(number_row).collect());
    page.heading("Published numbers");
    page.table(NUMBER_COLUMNS, sheet.numbers.iter().map(number_row).collect());
    page.paragraph(FROM_MEMORY);
    for table in &sheet.tables {
        table_part(&mut page, table);
    }
    page
}

const NUMBER_COLUMNS: &[&str] = &["what", "value", "source", "confidence"];

fn number_row(line: &NumberLine) -> Vec<String> {
    vec![line.what.clone(), line.value.clone(), line.source.clone(), line.confidence.clone()]
}

fn regime_part(page: &mut Document, regime: &RegimeSheet, several: bool) {
    if several {
        page.heading(format!("Equation, {}", regime.name));
        page.paragraph(format!("When {}.", regime.when));
    } else {
        page.heading("Equation");
    }
    page.lines(regime.equations.iter().map(|line| format!("{} = {}", line.name, line.text)));
    page.heading("Derivatives");
    page.lines(regime.derivatives.iter().map(|line| format!("{} = {}", line.name, line.text)));
    let has = |start: &str| regime.derivatives.iter().any(|line| line.name.starts_with(start));
    if has("∂F") {
        page.paragraph(
            "In parts, each with the other names held. The chain rule joins them, and the implicit-function \
             theorem: for y that is the root of F, dy/dx = -(dF/dx)/(dF/dy).",
        );
    } else if has("dF") {
        page.paragraph(
            "By the implicit-function theorem: for y that is the root of F, dy/dx = -(∂F/∂x)/(∂F/∂y).",
        );
    }
    page.heading("Limits of use and uncertainty of the coefficient");
    let rows = regime.limits.iter().chain(&regime.coefficient).map(number_row).collect();
    page.table(NUMBER_COLUMNS, rows);
}

fn table_part(page: &mut Document, table: &TableSheet) {
    page.paragraph(format!(
        "Table {}. Values in {}; {}, {}.",
        table.what, table.unit, table.source, table.confidence
    ));
    let mut columns = vec![table.arguments.join(" \\ ")];
    if table.columns.is_empty() {
        columns.push("#value".to_owned());
    } else {
        columns.extend(table.columns.iter().map(|node| format!("#{node}")));
    }
    let columns: Vec<&str> = columns.iter().map(String::as_str).collect();
    let rows = table
        .rows
        .iter()
        .map(|(node, values)| {
            let number = |value: &Option<f64>| {
                value.map_or_else(|| "-".to_owned(), |value| significant(value, 5))
            };
            std::iter::once(node.clone()).chain(values.iter().map(number)).collect()
        })
        .collect();
    page.table(&columns, rows);
}

/// Lays out the list of structures.
pub fn catalogue_document(sheets: &[Sheet]) -> Document {
    let mut page = Document::default();
    page.title("Structures");
    let mut rows: Vec<Vec<String>> = sheets
        .iter()
        .map(|sheet| vec![sheet.kind.clone(), sheet.title.clone(), sheet.standard.clone()])
        .collect();
    rows.push(vec![
        "equation".to_owned(),
        "An equation of your own, of any dimension".to_owned(),
        "docs/station-file.md has its keys".to_owned(),
    ]);
    page.table(&["kind", "what it is", "standard"], rows);
    page.paragraph("`nappe structures KIND` shows one in full, `nappe new KIND` starts a file.");
    page
}
