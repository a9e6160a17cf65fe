//! From the equations as text to a model: names ordered, dimensions checked, every fault noted.

use std::collections::{BTreeMap, HashSet};
use std::ops::Range;

use super::blueprint::{
    Blueprint, Fault, FaultProblem, Part, UnknownText, mismatch_fault, syntax_fault,
};
use super::expression::{
    Function, Graph, MismatchError, Number, SymbolId, Tree, TreeKind, parse, parse_equation,
};
use super::system::{Definition, Model, Unknown};
use crate::units::Dimension;

/// The steps from a blueprint to a model.
pub(super) struct Builder<'a> {
    blueprint: &'a Blueprint,
    model: Model,
    faults: Vec<Fault>,
}

impl<'a> Builder<'a> {
    pub(super) fn new(blueprint: &'a Blueprint) -> Self {
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
            borders: Vec::new(),
            names: all_names(blueprint),
            faulty: Vec::new(),
        };
        Self { blueprint, model, faults: Vec::new() }
    }

    pub(super) fn build(mut self) -> Result<Model, Vec<Fault>> {
        self.check_names();
        let trees = self.parse_definitions();
        let bounds = self.parse_bounds();
        if !self.faults.is_empty() {
            return Err(self.faults);
        }
        let order = self.order(&trees, &bounds);
        if !self.faults.is_empty() {
            return Err(self.faults);
        }
        for name in order {
            match (trees.get(&name), bounds.get(&name)) {
                (Some(tree), _) => self.define(&name, tree),
                (None, Some(bounds)) => self.declare_unknown(&name, bounds),
                (None, None) => {}
            }
        }
        for unknown in &self.blueprint.unknowns {
            self.close_unknown(unknown);
        }
        self.total_slope();
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
        for unknown in &self.blueprint.unknowns {
            if !seen.insert(&unknown.name) {
                let problem = FaultProblem::Duplicate(unknown.name.clone());
                self.faults.push(Fault { part: Part::UnknownName, span: 0..0, problem });
            }
        }
    }

    fn parse_definitions(&mut self) -> BTreeMap<String, Tree> {
        let mut trees = BTreeMap::new();
        for (name, text) in &self.blueprint.definitions {
            match parse(text) {
                Ok(tree) => drop(trees.insert(name.clone(), tree)),
                Err(error) => {
                    self.faults.push(syntax_fault(&Part::Definition(name.clone()), error));
                }
            }
        }
        trees
    }

    /// The bounds of the unknowns; their equations are read for their faults only, and again at the end.
    fn parse_bounds(&mut self) -> BTreeMap<String, [Tree; 2]> {
        let mut bounds = BTreeMap::new();
        for unknown in &self.blueprint.unknowns {
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
            if let (Some(from), Some(to)) = (from, to) {
                bounds.insert(unknown.name.clone(), [from, to]);
            }
        }
        bounds
    }

    /// Definitions in an order in which each stands after those it needs. An unknown needs its bounds.
    fn order(
        &mut self,
        trees: &BTreeMap<String, Tree>,
        bounds: &BTreeMap<String, [Tree; 2]>,
    ) -> Vec<String> {
        let mut needs: Vec<(String, HashSet<String>)> = Vec::new();
        for unknown in &self.blueprint.unknowns {
            let mut names = HashSet::new();
            for tree in &bounds[&unknown.name] {
                collect_names(tree, &mut names);
            }
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
                let circle = circle(&needs);
                let first = circle[0].clone();
                let is_unknown = bounds.contains_key(&first);
                let part = if is_unknown { Part::To } else { Part::Definition(first) };
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
                self.model.faulty.push(name.clone());
                self.model.definitions.push(Definition { name, id, dimension: Dimension::NONE });
            }
        }
    }

    /// The unknown as a symbol, with its bounds; its equation may need definitions that come later.
    fn declare_unknown(&mut self, name: &str, bounds: &[Tree; 2]) {
        let zero = self.model.graph.whole(0);
        let mut ids = [zero, zero];
        let mut dimensions = [None; 2];
        for (index, (tree, part)) in bounds.iter().zip([Part::From, Part::To]).enumerate() {
            match self.model.lower(tree, &part) {
                Ok(id) => ids[index] = id,
                Err(faults) => self.faults.extend(faults),
            }
            match self.model.graph_dimension(tree) {
                Ok(dimension) => dimensions[index] = dimension,
                Err(error) => self.faults.push(mismatch_fault(&part, error)),
            }
        }
        // A bound of 0 fits any dimension.
        let dimension = dimensions[0].or(dimensions[1]).unwrap_or(Dimension::NONE);
        let both = dimensions.map(|bound| bound.unwrap_or(dimension));
        if self.faults.is_empty() && both[0] != both[1] {
            let [from, to] = both.map(Dimension::described);
            let message = format!("both bounds need one dimension: `from` is {from}, `to` is {to}");
            let places = vec![(bounds[1].span.clone(), to)];
            self.faults.push(mismatch_fault(&Part::To, MismatchError { message, places }));
        }
        let symbol = SymbolId((self.model.inputs.len() + self.model.unknowns.len()) as u32);
        self.model.graph.symbol(symbol);
        self.model.unknowns.push(Unknown {
            name: name.to_owned(),
            symbol,
            dimension,
            residual: zero,
            slope: zero,
            lower: ids[0],
            upper: ids[1],
            rising: self.blueprint.unknowns.iter().any(|each| each.name == name && each.rising),
        });
    }

    fn close_unknown(&mut self, text: &UnknownText) {
        let found = self.model.unknowns.iter().position(|unknown| unknown.name == text.name);
        let Some(index) = found.filter(|_| self.faults.is_empty()) else { return };
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
                let slope =
                    self.model.graph.derivative(residual, self.model.unknowns[index].symbol);
                if self.model.graph.is_zero(slope) {
                    let name = text.name.clone();
                    self.fault(Part::Equation, 0..0, FaultProblem::NotInEquation(name));
                }
                self.model.unknowns[index].residual = residual;
                self.model.unknowns[index].slope = slope;
            }
            sides => self.faults.extend(sides.into_iter().filter_map(Result::err).flatten()),
        }
    }

    /// The slope of the first unknown's residual through the others, which follow it.
    fn total_slope(&mut self) {
        if self.model.unknowns.len() < 2 || !self.faults.is_empty() {
            return;
        }
        let first = &self.blueprint.unknowns[0].name;
        debug_assert!(self.model.unknowns[0].name == *first, "the others need the first");
        let Unknown { residual, symbol, .. } = self.model.unknowns[0];
        let slope = self.model.derivative_past_first(residual, symbol);
        self.model.unknowns[0].slope = slope;
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
        let Blueprint { flowing, beyond, borders, .. } = self.blueprint;
        let mut read = |text: &Option<String>| match self.model.expression(text.as_ref()?) {
            Ok((id, _)) => Some(id),
            Err(faults) => {
                self.faults.extend(faults);
                None
            }
        };
        let (flowing, beyond) = (read(flowing), read(beyond));
        let borders = borders.iter().filter_map(|text| read(&Some(text.clone()))).collect();
        self.model.flowing = flowing;
        self.model.beyond = beyond;
        self.model.borders = borders;
    }
}

