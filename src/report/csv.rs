//! A budget as CSV: one row a source, SI units, full precision.

use crate::study::{Budget, BudgetRow};

/// Renders the ranked sources as CSV with a header line.
///
/// The results stand in rows of their own after the sources, with the rank left empty.
pub fn budget_csv(budget: &Budget) -> String {
    let mut out = String::new();
    let header = [
        "rank",
        "source",
        "acts_on",
        "size",
        "standard_uncertainty",
        "unit",
        "degrees_of_freedom",
        "sensitivity",
        "contribution",
        "contribution_unit",
        "share_linear",
        "share_first_order",
        "share_total",
        "fixed_until",
        "evidence",
    ];
    line(&mut out, &header.map(str::to_owned));
    for row in &budget.rows {
        line(&mut out, &source_cells(row, budget));
    }
    let linear = &budget.linear;
    let mut results = vec![
        ("corrected value", linear.value),
        ("indicated value", linear.indicated),
        ("combined standard uncertainty", linear.standard_uncertainty),
        ("expanded uncertainty", budget.expanded_uncertainty),
    ];
    if let Some(part) = &budget.monte_carlo {
        let statistics = part.result.outputs[0];
        results.extend([
            ("Monte Carlo mean", statistics.mean),
            ("Monte Carlo standard uncertainty", statistics.standard_uncertainty),
            ("Monte Carlo interval low", statistics.intervals.symmetric[0]),
            ("Monte Carlo interval high", statistics.intervals.symmetric[1]),
        ]);
    }
    for (name, value) in results {
        let mut cells = vec![String::new(); header.len()];
        name.clone_into(&mut cells[1]);
        cells[8] = number(value);
        cells[9] = budget.result.unit.to_string();
        line(&mut out, &cells);
    }
    out
}

fn source_cells(row: &BudgetRow, budget: &Budget) -> Vec<String> {
    vec![
        row.rank.to_string(),
        row.name.clone(),
        row.acts_on.join(" "),
        row.size.clone(),
        number(row.standard_uncertainty),
        row.unit.clone(),
        if row.degrees_of_freedom.is_finite() {
            number(row.degrees_of_freedom)
        } else {
            String::new()
        },
        number(row.sensitivity),
        number(row.contribution),
        budget.result.unit.to_string(),
        number(row.share_linear),
        row.share.map_or_else(String::new, |share| number(share.first_order)),
        row.share.map_or_else(String::new, |share| number(share.total)),
        row.fixed_until.clone(),
        row.evidence.evidence.clone().unwrap_or_default(),
    ]
}

/// The shortest text that reads back as the same number.
fn number(value: f64) -> String {
    format!("{value:?}")
}

/// One line, quoted where it must be (RFC 4180).
fn line(out: &mut String, cells: &[String]) {
    let quoted = |cell: &String| {
        // A cell that a spreadsheet would take for a formula is text to it with a quote before.
        let cell = match cell.chars().next() {
            Some('=' | '@') => format!("'{cell}"),
            _ => cell.clone(),
        };
        if cell.contains([',', '"', '\n', '\r']) {
            format!("\"{}\"", cell.replace('"', "\"\""))
        } else {
            cell
        }
    };
    let cells: Vec<String> = cells.iter().map(quoted).collect();
    out.push_str(&cells.join(","));
    out.push('\n');
}
