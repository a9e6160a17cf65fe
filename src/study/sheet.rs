//! The sheet of a structure: its equation, its derivatives, its limits, and the source of every number.

use serde::Serialize;

use crate::model::structures::{InputSpec, Regime, Structure};
use crate::model::{Confidence, Model};

/// All that is known of a structure.
#[derive(Clone, Debug, Serialize)]
pub struct Sheet {
    /// Its kind.
    pub kind: String,
    /// What it is, in words.
    pub title: String,
    /// Number and title of its standard.
    pub standard: String,
    /// Its inputs: key, symbol, SI unit, meaning.
    pub inputs: Vec<[String; 4]>,
    /// The forms of its equation.
    pub regimes: Vec<RegimeSheet>,
    /// Published constants and uncertainties.
    pub numbers: Vec<NumberLine>,
    /// Published tables.
    pub tables: Vec<TableSheet>,
    /// How the velocity of approach enters.
    pub velocity_of_approach: String,
}

/// One form of the equation.
#[derive(Clone, Debug, Serialize)]
pub struct RegimeSheet {
    /// Its name.
    pub name: String,
    /// When it holds.
    pub when: String,
    /// The definitions, the result first.
    pub equations: Vec<EquationLine>,
    /// The derivatives of the result, and of the unknown, by each input that they depend on.
    pub derivatives: Vec<DerivativeLine>,
    /// Limits of use.
    pub limits: Vec<NumberLine>,
    /// The published uncertainty of the coefficient.
    pub coefficient: NumberLine,
}

/// A definition.
#[derive(Clone, Debug, Serialize)]
pub struct EquationLine {
    /// Left-hand side.
    pub name: String,
    /// Right-hand side.
    pub text: String,
}

/// A derivative.
#[derive(Clone, Debug, Serialize)]
pub struct DerivativeLine {
    /// `dQ/dh`.
    pub name: String,
    /// The expression.
    pub text: String,
}

/// A published number, or a statement, with its source.
#[derive(Clone, Debug, Serialize)]
pub struct NumberLine {
    /// What it is.
    pub what: String,
    /// Its value, with unit.
    pub value: String,
    /// Who published it.
    pub source: String,
    /// How well it is known, in words.
    pub confidence: String,
}

/// A published table.
#[derive(Clone, Debug, Serialize)]
pub struct TableSheet {
    /// Its name in the equation, and what it gives.
    pub what: String,
    /// The first argument with its unit; the second, if there is one.
    pub arguments: Vec<String>,
    /// Nodes of the second argument, if there is one.
    pub columns: Vec<f64>,
    /// A node of the first argument, and the values there.
    pub rows: Vec<(f64, Vec<f64>)>,
    /// Unit of the values.
    pub unit: String,
    /// Who published it.
    pub source: String,
    /// How well it is known, in words.
    pub confidence: String,
}

/// The sheet of a structure of the catalogue.
pub fn sheet(structure: &'static Structure) -> Sheet {
    let inputs = structure.all_inputs();
    let regimes = structure
        .regimes
        .iter()
        .enumerate()
        .filter_map(|(index, regime)| {
            // The catalogue builds; a test holds it so.
            let model = Model::build(&structure.blueprint(index)).ok()?;
            Some(regime_sheet(regime, model))
        })
        .collect();
    Sheet {
        kind: structure.kind.to_owned(),
        title: structure.title.to_owned(),
        standard: format!("{}, {}", structure.standard.document, structure.standard.title),
        inputs: inputs.iter().map(input_line).collect(),
        regimes,
        numbers: numbers(structure),
        tables: structure.tables.iter().map(table_sheet).collect(),
        velocity_of_approach: structure.velocity_of_approach.to_owned(),
    }
}

fn input_line(input: &InputSpec) -> [String; 4] {
    let mut meaning = input.meaning.to_owned();
    if let Some(default) = input.default.filter(|default| !default.is_nan()) {
        meaning = format!("{meaning} (default {default})");
    }
    [input.key.to_owned(), input.symbol.to_owned(), input.dimension.to_string(), meaning]
}

fn line(
    what: impl Into<String>,
    value: impl Into<String>,
    source: &str,
    confidence: Confidence,
) -> NumberLine {
    NumberLine {
        what: what.into(),
        value: value.into(),
        source: source.to_owned(),
        confidence: confidence.words().to_owned(),
    }
}