/// Every name that an equation may hold.
fn all_names(blueprint: &Blueprint) -> Vec<String> {
    let inputs = blueprint.inputs.iter().map(|input| input.symbol.clone());
    let definitions = blueprint.definitions.iter().map(|(name, _)| name.clone());
    let unknown = blueprint.unknowns.iter().map(|unknown| unknown.name.clone());
    let functions = Function::ALL.iter().map(|(name, _)| (*name).to_owned());
    let others = ["sqrt", "min", "max"].map(str::to_owned);
    inputs.chain(definitions).chain(unknown).chain(functions).chain(others).collect()
}

/// A circle among definitions of which each needs another of them: from any one, needs followed until a
/// name comes again.
fn circle(needs: &[(String, HashSet<String>)]) -> Vec<String> {
    let mut path: Vec<&String> = Vec::new();
    let mut next = &needs[0];
    loop {
        if let Some(start) = path.iter().position(|name| **name == next.0) {
            return path[start..].iter().map(|name| (*name).clone()).collect();
        }
        path.push(&next.0);
        let mut wanted: Vec<&String> = next.1.iter().collect();
        wanted.sort_unstable();
        match needs.iter().find(|(name, _)| wanted.contains(&name)) {
            Some(found) => next = found,
            None => return path.into_iter().cloned().collect(),
        }
    }
}

/// All names in a tree, those of functions and tables too.
fn collect_names(tree: &Tree, names: &mut HashSet<String>) {
    match &tree.kind {
        TreeKind::Number(_) => {}
        TreeKind::Name(name) => drop(names.insert(name.clone())),
        TreeKind::Sum(parts) | TreeKind::Product(parts) => {
            for (_, part) in parts {
                collect_names(part, names);
            }
        }
        TreeKind::Power(parts) => parts.iter().for_each(|part| collect_names(part, names)),
        TreeKind::Call(_, parts) => parts.iter().for_each(|part| collect_names(part, names)),
        TreeKind::Choose { parts, .. } => {
            parts.iter().for_each(|part| collect_names(part, names));
        }
    }
}
