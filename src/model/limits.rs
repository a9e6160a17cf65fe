//! Limits of use: a quantity of the structure, its bound, and who set it.

use super::{Citation, Confidence};

/// One end of what a standard allows, in SI units.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Bound {
    /// Not below this.
    AtLeast(f64),
    /// Not above this.
    AtMost(f64),
}

impl Bound {
    /// The number.
    pub fn value(self) -> f64 {
        match self {
            Self::AtLeast(value) | Self::AtMost(value) => value,
        }
    }

    /// The sign between quantity and bound.
    pub fn sign(self) -> &'static str {
        match self {
            Self::AtLeast(_) => ">=",
            Self::AtMost(_) => "<=",
        }
    }

    /// Whether a value keeps the bound; a value at it, to rounding, does.
    pub fn allows(self, value: f64) -> bool {
        let slack = 1e-12 * self.value().abs();
        match self {
            Self::AtLeast(bound) => value >= bound - slack,
            Self::AtMost(bound) => value <= bound + slack,
        }
    }
}

/// A limit of use as a structure states it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Limit {
    /// The quantity, in the symbols of the structure.
    pub quantity: &'static str,
    /// The bound.
    pub bound: Bound,
    /// What the quantity is, in words.
    pub meaning: &'static str,
    /// Who set it.
    pub source: Citation,
    /// How well the bound is known.
    pub confidence: Confidence,
}

impl Limit {
    /// A lower limit.
    pub const fn at_least(quantity: &'static str, bound: f64, meaning: &'static str) -> Unsourced {
        Unsourced { quantity, bound: Bound::AtLeast(bound), meaning }
    }

    /// An upper limit.
    pub const fn at_most(quantity: &'static str, bound: f64, meaning: &'static str) -> Unsourced {
        Unsourced { quantity, bound: Bound::AtMost(bound), meaning }
    }
}

/// A limit that has yet to say who set it.
#[derive(Clone, Copy, Debug)]
pub struct Unsourced {
    quantity: &'static str,
    bound: Bound,
    meaning: &'static str,
}

impl Unsourced {
    /// Who set the limit, and how well that is known here.
    pub const fn by(self, source: Citation, confidence: Confidence) -> Limit {
        let Self { quantity, bound, meaning } = self;
        Limit { quantity, bound, meaning, source, confidence }
    }
}
