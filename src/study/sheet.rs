//! The sheet of a structure: its equation, its derivatives, its limits, and the source of every number.

use serde::Serialize;

use crate::model::structures::{
    CATALOGUE, Choice, Form, Installation, InstalledInput, SecondHead, Structure,
};
use crate::model::{Blueprint, Confidence, Input, Model};
use crate::units::{Dimension, significant, with_unit};

/// All that is known of a structure.
#[derive(Clone, Debug, Serialize)]
pub struct Sheet {
    /// Its kind.
    pub kind: String,
    /// What it is, in words.
    pub title: String,
    /// Number and title of its standard.
    pub standard: String,
    /// What the sheet is an example of; `None` where it is the whole.
    pub example: Option<String>,
    /// Its inputs: key, symbol, SI unit, meaning.
    pub inputs: Vec<[String; 4]>,
    /// The forms of its equation.
    pub regimes: Vec<RegimeSheet>,
    /// Equations for drowned flow.
    pub drowned: Vec<DrownedSheet>,
    /// What is checked besides the limits of use.
    pub checks: Vec<NumberLine>,
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
    /// The published uncertainty of the coefficient, or why there is none.
    pub coefficient: Vec<NumberLine>,
}

/// An equation for drowned flow.
#[derive(Clone, Debug, Serialize)]
pub struct DrownedSheet {
    /// The word that chooses it.
    pub name: String,
    /// When it holds.
    pub when: String,
    /// Its definitions; `f` is the factor on the modular discharge.
    pub equations: Vec<EquationLine>,
    /// Who published it.
    pub source: String,
    /// How well it is known, in words.
    pub confidence: String,
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
    /// Nodes of the second argument, if there is one; the constants of a choice.
    pub columns: Vec<String>,
    /// A node of the first argument, or a word, and the values there; null where none is published.
    pub rows: Vec<(String, Vec<Option<f64>>)>,
    /// Unit of the values.
    pub unit: String,
    /// Who published it.
    pub source: String,
    /// How well it is known, in words.
    pub confidence: String,
}

/// The sheet of a structure of the catalogue.
pub fn sheet(structure: &'static Structure) -> Sheet {
    let installation = Installation::plain(structure);
    // The catalogue builds; a test holds it so.
    let built = |form: Form| Some((Model::build(&form.blueprint).ok()?, form));
    let regimes = installation.forms().into_iter().filter_map(built);
    Sheet {
        kind: structure.kind.to_owned(),
        title: structure.title.to_owned(),
        standard: format!("{}, {}", structure.standard.document, structure.standard.title),
        example: example(&installation),
        inputs: inputs(&installation),
        regimes: regimes.map(|(model, form)| regime_sheet(&form, model)).collect(),
        drowned: drowned(&installation),
        checks: checks(&installation),
        numbers: numbers(structure),
        tables: structure
            .tables
            .iter()
            .map(table_sheet)
            .chain(structure.choice.map(choice_sheet))
            .collect(),
        velocity_of_approach: structure.velocity_of_approach.to_owned(),
    }
}

fn example(installation: &Installation) -> Option<String> {
    let first = installation.sections.first()?.installation.structure;
    let kinds = CATALOGUE.iter().filter(|each| each.head_in_approach).map(|each| each.kind);
    Some(format!(
        "Shown with {} sections of kind {}. A section can be: {}.",
        installation.sections.len(),
        first.kind,
        kinds.collect::<Vec<_>>().join(", ")
    ))
}

fn inputs(installation: &Installation) -> Vec<[String; 4]> {
    let choice = installation.structure.choice.map(|choice| {
        let words: Vec<&str> = choice.sets.iter().map(|(word, _)| *word).collect();
        let meaning = format!("{}: {}", choice.meaning, words.join(", "));
        [choice.key.to_owned(), "-".to_owned(), "-".to_owned(), meaning]
    });
    choice.into_iter().chain(installation.inputs().iter().map(input_line)).collect()
}

fn input_line(input: &InstalledInput) -> [String; 4] {
    let mut meaning = input.spec.meaning.to_owned();
    if let Some(default) = input.spec.default_value() {
        meaning = format!("{meaning} (default {default})");
    }
    [input.key.clone(), input.symbol.clone(), input.spec.dimension.to_string(), meaning]
}

/// The equations for drowned flow.
fn drowned(installation: &Installation) -> Vec<DrownedSheet> {
    installation
        .structure
        .drowned
        .iter()
        .map(|each| DrownedSheet {
            name: each.name.to_owned(),
            when: each.when.to_owned(),
            equations: each
                .definitions
                .iter()
                .map(|(name, text)| EquationLine {
                    name: (*name).to_owned(),
                    text: (*text).to_owned(),
                })
                .collect(),
            source: each.source.document.to_owned(),
            confidence: each.confidence.words().to_owned(),
        })
        .collect()
}

