//! The questions people ask of a station. Each study gives plain data that a report lays out.

mod answer;
mod at;
mod budget;
mod check;
mod hydraulics;
mod limits;
mod range;
mod sheet;
mod warnings;

pub use at::At;
pub use budget::{
    Budget, BudgetRow, Correction, EquationRow, InputRow, MonteCarloPart, Question, ResultPart,
    budget,
};
pub use check::{Check, CheckedEnd, check};
pub use hydraulics::{FlowState, Hydraulics};
pub use limits::{Asked, LimitState};
pub use range::FailingLimit;
pub use sheet::{
    DerivativeLine, DrownedSheet, EquationLine, NumberLine, RegimeSheet, Sheet, TableSheet, sheet,
};
