//! Limits of use: a quantity of the structure, its bound, and who set it.

use super::{Citation, Confidence};

/// Which end of what is allowed a bound is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Side {
    /// Not below the bound.
    AtLeast,
    /// Not above it.
    AtMost,
}

impl Side {
    /// The sign between quantity and bound.
    pub fn sign(self) -> &'static str {
        match self {
            Self::AtLeast => ">=",
            Self::AtMost => "<=",
        }
    }

    /// How far a value is on the right side of a bound; negative on the wrong one.
    pub fn margin(self, value: f64, bound: f64) -> f64 {
        match self {
            Self::AtLeast => value - bound,
            Self::AtMost => bound - value,
        }
    }

    /// Whether a value keeps the bound; a value at it, to rounding, does. One that is no number keeps
    /// none.
    pub fn allows(self, value: f64, bound: f64) -> bool {
        self.margin(value, bound) >= -1e-12 * bound.abs()
    }
}

/// A limit of use as a structure states it, in its symbols and SI units.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Limit {
    /// The quantity.
    pub quantity: &'static str,
    /// Which end the bound is.
    pub side: Side,
    /// The bound: a number, or an expression.
    pub bound: &'static str,
    /// What the quantity is, in words.
    pub meaning: &'static str,
    /// Who set it.
    pub source: Citation,
    /// How well the bound is known.
    pub confidence: Confidence,
}

impl Limit {
    /// A lower limit.
    pub const fn at_least(
        quantity: &'static str,
        bound: &'static str,
        meaning: &'static str,
    ) -> Unsourced {
        Unsourced { quantity, side: Side::AtLeast, bound, meaning }
    }

    /// An upper limit.
    pub const fn at_most(
        quantity: &'static str,
        bound: &'static str,
        meaning: &'static str,
    ) -> Unsourced {
        Unsourced { quantity, side: Side::AtMost, bound, meaning }
    }
}

/// A limit that has yet to say who set it.
#[derive(Clone, Copy, Debug)]
pub struct Unsourced {
    quantity: &'static str,
    side: Side,
    bound: &'static str,
    meaning: &'static str,
}

impl Unsourced {
    /// Who set the limit, and how well that is known here.
    pub const fn by(self, source: Citation, confidence: Confidence) -> Limit {
        let Self { quantity, side, bound, meaning } = self;
        Limit { quantity, side, bound, meaning, source, confidence }
    }
}
