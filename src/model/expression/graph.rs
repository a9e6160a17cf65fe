//! The expression graph: nodes in an arena, shared, and simplified as they are made.
//!
//! Every node is made by one of the constructors here, which keep a canonical form: sums and products
//! are flat, sorted and collected, so that equal expressions are the same node, a common subexpression
//! is stored once, and a derivative comes out as a person would write it.

use std::collections::{BTreeMap, HashMap};

use super::{Number, Table};
use crate::units::Rational;

/// A node of a [`Graph`].
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Id(u32);

/// A named quantity that the graph does not define: an input or an unknown.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct SymbolId(pub u32);

/// A name that a definition gives.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct NameId(u32);

/// A table of the graph.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct TableId(pub u32);

/// What a node is. Operands always stand before the node in the arena.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub enum Node {
    /// A constant.
    Number(Number),
    /// The circle's ratio.
    Pi,
    /// An input or an unknown.
    Symbol(SymbolId),
    /// An expression that a definition has given a name: written by its name, and never opened by the
    /// simplification of what it stands in, so that equations read as they were written.
    Named(NameId, Id),
    /// Terms, sorted; a constant term first.
    Sum(Box<[Id]>),
    /// Factors, sorted; a constant factor first.
    Product(Box<[Id]>),
    /// A power with an exact exponent.
    Power(Id, Rational),
    /// A power whose exponent is an expression.
    PowerOf(Id, Id),
    /// A function of one argument.
    Apply(Function, Id),
    /// The smaller or the larger of two.
    Extremum(Extremum, Id, Id),
    /// A table, or its derivative of the given order by each argument.
    LookUp {
        /// Which table.
        table: TableId,
        /// Its arguments; a table of one has the same twice.
        at: [Id; 2],
        /// 0 or 1 for each argument.
        order: [u8; 2],
    },
    /// One of two expressions, by a comparison.
    Choose {
        /// How left and right are compared.
        relation: Relation,
        /// Left side of the comparison.
        left: Id,
        /// Right side of the comparison.
        right: Id,
        /// The value when it holds.
        then: Id,
        /// The value when it does not.
        otherwise: Id,
    },
}

/// Functions of one argument.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Function {
    /// Exponential.
    Exp,
    /// Natural logarithm.
    Ln,
    /// Sine.
    Sin,
    /// Cosine.
    Cos,
    /// Tangent.
    Tan,
    /// Inverse sine.
    Arcsin,
    /// Inverse cosine.
    Arccos,
    /// Inverse tangent.
    Arctan,
    /// Absolute value.
    Abs,
}

impl Function {
    /// All of them, with their names in equations (ISO 80000-2).
    pub const ALL: [(&'static str, Self); 9] = [
        ("exp", Self::Exp),
        ("ln", Self::Ln),
        ("sin", Self::Sin),
        ("cos", Self::Cos),
        ("tan", Self::Tan),
        ("arcsin", Self::Arcsin),
        ("arccos", Self::Arccos),
        ("arctan", Self::Arctan),
        ("abs", Self::Abs),
    ];

    /// Its name in equations.
    pub fn name(self) -> &'static str {
        Self::ALL.iter().find(|(_, function)| *function == self).map_or("", |(name, _)| *name)
    }

    /// Its value.
    pub fn value(self, x: f64) -> f64 {
        match self {
            Self::Exp => x.exp(),
            Self::Ln => x.ln(),
            Self::Sin => x.sin(),
            Self::Cos => x.cos(),
            Self::Tan => x.tan(),
            Self::Arcsin => x.asin(),
            Self::Arccos => x.acos(),
            Self::Arctan => x.atan(),
            Self::Abs => x.abs(),
        }
    }
}

/// The smaller or the larger.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Extremum {
    /// The smaller.
    Min,
    /// The larger.
    Max,
}

impl Extremum {
    /// The smaller or larger of two; NaN if either is.
    #[inline]
    pub fn of(self, a: f64, b: f64) -> f64 {
        // f64::min and max would drop a NaN; these keep it.
        let second = match self {
            Self::Min => b < a,
            Self::Max => b > a,
        };
        if second || b.is_nan() { b } else { a }
    }
}

/// Relative room for the rounding of a quotient or two.
const ROUNDING: f64 = 1e-12;

/// How two values are compared.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Relation {
    /// Left is below right.
    Below,
    /// Left is below or equal to right.
    AtMost,
}

impl Relation {
    /// Whether it holds. Sides that are equal to rounding are equal: a head of 0.525 m over a crest of
    /// 0.35 m is at a limit of 1.5, though the quotient of the two is not 1.5 to the last bit.
    #[inline]
    pub fn holds(self, left: f64, right: f64) -> bool {
        let equal = (left - right).abs() <= ROUNDING * left.abs().max(right.abs());
        match self {
            Self::Below => left < right && !equal,
            Self::AtMost => left <= right || equal,
        }
    }
}

