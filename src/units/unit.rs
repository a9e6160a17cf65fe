//! Units: reading `m3/s`, converting to SI and back.

use thiserror::Error;

use super::table::UNITS;
use super::{Dimension, Rational};
use crate::diagnostic::nearest;

/// A unit as a file or a report writes it.
#[derive(Clone, Debug, PartialEq)]
pub struct Unit {
    text: String,
    numerator: f64,
    denominator: f64,
    dimension: Dimension,
}

/// A unit that cannot be read.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum UnitError {
    /// A symbol that is not in the table.
    #[error("`{symbol}` is no unit that nappe knows")]
    Unknown {
        /// The symbol.
        symbol: String,
        /// The nearest known one.
        nearest: Option<&'static str>,
    },
    /// A symbol is missing, as in `m3/`, or an exponent cannot be read.
    #[error("the unit `{text}` cannot be read")]
    Malformed {
        /// The whole unit.
        text: String,
    },
}

/// No quantity of the trade has a larger exponent; beyond it a unit is a slip.
const LARGEST_EXPONENT: f64 = 12.0;

impl Unit {
    /// Reads a unit: symbols joined by `/`, `*`, `·` or a space, each with an optional exponent
    /// (`m3`, `m^0.5`, `m³`, `s^(-1)`); `/` divides by the next symbol only.
    ///
    /// # Errors
    ///
    /// [`UnitError`], with the nearest known symbol.
    ///
    /// ```
    /// use nappe::units::Unit;
    ///
    /// let unit = Unit::parse("Ml/d")?;
    /// assert_eq!(unit.to_si(86.4), 1.0);
    /// assert_eq!(unit.dimension().to_string(), "m3/s");
    /// # Ok::<(), nappe::units::UnitError>(())
    /// ```
    pub fn parse(text: &str) -> Result<Self, UnitError> {
        let text = text.trim();
        let malformed = || UnitError::Malformed { text: text.chars().take(40).collect() };
        if text.is_empty() || text.len() > 80 {
            return Err(malformed());
        }
        let mut unit = Self { text: text.to_owned(), ..Self::one() };
        if let Some(whole) = lookup(text) {
            return Ok(Self { text: text.to_owned(), ..whole });
        }
        let tidied = tidy(text);
        for (divides, factor) in factors(&tidied) {
            let (symbol, exponent) = split_exponent(factor).ok_or_else(malformed)?;
            if symbol.is_empty() {
                return Err(malformed());
            }
            if exponent.value().abs() > LARGEST_EXPONENT {
                return Err(malformed());
            }
            let exponent = if divides { exponent.negated() } else { exponent };
            let base = lookup(symbol).ok_or_else(|| unknown(symbol))?;
            unit = unit.times_power(&base, exponent).ok_or_else(malformed)?;
        }
        Ok(unit)
    }

    /// The unit of pure numbers, `1`.
    pub fn one() -> Self {
        Self { text: "1".to_owned(), numerator: 1.0, denominator: 1.0, dimension: Dimension::NONE }
    }

    /// The coherent SI unit of a dimension.
    pub fn si(dimension: Dimension) -> Self {
        Self { text: dimension.to_string(), dimension, ..Self::one() }
    }

    /// Its dimension.
    pub fn dimension(&self) -> Dimension {
        self.dimension
    }

    /// How it was written.
    pub fn as_str(&self) -> &str {
        &self.text
    }

    /// A number of this unit in SI units.
    pub fn to_si(&self, value: f64) -> f64 {
        value * self.numerator / self.denominator
    }

    /// A number of SI units in this unit.
    pub fn from_si(&self, value: f64) -> f64 {
        value * self.denominator / self.numerator
    }

    /// It is a ratio (`%`, `‰` or `1`).
    pub fn is_ratio(&self) -> bool {
        self.dimension.is_none()
    }

    fn times_power(mut self, base: &Self, exponent: Rational) -> Option<Self> {
        let power = exponent.value();
        if exponent.is_negative() {
            self.numerator *= base.denominator.powf(-power);
            self.denominator *= base.numerator.powf(-power);
        } else {
            self.numerator *= base.numerator.powf(power);
            self.denominator *= base.denominator.powf(power);
        }
        self.dimension = self.dimension.times(base.dimension.power(exponent)?)?;
        let sane = |value: f64| value.is_finite() && value > 0.0;
        (sane(self.numerator) && sane(self.denominator)).then_some(self)
    }
}

impl std::fmt::Display for Unit {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(&self.text)
    }
}

fn lookup(symbol: &str) -> Option<Unit> {
    let entry = UNITS.iter().find(|entry| entry.spellings.contains(&symbol))?;
    Some(Unit {
        text: symbol.to_owned(),
        numerator: entry.numerator,
        denominator: entry.denominator,
        dimension: entry.dimension,
    })
}

fn unknown(symbol: &str) -> UnitError {
    let spellings = UNITS.iter().flat_map(|entry| entry.spellings.iter().copied());
    let folded = spellings.clone().find(|known| known.eq_ignore_ascii_case(symbol));
    UnitError::Unknown {
        symbol: symbol.to_owned(),
        nearest: folded.or_else(|| nearest(symbol, spellings)),
    }
}

