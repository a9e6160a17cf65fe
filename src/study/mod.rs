//! The questions people ask of a station. Each study gives plain data that a report lays out.

mod at;
mod budget;
mod check;
mod limits;
mod sheet;
mod warnings;

pub use at::At;
pub use budget::{
    Budget, BudgetRow, Correction, InputRow, MonteCarloPart, Question, ResultPart, budget,
};
pub use check::{Check, CheckedEnd, check};
pub use limits::LimitState;
pub use sheet::{DerivativeLine, EquationLine, NumberLine, RegimeSheet, Sheet, TableSheet, sheet};