/// Nodes, each stored once.
#[derive(Clone, Debug, Default)]
pub struct Graph {
    nodes: Vec<Node>,
    index: HashMap<Node, Id>,
    tables: Vec<Table>,
    names: Vec<String>,
}

impl Graph {
    /// What a node is.
    pub fn node(&self, id: Id) -> &Node {
        &self.nodes[id.0 as usize]
    }

    /// How many nodes there are.
    pub fn len(&self) -> usize {
        self.nodes.len()
    }

    /// There is no node yet.
    pub fn is_empty(&self) -> bool {
        self.nodes.is_empty()
    }

    /// A table of this graph.
    pub fn table(&self, table: TableId) -> &Table {
        &self.tables[table.0 as usize]
    }

    /// The tables, in the order they were added.
    pub fn tables(&self) -> &[Table] {
        &self.tables
    }

    /// Adds a table.
    pub fn add_table(&mut self, table: Table) -> TableId {
        self.tables.push(table);
        TableId(self.tables.len() as u32 - 1)
    }

    fn store(&mut self, node: Node) -> Id {
        if let Some(id) = self.index.get(&node) {
            return *id;
        }
        let id = Id(u32::try_from(self.nodes.len()).unwrap_or(u32::MAX));
        self.nodes.push(node.clone());
        self.index.insert(node, id);
        id
    }

    /// A constant.
    pub fn number(&mut self, value: Number) -> Id {
        self.store(Node::Number(value))
    }

    /// A whole number.
    pub fn whole(&mut self, value: i64) -> Id {
        self.number(Number::Exact(Rational::whole(value)))
    }

    /// The circle's ratio.
    pub fn pi(&mut self) -> Id {
        self.store(Node::Pi)
    }

    /// A symbol.
    pub fn symbol(&mut self, symbol: SymbolId) -> Id {
        self.store(Node::Symbol(symbol))
    }

    /// An expression by a name. Numbers and symbols, which read well as they are, take none.
    pub fn named(&mut self, name: &str, inner: Id) -> Id {
        if matches!(self.node(inner), Node::Number(_) | Node::Symbol(_) | Node::Pi) {
            return inner;
        }
        let place = self.names.iter().position(|known| known == name).unwrap_or_else(|| {
            self.names.push(name.to_owned());
            self.names.len() - 1
        });
        self.store(Node::Named(NameId(place as u32), inner))
    }

    /// What a name is.
    pub fn name(&self, name: NameId) -> &str {
        &self.names[name.0 as usize]
    }

    /// What a named expression is made of; any other is itself.
    pub fn unnamed(&self, id: Id) -> Id {
        match self.node(id) {
            Node::Named(_, inner) => *inner,
            _ => id,
        }
    }

    /// The constant that a node is.
    pub fn as_number(&self, id: Id) -> Option<Number> {
        match self.node(id) {
            Node::Number(value) => Some(*value),
            _ => None,
        }
    }

    /// Whether a node is the constant 0.
    pub fn is_zero(&self, id: Id) -> bool {
        self.as_number(id).is_some_and(Number::is_zero)
    }

    /// A sum: flat, like terms collected, zero terms gone.
    pub fn sum(&mut self, terms: impl IntoIterator<Item = Id>) -> Id {
        let mut waiting: Vec<(Number, Id)> =
            terms.into_iter().map(|term| (Number::ONE, term)).collect();
        if let [(_, only)] = waiting.as_slice() {
            return *only;
        }
        waiting.reverse();
        let mut constant = Number::ZERO;
        let mut collected: BTreeMap<Id, Number> = BTreeMap::new();
        while let Some((factor, term)) = waiting.pop() {
            let (coefficient, core) = self.split_coefficient(term);
            let coefficient = factor.times(coefficient);
            let Some(core) = core else {
                constant = constant.plus(coefficient);
                continue;
            };
            let unit = coefficient == Number::ONE || coefficient == minus_one();
            match self.node(core) {
                // A sum inside a sum is opened, and so is its negative; other multiples stay factored.
                Node::Sum(inner) if unit => {
                    waiting.extend(inner.iter().rev().map(|id| (coefficient, *id)));
                }
                _ => {
                    let entry = collected.entry(core).or_insert(Number::ZERO);
                    *entry = entry.plus(coefficient);
                }
            }
        }
        let mut result = Vec::with_capacity(collected.len() + 1);
        if !constant.is_zero() {
            result.push(self.number(constant));
        }
        for (core, coefficient) in collected {
            if !coefficient.is_zero() {
                let term = self.scaled(coefficient, core);
                result.push(term);
            }
        }
        match result.as_slice() {
            [] => self.number(Number::ZERO),
            [only] => *only,
            _ => self.store(Node::Sum(result.into())),
        }
    }

