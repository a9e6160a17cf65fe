//! A model: named definitions over inputs, some of them given only by an equation they must satisfy.

use std::collections::{BTreeMap, HashMap};

use super::blueprint::{Blueprint, Fault, Input, Part, mismatch_fault, syntax_fault};
use super::build::Builder;
use super::expression::{
    Dimensions, Graph, Id, MismatchError, Names, Node, Number, Relation, Scope, SymbolId, Table,
    TableId, Tree, parse,
};
use super::program::{Outcome, Program};
use crate::units::Dimension;

/// A definition of a model.
#[derive(Clone, Debug, PartialEq)]
pub struct Definition {
    /// Its name.
    pub name: String,
    /// Its expression.
    pub id: Id,
    /// Its dimension.
    pub dimension: Dimension,
}

/// A scalar unknown of a model.
#[derive(Clone, Debug, PartialEq)]
pub struct Unknown {
    /// Its name.
    pub name: String,
    /// Its symbol.
    pub symbol: SymbolId,
    /// Its dimension.
    pub dimension: Dimension,
    /// Zero where the unknown has its value: left side minus right side.
    pub residual: Id,
    /// The derivative of the residual by the unknown.
    pub slope: Id,
    /// The smallest value it can have.
    pub lower: Id,
    /// The largest value it can have.
    pub upper: Id,
    /// Only a root at which the residual rises through zero is meant.
    pub rising: bool,
}

/// A condition on which the equation takes one branch or another.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Branch {
    /// The comparison.
    pub relation: Relation,
    /// Its left side.
    pub left: Id,
    /// Its right side.
    pub right: Id,
}

/// What the compiler needs of an unknown.
#[derive(Clone, Copy, Debug)]
pub(super) struct UnknownParts {
    pub(super) symbol: Id,
    pub(super) residual: Id,
    pub(super) slope: Id,
    pub(super) lower: Id,
    pub(super) upper: Id,
    pub(super) rising: bool,
}

/// A checked model: one graph for everything that is asked of it.
#[derive(Clone, Debug)]
pub struct Model {
    pub(super) graph: Graph,
    pub(super) inputs: Vec<Input>,
    pub(super) constants: Vec<(String, Id, Dimension)>,
    pub(super) tables: HashMap<String, (TableId, Dimension)>,
    pub(super) definitions: Vec<Definition>,
    pub(super) unknowns: Vec<Unknown>,
    pub(super) result: Id,
    pub(super) result_name: String,
    pub(super) result_dimension: Dimension,
    pub(super) flowing: Option<Id>,
    pub(super) beyond: Option<Id>,
    pub(super) borders: Vec<Id>,
    /// Every name of the blueprint, to find the nearest to a mistyped one.
    pub(super) names: Vec<String>,
    /// Definitions that have a fault: their dimension is not known.
    pub(super) faulty: Vec<String>,
}

impl Model {
    /// Reads, checks and joins the equations of a blueprint.
    ///
    /// # Errors
    ///
    /// Every [`Fault`] that can be told at once.
    ///
    /// ```
    /// use nappe::model::{Blueprint, Input, Model};
    /// use nappe::units::Dimension;
    ///
    /// let weir = Blueprint {
    ///     inputs: vec![Input {
    ///         key: "head".into(),
    ///         symbol: "h".into(),
    ///         dimension: Dimension::LENGTH,
    ///     }],
    ///     definitions: vec![("Q".into(), "8/15 * h^2.5".into())],
    ///     result: "Q".into(),
    ///     ..Blueprint::default()
    /// };
    /// let mut model = Model::build(&weir).unwrap();
    /// let by_head = model.derivative(model.result(), 0);
    /// assert_eq!(model.text(by_head), "4/3*h^1.5");
    /// ```
    pub fn build(blueprint: &Blueprint) -> Result<Self, Vec<Fault>> {
        Builder::new(blueprint).build()
    }

    /// The inputs, in the order of the symbols.
    pub fn inputs(&self) -> &[Input] {
        &self.inputs
    }

    /// The input with this key or symbol.
    pub fn input(&self, name: &str) -> Option<usize> {
        self.inputs.iter().position(|input| input.key == name || input.symbol == name)
    }

    /// The definitions, each after those it needs.
    pub fn definitions(&self) -> &[Definition] {
        &self.definitions
    }

    /// The unknowns.
    pub fn unknowns(&self) -> &[Unknown] {
        &self.unknowns
    }

    /// The result's expression.
    pub fn result(&self) -> Id {
        self.result
    }

    /// The result's name.
    pub fn result_name(&self) -> &str {
        &self.result_name
    }

    /// The result's dimension.
    pub fn result_dimension(&self) -> Dimension {
        self.result_dimension
    }

    /// The expression graph.
    pub fn graph(&self) -> &Graph {
        &self.graph
    }

