//! Putting a tree that was read into the graph.

use std::ops::Range;

use thiserror::Error;

use super::{Extremum, Function, Graph, Id, Number, Relation, TableId, Tree, TreeKind};
use crate::units::Rational;

/// Where names, and tables, of an equation come from.
pub trait Scope {
    /// The node that a name stands for.
    fn name(&self, name: &str) -> Option<Id>;
    /// The table that a name stands for.
    fn table(&self, name: &str) -> Option<TableId>;
    /// All names, to find the nearest to a mistyped one.
    fn known_names(&self) -> Vec<String>;
}

/// A name that means nothing, or a function that is called wrongly.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum LowerError {
    /// Nothing defines the name.
    #[error("nothing defines `{name}`")]
    UnknownName {
        /// The name.
        name: String,
        /// The nearest known one.
        nearest: Option<String>,
        /// Its place in the text.
        span: Range<usize>,
    },
    /// A function with too few or too many arguments.
    #[error("`{name}` takes {expected}, not {found}")]
    Arguments {
        /// The function.
        name: String,
        /// How many it takes, in words.
        expected: &'static str,
        /// How many it was given.
        found: usize,
        /// The place of the call.
        span: Range<usize>,
    },
}

impl LowerError {
    /// The place in the text.
    pub fn span(&self) -> Range<usize> {
        match self {
            Self::UnknownName { span, .. } | Self::Arguments { span, .. } => span.clone(),
        }
    }
}

/// Puts a tree into the graph; unknown names are all collected, so that they are told at once.
///
/// # Errors
///
/// All of the tree's [`LowerError`]s.
pub(in crate::model) fn lower(
    graph: &mut Graph,
    tree: &Tree,
    scope: &dyn Scope,
) -> Result<Id, Vec<LowerError>> {
    let mut errors = Vec::new();
    let id = Lowering { graph, scope, errors: &mut errors }.lower(tree);
    if errors.is_empty() { Ok(id) } else { Err(errors) }
}

struct Lowering<'a> {
    graph: &'a mut Graph,
    scope: &'a dyn Scope,
    errors: &'a mut Vec<LowerError>,
}

