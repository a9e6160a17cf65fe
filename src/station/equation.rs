//! `kind = "equation"`: an equation of the user's own, of any dimension.

use super::section::{Findings, Section, string};
use super::structure::{
    Evidence, Kind, StationInput, StructureSection, gravity_of, read_input, read_value,
};
use crate::diagnostic::{Code, Diagnostic, Span, listed, nearest, shown};
use crate::model::expression::LowerError;
use crate::model::structures::{COEFFICIENT_FACTOR, HEAD};
use crate::model::{Blueprint, Fault, FaultProblem, Input, Model, Part, UnknownText};
use crate::units::{Dimension, Unit, UnitError};

/// The word in `kind`.
pub(super) const KIND: &str = "equation";

/// An equation of the user's own, checked.
#[derive(Clone, Debug)]
pub struct Equation {
    /// The equations.
    pub blueprint: Blueprint,
    /// The unit that the result is to be shown in.
    pub unit: Unit,
    /// It reads the head.
    pub reads_head: bool,
}

/// More names than any equation needs; work grows with their square.
const MOST_NAMES: usize = 300;
/// Characters of all definitions together: each may become an operation on a block of trials.
const MOST_TEXT: usize = 50_000;

/// Where the texts of the equations stand in the file.
#[derive(Default)]
struct Places {
    definitions: Vec<(String, Span, String)>,
    unknown: Vec<(Part, Span, String)>,
    result: Span,
}

pub(super) fn read(
    mut section: Section<'_, '_>,
    findings: &mut Findings<'_>,
) -> Option<StructureSection> {
    let before = findings.list.len();
    let mut places = Places::default();
    let mut inputs = read_inputs(&mut section, findings);
    let reads_head = inputs.iter().any(|input| input.key == HEAD.key);
    let gravity = gravity_of(&mut section, findings);
    let factor_span = section.key_span(COEFFICIENT_FACTOR.key);
    let factor = read_input(&mut section, &COEFFICIENT_FACTOR, findings);
    let definitions = read_definitions(&mut section, &mut places, findings);
    let unknown = read_unknown(&mut section, &mut places, findings);
    let result = section.text("result", findings);
    if result.is_none() && section.get("result").is_none() {
        let title = "[structure] of kind `equation` needs `result`";
        findings
            .push(Diagnostic::error(Code::MissingKey, section.span.clone(), title).help(
                "name the definition that is the answer, for example result = \"discharge\"",
            ));
    }
    let unit = read_unit(&mut section, findings);
    section.finish(findings);
    let (result, result_span) = result?;
    places.result = result_span;

    // A name that the user has given a meaning of their own keeps it.
    let taken = inputs.iter().any(|input| input.symbol == gravity.symbol)
        || definitions.iter().any(|(name, _)| *name == gravity.symbol);
    if !taken {
        inputs.push(gravity);
    } else if let Some(span) = gravity.span {
        let title = "`gravity` has no effect: `g` is a name of this equation's own";
        findings.error(Code::UnusedKey, span, title);
    }
    let blueprint = Blueprint {
        inputs: inputs.iter().map(model_input).collect(),
        definitions,
        unknowns: unknown.into_iter().collect(),
        result: result.clone(),
        ..Blueprint::default()
    };
    if findings.list.len() > before {
        return None;
    }
    if let Some(title) = too_large(&blueprint) {
        findings.error(Code::OutsideDomain, places.result, title);
        return None;
    }
    let known: Vec<String> = blueprint.definitions.iter().map(|(name, _)| name.clone()).collect();
    if let Some(near) = nearest(&result, known.iter().map(String::as_str))
        && !known.contains(&result)
        && blueprint.unknowns.iter().all(|unknown| unknown.name != result)
    {
        let span = places.result;
        findings.push(
            Diagnostic::error(
                Code::UnknownName,
                span.clone(),
                format!("nothing defines the result `{result}`"),
            )
            .help(format!("the nearest definition is `{near}`"))
            .fix(span, format!("\"{near}\"")),
        );
        return None;
    }
    let model = match Model::build(&blueprint) {
        Ok(model) => model,
        Err(faults) => {
            for fault in &faults {
                report(fault, &places, findings);
            }
            return None;
        }
    };
    let unit = unit?;
    if unit.dimension().in_equations() != model.result_dimension() {
        let title = format!(
            "`unit` is {}, but the result `{result}` is {}",
            unit.dimension().described(),
            model.result_dimension().described()
        );
        findings.error(Code::DimensionMismatch, places.result, title);
        return None;
    }
    let multiplies = reads_head && blueprint.definitions.iter().any(|(name, _)| *name == result);
    let blueprint = match (factor, factor_span) {
        (Some(factor), _) if multiplies => {
            let blueprint = with_factor(blueprint, &factor);
            inputs.push(factor);
            blueprint
        }
        (_, Some(span)) => {
            findings.push(
                Diagnostic::error(Code::UnusedKey, span, "`coefficient_factor` has no effect here")
                    .help("it multiplies a result that is a definition, of an equation that reads a head"),
            );
            return None;
        }
        _ => blueprint,
    };
    let equation = Equation { blueprint, unit, reads_head };
    Some(StructureSection { kind: Kind::Own(Box::new(equation)), inputs, unused: Vec::new() })
}

