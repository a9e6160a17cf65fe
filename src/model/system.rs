//! A model: named definitions over inputs, some of them given only by an equation they must satisfy.

use std::collections::{BTreeMap, HashMap, HashSet};
use std::ops::Range;

use thiserror::Error;

use super::expression::{
    Dimensions, Graph, Id, LowerError, MismatchError, Names, Node, Number, Scope, SymbolId,
    SyntaxError, Table, TableId, Tree, TreeKind, parse, parse_equation,
};
use super::program::{Outcome, Program};
use crate::units::Dimension;

/// A quantity that a model takes from outside.
#[derive(Clone, Debug, PartialEq)]
pub struct Input {
    /// Its key in a station file.
    pub key: String,
    /// Its symbol in equations.
    pub symbol: String,
    /// Its dimension.
    pub dimension: Dimension,
}

/// The equations of a model as text, before they are checked.
#[derive(Clone, Debug, Default)]
pub struct Blueprint {
    /// The inputs.
    pub inputs: Vec<Input>,
    /// Published constants: name, value in SI units, dimension.
    pub constants: Vec<(String, f64, Dimension)>,
    /// Tables that the definitions look up, with the dimension of their values. Their arguments are pure
    /// numbers.
    pub tables: Vec<(Table, Dimension)>,
    /// Name and expression, in any order.
    pub definitions: Vec<(String, String)>,
    /// A quantity given by an equation that it must satisfy.
    pub unknown: Option<UnknownText>,
    /// The name of the result: a definition, or the unknown.
    pub result: String,
    /// An expression that is positive where water flows; elsewhere the result is 0.
    pub flowing: Option<String>,
    /// An expression that is positive where a published curve is left and its end held.
    pub beyond: Option<String>,
}

/// A scalar unknown as text.
#[derive(Clone, Debug, PartialEq)]
pub struct UnknownText {
    /// Its name.
    pub name: String,
    /// The equation it must satisfy.
    pub equation: String,
    /// The smallest value it can have; the root nearest above is meant.
    pub from: String,
    /// The largest value it can have.
    pub to: String,
}

/// Which text of a blueprint a fault is in.
#[derive(Clone, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Part {
    /// A definition, by name.
    Definition(String),
    /// The equation of the unknown.
    Equation,
    /// Its lower bound.
    From,
    /// Its upper bound.
    To,
    /// The name of the unknown.
    UnknownName,
    /// The name of the result.
    Result,
    /// An expression asked about the model: a limit, say.
    Expression,
}

/// What is wrong with a blueprint, and where.
#[derive(Clone, Debug, PartialEq, Error)]
#[error("{problem}")]
pub struct Fault {
    /// The text.
    pub part: Part,
    /// The bytes in that text.
    pub span: Range<usize>,
    /// What is wrong.
    pub problem: FaultProblem,
}