/// The symbols of a unit, each with whether it divides; an empty symbol where one is missing. A sign in
/// brackets belongs to an exponent.
fn factors(text: &str) -> Vec<(bool, &str)> {
    let mut result = Vec::new();
    let mut divides = false;
    let mut start = 0;
    for (index, sign) in text.match_indices(['/', '*', '·', ' ']) {
        let before = &text[start..index];
        if before.contains('(') && !before.contains(')') {
            continue;
        }
        result.push((divides, before));
        divides = sign == "/";
        start = index + sign.len();
    }
    result.push((divides, &text[start..]));
    result
}

/// One space between symbols that stand side by side, none around a sign.
fn tidy(text: &str) -> String {
    let mut tidy = text.split_whitespace().collect::<Vec<_>>().join(" ");
    for sign in ["/", "*", "·"] {
        tidy = tidy.replace(&format!(" {sign}"), sign).replace(&format!("{sign} "), sign);
    }
    tidy
}

/// Splits `m3`, `m^0.5`, `m³` or `s^(-1)` into symbol and exponent.
fn split_exponent(factor: &str) -> Option<(&str, Rational)> {
    if lookup(factor).is_some() {
        return Some((factor, Rational::ONE));
    }
    if let Some((symbol, exponent)) = factor.split_once('^') {
        let exponent = exponent.trim_start_matches('(').trim_end_matches(')');
        return Some((symbol, signed_fraction(exponent)?));
    }
    let digits = factor.trim_start_matches(|letter: char| !is_exponent_digit(letter));
    let symbol = &factor[..factor.len() - digits.len()];
    if digits.is_empty() {
        return Some((symbol, Rational::ONE));
    }
    let plain: String = digits.chars().map(plain_digit).collect();
    Some((symbol, Rational::whole(plain.parse().ok()?)))
}

fn signed_fraction(text: &str) -> Option<Rational> {
    let (negative, text) = text.strip_prefix('-').map_or((false, text), |rest| (true, rest));
    let value = match text.split_once('/') {
        Some((above, below)) => {
            Rational::from_decimal(above)?.times(Rational::from_decimal(below)?.reciprocal()?)?
        }
        None => Rational::from_decimal(text)?,
    };
    Some(if negative { value.negated() } else { value })
}

const SUPERSCRIPTS: &str = "⁰¹²³⁴⁵⁶⁷⁸⁹";

fn is_exponent_digit(letter: char) -> bool {
    letter.is_ascii_digit() || letter == '-' || letter == '⁻' || SUPERSCRIPTS.contains(letter)
}

fn plain_digit(letter: char) -> char {
    match SUPERSCRIPTS.chars().position(|each| each == letter) {
        Some(digit) => char::from_digit(digit as u32, 10).unwrap_or(letter),
        None if letter == '⁻' => '-',
        None => letter,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Conversions from NIST SP 811 (2008), appendix B, to the digits printed there.
    #[test]
    fn us_customary_units_have_their_published_size() {
        let si = |text: &str| Unit::parse(text).unwrap().to_si(1.0);
        let close = |value: f64, printed: f64| (value / printed - 1.0).abs() < 5e-7;
        assert_eq!(si("ft"), 0.3048);
        assert_eq!(si("in"), 0.0254);
        assert!(close(si("cfs"), 2.831685e-2));
        assert!(close(si("ft3/s"), 2.831685e-2));
        assert!(close(si("gpm"), 6.309020e-5));
        assert!(close(si("gal/min"), 6.309020e-5));
        assert!(close(si("mgd"), 4.381264e-2));
        assert!(close(si("acre-ft"), 1233.4818));
    }

    #[test]
    fn compound_units_read_in_every_spelling() {
        for text in ["m3/s", "m^3/s", "m³/s", "m³·s⁻¹", "m3 s-1", "m3 / s"] {
            assert_eq!(Unit::parse(text).unwrap().dimension(), Dimension::DISCHARGE, "{text}");
        }
        assert_eq!(Unit::parse("m^0.5/s").unwrap().dimension().to_string(), "m^0.5/s");
        let third = Unit::parse("m^(1/3)/s").unwrap().dimension();
        assert_eq!(Unit::parse(&third.to_string()).unwrap().dimension(), third);
        assert_eq!(Unit::parse("Pa s").unwrap().dimension().to_string(), "kg/m/s");
        assert_eq!(Unit::parse("1/s").unwrap().dimension().to_string(), "1/s");
    }

    #[test]
    fn nonsense_is_refused_with_the_nearest_unit() {
        for text in ["", "m3/", "/s", "m//s", "m^", "m^x", "m^(1/0)", "m^999999999"] {
            assert!(Unit::parse(text).is_err(), "{text}");
        }
        let Err(UnitError::Unknown { nearest, .. }) = Unit::parse("CFS") else {
            panic!("an unknown unit")
        };
        assert_eq!(nearest, Some("cfs"));
    }
}