/// What is checked besides the limits of use: modular flow, critical flow, the place of the gauge.
fn checks(installation: &Installation) -> Vec<NumberLine> {
    let structure = installation.structure;
    let modular = structure.modular;
    let mut with_tailwater = installation.clone();
    let drowned = installation.drowned().first().copied();
    with_tailwater.second_head =
        Some(SecondHead { drowned, modular_limit: Some(0.5), curve: None });
    let form = with_tailwater.forms().swap_remove(0);
    let critical = form
        .limits
        .iter()
        .filter(|limit| limit.kind == crate::model::structures::LimitKind::Critical)
        .map(|limit| {
            let bound = format!("{} {} {}", limit.quantity, limit.side.sign(), limit.bound);
            line(limit.meaning.clone(), bound, limit.source.document, limit.confidence)
        });
    let definitions = form.blueprint.definitions.iter();
    let energies = definitions
        .filter(|(name, _)| ["y_2", "E_2", "E_c"].contains(&name.as_str()))
        .map(|(name, text)| {
            let source = crate::model::source::SPECIFIC_ENERGY;
            line(
                energy_meaning(name),
                format!("{name} = {text}"),
                source.document,
                Confidence::Derived,
            )
        });
    let position = structure.head_measured;
    let gauge = [(position.nearest, ">="), (position.farthest, "<=")].into_iter().filter_map(
        |(text, sign)| {
            let value = format!("gauge_distance {sign} {}, h the largest", text?);
            let what = "place of the gauge, [head] gauge_distance";
            Some(line(what, value, position.source.document, position.confidence))
        },
    );
    let ratio = modular.ratio.map_or_else(String::new, |ratio| format!(", M_L = {ratio}"));
    let highest = if installation.sections.is_empty() {
        format!("h_2 <= {}{ratio}", modular.highest)
    } else {
        modular.words.to_owned()
    };
    let first = line(
        "modular flow, with [tailwater]",
        highest,
        modular.source.document,
        modular.confidence,
    );
    std::iter::once(first).chain(critical).chain(energies).chain(gauge).collect()
}

fn energy_meaning(name: &str) -> &'static str {
    match name {
        "y_2" => "depth of the undisturbed flow above the approach bed",
        "E_2" => "its specific energy",
        _ => "least energy above the sill that the control takes",
    }
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

fn regime_sheet(form: &Form, mut model: Model) -> RegimeSheet {
    let mut equations: Vec<EquationLine> = Vec::new();
    let several = model.unknowns().len() > 1;
    for unknown in model.unknowns() {
        let residual = residual_name(&unknown.name, several);
        let from = model.text(unknown.lower);
        equations.push(EquationLine {
            name: unknown.name.clone(),
            text: format!("the smallest root above {from} of {residual} = 0"),
        });
        equations.push(EquationLine { name: residual, text: model.text(unknown.residual) });
    }
    equations.extend(model.definitions().iter().rev().map(|each| EquationLine {
        name: each.name.clone(),
        text: model.text_of_definition(each.id),
    }));
    // The result stands first, and what makes it; then the definitions.
    equations.sort_by_key(|each| each.name != model.result_name());
    let limits = form
        .limits
        .iter()
        .map(|limit| {
            let unit = model
                .expression(&limit.quantity)
                .map_or_else(|_| "1".to_owned(), |(_, dimension)| dimension.to_string());
            // A bound in symbols has its unit from them.
            let unit = if limit.bound.parse::<f64>().is_ok() { unit.as_str() } else { "1" };
            let bound = format!(
                "{} {} {}",
                limit.quantity,
                limit.side.sign(),
                with_unit(&*limit.bound, unit)
            );
            line(limit.meaning.clone(), bound, limit.source.document, limit.confidence)
        })
        .collect();
    let rules = form.automatic.iter().filter(|source| source.is_coefficient).map(|source| {
        let (by, confidence) = source.published;
        line(source.name.clone(), source.words.clone(), by.document, confidence)
    });
    let unstated = form.unstated.iter().map(|each| {
        line(
            each.inputs.join(", "),
            each.why.clone(),
            form.structure.standard.document,
            Confidence::Doubtful,
        )
    });
    RegimeSheet {
        name: form.regime.clone(),
        when: form.when.clone(),
        equations,
        derivatives: derivatives(form, &mut model),
        limits,
        coefficient: rules.chain(unstated).collect(),
    }
}

/// A derivative longer than this is not read by anybody: it is then given in parts.
const READABLE: usize = 240;

/// The derivatives of the result by every input; where one of them is too long to read, those of each
/// definition by what stands in it, which the chain rule joins.
fn derivatives(form: &Form, model: &mut Model) -> Vec<DerivativeLine> {
    let whole = whole_derivatives(model);
    if whole.iter().all(|line| line.text.chars().count() <= READABLE) {
        whole
    } else {
        partial_derivatives(form, model)
    }
}