    /// `left - right`.
    pub fn difference(&mut self, left: Id, right: Id) -> Id {
        let negated = self.negated(right);
        self.sum([left, negated])
    }

    /// `-value`.
    pub fn negated(&mut self, value: Id) -> Id {
        self.scaled(minus_one(), value)
    }

    /// A multiple.
    pub fn scaled(&mut self, factor: Number, value: Id) -> Id {
        let factor = self.number(factor);
        self.product([factor, value])
    }

    /// A product: flat, powers of one base collected, constants multiplied.
    pub fn product(&mut self, factors: impl IntoIterator<Item = Id>) -> Id {
        let mut coefficient = Number::ONE;
        let mut collected: BTreeMap<Id, Rational> = BTreeMap::new();
        let mut waiting: Vec<Id> = factors.into_iter().collect();
        let mut opaque: Vec<Id> = Vec::new();
        while let Some(factor) = waiting.pop() {
            let (base, exponent) = match self.node(factor) {
                Node::Number(value) => {
                    coefficient = coefficient.times(*value);
                    continue;
                }
                Node::Product(inner) => {
                    waiting.extend(inner.iter().copied());
                    continue;
                }
                Node::Power(base, exponent) => (*base, *exponent),
                _ => (factor, Rational::ONE),
            };
            let sum = collected.get(&base).copied().unwrap_or(Rational::ZERO).plus(exponent);
            match sum {
                Some(sum) => drop(collected.insert(base, sum)),
                None => opaque.push(factor),
            }
        }
        let mut result = opaque;
        for (base, exponent) in collected {
            let power = self.power(base, exponent);
            match self.node(power) {
                Node::Number(value) => coefficient = coefficient.times(*value),
                // A power of a product opens into factors, none of which is collected further.
                Node::Product(inner) => {
                    for id in inner.clone() {
                        match self.as_number(id) {
                            Some(value) => coefficient = coefficient.times(value),
                            None => result.push(id),
                        }
                    }
                }
                _ => result.push(power),
            }
        }
        if coefficient.is_zero() {
            return self.number(Number::ZERO);
        }
        result.sort_unstable();
        if coefficient != Number::ONE {
            let coefficient = self.number(coefficient);
            result.insert(0, coefficient);
        }
        match result.as_slice() {
            [] => self.number(Number::ONE),
            [only] => *only,
            _ => self.store(Node::Product(result.into())),
        }
    }

    /// `above / below`.
    pub fn quotient(&mut self, above: Id, below: Id) -> Id {
        let inverse = self.power(below, Rational::whole(-1));
        self.product([above, inverse])
    }

    /// A power with an exact exponent.
    pub fn power(&mut self, base: Id, exponent: Rational) -> Id {
        if exponent == Rational::ZERO {
            return self.number(Number::ONE);
        }
        if exponent == Rational::ONE {
            return base;
        }
        let whole = exponent.as_whole();
        match (self.node(base).clone(), whole) {
            (Node::Number(value), Some(whole)) if !(value.is_zero() && whole < 0) => {
                self.number(value.power(whole))
            }
            (Node::Number(value), _) if value == Number::ONE => base,
            (Node::Power(inner, first), _) if powers_combine(first, exponent) => {
                match first.times(exponent) {
                    Some(both) => self.power(inner, both),
                    None => self.store(Node::Power(base, exponent)),
                }
            }
            (Node::Product(factors), Some(_)) => {
                let powers: Vec<Id> =
                    factors.iter().map(|factor| self.power(*factor, exponent)).collect();
                self.product(powers)
            }
            _ => self.store(Node::Power(base, exponent)),
        }
    }

    /// Square root.
    pub fn root(&mut self, value: Id) -> Id {
        self.power(value, Rational::HALF)
    }

    /// A power whose exponent is an expression; an exact one where the exponent is a fraction.
    pub fn power_of(&mut self, base: Id, exponent: Id) -> Id {
        match self.as_number(exponent).and_then(Number::as_exact) {
            Some(exact) => self.power(base, exact),
            None => self.store(Node::PowerOf(base, exponent)),
        }
    }

    /// A function of one argument.
    pub fn apply(&mut self, function: Function, argument: Id) -> Id {
        match (function, self.node(argument)) {
            (Function::Exp, Node::Number(value)) if value.is_zero() => self.whole(1),
            (Function::Ln, Node::Number(value)) if *value == Number::ONE => self.whole(0),
            (Function::Ln, Node::Apply(Function::Exp, inner)) => *inner,
            _ => self.store(Node::Apply(function, argument)),
        }
    }

    /// The smaller or larger of two.
    pub fn extremum(&mut self, extremum: Extremum, left: Id, right: Id) -> Id {
        if left == right {
            return left;
        }
        self.store(Node::Extremum(extremum, left.min(right), left.max(right)))
    }