/// What can be wrong with a blueprint.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum FaultProblem {
    /// A text that cannot be read.
    #[error(transparent)]
    Syntax(#[from] SyntaxError),
    /// A name that means nothing.
    #[error(transparent)]
    Name(#[from] LowerError),
    /// Dimensions that do not fit.
    #[error(transparent)]
    Mismatch(#[from] MismatchError),
    /// A name that has a meaning already.
    #[error("`{0}` is defined twice")]
    Duplicate(String),
    /// Definitions that need each other.
    #[error("these definitions need each other: {}", .0.join(", "))]
    Circular(Vec<String>),
    /// The result is neither a definition nor the unknown.
    #[error("nothing defines the result `{0}`")]
    NoResult(String),
}

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
}

/// What the compiler needs of an unknown.
#[derive(Clone, Copy, Debug)]
pub(super) struct UnknownParts {
    pub(super) symbol: Id,
    pub(super) residual: Id,
    pub(super) slope: Id,
    pub(super) lower: Id,
    pub(super) upper: Id,
}

/// A checked model: one graph for everything that is asked of it.
#[derive(Clone, Debug)]
pub struct Model {
    graph: Graph,
    inputs: Vec<Input>,
    constants: Vec<(String, Id, Dimension)>,
    tables: HashMap<String, (TableId, Dimension)>,
    definitions: Vec<Definition>,
    unknowns: Vec<Unknown>,
    result: Id,
    result_name: String,
    result_dimension: Dimension,
    flowing: Option<Id>,
    beyond: Option<Id>,
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
    /// (implicit-function theorem; JCGM 102:2011 6.3 uses the same).
    pub fn derivative(&mut self, of: Id, input: usize) -> Id {
        let by = SymbolId(input as u32);
        let mut result = self.graph.derivative(of, by);
        for index in 0..self.unknowns.len() {
            let through = self.graph.derivative(of, self.unknowns[index].symbol);
            if !self.graph.is_zero(through) {
                let slope = self.unknown_slope(index, input);
                let term = self.graph.product([through, slope]);
                result = self.graph.sum([result, term]);
            }
        }
        result
    }

    /// The partial derivative of an expression by a symbol, the unknowns held.
    pub fn partial_derivative(&mut self, of: Id, by: SymbolId) -> Id {
        self.graph.derivative(of, by)
    }

    /// How an unknown changes with an input.
    pub fn unknown_slope(&mut self, unknown: usize, input: usize) -> Id {
        let Unknown { residual, slope, .. } = self.unknowns[unknown];
        let by_input = self.graph.derivative(residual, SymbolId(input as u32));
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

    /// Table look-ups among the operands of the result: table, arguments.
    pub fn look_ups(&self) -> Vec<(TableId, [Id; 2])> {
        let residuals = self.unknowns.iter().map(|unknown| unknown.residual);
        let roots: Vec<Id> = residuals.chain([self.result]).collect();
        self.graph
            .reachable(roots)
            .into_iter()
            .filter_map(|id| match self.graph.node(id) {
                Node::LookUp { table, at, order: [0, 0] } => Some((*table, *at)),
                _ => None,
            })
            .collect()
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
        let Unknown { symbol, residual, slope, lower, upper, .. } = self.unknowns[unknown];
        UnknownParts { symbol: self.graph.symbol(symbol), residual, slope, lower, upper }
    }

    /// Of the nodes that `roots` are made of, those that contain `symbol`.
    pub(super) fn dependents(
        &self,
        roots: impl IntoIterator<Item = Id>,
        symbol: Id,
    ) -> HashSet<Id> {
        let mut result = HashSet::from([symbol]);
        for id in self.graph.reachable(roots) {
            if self.graph.operands(id).iter().any(|operand| result.contains(operand)) {
                result.insert(id);
            }
        }
        result
    }

    fn graph_dimension(&self, tree: &Tree) -> Result<Option<Dimension>, MismatchError> {
        super::expression::check_dimensions(tree, self)
    }

    /// Lowers a tree into this model's graph, with faults placed in `part`.
    fn lower(&mut self, tree: &Tree, part: &Part) -> Result<Id, Vec<Fault>> {
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
        let definitions = self.model.definitions.iter().map(|each| each.name.clone());
        self.symbols.keys().cloned().chain(definitions).collect()
    }
}

fn syntax_fault(part: &Part, error: SyntaxError) -> Fault {
    Fault { part: part.clone(), span: error.span.clone(), problem: error.into() }
}

fn mismatch_fault(part: &Part, error: MismatchError) -> Fault {
    let span = error.places.first().map_or(0..0, |(span, _)| span.clone());
    Fault { part: part.clone(), span, problem: error.into() }
}

/// The steps from a blueprint to a model.
struct Builder<'a> {
    blueprint: &'a Blueprint,
    model: Model,
    faults: Vec<Fault>,
}

impl<'a> Builder<'a> {
    fn new(blueprint: &'a Blueprint) -> Self {
        let mut graph = Graph::default();
        // Symbols come first, in the order of the inputs, so that products print in that order.
        for index in 0..blueprint.inputs.len() {
            graph.symbol(SymbolId(index as u32));
        }
        let tables = blueprint
            .tables
            .iter()
            .map(|(table, dimension)| {
                (table.name().to_owned(), (graph.add_table(table.clone()), *dimension))
            })
            .collect();
        let constants = blueprint
            .constants
            .iter()
            .map(|(name, value, dimension)| {
                (name.clone(), graph.number(Number::decimal(*value)), *dimension)
            })
            .collect();
        let result = graph.whole(0);
        let model = Model {
            graph,
            inputs: blueprint.inputs.clone(),
            constants,
            tables,
            definitions: Vec::new(),
            unknowns: Vec::new(),
            result,
            result_name: blueprint.result.clone(),
            result_dimension: Dimension::NONE,
            flowing: None,
            beyond: None,
        };
        Self { blueprint, model, faults: Vec::new() }
    }

    fn build(mut self) -> Result<Model, Vec<Fault>> {
        self.check_names();
        let trees = self.parse_definitions();
        let bounds = self.parse_bounds();
        if !self.faults.is_empty() {
            return Err(self.faults);
        }
        let order = self.order(&trees, bounds.as_ref());
        if !self.faults.is_empty() {
            return Err(self.faults);
        }
        for name in order {
            match (trees.get(&name), &bounds) {
                (Some(tree), _) => self.define(&name, tree),
                (None, Some(bounds)) => self.declare_unknown(&name, bounds),
                (None, None) => {}
            }
        }
        self.close_unknown();
        self.find_result();
        self.read_conditions();
        if self.faults.is_empty() { Ok(self.model) } else { Err(self.faults) }
    }

    fn fault(&mut self, part: Part, span: Range<usize>, problem: FaultProblem) {
        self.faults.push(Fault { part, span, problem });
    }

    fn check_names(&mut self) {
        let mut seen: HashSet<&str> =
            self.blueprint.inputs.iter().map(|input| input.symbol.as_str()).collect();
        for (name, _) in &self.blueprint.definitions {
            if !seen.insert(name) {
                let problem = FaultProblem::Duplicate(name.clone());
                self.faults.push(Fault {
                    part: Part::Definition(name.clone()),
                    span: 0..0,
                    problem,
                });
            }
        }
        if let Some(unknown) = &self.blueprint.unknown
            && !seen.insert(&unknown.name)
        {
            let problem = FaultProblem::Duplicate(unknown.name.clone());
            self.faults.push(Fault { part: Part::UnknownName, span: 0..0, problem });
        }
    }

    fn parse_definitions(&mut self) -> BTreeMap<String, Tree> {
        let mut trees = BTreeMap::new();
        for (name, text) in &self.blueprint.definitions {
            match parse(text) {
                Ok(tree) => drop(trees.insert(name.clone(), tree)),
                Err(error) => {
                    self.faults.push(syntax_fault(&Part::Definition(name.clone()), error))
                }
            }
        }
        trees
    }

    /// The bounds of the unknown; its equation is read for its faults only, and again at the end.
    fn parse_bounds(&mut self) -> Option<[Tree; 2]> {
        let unknown = self.blueprint.unknown.as_ref()?;
        if let Err(error) = parse_equation(&unknown.equation) {
            self.faults.push(syntax_fault(&Part::Equation, error));
        }
        let mut read = |part, text| match parse(text) {
            Ok(tree) => Some(tree),
            Err(error) => {
                self.faults.push(syntax_fault(&part, error));
                None
            }
        };
        let from = read(Part::From, &unknown.from);
        let to = read(Part::To, &unknown.to);
        Some([from?, to?])
    }

    /// Definitions in an order in which each stands after those it needs. The unknown needs its bounds.
    fn order(&mut self, trees: &BTreeMap<String, Tree>, bounds: Option<&[Tree; 2]>) -> Vec<String> {
        let mut needs: Vec<(String, HashSet<String>)> = Vec::new();
        if let (Some(unknown), Some(bounds)) = (&self.blueprint.unknown, bounds) {
            let mut names = HashSet::new();
            bounds.iter().for_each(|tree| collect_names(tree, &mut names));
            needs.push((unknown.name.clone(), names));
        }
        for (name, _) in &self.blueprint.definitions {
            let mut names = HashSet::new();
            collect_names(&trees[name], &mut names);
            needs.push((name.clone(), names));
        }
        let defined: HashSet<String> = needs.iter().map(|(name, _)| name.clone()).collect();
        for (_, names) in &mut needs {
            names.retain(|name| defined.contains(name));
        }
        let mut order: Vec<String> = Vec::new();
        while !needs.is_empty() {
            let ready = |names: &HashSet<String>| names.iter().all(|name| order.contains(name));
            let Some(next) = needs.iter().position(|(_, names)| ready(names)) else {
                let mut circle: Vec<String> = needs.into_iter().map(|(name, _)| name).collect();
                let first = circle[0].clone();
                circle.sort_unstable();
                let unknown = self.blueprint.unknown.as_ref().map(|unknown| &unknown.name);
                let part =
                    if unknown == Some(&first) { Part::From } else { Part::Definition(first) };
                self.fault(part, 0..0, FaultProblem::Circular(circle));
                return Vec::new();
            };
            order.push(needs.remove(next).0);
        }
        order
    }

    fn define(&mut self, name: &str, tree: &Tree) {
        let part = Part::Definition(name.to_owned());
        let lowered = self.model.lower(tree, &part);
        let dimension = self.model.graph_dimension(tree);
        match (lowered, dimension) {
            (Ok(id), Ok(dimension)) => {
                let id = self.model.graph.named(name, id);
                let dimension = dimension.unwrap_or(Dimension::NONE);
                self.model.definitions.push(Definition { name: name.to_owned(), id, dimension });
            }
            (lowered, dimension) => {
                self.faults.extend(lowered.err().unwrap_or_default());
                self.faults.extend(dimension.err().map(|error| mismatch_fault(&part, error)));
                // The name stays known, so that what needs it is not reported as well.
                let id = self.model.graph.whole(0);
                let name = name.to_owned();
                self.model.definitions.push(Definition { name, id, dimension: Dimension::NONE });
            }
        }
    }

    /// The unknown as a symbol, with its bounds; its equation may need definitions that come later.
    fn declare_unknown(&mut self, name: &str, bounds: &[Tree; 2]) {
        let zero = self.model.graph.whole(0);
        let mut ids = [zero, zero];
        let mut dimensions = [Dimension::NONE; 2];
        for (index, (tree, part)) in bounds.iter().zip([Part::From, Part::To]).enumerate() {
            match self.model.lower(tree, &part) {
                Ok(id) => ids[index] = id,
                Err(faults) => self.faults.extend(faults),
            }
            match self.model.graph_dimension(tree) {
                Ok(dimension) => dimensions[index] = dimension.unwrap_or(Dimension::NONE),
                Err(error) => self.faults.push(mismatch_fault(&part, error)),
            }
        }
        if self.faults.is_empty() && dimensions[0] != dimensions[1] {
            let [from, to] = dimensions.map(Dimension::described);
            let message = format!("both bounds need one dimension: `from` is {from}, `to` is {to}");
            let places = vec![(bounds[1].span.clone(), to)];
            self.faults.push(mismatch_fault(&Part::To, MismatchError { message, places }));
        }
        let symbol = SymbolId((self.model.inputs.len() + self.model.unknowns.len()) as u32);
        self.model.graph.symbol(symbol);
        self.model.unknowns.push(Unknown {
            name: name.to_owned(),
            symbol,
            dimension: dimensions[0],
            residual: zero,
            slope: zero,
            lower: ids[0],
            upper: ids[1],
        });
    }

    fn close_unknown(&mut self) {
        let Some(text) = self.blueprint.unknown.as_ref() else { return };
        if !self.faults.is_empty() {
            return;
        }
        let Ok(sides) = parse_equation(&text.equation) else { return };
        let [left, right] = &sides;
        let lowered = [left, right].map(|side| self.model.lower(side, &Part::Equation));
        let dimensions = [left, right].map(|side| self.model.graph_dimension(side));
        match dimensions {
            [Ok(Some(left_dimension)), Ok(Some(right_dimension))]
                if left_dimension != right_dimension =>
            {
                let described = [left_dimension, right_dimension].map(Dimension::described);
                let message = format!(
                    "the two sides differ in dimension: the left is {}, the right is {}",
                    described[0], described[1]
                );
                let places = [left, right].map(|side| side.span.clone()).into_iter().zip(described);
                let places = places.collect();
                let error = MismatchError { message, places };
                self.faults.push(mismatch_fault(&Part::Equation, error));
            }
            results => {
                for error in results.into_iter().filter_map(Result::err) {
                    self.faults.push(mismatch_fault(&Part::Equation, error));
                }
            }
        }
        match lowered {
            [Ok(left), Ok(right)] => {
                let residual = self.model.graph.difference(left, right);
                let index = self.model.unknowns.len() - 1;
                let slope =
                    self.model.graph.derivative(residual, self.model.unknowns[index].symbol);
                self.model.unknowns[index].residual = residual;
                self.model.unknowns[index].slope = slope;
            }
            sides => self.faults.extend(sides.into_iter().filter_map(Result::err).flatten()),
        }
    }

    fn find_result(&mut self) {
        let name = &self.blueprint.result;
        let definition = self.model.definitions.iter().find(|each| each.name == *name);
        let unknown = self.model.unknowns.iter().find(|each| each.name == *name);
        match (definition, unknown) {
            (Some(definition), _) => {
                self.model.result_dimension = definition.dimension;
                self.model.result = definition.id;
            }
            (None, Some(unknown)) => {
                self.model.result_dimension = unknown.dimension;
                let symbol = unknown.symbol;
                self.model.result = self.model.graph.symbol(symbol);
            }
            (None, None) => {
                self.fault(Part::Result, 0..0, FaultProblem::NoResult(name.clone()));
            }
        }
    }

    fn read_conditions(&mut self) {
        if !self.faults.is_empty() {
            return;
        }
        let Blueprint { flowing, beyond, .. } = self.blueprint;
        let mut read = |text: &Option<String>| match self.model.expression(text.as_ref()?) {
            Ok((id, _)) => Some(id),
            Err(faults) => {
                self.faults.extend(faults);
                None
            }
        };
        let (flowing, beyond) = (read(flowing), read(beyond));
        self.model.flowing = flowing;
        self.model.beyond = beyond;
    }
}

/// All names in a tree, those of functions and tables too.
fn collect_names(tree: &Tree, names: &mut HashSet<String>) {
    match &tree.kind {
        TreeKind::Number(_) => {}
        TreeKind::Name(name) => drop(names.insert(name.clone())),
        TreeKind::Sum(parts) | TreeKind::Product(parts) => {
            parts.iter().for_each(|(_, part)| collect_names(part, names));
        }
        TreeKind::Power(parts) => parts.iter().for_each(|part| collect_names(part, names)),
        TreeKind::Call(_, parts) => parts.iter().for_each(|part| collect_names(part, names)),
        TreeKind::Choose { parts, .. } => {
            parts.iter().for_each(|part| collect_names(part, names));
        }
    }
}