impl Lowering<'_> {
    fn lower(&mut self, tree: &Tree) -> Id {
        match &tree.kind {
            TreeKind::Number(text) => self.graph.number(literal(text)),
            TreeKind::Name(name) => self.name(name, &tree.span),
            TreeKind::Sum(terms) => {
                let terms: Vec<Id> = terms
                    .iter()
                    .map(|(negative, term)| {
                        let id = self.lower(term);
                        if *negative { self.graph.negated(id) } else { id }
                    })
                    .collect();
                self.graph.sum(terms)
            }
            TreeKind::Product(factors) => {
                let factors: Vec<Id> = factors
                    .iter()
                    .map(|(divides, factor)| {
                        let id = self.lower(factor);
                        if *divides { self.graph.power(id, Rational::whole(-1)) } else { id }
                    })
                    .collect();
                self.graph.product(factors)
            }
            TreeKind::Power(parts) => {
                let base = self.lower(&parts[0]);
                if let Some(exact) = exact_value(&parts[1]) {
                    self.graph.power(base, exact)
                } else {
                    let exponent = self.lower(&parts[1]);
                    self.graph.power_of(base, exponent)
                }
            }
            TreeKind::Call(name, arguments) => self.call(name, arguments, &tree.span),
            TreeKind::Choose { relation, parts } => self.choose(*relation, parts),
        }
    }

    fn name(&mut self, name: &str, span: &Range<usize>) -> Id {
        if let Some(id) = self.scope.name(name) {
            return id;
        }
        if name == "pi" || name == "π" {
            return self.graph.pi();
        }
        self.unknown(name, span)
    }

    fn unknown(&mut self, name: &str, span: &Range<usize>) -> Id {
        let known = self.scope.known_names();
        let nearest =
            crate::diagnostic::nearest(name, known.iter().map(String::as_str)).map(str::to_owned);
        self.errors.push(LowerError::UnknownName {
            name: name.to_owned(),
            nearest,
            span: span.clone(),
        });
        self.graph.whole(0)
    }

    fn call(&mut self, name: &str, arguments: &[Tree], span: &Range<usize>) -> Id {
        let ids: Vec<Id> = arguments.iter().map(|argument| self.lower(argument)).collect();
        let function = Function::ALL.iter().find(|(known, _)| *known == spelled(name));
        match (function, name, ids.as_slice()) {
            (Some((_, function)), _, [only]) => self.graph.apply(*function, *only),
            (_, "sqrt", [only]) => self.graph.root(*only),
            (_, "min", [first, rest @ ..]) if !rest.is_empty() => {
                rest.iter().fold(*first, |a, b| self.graph.extremum(Extremum::Min, a, *b))
            }
            (_, "max", [first, rest @ ..]) if !rest.is_empty() => {
                rest.iter().fold(*first, |a, b| self.graph.extremum(Extremum::Max, a, *b))
            }
            (Some(_), ..) | (_, "sqrt", _) => self.wrong_count(name, "one argument", &ids, span),
            (_, "min" | "max", _) => self.wrong_count(name, "two arguments or more", &ids, span),
            _ => self.table_call(name, &ids, span),
        }
    }

    fn table_call(&mut self, name: &str, ids: &[Id], span: &Range<usize>) -> Id {
        let (table_name, order) = table_call(name).unwrap_or((name, [0, 0]));
        let Some(table) = self.scope.table(table_name) else {
            return self.unknown(name, &(span.start..span.start + name.len()));
        };
        match (self.graph.table(table).arguments(), ids) {
            (1, [only]) => self.graph.look_up(table, [*only, *only], order),
            (2, [first, second]) => self.graph.look_up(table, [*first, *second], order),
            (1, _) => self.wrong_count(name, "one argument", ids, span),
            _ => self.wrong_count(name, "two arguments", ids, span),
        }
    }

    fn wrong_count(
        &mut self,
        name: &str,
        expected: &'static str,
        ids: &[Id],
        span: &Range<usize>,
    ) -> Id {
        self.errors.push(LowerError::Arguments {
            name: name.to_owned(),
            expected,
            found: ids.len(),
            span: span.clone(),
        });
        self.graph.whole(0)
    }

    fn choose(&mut self, relation: Relation, parts: &[Tree; 4]) -> Id {
        let [left, right, then, otherwise] = [0, 1, 2, 3].map(|index| self.lower(&parts[index]));
        self.graph.choose(relation, [left, right], then, otherwise)
    }
}

/// Both common spellings of the inverse functions are read; the first is printed.
fn spelled(name: &str) -> &str {
    match name {
        "asin" => "arcsin",
        "acos" => "arccos",
        "atan" => "arctan",
        other => other,
    }
}

/// A table's name and the orders of derivative that a printed derivative carries in its name:
/// `C_slope1` is the slope of `C` by its first argument, `C_slope12` by both.
pub(super) fn table_call(name: &str) -> Option<(&str, [u8; 2])> {
    let (table, which) = name.rsplit_once("_slope")?;
    let order = match which {
        "1" => [1, 0],
        "2" => [0, 1],
        "12" => [1, 1],
        _ => return None,
    };
    Some((table, order))
}

/// The number that a literal is: exact with up to nine decimals.
fn literal(text: &str) -> Number {
    match Rational::from_decimal(text) {
        Some(exact) => Number::Exact(exact),
        None => Number::decimal(text.parse().unwrap_or(f64::NAN)),
    }
}

/// The exact fraction that an exponent is, decimals included (`1.5`, `3/2`, `-1`), if it is one.
pub(super) fn exact_value(tree: &Tree) -> Option<Rational> {
    match &tree.kind {
        TreeKind::Number(text) => Rational::from_decimal(text),
        TreeKind::Sum(terms) => terms.iter().try_fold(Rational::ZERO, |sum, (negative, term)| {
            let value = exact_value(term)?;
            sum.plus(if *negative { value.negated() } else { value })
        }),
        TreeKind::Product(factors) => {
            factors.iter().try_fold(Rational::ONE, |product, (divides, factor)| {
                let value = exact_value(factor)?;
                product.times(if *divides { value.reciprocal()? } else { value })
            })
        }
        _ => None,
    }
}