    /// Reads an expression in the names of this model: a limit of use, say.
    ///
    /// # Errors
    ///
    /// The [`Fault`]s of the text, in the part [`Part::Expression`].
    pub fn expression(&mut self, text: &str) -> Result<(Id, Dimension), Vec<Fault>> {
        let part = Part::Expression;
        let tree = parse(text).map_err(|error| vec![syntax_fault(&part, error)])?;
        let dimension = self
            .graph_dimension(&tree)
            .map_err(|error| vec![mismatch_fault(&part, error)])?
            .unwrap_or(Dimension::NONE);
        Ok((self.lower(&tree, &part)?, dimension))
    }

    /// The derivative of an expression by an input, through the unknowns: for an unknown `H` given by
    /// `F(x, H) = 0`,
    ///
    /// ```text
    /// dy/dx = ∂y/∂x + ∂y/∂H · dH/dx,   dH/dx = -(∂F/∂x) / (∂F/∂H)
    /// ```
    ///
    /// (implicit-function theorem; JCGM 102:2011 6.3 uses the same). Where other unknowns follow the
    /// first, they are gone through first, at a fixed value of it.
    pub fn derivative(&mut self, of: Id, input: usize) -> Id {
        let by = SymbolId(input as u32);
        let Some(first) = self.unknowns.first().map(|unknown| unknown.symbol) else {
            return self.graph.derivative(of, by);
        };
        let held = self.derivative_past_first(of, by);
        let through = self.derivative_past_first(of, first);
        if self.graph.is_zero(through) {
            return held;
        }
        let slope = self.unknown_slope(0, input);
        let term = self.graph.product([through, slope]);
        self.graph.sum([held, term])
    }

    /// The derivative by a symbol, the first unknown's or an input's, through the unknowns after the first.
    pub(super) fn derivative_past_first(&mut self, of: Id, by: SymbolId) -> Id {
        let mut result = self.graph.derivative(of, by);
        for index in 1..self.unknowns.len() {
            let Unknown { symbol, residual, slope, .. } = self.unknowns[index];
            let through = self.graph.derivative(of, symbol);
            if !self.graph.is_zero(through) {
                let by_symbol = self.graph.derivative(residual, by);
                let ratio = self.graph.quotient(by_symbol, slope);
                let ratio = self.graph.negated(ratio);
                let term = self.graph.product([through, ratio]);
                result = self.graph.sum([result, term]);
            }
        }
        result
    }

    /// The partial derivative of an expression by a symbol, the unknowns held.
    pub fn partial_derivative(&mut self, of: Id, by: SymbolId) -> Id {
        self.graph.derivative(of, by)
    }

    /// How an unknown changes with an input: all told for the first, at a fixed value of the first for
    /// the others.
    pub fn unknown_slope(&mut self, unknown: usize, input: usize) -> Id {
        let Unknown { residual, slope, .. } = self.unknowns[unknown];
        let by = SymbolId(input as u32);
        let by_input = match unknown {
            0 => self.derivative_past_first(residual, by),
            _ => self.graph.derivative(residual, by),
        };
        let ratio = self.graph.quotient(by_input, slope);
        self.graph.negated(ratio)
    }

    /// Values of expressions at given inputs, and what became of them there.
    pub fn evaluate(&mut self, outputs: &[Id], inputs: &[f64]) -> (Vec<f64>, Outcome) {
        let free = vec![None; self.inputs.len()];
        Program::compile(self, outputs, &free, inputs).evaluate(inputs)
    }

    /// Writes an expression in the names of this model.
    pub fn text(&self, id: Id) -> String {
        self.graph.text(id, self)
    }

    /// Writes the right-hand side of a definition.
    pub fn text_of_definition(&self, id: Id) -> String {
        self.graph.text(self.graph.unnamed(id), self)
    }

    /// Everything that the result is made of, through the unknowns.
    fn parts_of_result(&self) -> Vec<Id> {
        let residuals = self.unknowns.iter().map(|unknown| unknown.residual);
        let roots: Vec<Id> = residuals.chain([self.result]).collect();
        self.graph.reachable(roots)
    }

    /// The conditions that the result branches on: those inside its equation, and the borders at which
    /// another form of it would be chosen.
    pub fn branches(&mut self) -> Vec<Branch> {
        let zero = self.graph.whole(0);
        let borders = self.borders.iter().map(|border| Branch {
            relation: Relation::AtMost,
            left: *border,
            right: zero,
        });
        let mut branches: Vec<Branch> = borders.collect();
        for id in self.parts_of_result() {
            let Node::Choose { relation, left, right, .. } = *self.graph.node(id) else { continue };
            let branch = Branch { relation, left, right };
            if !branches.contains(&branch) {
                branches.push(branch);
            }
        }
        branches
    }

    /// The distance of a branch's two sides, left minus right.
    pub fn distance(&mut self, branch: Branch) -> Id {
        self.graph.difference(branch.left, branch.right)
    }

