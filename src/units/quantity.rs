//! Quantities: a number with its unit, as files and the command line write them.

use std::ops::Range;

use super::{Dimension, Unit, UnitError};

/// A number with its unit.
#[derive(Clone, Debug, PartialEq)]
pub struct Quantity {
    /// The number in coherent SI units.
    pub value: f64,
    /// The unit it was stated in.
    pub unit: Unit,
}

/// Why a text is no quantity, and which part of it.
#[derive(Clone, Debug, PartialEq)]
pub struct QuantityError {
    /// What is wrong.
    pub problem: QuantityProblem,
    /// The bytes of the text that are meant.
    pub range: Range<usize>,
}

/// What can be wrong with a quantity.
#[derive(Clone, Debug, PartialEq)]
pub enum QuantityProblem {
    /// It does not start with a number.
    NoNumber,
    /// A decimal comma; the text as it should be.
    DecimalComma(String),
    /// Not finite, or beyond 1e15 or below 1e-15 in size: a slip in any station.
    OutOfRange,
    /// The unit cannot be read.
    Unit(UnitError),
}

/// Larger numbers, or smaller ones other than zero, are slips of the pen.
const LARGEST: f64 = 1e15;

impl Quantity {
    /// Reads `"0.45 m"`, `"8 %"` or, without unit, `"1.2"`.
    ///
    /// # Errors
    ///
    /// [`QuantityError`] with the part of the text that is wrong.
    ///
    /// ```
    /// use nappe::units::Quantity;
    ///
    /// assert_eq!(Quantity::parse("3 mm").unwrap().value, 0.003);
    /// assert!(Quantity::parse("0,45 m").is_err());
    /// ```
    pub fn parse(text: &str) -> Result<Self, QuantityError> {
        let (number, rest) = parse_number(text)?;
        let unit_text = rest.trim();
        let unit = if unit_text.is_empty() { Ok(Unit::one()) } else { Unit::parse(unit_text) };
        let unit = unit.map_err(|error| {
            let start = text.len() - rest.trim_start().len();
            QuantityError {
                problem: QuantityProblem::Unit(error),
                range: start..start + unit_text.len(),
            }
        })?;
        Ok(Self { value: unit.to_si(number), unit })
    }

    /// Its dimension.
    pub fn dimension(&self) -> Dimension {
        self.unit.dimension()
    }
}

/// Reads the number at the start of a text, and gives it with what follows.
///
/// # Errors
///
/// [`QuantityError`]: no number, a decimal comma, or a number that no station can have.
pub fn parse_number(text: &str) -> Result<(f64, &str), QuantityError> {
    let start = text.len() - text.trim_start().len();
    let length = number_length(&text[start..]);
    let end = start + length;
    let error = |problem, range| Err(QuantityError { problem, range });
    let rest = &text[end..];
    let digits_after_comma = rest
        .strip_prefix(',')
        .map_or(0, |tail| tail.bytes().take_while(u8::is_ascii_digit).count());
    if digits_after_comma > 0 {
        let mended = format!("{}.{}", text[..end].trim_start(), &rest[1..]);
        return error(QuantityProblem::DecimalComma(mended), start..end + 1 + digits_after_comma);
    }
    let token: String = text[start..].chars().take_while(|c| !c.is_whitespace()).collect();
    let bare = token.trim_start_matches(['+', '-', '−']).to_ascii_lowercase();
    if bare == "nan" || bare == "inf" || bare == "infinity" {
        return error(QuantityProblem::OutOfRange, start..start + token.len());
    }
    let Ok(number) = text[start..end].replace('−', "-").parse::<f64>() else {
        return error(QuantityProblem::NoNumber, start..start + token.len());
    };
    if !is_plausible(number) {
        return error(QuantityProblem::OutOfRange, start..end);
    }
    Ok((number, rest))
}

/// Finite, and of a size that a measurement can have.
pub(crate) fn is_plausible(number: f64) -> bool {
    number == 0.0 || (1.0 / LARGEST..=LARGEST).contains(&number.abs())
}

/// How many bytes at the start of a text belong to a number: sign, digits, point, exponent.
fn number_length(text: &str) -> usize {
    let sign = text.chars().next().filter(|c| matches!(c, '+' | '-' | '−'));
    let mut length = sign.map_or(0, char::len_utf8);
    let digits = |from: usize| text[from..].bytes().take_while(u8::is_ascii_digit).count();
    let whole = digits(length);
    length += whole;
    let mut seen = whole;
    if text[length..].starts_with('.') {
        let fraction = digits(length + 1);
        seen += fraction;
        if seen > 0 {
            length += 1 + fraction;
        }
    }
    if seen == 0 {
        return 0;
    }
    if text[length..].starts_with(['e', 'E']) {
        let sign = usize::from(text[length + 1..].starts_with(['+', '-']));
        let exponent = digits(length + 1 + sign);
        if exponent > 0 {
            length += 1 + sign + exponent;
        }
    }
    length
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn quantities_read_with_one_rounding() {
        for (text, value) in [
            ("0.45 m", 0.45),
            ("3 mm", 0.003),
            ("3mm", 0.003),
            ("-5 mm", -0.005),
            ("−5 mm", -0.005),
            ("1e-3 m", 0.001),
            ("12 l/s", 0.012),
            ("8 %", 0.08),
            ("1.2", 1.2),
            (" 2.5 ft ", 0.762),
            ("90 deg", std::f64::consts::FRAC_PI_2),
        ] {
            assert_eq!(Quantity::parse(text).unwrap().value, value, "{text}");
        }
    }

    #[test]
    fn slips_are_named() {
        let problem = |text: &str| Quantity::parse(text).unwrap_err().problem;
        assert_eq!(problem("0,45 m"), QuantityProblem::DecimalComma("0.45 m".into()));
        assert_eq!(problem("nan m"), QuantityProblem::OutOfRange);
        assert_eq!(problem("-inf m"), QuantityProblem::OutOfRange);
        assert_eq!(problem("1e308 m"), QuantityProblem::OutOfRange);
        assert_eq!(problem("1e999 m"), QuantityProblem::OutOfRange);
        assert_eq!(problem("about 3 mm"), QuantityProblem::NoNumber);
        assert_eq!(problem(""), QuantityProblem::NoNumber);
        assert_eq!(problem("."), QuantityProblem::NoNumber);
        assert!(matches!(problem("3 furlongs"), QuantityProblem::Unit(_)));
    }
}