/// For each definition, and each residual of an unknown, its derivatives by the names in it, those held.
fn partial_derivatives(form: &Form, model: &Model) -> Vec<DerivativeLine> {
    let several = model.unknowns().len() > 1;
    let symbols: Vec<Input> = model
        .inputs()
        .iter()
        .cloned()
        .chain(model.definitions().iter().map(|each| as_input(&each.name, each.dimension)))
        .chain(model.unknowns().iter().map(|each| as_input(&each.name, each.dimension)))
        .collect();
    let definitions = form.blueprint.definitions.iter().cloned();
    let residuals = form.blueprint.unknowns.iter().filter_map(|unknown| {
        let (left, right) = unknown.equation.split_once(" = ")?;
        Some((residual_name(&unknown.name, several), format!("{left} - ({right})")))
    });
    let mut lines = Vec::new();
    for (name, text) in residuals.chain(definitions) {
        let blueprint = Blueprint {
            inputs: symbols.iter().filter(|input| input.symbol != name).cloned().collect(),
            definitions: vec![(name.clone(), text)],
            result: name.clone(),
            constants: form.blueprint.constants.clone(),
            tables: form.blueprint.tables.clone(),
            ..Blueprint::default()
        };
        // What is part of a model that builds, builds by itself.
        let Ok(mut part) = Model::build(&blueprint) else { continue };
        let inputs = part.inputs().to_vec();
        for (index, input) in inputs.iter().enumerate() {
            let by = crate::model::expression::SymbolId(index as u32);
            let derivative = part.partial_derivative(part.result(), by);
            if !part.graph().is_zero(derivative) {
                lines.push(DerivativeLine {
                    name: format!("∂{name}/∂{}", input.symbol),
                    text: part.text(derivative),
                });
            }
        }
    }
    lines
}

fn as_input(name: &str, dimension: Dimension) -> Input {
    Input { key: name.to_owned(), symbol: name.to_owned(), dimension }
}

/// The derivatives of the result by every input, through the unknowns.
fn whole_derivatives(model: &mut Model) -> Vec<DerivativeLine> {
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
    let several = model.unknowns().len() > 1;
    for (index, unknown) in model.unknowns().to_vec().into_iter().enumerate() {
        let residual = residual_name(&unknown.name, several);
        let by_unknown = model.partial_derivative(result, unknown.symbol);
        if unknown.name != name {
            lines.push(DerivativeLine {
                name: format!("∂{name}/∂{}", unknown.name),
                text: model.text(by_unknown),
            });
        }
        lines.push(DerivativeLine {
            name: format!("d{residual}/d{}", unknown.name),
            text: model.text(unknown.slope),
        });
        for (input, symbol) in symbols.iter().enumerate() {
            let slope = model.unknown_slope(index, input);
            if !model.graph().is_zero(slope) {
                lines.push(DerivativeLine {
                    name: format!("d{}/d{symbol}", unknown.name),
                    text: model.text(slope),
                });
            }
        }
    }
    lines
}

/// What an unknown is the root of.
fn residual_name(unknown: &str, several: bool) -> String {
    if several { format!("F_{unknown}") } else { "F".to_owned() }
}

fn numbers(structure: &'static Structure) -> Vec<NumberLine> {
    let constants = structure.constants.iter().map(|each| {
        line(
            format!("{} ({})", each.meaning, each.symbol),
            with_unit(each.value.to_string(), &each.dimension.to_string()),
            each.source.document,
            each.confidence,
        )
    });
    let adjustments = structure
        .adjustments
        .iter()
        .map(|each| line(each.name, each.words, each.source.document, each.confidence));
    let (modular, position) = (structure.modular, structure.head_measured);
    let statements = [
        line("head measured", position.words, position.source.document, position.confidence),
        line("modular", modular.words, modular.source.document, modular.confidence),
    ];
    constants.chain(adjustments).chain(statements).collect()
}

fn table_sheet(table: &crate::model::structures::PublishedTable) -> TableSheet {
    let (first, first_unit, nodes) = table.first;
    let number = |node: &f64| significant(*node, 4);
    let columns: Vec<String> =
        table.second.map_or_else(Vec::new, |(_, _, nodes)| nodes.iter().map(number).collect());
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
            .map(|(node, values)| (number(node), values.iter().copied().map(Some).collect()))
            .collect(),
        columns,
        unit: table.unit.to_owned(),
        source: table.source.document.to_owned(),
        confidence: table.confidence.words().to_owned(),
    }
}

/// The sets of constants that a word picks, as a table with a row for each word.
fn choice_sheet(choice: Choice) -> TableSheet {
    let symbols: Vec<String> = choice
        .symbols
        .iter()
        .map(|(symbol, dimension, meaning)| {
            format!(
                "{symbol} {}",
                with_unit(*meaning, &format!("[{dimension}]").replace("[1]", "1"))
            )
        })
        .collect();
    TableSheet {
        what: format!("{}: {}; columns: {}", choice.key, choice.meaning, symbols.join("; ")),
        arguments: vec![choice.key.to_owned()],
        columns: choice.symbols.iter().map(|(symbol, ..)| (*symbol).to_owned()).collect(),
        rows: choice
            .sets
            .iter()
            .map(|(word, values)| {
                let known = |value: &f64| Some(*value).filter(|value| !value.is_nan());
                ((*word).to_owned(), values.iter().map(known).collect())
            })
            .collect(),
        unit: "m and m3/s".to_owned(),
        source: choice.source.document.to_owned(),
        confidence: choice.confidence.words().to_owned(),
    }
}
