//! Exact fractions, for exponents and for numbers such as 8/15.

use std::fmt;

/// A fraction in lowest terms with a positive denominator.
///
/// Arithmetic that would overflow gives `None`; callers fall back to floating point or refuse.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Rational {
    numerator: i64,
    denominator: i64,
}

/// Decimals of at most nine places are written as such.
const NINE_PLACES: i64 = 1_000_000_000;

impl Rational {
    /// Zero.
    pub const ZERO: Self = Self::whole(0);
    /// One.
    pub const ONE: Self = Self::whole(1);
    /// One half.
    pub const HALF: Self = Self { numerator: 1, denominator: 2 };

    /// A whole number.
    pub const fn whole(value: i64) -> Self {
        Self { numerator: value, denominator: 1 }
    }

    /// `numerator / denominator` in lowest terms; `None` for a zero denominator.
    pub fn new(numerator: i64, denominator: i64) -> Option<Self> {
        Self::reduced(i128::from(numerator), i128::from(denominator))
    }

    fn reduced(numerator: i128, denominator: i128) -> Option<Self> {
        if denominator == 0 {
            return None;
        }
        let divisor = greatest_common_divisor(numerator.abs(), denominator.abs()).max(1);
        let sign = denominator.signum();
        Some(Self {
            numerator: i64::try_from(sign * numerator / divisor).ok()?,
            denominator: i64::try_from(sign * denominator / divisor).ok()?,
        })
    }

    /// The exact value of a decimal literal such as `1.522`; `None` beyond nine decimals, or where it
    /// does not fit.
    pub fn from_decimal(text: &str) -> Option<Self> {
        let (whole, fraction) = text.split_once('.').unwrap_or((text, ""));
        if whole.len() > 19 || fraction.len() > 9 || (whole.is_empty() && fraction.is_empty()) {
            return None;
        }
        let digits = format!("{whole}{fraction}");
        if !digits.bytes().all(|byte| byte.is_ascii_digit()) {
            return None;
        }
        Self::reduced(digits.parse().ok()?, 10_i128.pow(u32::try_from(fraction.len()).ok()?))
    }

    /// Sum.
    pub fn plus(self, other: Self) -> Option<Self> {
        let [a, b, c, d] = self.wide(other);
        Self::reduced(a * d + c * b, b * d)
    }

    /// Product.
    pub fn times(self, other: Self) -> Option<Self> {
        let [a, b, c, d] = self.wide(other);
        Self::reduced(a * c, b * d)
    }

    /// `1 / self`; `None` for zero.
    pub fn reciprocal(self) -> Option<Self> {
        Self::new(self.denominator, self.numerator)
    }

    /// Whole power; `None` on overflow or for a negative power of zero.
    pub fn power(self, exponent: i64) -> Option<Self> {
        if exponent < 0 {
            return self.reciprocal()?.power(exponent.checked_neg()?);
        }
        let mut result = Self::ONE;
        for _ in 0..exponent.min(64) {
            result = result.times(self)?;
        }
        (exponent <= 64).then_some(result)
    }

    /// `-self`.
    #[must_use]
    pub fn negated(self) -> Self {
        // Lowest terms never hold i64::MIN: reduced() goes through i128 and refuses it above.
        Self { numerator: self.numerator.saturating_neg(), denominator: self.denominator }
    }

    /// The numerator, which carries the sign.
    pub fn numerator(self) -> i64 {
        self.numerator
    }

    /// The denominator, positive.
    pub fn denominator(self) -> i64 {
        self.denominator
    }

    /// The whole number it is, if it is one.
    pub fn as_whole(self) -> Option<i64> {
        (self.denominator == 1).then_some(self.numerator)
    }

    /// The nearest floating-point number.
    pub fn value(self) -> f64 {
        self.numerator as f64 / self.denominator as f64
    }

    /// Below zero.
    pub fn is_negative(self) -> bool {
        self.numerator < 0
    }

    fn wide(self, other: Self) -> [i128; 4] {
        [self.numerator, self.denominator, other.numerator, other.denominator].map(i128::from)
    }
}

impl fmt::Display for Rational {
    /// A decimal of at most nine places is written as one (`1.5`), anything else as a fraction (`8/15`).
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.denominator == 1 {
            write!(f, "{}", self.numerator)
        } else if NINE_PLACES % self.denominator == 0 {
            // In whole numbers, so that every digit is exact.
            let scaled = i128::from(self.numerator) * i128::from(NINE_PLACES / self.denominator);
            let sign = if scaled < 0 { "-" } else { "" };
            let (whole, part) =
                (scaled.abs() / i128::from(NINE_PLACES), scaled.abs() % i128::from(NINE_PLACES));
            let digits = format!("{part:09}");
            write!(f, "{sign}{whole}.{}", digits.trim_end_matches('0'))
        } else {
            write!(f, "{}/{}", self.numerator, self.denominator)
        }
    }
}

fn greatest_common_divisor(a: i128, b: i128) -> i128 {
    if b == 0 { a } else { greatest_common_divisor(b, a % b) }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn fractions_reduce_and_print_as_people_write_them() {
        let eight_fifteenths = Rational::new(-16, -30).unwrap();
        assert_eq!(eight_fifteenths.to_string(), "8/15");
        let by_five_halves = eight_fifteenths.times(Rational::new(5, 2).unwrap()).unwrap();
        assert_eq!(by_five_halves.to_string(), "4/3");
        assert_eq!(Rational::new(3, 2).unwrap().to_string(), "1.5");
        assert_eq!(Rational::from_decimal("1.522").unwrap(), Rational::new(761, 500).unwrap());
    }

    #[test]
    fn overflow_is_refused() {
        let large = Rational::whole(i64::MAX);
        assert_eq!(large.times(Rational::whole(2)), None);
        assert_eq!(Rational::new(1, 0), None);
        assert_eq!(Rational::ZERO.reciprocal(), None);
    }
}