    /// Table look-ups among the operands of the result: table, arguments.
    pub fn look_ups(&self) -> Vec<(TableId, [Id; 2])> {
        self.parts_of_result()
            .into_iter()
            .filter_map(|id| match self.graph.node(id) {
                Node::LookUp { table, at, order: [0, 0] } => Some((*table, *at)),
                _ => None,
            })
            .collect()
    }

    /// The inputs that an expression is made of, by place; those of its unknowns included.
    pub fn inputs_of(&self, id: Id) -> Vec<usize> {
        let mut found = Vec::new();
        let mut asked: Vec<usize> = Vec::new();
        let mut roots = vec![id];
        while let Some(root) = roots.pop() {
            for part in self.graph.reachable([root]) {
                let Node::Symbol(symbol) = self.graph.node(part) else { continue };
                let place = symbol.0 as usize;
                match place.checked_sub(self.inputs.len()) {
                    None => found.push(place),
                    Some(unknown) if asked.contains(&unknown) => {}
                    Some(unknown) => {
                        asked.push(unknown);
                        roots.push(self.unknowns[unknown].residual);
                    }
                }
            }
        }
        found
    }

    /// The table itself.
    pub fn table(&self, table: TableId) -> &Table {
        self.graph.table(table)
    }

    pub(super) fn flowing(&self) -> Option<Id> {
        self.flowing
    }

    pub(super) fn beyond(&self) -> Option<Id> {
        self.beyond
    }

    pub(super) fn split_coefficient(&mut self, id: Id) -> (Number, Option<Id>) {
        self.graph.split_coefficient(id)
    }

    pub(super) fn unknown_parts(&mut self, unknown: usize) -> UnknownParts {
        let Unknown { symbol, residual, slope, lower, upper, rising, .. } = self.unknowns[unknown];
        UnknownParts { symbol: self.graph.symbol(symbol), residual, slope, lower, upper, rising }
    }

    pub(super) fn graph_dimension(&self, tree: &Tree) -> Result<Option<Dimension>, MismatchError> {
        super::expression::check_dimensions(tree, self)
    }

    /// Lowers a tree into this model's graph, with faults placed in `part`.
    pub(super) fn lower(&mut self, tree: &Tree, part: &Part) -> Result<Id, Vec<Fault>> {
        let mut graph = std::mem::take(&mut self.graph);
        let symbols = self.symbol_ids(&mut graph);
        let scope = ModelScope { model: self, symbols };
        let lowered = super::expression::lower_tree(&mut graph, tree, &scope);
        self.graph = graph;
        lowered.map_err(|errors| {
            errors
                .into_iter()
                .map(|error| Fault {
                    part: part.clone(),
                    span: error.span(),
                    problem: error.into(),
                })
                .collect()
        })
    }

    fn symbol_ids(&self, graph: &mut Graph) -> BTreeMap<String, Id> {
        let inputs = self.inputs.iter().map(|input| input.symbol.clone());
        let unknowns = self.unknowns.iter().map(|unknown| unknown.name.clone());
        (0..)
            .zip(inputs.chain(unknowns))
            .map(|(index, name)| (name, graph.symbol(SymbolId(index))))
            .collect()
    }
}

impl Names for Model {
    fn symbol(&self, symbol: SymbolId) -> String {
        let index = symbol.0 as usize;
        match self.inputs.get(index) {
            Some(input) => input.symbol.clone(),
            None => self.unknowns[index - self.inputs.len()].name.clone(),
        }
    }
}

impl Dimensions for Model {
    fn of_name(&self, name: &str) -> Option<Dimension> {
        if self.faulty.iter().any(|faulty| faulty == name) {
            return None;
        }
        let inputs = self.inputs.iter().map(|input| (&input.symbol, input.dimension));
        let unknowns = self.unknowns.iter().map(|unknown| (&unknown.name, unknown.dimension));
        let definitions = self.definitions.iter().map(|each| (&each.name, each.dimension));
        let tables = self.tables.iter().map(|(name, (_, dimension))| (name, *dimension));
        let constants = self.constants.iter().map(|(name, _, dimension)| (name, *dimension));
        inputs
            .chain(constants)
            .chain(unknowns)
            .chain(definitions)
            .chain(tables)
            .find(|(known, _)| *known == name)
            .map(|(_, dimension)| dimension)
    }
}

struct ModelScope<'a> {
    model: &'a Model,
    symbols: BTreeMap<String, Id>,
}

impl Scope for ModelScope<'_> {
    fn name(&self, name: &str) -> Option<Id> {
        let definitions = &self.model.definitions;
        let constants = &self.model.constants;
        self.symbols
            .get(name)
            .copied()
            .or_else(|| constants.iter().find(|each| each.0 == name).map(|each| each.1))
            .or_else(|| definitions.iter().find(|each| each.name == name).map(|each| each.id))
    }

    fn table(&self, name: &str) -> Option<TableId> {
        self.model.tables.get(name).map(|(table, _)| *table)
    }

    fn known_names(&self) -> Vec<String> {
        self.model.names.clone()
    }
}
