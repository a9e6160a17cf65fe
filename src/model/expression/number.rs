//! Constants of an equation: exact fractions, decimals of a few places included.

use std::fmt;

use crate::units::Rational;

/// A constant. `8/15` and `0.003` are exact, so that a derivative reads `4/3` and `0.0045` and not what
/// rounding makes of them.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Number {
    /// A fraction of two whole numbers.
    Exact(Rational),
    /// A number that is none of nine decimals, by its bits so that it can be compared and hashed.
    Decimal(u64),
}

impl Number {
    /// Zero.
    pub const ZERO: Self = Self::Exact(Rational::ZERO);
    /// One.
    pub const ONE: Self = Self::Exact(Rational::ONE);

    /// The number that the shortest decimal of a floating-point number stands for.
    pub fn decimal(value: f64) -> Self {
        let text = format!("{}", value.abs());
        match Rational::from_decimal(&text) {
            Some(exact) if value < 0.0 => Self::Exact(exact.negated()),
            Some(exact) => Self::Exact(exact),
            None => Self::Decimal(value.to_bits()),
        }
    }

    /// As a floating-point number.
    pub fn value(self) -> f64 {
        match self {
            Self::Exact(fraction) => fraction.value(),
            Self::Decimal(bits) => f64::from_bits(bits),
        }
    }

    /// The fraction it is, if exact.
    pub fn as_exact(self) -> Option<Rational> {
        match self {
            Self::Exact(fraction) => Some(fraction),
            Self::Decimal(_) => None,
        }
    }

    /// Sum; exact as long as both are and nothing overflows.
    #[must_use]
    pub fn plus(self, other: Self) -> Self {
        self.combine(other, Rational::plus, |a, b| a + b)
    }

    /// Product; exact as long as both are and nothing overflows.
    #[must_use]
    pub fn times(self, other: Self) -> Self {
        self.combine(other, Rational::times, |a, b| a * b)
    }

    /// Whole power.
    #[must_use]
    pub fn power(self, exponent: i64) -> Self {
        match self.as_exact().and_then(|fraction| fraction.power(exponent)) {
            Some(fraction) => Self::Exact(fraction),
            None => Self::decimal(self.value().powf(exponent as f64)),
        }
    }

    /// Zero, of either kind.
    pub fn is_zero(self) -> bool {
        self.value() == 0.0
    }

    /// Below zero.
    pub fn is_negative(self) -> bool {
        self.value() < 0.0
    }

    fn combine(
        self,
        other: Self,
        exact: impl Fn(Rational, Rational) -> Option<Rational>,
        decimal: impl Fn(f64, f64) -> f64,
    ) -> Self {
        match (self.as_exact(), other.as_exact()) {
            (Some(a), Some(b)) => exact(a, b).map(Self::Exact),
            _ => None,
        }
        .unwrap_or_else(|| Self::decimal(decimal(self.value(), other.value())))
    }
}

impl fmt::Display for Number {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Exact(fraction) => write!(f, "{fraction}"),
            Self::Decimal(bits) => write!(f, "{:?}", f64::from_bits(*bits)),
        }
    }
}
