//! From expressions to operations: constants folded, common parts once, powers through square roots.

use std::collections::{HashMap, HashSet};

use super::allocate::{Allocation, Draft, DraftKind};
use super::expression::{Graph, Id, Node, Number, Relation, SymbolId};
use super::program::{Program, Watched};
use super::system::{Branch, Model};
use crate::units::Rational;

/// The value of a node while a program is being made.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Value {
    Constant(f64),
    /// A virtual register: every operation has its own, before registers are shared out.
    Virtual(u32),
}

/// Makes a program of some expressions of a model.
pub(super) struct Compiler<'m> {
    model: &'m mut Model,
    fixed: Vec<Option<f64>>,
    next: u32,
    known: HashMap<Id, Value>,
    /// Roots of nodes, kept so that `x^1.5` and `x^2.5` share one square root.
    roots: HashMap<u32, Value>,
    constants: Vec<(u32, f64)>,
    inputs: Vec<Option<u32>>,
    drafts: Vec<(u32, Draft)>,
    /// While the body of a solve is made: the body, and those around it.
    bodies: Vec<Body>,
}

/// The body of a solve: what has to be computed anew for each value of its unknown.
struct Body {
    /// The unknown.
    symbol: Id,
    /// Nodes that contain the unknown, and nodes that do not; those made on the way are added.
    depends: HashSet<Id>,
    independent: HashSet<Id>,
    known: HashMap<Id, Value>,
    roots: HashMap<u32, Value>,
    drafts: Vec<(u32, Draft)>,
    own: HashSet<u32>,
}

impl<'m> Compiler<'m> {
    pub(super) fn new(model: &'m mut Model, fixed: &[Option<f64>]) -> Self {
        let inputs = vec![None; model.inputs().len()];
        Self {
            model,
            fixed: fixed.to_vec(),
            next: 0,
            known: HashMap::new(),
            roots: HashMap::new(),
            constants: Vec::new(),
            inputs,
            drafts: Vec::new(),
            bodies: Vec::new(),
        }
    }

    /// Compiles the outputs, the model's test of whether water flows, and the conditions whose sides are
    /// to be watched.
    pub(super) fn compile(mut self, outputs: &[Id], branches: &[Branch]) -> Program {
        let values: Vec<Value> = outputs.iter().map(|id| self.emit(*id)).collect();
        let mut watched = Vec::new();
        for Branch { relation, left, right } in branches {
            let sides = [*left, *right].map(|id| self.emit(id));
            // Where both sides are constant, no trial is on another branch.
            if sides.iter().any(|side| matches!(side, Value::Virtual(_))) {
                watched.push((*relation, sides));
            }
        }
        let flowing = self.model.flowing().map(|id| self.emit(id));
        let beyond = self.model.beyond().map(|id| self.emit(id));
        self.finish(&values, [flowing, beyond], &watched)
    }

    fn graph(&self) -> &Graph {
        self.model.graph()
    }

    fn fresh(&mut self) -> u32 {
        self.next += 1;
        self.next - 1
    }

    fn emit(&mut self, id: Id) -> Value {
        // A node belongs to the innermost body whose unknown it contains; the bodies inside that one are
        // put aside while it is made, so that it is computed once, outside of them.
        let level = (0..self.bodies.len()).rev().find(|level| self.depends(id, *level));
        let inside = self.bodies.split_off(level.map_or(0, |level| level + 1));
        let known = self.bodies.last().map_or(&self.known, |body| &body.known).get(&id).copied();
        let value = known.unwrap_or_else(|| self.emit_new(id));
        self.bodies.last_mut().map_or(&mut self.known, |body| &mut body.known).insert(id, value);
        self.bodies.extend(inside);
        value
    }

    /// Whether a node contains the unknown that a body solves for, itself or through an unknown that
    /// follows it.
    fn depends(&mut self, id: Id, level: usize) -> bool {
        let body = &self.bodies[level];
        if body.depends.contains(&id) {
            return true;
        }
        if body.independent.contains(&id) {
            return false;
        }
        let found = if let Node::Symbol(symbol) = *self.graph().node(id) {
            self.follows(id, symbol, level)
        } else {
            let operands = self.graph().operands(id);
            operands.into_iter().any(|operand| self.depends(operand, level))
        };
        let body = &mut self.bodies[level];
        if found {
            body.depends.insert(id)
        } else {
            body.independent.insert(id)
        };
        found
    }