fn regime_sheet(regime: &Regime, mut model: Model) -> RegimeSheet {
    let mut equations: Vec<EquationLine> = model
        .definitions()
        .iter()
        .rev()
        .map(|each| EquationLine {
            name: each.name.clone(),
            text: model.text_of_definition(each.id),
        })
        .collect();
    // The result stands first, whatever the order of the definitions.
    equations.sort_by_key(|each| each.name != model.result_name());
    for unknown in model.unknowns() {
        equations.push(EquationLine {
            name: unknown.name.clone(),
            text: format!("the smallest root above {} of F = 0", model.text(unknown.lower)),
        });
        equations.push(EquationLine { name: "F".to_owned(), text: model.text(unknown.residual) });
    }
    let limits = regime
        .limits
        .iter()
        .map(|limit| {
            let unit = model
                .expression(limit.quantity)
                .map(|(_, dimension)| dimension.to_string())
                .ok()
                .filter(|unit| unit != "1")
                .map_or_else(String::new, |unit| format!(" {unit}"));
            let bound =
                format!("{} {} {}{unit}", limit.quantity, limit.bound.sign(), limit.bound.value());
            line(limit.meaning, bound, limit.source.document, limit.confidence)
        })
        .collect();
    let rule = regime.coefficient;
    RegimeSheet {
        name: regime.name.to_owned(),
        when: regime.when.to_owned(),
        equations,
        derivatives: derivatives(&mut model),
        limits,
        coefficient: line(
            "published coefficient",
            rule.words,
            rule.source.document,
            rule.confidence,
        ),
    }
}

/// The derivatives of the result. Through an unknown they are given in parts: with the unknown held, by
/// the unknown, and of the unknown, which together are dQ/dx = ∂Q/∂x + ∂Q/∂H dH/dx.
fn derivatives(model: &mut Model) -> Vec<DerivativeLine> {
    let result = model.result();
    let name = model.result_name().to_owned();
    let mut lines = Vec::new();
    let implicit = !model.unknowns().is_empty();
    let d = if implicit { "∂" } else { "d" };
    let symbols: Vec<String> = model.inputs().iter().map(|input| input.symbol.clone()).collect();
    for (index, symbol) in symbols.iter().enumerate() {
        let by = crate::model::expression::SymbolId(index as u32);
        let partial = model.partial_derivative(result, by);
        if !model.graph().is_zero(partial) {
            lines.push(DerivativeLine {
                name: format!("{d}{name}/{d}{symbol}"),
                text: model.text(partial),
            });
        }
    }
    for (index, unknown) in model.unknowns().to_vec().into_iter().enumerate() {
        let by_unknown = model.partial_derivative(result, unknown.symbol);
        lines.push(DerivativeLine {
            name: format!("∂{name}/∂{}", unknown.name),
            text: model.text(by_unknown),
        });
        lines.push(DerivativeLine {
            name: format!("∂F/∂{}", unknown.name),
            text: model.text(unknown.slope),
        });
        for (input, symbol) in symbols.iter().enumerate() {
            let slope = model.unknown_slope(index, input);
            if !model.graph().is_zero(slope) {
                let by = crate::model::expression::SymbolId(input as u32);
                let of_residual = model.partial_derivative(unknown.residual, by);
                lines.push(DerivativeLine {
                    name: format!("d{}/d{symbol}", unknown.name),
                    text: format!("-({})/(∂F/∂{})", model.text(of_residual), unknown.name),
                });
            }
        }
    }
    lines
}

fn numbers(structure: &'static Structure) -> Vec<NumberLine> {
    let constants = structure.constants.iter().map(|each| {
        let unit = each.dimension.to_string();
        let unit = if unit == "1" { String::new() } else { format!(" {unit}") };
        line(
            format!("{} ({})", each.meaning, each.symbol),
            format!("{}{unit}", each.value),
            each.source.document,
            each.confidence,
        )
    });
    let adjustments = structure
        .adjustments
        .iter()
        .map(|each| line(each.name, each.words, each.source.document, each.confidence));
    let statements = [("head measured", &structure.head_measured), ("modular", &structure.modular)]
        .into_iter()
        .map(|(what, each)| line(what, each.text, each.source.document, each.confidence));
    constants.chain(adjustments).chain(statements).collect()
}

fn table_sheet(table: &crate::model::structures::PublishedTable) -> TableSheet {
    let (first, first_unit, nodes) = table.first;
    let columns = table.second.map_or_else(Vec::new, |(_, _, nodes)| nodes.to_vec());
    let width = columns.len().max(1);
    let named = |name: &str, unit: &str| format!("{name} [{unit}]");
    TableSheet {
        what: format!("{}: {}", table.name, table.meaning),
        arguments: std::iter::once(named(first, first_unit))
            .chain(table.second.map(|(name, unit, _)| named(name, unit)))
            .collect(),
        rows: nodes
            .iter()
            .zip(table.values.chunks(width))
            .map(|(node, values)| (*node, values.to_vec()))
            .collect(),
        columns,
        unit: table.unit.to_owned(),
        source: table.source.document.to_owned(),
        confidence: table.confidence.words().to_owned(),
    }
}
