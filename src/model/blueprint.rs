//! The equations of a model as text, and what can be wrong with them.

use std::ops::Range;

use thiserror::Error;

use super::expression::{LowerError, MismatchError, SyntaxError, Table};
use crate::units::Dimension;

/// A quantity that a model takes from outside.
#[derive(Clone, Debug, PartialEq)]
pub struct Input {
    /// Its key in a station file.
    pub key: String,
    /// Its symbol in equations.
    pub symbol: String,
    /// Its dimension.
    pub dimension: Dimension,
}

/// The equations of a model as text, before they are checked.
#[derive(Clone, Debug, Default)]
pub struct Blueprint {
    /// The inputs.
    pub inputs: Vec<Input>,
    /// Published constants: name, value in SI units, dimension.
    pub constants: Vec<(String, f64, Dimension)>,
    /// Tables that the definitions look up, with the dimension of their values. Their arguments are pure
    /// numbers.
    pub tables: Vec<(Table, Dimension)>,
    /// Name and expression, in any order.
    pub definitions: Vec<(String, String)>,
    /// Quantities given by an equation that they must satisfy. The first may depend on all others; each
    /// of those on the first, and on no other.
    pub unknowns: Vec<UnknownText>,
    /// The name of the result: a definition, or the unknown.
    pub result: String,
    /// An expression that is positive where water flows; elsewhere the result is 0.
    pub flowing: Option<String>,
    /// An expression that is positive where a published curve is left and its end held.
    pub beyond: Option<String>,
    /// Expressions that are zero where another form of the equation would be chosen.
    pub borders: Vec<String>,
}

/// A scalar unknown as text.
#[derive(Clone, Debug, PartialEq)]
pub struct UnknownText {
    /// Its name.
    pub name: String,
    /// The equation it must satisfy.
    pub equation: String,
    /// The smallest value it can have; the root nearest above is meant.
    pub from: String,
    /// The largest value it can have.
    pub to: String,
    /// Only a root at which left minus right rises through zero is meant: where the equation has no value
    /// at the lower bound, another may stand before it.
    pub rising: bool,
}

/// Which text of a blueprint a fault is in.
#[derive(Clone, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Part {
    /// A definition, by name.
    Definition(String),
    /// The equation of the unknown.
    Equation,
    /// Its lower bound.
    From,
    /// Its upper bound.
    To,
    /// The name of the unknown.
    UnknownName,
    /// The name of the result.
    Result,
    /// An expression asked about the model: a limit, say.
    Expression,
}

/// What is wrong with a blueprint, and where.
#[derive(Clone, Debug, PartialEq, Error)]
#[error("{problem}")]
pub struct Fault {
    /// The text.
    pub part: Part,
    /// The bytes in that text.
    pub span: Range<usize>,
    /// What is wrong.
    pub problem: FaultProblem,
}

/// What can be wrong with a blueprint.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum FaultProblem {
    /// A text that cannot be read.
    #[error(transparent)]
    Syntax(#[from] SyntaxError),
    /// A name that means nothing.
    #[error(transparent)]
    Name(#[from] LowerError),
    /// Dimensions that do not fit.
    #[error(transparent)]
    Mismatch(#[from] MismatchError),
    /// A name that has a meaning already.
    #[error("`{0}` is defined twice")]
    Duplicate(String),
    /// Definitions that need each other.
    #[error("these definitions need each other: {}", .0.join(", "))]
    Circular(Vec<String>),
    /// The equation of the unknown does not depend on it.
    #[error("the equation does not depend on the unknown `{0}`")]
    NotInEquation(String),
    /// The result is neither a definition nor the unknown.
    #[error("nothing defines the result `{0}`")]
    NoResult(String),
}

pub(super) fn syntax_fault(part: &Part, error: SyntaxError) -> Fault {
    Fault { part: part.clone(), span: error.span.clone(), problem: error.into() }
}

pub(super) fn mismatch_fault(part: &Part, error: MismatchError) -> Fault {
    let span = error.places.first().map_or(0..0, |(span, _)| span.clone());
    Fault { part: part.clone(), span, problem: error.into() }
}
