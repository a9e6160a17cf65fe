//! Quantities in a station file: read, checked for their dimension, with faults placed.

use toml::Spanned;
use toml::de::DeValue;

use super::section::{Findings, article, number};
use crate::diagnostic::{Code, Diagnostic, Span, shown};
use crate::units::{Dimension, Quantity, QuantityError, QuantityProblem, Unit, UnitError};

/// A quantity as a file states it.
#[derive(Clone, Debug, PartialEq)]
pub struct Stated {
    /// In SI units.
    pub value: f64,
    /// The unit it was stated in.
    pub unit: Unit,
    /// As it was written.
    pub text: String,
    /// Its place in the file.
    pub span: Span,
}

/// Reads a quantity of a given dimension; of any if `None`.
pub(super) fn read(
    what: &str,
    value: &Spanned<DeValue<'_>>,
    dimension: Option<Dimension>,
    findings: &mut Findings<'_>,
) -> Option<Stated> {
    let span = value.span();
    if let Some(bare) = number(value.get_ref()) {
        return bare_number(what, bare, span, dimension, findings);
    }
    let DeValue::String(text) = value.get_ref() else {
        let title =
            format!("`{what}` is a quantity such as \"0.45 m\", not {}", article(value.get_ref()));
        findings.error(Code::WrongType, span, title);
        return None;
    };
    if dimension == Some(Dimension::NONE) && text.contains(':') {
        let text = text.trim().to_owned();
        if let Some(value) = slope(&text) {
            return Some(Stated { value, unit: Unit::one(), text, span });
        }
        let title = format!("`{what}`: \"{}\" is no slope", shown(&text));
        findings.push(
            Diagnostic::error(Code::NotAQuantity, span, title)
                .help("a slope is vertical : horizontal, such as \"1:20\""),
        );
        return None;
    }
    match Quantity::parse(text) {
        Ok(quantity) => checked(what, text, quantity, span, dimension, findings),
        Err(error) => {
            report(what, text, &span, &error, dimension, findings);
            None
        }
    }
}

/// A slope as it is usually written, vertical : horizontal, as the horizontal part of 1 vertical.
fn slope(text: &str) -> Option<f64> {
    let (vertical, horizontal) = text.split_once(':')?;
    let [vertical, horizontal] = [vertical, horizontal].map(|part| part.trim().parse::<f64>().ok());
    let slope = horizontal? / vertical?;
    (slope.is_finite() && slope >= 0.0 && crate::units::is_plausible(slope)).then_some(slope)
}

fn bare_number(
    what: &str,
    value: f64,
    span: Span,
    dimension: Option<Dimension>,
    findings: &mut Findings<'_>,
) -> Option<Stated> {
    if !crate::units::is_plausible(value) {
        let title = format!("`{what}`: {value:e} is no number that a station can have");
        findings.error(Code::NumberOutOfRange, span, title);
        return None;
    }
    if let Some(due) = dimension.filter(|dimension| !dimension.is_none()) {
        missing_unit(what, &value.to_string(), span, due, findings);
        return None;
    }
    Some(Stated { value, unit: Unit::one(), text: value.to_string(), span })
}

fn missing_unit(what: &str, number: &str, span: Span, due: Dimension, findings: &mut Findings<'_>) {
    let title = format!("`{what}` has no unit: {} is due", due.name().unwrap_or("a quantity"));
    let units = match due.usual_units() {
        "" => due.to_string(),
        usual => usual.to_owned(),
    };
    let first = units.split([',', ' ']).next().unwrap_or_default().to_owned();
    let mut diagnostic = Diagnostic::error(Code::MissingUnit, span, title);
    diagnostic.help =
        Some(format!("units that would do: {units}; for example \"{number} {first}\""));
    findings.push(diagnostic);
}

fn checked(
    what: &str,
    text: &str,
    quantity: Quantity,
    span: Span,
    dimension: Option<Dimension>,
    findings: &mut Findings<'_>,
) -> Option<Stated> {
    let found = quantity.dimension();
    if let Some(due) = dimension.filter(|due| *due != found) {
        if found.is_none() && quantity.unit.as_str() == "1" {
            missing_unit(what, text.trim(), span, due, findings);
        } else {
            let title =
                format!("`{what}` is {}, but \"{text}\" is {}", due.described(), found.described());
            let mut diagnostic = Diagnostic::error(Code::WrongDimension, span, title);
            if !due.usual_units().is_empty() {
                diagnostic = diagnostic.help(format!("units that would do: {}", due.usual_units()));
            }
            findings.push(diagnostic);
        }
        return None;
    }
    Some(Stated { value: quantity.value, unit: quantity.unit, text: text.trim().to_owned(), span })
}

/// Notes why a text is no quantity.
pub(super) fn report(
    what: &str,
    text: &str,
    span: &Span,
    error: &QuantityError,
    dimension: Option<Dimension>,
    findings: &mut Findings<'_>,
) {
    let place = findings.inside(span, text, &error.range);
    let place = if place.is_empty() { span.clone() } else { place };
    let shown = shown(text);
    let diagnostic = match &error.problem {
        QuantityProblem::DecimalComma(mended) => decimal_comma(what, mended, place, span),
        QuantityProblem::OutOfRange => Diagnostic::error(
            Code::NumberOutOfRange,
            place,
            format!("`{what}`: \"{shown}\" holds no number that a station can have"),
        )
        .help("numbers are finite, and between 1e-15 and 1e15 in size"),
        QuantityProblem::NoNumber => {
            let example = match dimension.map(Dimension::usual_units) {
                Some(units) if !units.is_empty() => {
                    format!("0.45 {}", units.split([',', ' ']).next().unwrap_or_default())
                }
                _ => "0.45 m".to_owned(),
            };
            Diagnostic::error(
                Code::NotAQuantity,
                place,
                format!("`{what}`: \"{shown}\" does not start with a number"),
            )
            .help(format!("a quantity is a number with its unit, such as \"{example}\""))
        }
        QuantityProblem::Unit(unit) => {
            let diagnostic =
                Diagnostic::error(Code::UnknownUnit, place.clone(), format!("`{what}`: {unit}"));
            match unit {
                UnitError::Unknown { nearest: Some(nearest), .. } => {
                    diagnostic.help(format!("did you mean `{nearest}`?"))
                }
                _ => diagnostic.help(match dimension.map(Dimension::usual_units) {
                    Some(units) if !units.is_empty() => format!("units that would do: {units}"),
                    _ => "docs/station-file.md lists the units".to_owned(),
                }),
            }
        }
    };
    findings.push(diagnostic);
}

fn decimal_comma(what: &str, mended: &str, place: Span, whole: &Span) -> Diagnostic {
    let number = mended.split_whitespace().next().unwrap_or_default();
    let title = format!("`{what}`: decimals have a point, not a comma");
    let diagnostic = Diagnostic::error(Code::DecimalComma, place.clone(), title);
    let decimals = number.split_once('.').map_or(0, |(_, decimals)| decimals.len());
    let leading = number.trim_start_matches(['-', '+']).starts_with('0');
    if decimals == 3 && !leading {
        let joined = mended.replacen('.', "", 1);
        return diagnostic
            .help(format!("write \"{mended}\", or \"{joined}\" if thousands are meant"));
    }
    let diagnostic = diagnostic.help(format!("write \"{mended}\""));
    // Where the place inside the text is not known, a patch could not be placed either.
    if place == *whole { diagnostic } else { diagnostic.fix(place, number) }
}
