//! Checking the dimensions of an equation, part by part, on the tree that was read.

use std::ops::Range;

use thiserror::Error;

use super::lower::{exact_value, table_call};
use super::{Tree, TreeKind};
use crate::units::Dimension;

/// Where the dimensions of names come from.
pub trait Dimensions {
    /// The dimension of a name; `None` if nothing defines it.
    fn of_name(&self, name: &str) -> Option<Dimension>;
}

/// A part of an equation whose dimensions do not fit.
#[derive(Clone, Debug, PartialEq, Error)]
#[error("{message}")]
pub struct MismatchError {
    /// What does not fit, with the dimensions.
    pub message: String,
    /// The part, and the part that it does not fit with, each with its dimension in words.
    pub places: Vec<(Range<usize>, String)>,
}

/// A dimension; none for the number 0, and for names that nothing defines, which fit anything: the
/// latter are reported where names are looked up.
type Found = Option<Dimension>;

/// The dimension of a tree.
///
/// # Errors
///
/// [`MismatchError`]: terms of a sum, sides of a comparison or branches of a choice that differ; an
/// exponent, or an argument of a function, that is not a pure number.
pub(in crate::model) fn check(tree: &Tree, names: &dyn Dimensions) -> Result<Found, MismatchError> {
    match &tree.kind {
        TreeKind::Number(text) => {
            Ok(if text.parse() == Ok(0.0) { None } else { Some(Dimension::NONE) })
        }
        TreeKind::Name(name) => {
            // The circle's ratio is the one name that needs no definition.
            let found =
                names.of_name(name).or((name == "pi" || name == "π").then_some(Dimension::NONE));
            Ok(found.map(Dimension::in_equations))
        }
        TreeKind::Sum(terms) => {
            let parts: Vec<&Tree> = terms.iter().map(|(_, term)| term).collect();
            same(&parts, names, "a sum adds quantities of one dimension")
        }
        TreeKind::Product(factors) => {
            let mut result = Dimension::NONE;
            let mut fits_anything = false;
            for (divides, factor) in factors {
                let Some(dimension) = check(factor, names)? else {
                    fits_anything = true;
                    continue;
                };
                let next = if *divides { result.per(dimension) } else { result.times(dimension) };
                result = next.ok_or_else(|| overflow(tree))?;
            }
            Ok(Some(result).filter(|_| !fits_anything))
        }
        TreeKind::Power(parts) => power(tree, parts, names),
        TreeKind::Call(name, arguments) => call(tree, name, arguments, names),
        TreeKind::Choose { parts, .. } => {
            let [left, right, then, otherwise] = &**parts;
            same(&[left, right], names, "a comparison needs quantities of one dimension")?;
            same(&[then, otherwise], names, "both branches need one dimension")
        }
    }
}

fn power(tree: &Tree, parts: &[Tree; 2], names: &dyn Dimensions) -> Result<Found, MismatchError> {
    let [base, exponent] = parts;
    let base_dimension = check(base, names)?;
    pure(exponent, names, "an exponent is a pure number")?;
    let Some(dimension) = base_dimension else { return Ok(None) };
    if dimension.is_none() {
        return Ok(Some(dimension));
    }
    match exact_value(exponent) {
        Some(exact) => Ok(Some(dimension.power(exact).ok_or_else(|| overflow(tree))?)),
        None => Err(MismatchError {
            message: "a quantity with a dimension needs an exponent that is a plain number".into(),
            places: vec![
                (base.span.clone(), dimension.described()),
                (exponent.span.clone(), "not a plain number".into()),
            ],
        }),
    }
}

fn call(
    tree: &Tree,
    name: &str,
    arguments: &[Tree],
    names: &dyn Dimensions,
) -> Result<Found, MismatchError> {
    let parts: Vec<&Tree> = arguments.iter().collect();
    match name {
        "sqrt" => {
            let Some(dimension) = check(&arguments[0], names)? else { return Ok(None) };
            let root = dimension.power(crate::units::Rational::HALF);
            Ok(Some(root.ok_or_else(|| overflow(tree))?))
        }
        "abs" => check(&arguments[0], names),
        "min" | "max" => same(&parts, names, "min and max compare quantities of one dimension"),
        _ => {
            // A table's dimension is that of its name; functions give pure numbers.
            let table = table_call(name).map_or(name, |(table, _)| table);
            for argument in parts {
                pure(argument, names, "a function or table takes a pure number or an angle")?;
            }
            let is_function = super::Function::ALL.iter().any(|(known, _)| *known == name);
            Ok(if is_function { Some(Dimension::NONE) } else { names.of_name(table) })
        }
    }
}

fn pure(tree: &Tree, names: &dyn Dimensions, rule: &str) -> Result<(), MismatchError> {
    match check(tree, names)? {
        Some(dimension) if !dimension.is_none() => Err(MismatchError {
            message: format!("{rule}, not {}", dimension.described()),
            places: vec![(tree.span.clone(), dimension.described())],
        }),
        _ => Ok(()),
    }
}

/// All parts have one dimension: that.
fn same(parts: &[&Tree], names: &dyn Dimensions, rule: &str) -> Result<Found, MismatchError> {
    let mut first: Option<(&Tree, Dimension)> = None;
    for part in parts {
        let Some(dimension) = check(part, names)? else { continue };
        match first {
            None => first = Some((part, dimension)),
            Some((_, expected)) if expected == dimension => {}
            Some((other, expected)) => {
                return Err(MismatchError {
                    message: format!(
                        "{rule}: here {} meets {}",
                        expected.described(),
                        dimension.described()
                    ),
                    places: vec![
                        (part.span.clone(), dimension.described()),
                        (other.span.clone(), expected.described()),
                    ],
                });
            }
        }
    }
    Ok(first.map(|(_, dimension)| dimension))
}

fn overflow(tree: &Tree) -> MismatchError {
    MismatchError {
        message: "the exponents of the dimension are beyond all bounds".into(),
        places: vec![(tree.span.clone(), String::new())],
    }
}
