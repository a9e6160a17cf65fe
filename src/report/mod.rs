//! Results laid out: terminal text, Markdown, CSV and JSON. Nothing is computed here but roundings.
//!
//! A study's result becomes a [`Document`] (headings, tables, lines), and a document becomes text or
//! Markdown; CSV and JSON carry the result's numbers in full precision.

mod budget;
mod check;
mod csv;
mod document;
mod heads;
mod json;
mod markdown;
mod rounding;
mod sheet;
mod text;
mod unit_system;

pub use budget::budget_document;
pub use check::check_document;
pub use csv::budget_csv;
pub use document::{Block, Document};
pub use json::{BudgetJson, budget_json, budget_schema, sheet_json, sheets_json};
pub use markdown::markdown;
pub use rounding::{Rounded, rounded};
pub use sheet::{catalogue_document, sheet_document};
pub use text::text;
pub use unit_system::UnitSystem;

/// What marks of memory mean, on every page that has them.
const FROM_MEMORY: &str = "\"From memory\": quoted without the document in hand; confirm against your copy of \
                           the standard. \"Doubtful\": do not rely on it without the standard.";

/// What every report says at its end.
pub const CAUTION: &str = "Results support, and never replace, local codes, the permit and licensed \
                           practice. Work in and beside water is dangerous.";
