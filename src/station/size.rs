//! How large an error is: `"3 mm"`, `"0.2 %"`, `"0.25 % of 3 m"`, `"1 mm + 0.2 %"`.

use toml::Spanned;
use toml::de::DeValue;

use super::quantity;
use super::section::Findings;
use crate::diagnostic::{Code, Diagnostic};
use crate::units::{Dimension, Quantity};

/// A size: a part in the unit of the input, a part relative to its value, or the sum of both.
#[derive(Clone, Debug, PartialEq)]
pub struct Amount {
    /// In SI units of the input.
    pub absolute: Option<f64>,
    /// Relative to the input's value, as a fraction.
    pub relative: Option<f64>,
    /// As it was written.
    pub text: String,
}

/// Which part of the input an amount is about.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Size {
    /// It shifts the input.
    Shift,
    /// It scales the input.
    Scale,
    /// It shifts the input by an amount that depends on the input's value.
    Mixed,
}

impl Amount {
    /// Which kind it is.
    pub fn kind(&self) -> Size {
        match (self.absolute, self.relative) {
            (Some(_), Some(_)) => Size::Mixed,
            (None, Some(_)) => Size::Scale,
            _ => Size::Shift,
        }
    }

    /// The size as a shift of an input that has this value, or as a fraction if it scales.
    pub fn at(&self, value: f64) -> f64 {
        match (self.absolute, self.relative) {
            (Some(absolute), Some(relative)) => absolute + relative * value.abs(),
            (Some(absolute), None) => absolute,
            (None, Some(relative)) => relative,
            (None, None) => 0.0,
        }
    }
}

/// Longer texts are no sizes.
const LONGEST: usize = 200;

/// The bound that a part of a size breaks, if it is beyond any error that a station can have.
fn implausible(part: &Quantity, absolute: bool) -> Option<&'static str> {
    let size = part.value.abs();
    if !absolute {
        return (size > 1.0).then_some("the input itself");
    }
    if part.dimension() == Dimension::LENGTH {
        return (size > 10.0).then_some("10 m");
    }
    (!crate::units::is_plausible(part.value)).then_some("any number that a station can have")
}

/// Reads a size for inputs of a dimension; of any dimension if `None`.
pub(super) fn read(
    what: &str,
    value: &Spanned<DeValue<'_>>,
    dimension: Option<Dimension>,
    findings: &mut Findings<'_>,
) -> Option<Amount> {
    let DeValue::String(text) = value.get_ref() else {
        let stated = quantity::read(what, value, dimension, findings)?;
        return Some(Amount { absolute: Some(stated.value), relative: None, text: stated.text });
    };
    if text.len() > LONGEST {
        let title = format!("`{what}`: a size has at most {LONGEST} letters");
        findings.push(Diagnostic::error(Code::NotAQuantity, value.span(), title));
        return None;
    }
    let mut amount = Amount { absolute: None, relative: None, text: text.trim().to_owned() };
    let mut at = 0;
    for term in text.split(" + ") {
        let place = findings.inside(&value.span(), text, &(at..at + term.len()));
        at += term.len() + " + ".len();
        let (size, base) = match term.split_once(" of ") {
            Some((size, base)) => (size, Some(base)),
            None => (term, None),
        };
        let mut read = |text: &str, due| match Quantity::parse(text) {
            Ok(quantity) => Some(quantity),
            Err(error) => {
                quantity::report(what, text, &place_of(&place), &error, due, findings);
                None
            }
        };
        let size = read(size, dimension)?;
        let base = match base {
            Some(base) => Some(read(base, dimension)?),
            None => None,
        };
        let sum_or_part = base.is_some() || text.contains(" + ");
        if sum_or_part && (size.value < 0.0 || base.as_ref().is_some_and(|base| base.value < 0.0)) {
            let title = format!("`{what}`: a part of a sum, or of something, cannot be negative");
            findings.push(Diagnostic::error(Code::OutsideDomain, place, title));
            return None;
        }
        let ratio = size.dimension().is_none() && size.unit.as_str() != "1";
        let (absolute, part) = match base {
            Some(base) if size.dimension().is_none() && size.unit.as_str() != "1" => {
                (true, Quantity { value: size.value * base.value, unit: base.unit })
            }
            Some(_) => {
                findings.push(Diagnostic::error(
                    Code::NotAQuantity,
                    place,
                    format!("`{what}`: before `of` a ratio is due, as in \"0.25 % of 3 m\""),
                ));
                return None;
            }
            None => (!ratio, size),
        };
        if absolute && let Some(due) = dimension.filter(|due| *due != part.dimension()) {
            wrong_dimension(what, term, &part, due, place, findings);
            return None;
        }
        if let Some(largest) = implausible(&part, absolute) {
            let title = format!("`{what}`: \"{}\" is larger than {largest}", term.trim());
            findings.push(
                Diagnostic::error(Code::OutsideDomain, place, title)
                    .help("no error of a station is that large: is the unit right?"),
            );
            return None;
        }
        let slot = if absolute { &mut amount.absolute } else { &mut amount.relative };
        *slot = Some(slot.unwrap_or(0.0) + part.value);
    }
    Some(amount)
}

/// The report takes the place of a string with its quotes; a term has none.
fn place_of(place: &crate::diagnostic::Span) -> crate::diagnostic::Span {
    place.start.saturating_sub(1)..place.end
}

fn wrong_dimension(
    what: &str,
    term: &str,
    part: &Quantity,
    due: Dimension,
    place: crate::diagnostic::Span,
    findings: &mut Findings<'_>,
) {
    let bare = part.unit.as_str() == "1";
    let code = if bare { Code::MissingUnit } else { Code::WrongDimension };
    let title = if bare {
        format!("`{what}`: \"{term}\" has no unit: {} is due", due.name().unwrap_or("a quantity"))
    } else {
        format!(
            "`{what}` is {} or a ratio, but \"{term}\" is {}",
            due.described(),
            part.dimension().described()
        )
    };
    let units = due.usual_units();
    findings.push(
        Diagnostic::error(code, place, title)
            .help(format!("units that would do: {units}; or % of the input's value")),
    );
}
