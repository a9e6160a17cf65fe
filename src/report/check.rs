//! A check as a page.

use super::UnitSystem;
use super::document::Document;
use super::heads::heads_in_words;
use crate::study::{Check, CheckedEnd, FailingLimit, LimitState};
use crate::units::{Unit, significant, with_unit};

/// Lays out a check.
pub fn check_document(check: &Check, units: UnitSystem) -> Document {
    let mut page = Document::default();
    page.title(check.station.clone());
    page.paragraph(format!(
        "The file reads without error: {}, {} stated and {} published.",
        check.kind,
        counted(check.stated_sources),
        check.automatic_sources
    ));
    let rows: Vec<Vec<String>> = check.ends.iter().map(|end| row(end, check, units)).collect();
    if rows.is_empty() {
        page.paragraph(
            "No range of heads is stated: [head] range would have it checked at both ends.",
        );
    } else {
        page.table(&["#indicated head", "#result", "limits that are not kept"], rows);
    }
    match &check.failing {
        Some(failing) if failing.is_empty() => {
            page.paragraph("Every limit that is tested is kept at every head of the range.");
        }
        Some(failing) => {
            let rows = failing.iter().map(|each| failing_row(each, units)).collect();
            page.table(&["limit", "what it is", "heads at which it is not kept", "source"], rows);
        }
        None => {}
    }
    if check.modular_not_tested {
        page.paragraph("Modular flow is not tested: the file states no [tailwater].");
    }
    for misfit in &check.misfits {
        page.paragraph(format!("NOT KEPT: {}", limit_in_words(misfit)));
    }
    page.warnings(&check.warnings);
    page
}

fn failing_row(failing: &FailingLimit, units: UnitSystem) -> Vec<String> {
    let limit = &failing.limit;
    vec![
        format!("{} {} {}", limit.quantity, limit.side.sign(), limit.bound),
        limit.meaning.clone(),
        heads_in_words(&failing.heads, &units.head()),
        format!("{}, {}", limit.source.document, limit.confidence.words()),
    ]
}

fn limit_in_words(state: &LimitState) -> String {
    let number = |value: f64| with_unit(significant(value, 3), &state.unit);
    let limit = &state.limit;
    format!(
        "{} ({}) = {}, limit {} {} ({})",
        limit.quantity,
        limit.meaning,
        number(state.value),
        limit.side.sign(),
        number(state.bound),
        limit.source.document
    )
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
    let broken: Vec<String> = end.broken.iter().map(limit_in_words).collect();
    let broken = match (&end.result, broken.is_empty()) {
        (Err(_), _) => "not tested".to_owned(),
        (Ok(_), true) => "none".to_owned(),
        (Ok(_), false) => broken.join("; "),
    };
    vec![head, result, broken]
}

fn counted(sources: usize) -> String {
    if sources == 1 { "1 source".to_owned() } else { format!("{sources} sources") }
}