    /// Whether a symbol is an unknown that follows the one of a body. One that is being solved for itself
    /// has a value there and follows none.
    fn follows(&mut self, id: Id, symbol: SymbolId, level: usize) -> bool {
        let Some(unknown) = (symbol.0 as usize).checked_sub(self.fixed.len()) else { return false };
        if self.bodies.iter().any(|body| body.symbol == id) {
            return false;
        }
        let parts = self.model.unknown_parts(unknown);
        let reached = self.graph().reachable([parts.lower, parts.upper, parts.residual]);
        reached.contains(&self.bodies[level].symbol)
    }

    fn emit_new(&mut self, id: Id) -> Value {
        match self.graph().node(id).clone() {
            Node::Number(number) => Value::Constant(number.value()),
            Node::Pi => Value::Constant(std::f64::consts::PI),
            Node::Symbol(symbol) => self.symbol(symbol),
            Node::Named(_, inner) => self.emit(inner),
            Node::Sum(terms) => self.sum(&terms),
            Node::Product(factors) => self.product(&factors),
            Node::Power(base, exponent) => {
                let base = self.emit(base);
                let magnitude = if exponent.is_negative() { exponent.negated() } else { exponent };
                let power = self.power(base, magnitude);
                if exponent.is_negative() {
                    self.divide(Value::Constant(1.0), power)
                } else {
                    power
                }
            }
            Node::PowerOf(base, exponent) => {
                let operands = [base, exponent].map(|id| self.emit(id));
                self.plain(DraftKind::PowerOf, &operands, |v| v[0].powf(v[1]))
            }
            Node::Apply(function, argument) => {
                let argument = self.emit(argument);
                self.plain(DraftKind::Apply(function), &[argument], |v| function.value(v[0]))
            }
            Node::Extremum(extremum, left, right) => {
                let operands = [left, right].map(|id| self.emit(id));
                self.plain(DraftKind::Extremum(extremum), &operands, |v| extremum.of(v[0], v[1]))
            }
            Node::LookUp { table, at, order } => {
                let operands = at.map(|id| self.emit(id));
                let values = self.graph().table(table).clone();
                self.plain(DraftKind::LookUp(table.0, order), &operands, |v| {
                    values.look_up([v[0], v[1]], order)
                })
            }
            Node::Choose { relation, left, right, then, otherwise } => {
                let operands = [left, right, then, otherwise].map(|id| self.emit(id));
                self.plain(DraftKind::Choose(relation), &operands, |v| {
                    if relation.holds(v[0], v[1]) { v[2] } else { v[3] }
                })
            }
        }
    }

    fn symbol(&mut self, symbol: SymbolId) -> Value {
        let index = symbol.0 as usize;
        if index >= self.fixed.len() {
            return self.solve(index - self.fixed.len());
        }
        if let Some(value) = self.fixed[index] {
            return Value::Constant(value);
        }
        let register = self.fresh();
        self.inputs[index] = Some(register);
        Value::Virtual(register)
    }

    /// An unknown: its bounds, then its residual and slope as a body of their own.
    fn solve(&mut self, unknown: usize) -> Value {
        let parts = self.model.unknown_parts(unknown);
        let lower = self.emit(parts.lower);
        let upper = self.emit(parts.upper);
        let (lower, upper) = (self.in_register(lower), self.in_register(upper));
        let register = self.fresh();
        self.bodies.push(Body {
            symbol: parts.symbol,
            depends: HashSet::from([parts.symbol]),
            independent: HashSet::new(),
            known: HashMap::from([(parts.symbol, Value::Virtual(register))]),
            roots: HashMap::new(),
            drafts: Vec::new(),
            own: HashSet::from([register]),
        });
        let mut residual = self.emit(parts.residual);
        if residual == Value::Virtual(register) {
            // The row of the unknown is taken out while it is stepped: nothing else may stand in it.
            residual = self.draft(DraftKind::AddConstant(0.0), vec![register]);
        }
        let slope = self.emit(parts.slope);
        let (residual, slope) = (self.in_register(residual), self.in_register(slope));
        let body = self.bodies.pop().map(|body| body.drafts).unwrap_or_default();
        self.push(
            register,
            Draft::Solve { lower, upper, body, residual, slope, only_rising: parts.rising },
        );
        Value::Virtual(register)
    }

    fn in_register(&mut self, value: Value) -> u32 {
        match value {
            Value::Virtual(register) => register,
            Value::Constant(constant) => {
                let known = self.constants.iter().find(|(_, c)| c.to_bits() == constant.to_bits());
                if let Some((register, _)) = known {
                    return *register;
                }
                let register = self.fresh();
                self.constants.push((register, constant));
                register
            }
        }
    }

