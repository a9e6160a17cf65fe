//! Quantities with run-time units: dimensions, the table of units, and reading `"3 mm"`.
//!
//! Inside the program every number is in coherent SI units; units live at the edges, here.

mod dimension;
mod quantity;
mod rational;
mod significant;
mod table;
mod unit;

pub use dimension::Dimension;
pub(crate) use quantity::is_plausible;
pub use quantity::{Quantity, QuantityError, QuantityProblem, parse_number};
pub use rational::Rational;
pub use significant::{significant, with_unit};
pub use unit::{Unit, UnitError};