fn model_input(input: &StationInput) -> Input {
    Input { key: input.key.clone(), symbol: input.symbol.clone(), dimension: input.dimension }
}

/// The factor on the coefficient multiplies the result wherever it is used. The user's own
/// equations were checked without it, so none of them holds its symbol.
fn with_factor(mut blueprint: Blueprint, factor: &StationInput) -> Blueprint {
    blueprint.inputs.push(model_input(factor));
    for (name, text) in &mut blueprint.definitions {
        if *name == blueprint.result {
            *text = format!("{}*({text})", factor.symbol);
        }
    }
    blueprint
}

fn read_inputs(section: &mut Section<'_, '_>, findings: &mut Findings<'_>) -> Vec<StationInput> {
    let help = "list every quantity of the equation, for example [structure.inputs] h = \"head\"";
    let Some(value) = section.need("inputs", help, findings) else { return Vec::new() };
    let Some(mut table) = Section::of("[structure.inputs]", value, findings) else {
        return Vec::new();
    };
    let mut inputs = Vec::new();
    for (name, span, value) in table.entries() {
        if !is_name(&name) {
            not_a_name(&name, span, findings);
            continue;
        }
        let is_head = value.get_ref().as_str() == Some(HEAD.key);
        if is_head {
            inputs.push(StationInput {
                key: HEAD.key.to_owned(),
                symbol: name,
                dimension: Dimension::LENGTH,
                value: None,
                text: String::new(),
                unit: Unit::si(Dimension::LENGTH),
                span: Some(value.span()),
                observations: Vec::new(),
                evidence: Evidence::default(),
            });
        } else {
            inputs.extend(read_value(&name, value, None, findings));
        }
    }
    if inputs.iter().filter(|input| input.key == HEAD.key).count() > 1 {
        let title = "two inputs are the head: one is due";
        findings.error(Code::DuplicateName, table.span.clone(), title);
    }
    inputs
}

fn read_definitions(
    section: &mut Section<'_, '_>,
    places: &mut Places,
    findings: &mut Findings<'_>,
) -> Vec<(String, String)> {
    let help = "for example [structure.definitions] discharge = \"c * b * h^1.5\"";
    let Some(value) = section.need("definitions", help, findings) else { return Vec::new() };
    let Some(mut table) = Section::of("[structure.definitions]", value, findings) else {
        return Vec::new();
    };
    let mut definitions = Vec::new();
    for (name, span, value) in table.entries() {
        if !is_name(&name) {
            not_a_name(&name, span, findings);
        } else if let Some(text) = string(&name, value, findings) {
            places.definitions.push((name.clone(), value.span(), text.clone()));
            definitions.push((name, text));
        }
    }
    definitions
}

/// Why an equation has more names or text than its answer would be waited for.
fn too_large(blueprint: &Blueprint) -> Option<String> {
    if blueprint.definitions.len() + blueprint.inputs.len() > MOST_NAMES {
        return Some(format!(
            "an equation has at most {MOST_NAMES} definitions and inputs together"
        ));
    }
    let length: usize = blueprint.definitions.iter().map(|(_, text)| text.len()).sum();
    (length > MOST_TEXT)
        .then(|| format!("the definitions have {length} characters; {MOST_TEXT} are read"))
}

fn read_unknown(
    section: &mut Section<'_, '_>,
    places: &mut Places,
    findings: &mut Findings<'_>,
) -> Option<UnknownText> {
    let value = section.get("unknown")?;
    let mut table = Section::of("[structure.unknown]", value, findings)?;
    let mut read = |key: &str, part: Part, help: &str| {
        let value = table.need(key, help, findings)?;
        let text = string(key, value, findings)?;
        places.unknown.push((part, value.span(), text.clone()));
        Some(text)
    };
    let name = read("name", Part::UnknownName, "the quantity that the equation gives");
    let equation = read("equation", Part::Equation, "for example \"H = h + v^2/(2*g)\"");
    let from = read("from", Part::From, "the smallest value it can have, for example \"h\"");
    let to = read("to", Part::To, "the largest value it can have, for example \"2*h\"");
    table.finish(findings);
    let name = name?;
    if !is_name(&name) {
        not_a_name(&name, value.span(), findings);
        return None;
    }
    Some(UnknownText { name, equation: equation?, from: from?, to: to?, rising: false })
}

