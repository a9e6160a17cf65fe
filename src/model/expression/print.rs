//! Writing an expression in the notation that is read.

use super::{Extremum, Graph, Id, Node, Number, Relation, SymbolId};
use crate::units::Rational;

/// What symbols are called.
pub trait Names {
    /// The name of a symbol.
    fn symbol(&self, symbol: SymbolId) -> String;
}

/// How tightly a text binds, so that brackets stand only where they must.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Binding {
    Choice,
    Sum,
    Product,
    Power,
    Atom,
}

impl Graph {
    /// Writes a node; reading the text again gives the same node.
    pub fn text(&self, id: Id, names: &dyn Names) -> String {
        self.write(id, names).0
    }

    fn write(&self, id: Id, names: &dyn Names) -> (String, Binding) {
        let plain = |id: Id| self.write(id, names).0;
        match self.node(id) {
            Node::Number(number) => write_number(*number),
            Node::Pi => ("pi".into(), Binding::Atom),
            Node::Symbol(symbol) => (names.symbol(*symbol), Binding::Atom),
            Node::Named(name, _) => (self.name(*name).to_owned(), Binding::Atom),
            Node::Sum(terms) => (self.write_sum(terms, names), Binding::Sum),
            Node::Product(factors) => self.write_product(factors, names),
            Node::Power(base, exponent) => self.write_power(*base, *exponent, names),
            Node::PowerOf(base, exponent) => {
                let base = self.bracketed(*base, Binding::Atom, names);
                let exponent = self.bracketed(*exponent, Binding::Atom, names);
                (format!("{base}^{exponent}"), Binding::Power)
            }
            Node::Apply(function, argument) => {
                (format!("{}({})", function.name(), plain(*argument)), Binding::Atom)
            }
            Node::Extremum(extremum, left, right) => {
                let name = match extremum {
                    Extremum::Min => "min",
                    Extremum::Max => "max",
                };
                (format!("{name}({}, {})", plain(*left), plain(*right)), Binding::Atom)
            }
            Node::LookUp { table, at, order } => {
                let table = self.table(*table);
                let slope = match order {
                    [0, 0] => "",
                    [_, 0] => "_slope1",
                    [0, _] => "_slope2",
                    _ => "_slope12",
                };
                let arguments: Vec<String> =
                    at[..table.arguments()].iter().map(|id| plain(*id)).collect();
                (format!("{}{slope}({})", table.name(), arguments.join(", ")), Binding::Atom)
            }
            Node::Choose { relation, left, right, then, otherwise } => {
                let sign = match relation {
                    Relation::Below => "<",
                    Relation::AtMost => "<=",
                };
                let [then, left, right] =
                    [then, left, right].map(|id| self.bracketed(*id, Binding::Sum, names));
                let text =
                    format!("{then} when {left} {sign} {right} otherwise {}", plain(*otherwise));
                (text, Binding::Choice)
            }
        }
    }

    fn bracketed(&self, id: Id, at_least: Binding, names: &dyn Names) -> String {
        let (text, binding) = self.write(id, names);
        if binding < at_least { format!("({text})") } else { text }
    }

    /// Positive terms first, so that a sum seldom starts with a minus.
    fn write_sum(&self, terms: &[Id], names: &dyn Names) -> String {
        let written = |id: &Id| {
            let text = self.bracketed(*id, Binding::Product, names);
            match text.strip_prefix('-') {
                Some(rest) => (true, rest.to_owned()),
                None => (false, text),
            }
        };
        let mut terms: Vec<(bool, String)> = terms.iter().map(written).collect();
        terms.sort_by_key(|(negative, _)| *negative);
        let mut text = String::new();
        for (index, (negative, term)) in terms.iter().enumerate() {
            text.push_str(match (index, negative) {
                (0, false) => "",
                (0, true) => "-",
                (_, false) => " + ",
                (_, true) => " - ",
            });
            text.push_str(term);
        }
        text
    }

    /// Factors with positive exponents over those with negative ones.
    fn write_product(&self, factors: &[Id], names: &dyn Names) -> (String, Binding) {
        let mut sign = "";
        let mut above: Vec<String> = Vec::new();
        let mut below: Vec<String> = Vec::new();
        for factor in factors {
            match self.node(*factor) {
                Node::Number(number) => {
                    sign = if number.is_negative() { "-" } else { "" };
                    write_coefficient(*number, &mut above, &mut below);
                }
                Node::Power(base, exponent) if exponent.is_negative() => {
                    let (text, binding) = self.write_power(*base, exponent.negated(), names);
                    below.push(if binding < Binding::Power { format!("({text})") } else { text });
                }
                _ => above.push(self.bracketed(*factor, Binding::Power, names)),
            }
        }
        let above = if above.is_empty() { "1".to_owned() } else { above.join("*") };
        let below = match below.as_slice() {
            [] => String::new(),
            [only] => format!("/{only}"),
            several => format!("/({})", several.join("*")),
        };
        (format!("{sign}{above}{below}"), Binding::Product)
    }

    fn write_power(&self, base: Id, exponent: Rational, names: &dyn Names) -> (String, Binding) {
        if exponent == Rational::ONE {
            return self.write(base, names);
        }
        if exponent == Rational::HALF {
            return (format!("sqrt({})", self.write(base, names).0), Binding::Atom);
        }
        if exponent.is_negative() {
            let (text, binding) = self.write_power(base, exponent.negated(), names);
            let below = if binding < Binding::Power { format!("({text})") } else { text };
            return (format!("1/{below}"), Binding::Product);
        }
        let base = self.bracketed(base, Binding::Atom, names);
        let exponent = exponent.to_string();
        let exponent = if exponent.contains('/') { format!("({exponent})") } else { exponent };
        (format!("{base}^{exponent}"), Binding::Power)
    }
}

fn write_number(number: Number) -> (String, Binding) {
    let text = number.to_string();
    // A minus binds like a factor: it needs brackets as the base of a power, none in a sum.
    let atom = !text.starts_with('-') && !text.contains('/');
    (text, if atom { Binding::Atom } else { Binding::Product })
}

/// A coefficient before the factors: `8/15*x` for fractions, nothing for 1.
fn write_coefficient(number: Number, above: &mut Vec<String>, below: &mut Vec<String>) {
    match number.as_exact() {
        Some(fraction) if fraction.numerator().abs() == 1 && fraction.denominator() == 1 => {}
        // The reciprocal of a small number reads better below: x/3.
        Some(fraction) if fraction.numerator().abs() == 1 && fraction.denominator() < 100 => {
            below.push(fraction.denominator().to_string());
        }
        Some(fraction) if fraction.is_negative() => above.push(fraction.negated().to_string()),
        Some(fraction) => above.push(fraction.to_string()),
        None => above.push(format!("{:?}", number.value().abs())),
    }
}