    /// A table, or a derivative of it. A table of one argument takes the same node twice.
    pub fn look_up(&mut self, table: TableId, at: [Id; 2], order: [u8; 2]) -> Id {
        if order.iter().any(|each| *each > 1) {
            return self.number(Number::ZERO);
        }
        self.store(Node::LookUp { table, at, order })
    }

    /// One of two expressions, by a comparison.
    pub fn choose(
        &mut self,
        relation: Relation,
        [left, right]: [Id; 2],
        then: Id,
        otherwise: Id,
    ) -> Id {
        if then == otherwise {
            return then;
        }
        match (self.as_number(left), self.as_number(right)) {
            (Some(a), Some(b)) if relation.holds(a.value(), b.value()) => then,
            (Some(_), Some(_)) => otherwise,
            _ => self.store(Node::Choose { relation, left, right, then, otherwise }),
        }
    }

    /// The nodes directly below a node.
    pub fn operands(&self, id: Id) -> Vec<Id> {
        match self.node(id) {
            Node::Number(_) | Node::Pi | Node::Symbol(_) => Vec::new(),
            Node::Sum(ids) | Node::Product(ids) => ids.to_vec(),
            Node::Power(base, _) => vec![*base],
            Node::Named(_, inner) => vec![*inner],
            Node::PowerOf(a, b) | Node::Extremum(_, a, b) => vec![*a, *b],
            Node::Apply(_, argument) => vec![*argument],
            Node::LookUp { at, .. } => at.to_vec(),
            Node::Choose { left, right, then, otherwise, .. } => {
                vec![*left, *right, *then, *otherwise]
            }
        }
    }

    /// All nodes that some nodes are made of, themselves included, operands first.
    pub fn reachable(&self, roots: impl IntoIterator<Item = Id>) -> Vec<Id> {
        let mut seen = vec![false; self.nodes.len()];
        let mut waiting: Vec<Id> = roots.into_iter().collect();
        while let Some(id) = waiting.pop() {
            if !std::mem::replace(&mut seen[id.0 as usize], true) {
                waiting.extend(self.operands(id));
            }
        }
        (0..).zip(seen).filter(|(_, seen)| *seen).map(|(index, _)| Id(index)).collect()
    }

    /// Splits `3*x` into 3 and `x`; a bare constant has no core.
    pub(in crate::model) fn split_coefficient(&mut self, id: Id) -> (Number, Option<Id>) {
        match self.node(id) {
            Node::Number(value) => (*value, None),
            Node::Product(factors) => match self.as_number(factors[0]) {
                Some(coefficient) => {
                    let rest = factors[1..].to_vec();
                    (coefficient, Some(self.product(rest)))
                }
                None => (Number::ONE, Some(id)),
            },
            _ => (Number::ONE, Some(id)),
        }
    }
}

fn minus_one() -> Number {
    Number::Exact(Rational::whole(-1))
}

/// `(x^a)^b = x^(a b)` holds for every x where b is whole, and where a is not (x is then positive
/// already); for a whole and b not it would turn `sqrt(x^2)` into `x`.
fn powers_combine(first: Rational, second: Rational) -> bool {
    second.as_whole().is_some() || first.as_whole().is_none()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn symbols(graph: &mut Graph) -> [Id; 3] {
        [0, 1, 2].map(|index| graph.symbol(SymbolId(index)))
    }

    #[test]
    fn equal_expressions_are_the_same_node() {
        let mut graph = Graph::default();
        let [x, y, z] = symbols(&mut graph);
        let left = graph.sum([x, y]);
        let first = graph.sum([left, z]);
        let right = graph.sum([z, y]);
        let second = graph.sum([x, right]);
        assert_eq!(first, second);
    }

    #[test]
    fn like_terms_and_powers_collect() {
        let mut graph = Graph::default();
        let [x, y, _] = symbols(&mut graph);
        let twice = graph.sum([x, x]);
        let back = graph.difference(twice, x);
        assert_eq!(back, x);
        let root = graph.root(x);
        let again = graph.product([root, root]);
        assert_eq!(again, x);
        let ratio = graph.quotient(x, y);
        let product = graph.product([ratio, y]);
        assert_eq!(product, x);
    }

    #[test]
    fn the_root_of_a_square_is_not_the_number() {
        let mut graph = Graph::default();
        let [x, ..] = symbols(&mut graph);
        let square = graph.power(x, Rational::whole(2));
        assert_ne!(graph.root(square), x);
    }

    #[test]
    fn a_power_of_zero_that_does_not_exist_is_left_standing() {
        let mut graph = Graph::default();
        let zero = graph.whole(0);
        let inverse = graph.power(zero, Rational::whole(-1));
        assert!(graph.as_number(inverse).is_none());
    }
}