    fn draft(&mut self, kind: DraftKind, operands: Vec<u32>) -> Value {
        let register = self.fresh();
        self.push(register, Draft::Plain(kind, operands));
        Value::Virtual(register)
    }

    /// Adds an operation to the innermost body.
    fn push(&mut self, register: u32, draft: Draft) {
        match self.bodies.last_mut() {
            Some(body) => {
                body.own.insert(register);
                body.drafts.push((register, draft));
            }
            None => self.drafts.push((register, draft)),
        }
    }

    fn plain(
        &mut self,
        kind: DraftKind,
        operands: &[Value],
        fold: impl Fn(&[f64]) -> f64,
    ) -> Value {
        let constants: Option<Vec<f64>> = operands
            .iter()
            .map(|operand| match operand {
                Value::Constant(value) => Some(*value),
                Value::Virtual(_) => None,
            })
            .collect();
        if let Some(values) = constants {
            return Value::Constant(fold(&values));
        }
        let operands = operands.iter().map(|operand| self.in_register(*operand)).collect();
        self.draft(kind, operands)
    }

    /// Positive terms added, then the others subtracted.
    fn sum(&mut self, terms: &[Id]) -> Value {
        let mut constant = 0.0;
        let mut added: Vec<Value> = Vec::new();
        let mut subtracted: Vec<Value> = Vec::new();
        for term in terms {
            let (coefficient, core) = self.model.split_coefficient(*term);
            let minus_one = coefficient == Number::Exact(Rational::whole(-1));
            let (negative, value) = match core {
                Some(core) if minus_one => (true, self.emit(core)),
                _ => (false, self.emit(*term)),
            };
            match value {
                Value::Constant(value) if negative => constant -= value,
                Value::Constant(value) => constant += value,
                varying @ Value::Virtual(_) if negative => subtracted.push(varying),
                varying @ Value::Virtual(_) => added.push(varying),
            }
        }
        let mut total = match added.split_first() {
            None => Value::Constant(constant),
            Some((first, rest)) => {
                let sum = rest.iter().fold(*first, |sum, term| self.add(sum, *term));
                self.add(sum, Value::Constant(constant))
            }
        };
        for term in subtracted {
            total = self.subtract(total, term);
        }
        total
    }

    /// Constants together first, then the varying factors, then one division.
    fn product(&mut self, factors: &[Id]) -> Value {
        let (mut above, mut below) = (Vec::new(), Vec::new());
        for factor in factors {
            match self.graph().node(*factor).clone() {
                Node::Power(base, exponent) if exponent.is_negative() => {
                    let base = self.emit(base);
                    below.push(self.power(base, exponent.negated()));
                }
                _ => above.push(self.emit(*factor)),
            }
        }
        let above = self.multiply_all(&above);
        let below = self.multiply_all(&below);
        self.divide(above, below)
    }

    fn multiply_all(&mut self, factors: &[Value]) -> Value {
        let mut constant = 1.0;
        let mut product: Option<Value> = None;
        for factor in factors {
            match (*factor, product) {
                (Value::Constant(value), _) => constant *= value,
                (varying, None) => product = Some(varying),
                (varying, Some(so_far)) => product = Some(self.multiply(so_far, varying)),
            }
        }
        match product {
            None => Value::Constant(constant),
            Some(product) => self.multiply(product, Value::Constant(constant)),
        }
    }

    fn add(&mut self, a: Value, b: Value) -> Value {
        match (a, b) {
            (other, Value::Constant(c)) | (Value::Constant(c), other) if c == 0.0 => other,
            (Value::Virtual(r), Value::Constant(c)) | (Value::Constant(c), Value::Virtual(r)) => {
                self.draft(DraftKind::AddConstant(c), vec![r])
            }
            _ => self.plain(DraftKind::Add, &[a, b], |v| v[0] + v[1]),
        }
    }

    fn subtract(&mut self, a: Value, b: Value) -> Value {
        match (a, b) {
            (Value::Virtual(r), Value::Constant(c)) => {
                self.draft(DraftKind::AddConstant(-c), vec![r])
            }
            (Value::Constant(c), Value::Virtual(r)) => {
                self.draft(DraftKind::SubtractFrom(c), vec![r])
            }
            _ => self.plain(DraftKind::Subtract, &[a, b], |v| v[0] - v[1]),
        }
    }

