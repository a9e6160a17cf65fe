//! Exact first derivatives of every node.

use std::collections::HashMap;

use super::{Extremum, Function, Graph, Id, Node, Number, Relation, SymbolId};
use crate::units::Rational;

impl Graph {
    /// The partial derivative of a node by a symbol, other symbols held.
    ///
    /// Where a function has no derivative (abs at 0, min and max where both are equal, a table at a
    /// node) it is that of one side: the branch that is taken there, the segment above a table's node.
    pub fn derivative(&mut self, of: Id, by: SymbolId) -> Id {
        let mut known: HashMap<Id, Id> = HashMap::new();
        // Operands stand before the nodes made of them, so one pass in order does.
        for id in self.reachable([of]) {
            let derivative = self.derivative_of_node(id, by, &known);
            known.insert(id, derivative);
        }
        known[&of]
    }

    fn derivative_of_node(&mut self, id: Id, by: SymbolId, known: &HashMap<Id, Id>) -> Id {
        match self.node(id).clone() {
            Node::Number(_) | Node::Pi => self.whole(0),
            Node::Symbol(symbol) => self.whole(i64::from(symbol == by)),
            Node::Named(_, inner) => known[&inner],
            Node::Sum(terms) => self.sum(terms.iter().map(|term| known[term])),
            Node::Product(factors) => self.derivative_of_product(&factors, known),
            Node::Power(base, exponent) => {
                let less = exponent.plus(Rational::whole(-1)).unwrap_or(exponent);
                let power = self.power(base, less);
                let factor = self.number(Number::Exact(exponent));
                self.product([factor, power, known[&base]])
            }
            Node::PowerOf(base, exponent) => self.derivative_of_power(id, base, exponent, known),
            Node::Apply(function, argument) => {
                let inner = known[&argument];
                if self.is_zero(inner) {
                    return inner;
                }
                let outer = self.derivative_of_function(function, argument, id);
                self.product([outer, inner])
            }
            Node::Extremum(extremum, left, right) => {
                let (first, second) = match extremum {
                    Extremum::Min => (left, right),
                    Extremum::Max => (right, left),
                };
                self.choose(Relation::AtMost, [first, second], known[&left], known[&right])
            }
            Node::LookUp { table, at, order } => {
                let arguments = self.table(table).arguments();
                let mut terms = Vec::new();
                for which in 0..arguments {
                    let inner = known[&at[which]];
                    if !self.is_zero(inner) {
                        let mut higher = order;
                        higher[which] += 1;
                        let slope = self.look_up(table, at, higher);
                        terms.push(self.product([slope, inner]));
                    }
                }
                self.sum(terms)
            }
            Node::Choose { relation, left, right, then, otherwise } => {
                self.choose(relation, [left, right], known[&then], known[&otherwise])
            }
        }
    }

    /// Each factor's derivative times the others.
    fn derivative_of_product(&mut self, factors: &[Id], known: &HashMap<Id, Id>) -> Id {
        let mut terms = Vec::new();
        for (index, factor) in factors.iter().enumerate() {
            let derivative = known[factor];
            if self.is_zero(derivative) {
                continue;
            }
            let others = factors.iter().enumerate().filter(|(other, _)| *other != index);
            let product: Vec<Id> = others.map(|(_, other)| *other).chain([derivative]).collect();
            terms.push(self.product(product));
        }
        self.sum(terms)
    }

    /// `b^e (e' ln b + e b'/b)`, with only the terms that exist.
    fn derivative_of_power(
        &mut self,
        power: Id,
        base: Id,
        exponent: Id,
        known: &HashMap<Id, Id>,
    ) -> Id {
        let mut terms = Vec::new();
        if !self.is_zero(known[&exponent]) {
            let logarithm = self.apply(Function::Ln, base);
            terms.push(self.product([power, known[&exponent], logarithm]));
        }
        if !self.is_zero(known[&base]) {
            let ratio = self.quotient(known[&base], base);
            terms.push(self.product([power, exponent, ratio]));
        }
        self.sum(terms)
    }

    /// The derivative of a function by its argument; `value` is the function's own node.
    fn derivative_of_function(&mut self, function: Function, argument: Id, value: Id) -> Id {
        let one = self.whole(1);
        match function {
            Function::Exp => value,
            Function::Ln => self.power(argument, Rational::whole(-1)),
            Function::Sin => self.apply(Function::Cos, argument),
            Function::Cos => {
                let sine = self.apply(Function::Sin, argument);
                self.negated(sine)
            }
            Function::Tan => {
                let cosine = self.apply(Function::Cos, argument);
                self.power(cosine, Rational::whole(-2))
            }
            Function::Arcsin | Function::Arccos => {
                let square = self.power(argument, Rational::whole(2));
                let rest = self.difference(one, square);
                let slope = self.power(rest, Rational::HALF.negated());
                if function == Function::Arcsin { slope } else { self.negated(slope) }
            }
            Function::Arctan => {
                let square = self.power(argument, Rational::whole(2));
                let below = self.sum([one, square]);
                self.power(below, Rational::whole(-1))
            }
            Function::Abs => {
                let zero = self.whole(0);
                let minus = self.negated(one);
                self.choose(Relation::AtMost, [zero, argument], one, minus)
            }
        }
    }
}