fn read_unit(section: &mut Section<'_, '_>, findings: &mut Findings<'_>) -> Option<Unit> {
    let value =
        section.need("unit", "the unit of the result, for example unit = \"m3/s\"", findings)?;
    let text = string("unit", value, findings)?;
    match Unit::parse(&text) {
        Ok(unit) => Some(unit),
        Err(error) => {
            let diagnostic =
                Diagnostic::error(Code::UnknownUnit, value.span(), format!("`unit`: {error}"));
            findings.push(match error {
                UnitError::Unknown { nearest: Some(near), .. } => {
                    diagnostic.help(format!("did you mean `{near}`?"))
                }
                _ => diagnostic.help("docs/station-file.md lists the units"),
            });
            None
        }
    }
}

/// A name that equations can hold, and that is none of their words.
fn is_name(name: &str) -> bool {
    let words = ["when", "otherwise", "sqrt", "min", "max", "pi", "π", COEFFICIENT_FACTOR.symbol];
    let functions = crate::model::expression::Function::ALL.map(|(name, _)| name);
    let mut letters = name.chars();
    letters.next().is_some_and(char::is_alphabetic)
        && letters.all(|c| c.is_alphabetic() || c.is_ascii_digit() || c == '_')
        && !words.contains(&name)
        && !functions.contains(&name)
        && name.len() <= 60
}

fn not_a_name(name: &str, span: Span, findings: &mut Findings<'_>) {
    let shown = shown(name);
    findings.push(
        Diagnostic::error(
            Code::EquationSyntax,
            span,
            format!("`{shown}` cannot be a name in an equation"),
        )
        .help("names are letters, digits and _, start with a letter, and are no function's"),
    );
}

/// Places a fault of the equations in the file.
fn report(fault: &Fault, places: &Places, findings: &mut Findings<'_>) {
    let (whole, text, what) = match &fault.part {
        Part::Definition(name) => {
            let place = places.definitions.iter().find(|(known, ..)| known == name);
            place.map_or((places.result.clone(), "", name.clone()), |(_, span, text)| {
                (span.clone(), text.as_str(), name.clone())
            })
        }
        Part::Result | Part::Expression => (places.result.clone(), "", "result".to_owned()),
        part => {
            let place = places.unknown.iter().find(|(known, ..)| known == part);
            let what = match part {
                Part::Equation => "equation",
                Part::From => "from",
                Part::To => "to",
                _ => "name",
            };
            place.map_or((places.result.clone(), "", what.to_owned()), |(_, span, text)| {
                (span.clone(), text.as_str(), what.to_owned())
            })
        }
    };
    let place = |span: &Span| {
        let inside = findings.inside(&whole, text, span);
        // An empty place (the end of the text) is shown as the string's last character.
        if inside.is_empty() { inside.start..inside.start + 1 } else { inside }
    };
    let title = format!("`{what}`: {fault}");
    let diagnostic = match &fault.problem {
        FaultProblem::Syntax(_) => {
            Diagnostic::error(Code::EquationSyntax, place(&fault.span), title).help(
                "a product needs its sign: c * b; numbers with a unit belong to [structure.inputs]",
            )
        }
        FaultProblem::Name(LowerError::UnknownName { nearest, .. }) => {
            let diagnostic = Diagnostic::error(Code::UnknownName, place(&fault.span), title);
            match nearest {
                Some(nearest) => diagnostic
                    .help(format!("the nearest known name is `{nearest}`"))
                    .fix(place(&fault.span), nearest.clone()),
                None => diagnostic.help("define it, or list it in [structure.inputs]"),
            }
        }
        FaultProblem::Name(_) => Diagnostic::error(Code::EquationSyntax, place(&fault.span), title),
        FaultProblem::Mismatch(error) => {
            let mut diagnostic =
                Diagnostic::error(Code::DimensionMismatch, place(&fault.span), title);
            for (index, (span, text)) in error.places.iter().enumerate() {
                if index == 0 {
                    diagnostic = diagnostic.label(text.clone());
                } else {
                    diagnostic = diagnostic.context(place(span), text.clone());
                }
            }
            diagnostic
        }
        FaultProblem::Duplicate(_) => Diagnostic::error(Code::DuplicateName, whole.clone(), title)
            .help("an input, a definition and the unknown each need a name of their own"),
        FaultProblem::Circular(circle) => {
            let names = listed(circle.iter().map(String::as_str));
            let title = format!("`{what}`: these quantities need each other: {names}");
            Diagnostic::error(Code::CircularDefinition, whole.clone(), title)
                .help("a quantity that depends on itself is an unknown: [structure.unknown]")
        }
        FaultProblem::NotInEquation(_) => {
            Diagnostic::error(Code::EquationSyntax, whole.clone(), title)
                .help("the equation must hold the unknown: total_head = h + discharge^2/(...)")
        }
        FaultProblem::NoResult(_) => Diagnostic::error(Code::UnknownName, whole.clone(), title)
            .help("the result is one of the definitions, or the unknown"),
    };
    findings.push(diagnostic);
}