    fn multiply(&mut self, a: Value, b: Value) -> Value {
        match (a, b) {
            (other, Value::Constant(c)) | (Value::Constant(c), other) if c == 1.0 => other,
            (Value::Virtual(r), Value::Constant(c)) | (Value::Constant(c), Value::Virtual(r)) => {
                self.draft(DraftKind::Scale(c), vec![r])
            }
            _ => self.plain(DraftKind::Multiply, &[a, b], |v| v[0] * v[1]),
        }
    }

    fn divide(&mut self, a: Value, b: Value) -> Value {
        match (a, b) {
            (other, Value::Constant(1.0)) => other,
            (Value::Virtual(r), Value::Constant(c)) => {
                self.draft(DraftKind::Scale(1.0 / c), vec![r])
            }
            (Value::Constant(c), Value::Virtual(r)) => {
                self.draft(DraftKind::DivideInto(c), vec![r])
            }
            _ => self.plain(DraftKind::Divide, &[a, b], |v| v[0] / v[1]),
        }
    }

    /// A positive power: whole ones by multiplication, halves through the square root, which costs a
    /// twentieth of a general power.
    fn power(&mut self, base: Value, exponent: Rational) -> Value {
        let Value::Virtual(register) = base else {
            return self.plain(DraftKind::Power(exponent.value()), &[base], |v| {
                v[0].powf(exponent.value())
            });
        };
        let halves = exponent.times(Rational::whole(2)).and_then(Rational::as_whole);
        match halves {
            Some(halves @ 1..=16) => {
                let root = (halves % 2 == 1).then(|| self.root(register));
                match (self.whole_power(base, halves / 2), root) {
                    (Some(whole), Some(root)) => self.multiply(whole, root),
                    (Some(only), None) | (None, Some(only)) => only,
                    (None, None) => base,
                }
            }
            _ => self.draft(DraftKind::Power(exponent.value()), vec![register]),
        }
    }

    fn whole_power(&mut self, base: Value, exponent: i64) -> Option<Value> {
        match exponent {
            0 => None,
            1 => Some(base),
            _ => {
                let half = self.whole_power(base, exponent / 2)?;
                let square = self.multiply(half, half);
                Some(if exponent % 2 == 1 { self.multiply(square, base) } else { square })
            }
        }
    }

    fn root(&mut self, register: u32) -> Value {
        let level = self.bodies.iter().rposition(|body| body.own.contains(&register));
        let inside = self.bodies.split_off(level.map_or(0, |level| level + 1));
        let roots = self.bodies.last().map_or(&self.roots, |body| &body.roots);
        let value = match roots.get(&register) {
            Some(value) => *value,
            None => self.draft(DraftKind::Root, vec![register]),
        };
        let roots = self.bodies.last_mut().map_or(&mut self.roots, |body| &mut body.roots);
        roots.insert(register, value);
        self.bodies.extend(inside);
        value
    }

    fn finish(
        mut self,
        outputs: &[Value],
        conditions: [Option<Value>; 2],
        watched: &[(Relation, [Value; 2])],
    ) -> Program {
        let watched: Vec<(Relation, [u32; 2])> = watched
            .iter()
            .map(|(relation, sides)| (*relation, sides.map(|side| self.in_register(side))))
            .collect();
        let outputs: Vec<u32> = outputs.iter().map(|value| self.in_register(*value)).collect();
        let [flowing, beyond] = conditions.map(|value| value.map(|value| self.in_register(value)));
        let kept: Vec<u32> = self
            .constants
            .iter()
            .map(|(register, _)| *register)
            .chain(self.inputs.iter().flatten().copied())
            .chain(outputs.iter().copied())
            .chain(flowing)
            .chain(beyond)
            .chain(watched.iter().flat_map(|(_, sides)| *sides))
            .collect();
        let mut allocation = Allocation::new(&kept);
        let steps = allocation.allocate(&self.drafts);
        let place = |register: &u32| allocation.places[register];
        Program {
            steps,
            tables: self.model.graph().tables().to_vec(),
            constants: self.constants.iter().map(|(register, c)| (place(register), *c)).collect(),
            inputs: self.inputs.iter().map(|register| register.as_ref().map(place)).collect(),
            outputs: outputs.iter().map(place).collect(),
            flowing: flowing.as_ref().map(place),
            beyond: beyond.as_ref().map(place),
            watched: watched
                .iter()
                .map(|(relation, sides)| Watched {
                    relation: *relation,
                    sides: sides.map(|side| place(&side)),
                    nominal: false,
                })
                .collect(),
            registers: allocation.count as usize,
        }
    }
}
