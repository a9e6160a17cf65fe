//! `[structure]`: which weir or flume it is, and its dimensions.

use toml::Spanned;
use toml::de::DeValue;

use super::compound;
use super::equation::{self, Equation};
use super::quantity;
use super::section::{Findings, Section, article};
use crate::diagnostic::{Code, Diagnostic, Span, nearest, shown};
use crate::model::structures::{
    CATALOGUE, COMPOUND, Choice, GRAVITY, InputSpec, Installation, InstalledInput,
    KINETIC_ENERGY_COEFFICIENT, find, section_key,
};
use crate::units::{Dimension, Unit, significant};

/// The kind of a station's structure.
#[derive(Clone, Debug)]
pub enum Kind {
    /// One of the catalogue, as it is installed.
    Catalogue(Box<Installation>),
    /// An equation of the user's own.
    Own(Box<Equation>),
}

/// An input as a file states it.
#[derive(Clone, Debug, PartialEq)]
pub struct StationInput {
    /// Its key.
    pub key: String,
    /// Its symbol.
    pub symbol: String,
    /// Its dimension.
    pub dimension: Dimension,
    /// Its value in SI units; `None` for the head, and for one that may be left out and was.
    pub value: Option<f64>,
    /// As it was written; empty for a default.
    pub text: String,
    /// The unit it was stated in.
    pub unit: Unit,
    /// Its place in the file.
    pub span: Option<Span>,
    /// Observed values, where it is given by them, in SI units.
    pub observations: Vec<f64>,
    /// What stands behind it.
    pub evidence: Evidence,
}

/// What stands behind a number.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Evidence {
    /// A sheet, a certificate, a photograph.
    pub evidence: Option<String>,
    /// Its date.
    pub dated: Option<String>,
    /// Until when it holds.
    pub valid_until: Option<String>,
}

/// What `[structure]` says.
#[derive(Debug)]
pub(super) struct StructureSection {
    pub(super) kind: Kind,
    pub(super) inputs: Vec<StationInput>,
    /// Keys that have no effect on this structure, and why.
    pub(super) unused: Vec<(String, &'static str)>,
}

pub(super) fn read(
    mut section: Section<'_, '_>,
    findings: &mut Findings<'_>,
) -> Option<StructureSection> {
    let help = "name the structure, for example kind = \"thin-plate-triangular\"; `nappe structures` \
                lists them";
    let value = section.need("kind", help, findings)?;
    let kind = super::section::string("kind", value, findings)?;
    if kind == equation::KIND {
        return equation::read(section, findings);
    }
    let Some(structure) = find(&kind) else {
        unknown_kind(&kind, value, findings);
        return None;
    };
    let mut installation = Installation::plain(structure);
    if let Some(choice) = &structure.choice {
        installation.set = read_choice(&mut section, choice, findings).unwrap_or(0);
    }
    let mut of_sections = Vec::new();
    if structure.kind == COMPOUND {
        (installation.sections, of_sections) = compound::read(&mut section, findings)?;
    }
    let inputs = read_inputs(&installation, of_sections, &mut section, findings);
    let mut unused = Vec::new();
    // Every structure takes the key; thin plates have no velocity head for it to act on.
    if !inputs.iter().any(|input| input.key == KINETIC_ENERGY_COEFFICIENT.key)
        && section.get(KINETIC_ENERGY_COEFFICIENT.key).is_some()
    {
        read_input(&mut section, &KINETIC_ENERGY_COEFFICIENT, findings);
        let why = "the velocity of approach is inside this coefficient";
        unused.push((KINETIC_ENERGY_COEFFICIENT.key.to_owned(), why));
    }
    if section.key_span(GRAVITY.key).is_some() && !installation.uses_gravity() {
        unused.push((GRAVITY.key.to_owned(), "gravity is inside this coefficient"));
    }
    section.finish(findings);
    check_widths(&installation, &inputs, findings);
    Some(StructureSection { kind: Kind::Catalogue(Box::new(installation)), inputs, unused })
}

/// The inputs of an installation in their order; those of its sections have been read already.
fn read_inputs(
    installation: &Installation,
    of_sections: Vec<StationInput>,
    section: &mut Section<'_, '_>,
    findings: &mut Findings<'_>,
) -> Vec<StationInput> {
    let mut of_sections = of_sections.into_iter();
    let mut read = |input: &InstalledInput| match input.key.as_str() {
        "head" => None,
        key if key == input.spec.key => read_input(section, &input.spec, findings),
        _ => of_sections.next(),
    };
    installation
        .inputs()
        .iter()
        // An input with a fault stays an input, so that what acts on it is not reported as well.
        .map(|input| read(input).unwrap_or_else(|| input_without_value(input)))
        .collect()
}

/// The word that picks a set of constants: the size of a flume, say.
pub(super) fn read_choice(
    section: &mut Section<'_, '_>,
    choice: &Choice,
    findings: &mut Findings<'_>,
) -> Option<usize> {
    let words: Vec<&str> = choice.sets.iter().map(|(word, _)| *word).collect();
    let help = format!("one of: {}", words.join(", "));
    let value = section.need(choice.key, &help, findings)?;
    let word = super::section::string(choice.key, value, findings)?;
    let found = choice.find(&word);
    if found.is_none() {
        let title = format!("`{}` cannot be \"{}\"", choice.key, shown(&word));
        let diagnostic = Diagnostic::error(Code::UnknownWord, value.span(), title).help(help);
        // Another size is no mend of a size.
        let is_size = word.starts_with(|c: char| c.is_ascii_digit());
        findings.push(match nearest(&word, words).filter(|_| !is_size) {
            Some(near) => diagnostic.fix(value.span(), format!("\"{near}\"")),
            None => diagnostic,
        });
    }
    found
}

/// No crest or throat is wider than the channel that leads to it, nor are those of all sections together.
/// A channel that widens upwards is not asked: its width is that at the bed.
fn check_widths(installation: &Installation, inputs: &[StationInput], findings: &mut Findings<'_>) {
    let find = |key: &str| inputs.iter().find(|input| input.key == key);
    let approach = find("approach_width").or_else(|| find("approach_bottom_width"));
    let widens = find("approach_side_slope").and_then(|slope| slope.value) > Some(0.0);
    let Some(approach) = approach.filter(|_| !widens) else { return };
    let Some(approach_width) = approach.value else { return };
    let own = installation.structure.control_width.and_then(find).map(|control| {
        let name = format!("`{}` ({})", control.key, control.text);
        (name, control.value.unwrap_or(0.0), control.span.clone())
    });
    let of_sections = installation.sections.iter().zip(1..).filter_map(|(section, number)| {
        let key = section.installation.structure.control_width?;
        find(&section_key(number, key))?.value
    });
    let together: f64 = of_sections.sum();
    let name = format!("the widths of the sections together ({} m)", significant(together, 6));
    for (name, width, place) in own.into_iter().chain([(name, together, None)]) {
        // Room for the rounding of a sum.
        if width <= approach_width * (1.0 + 1e-12) {
            continue;
        }
        let span = approach.span.clone().unwrap_or(0..0);
        let title = format!("`{}` ({}) is below {name}", approach.key, approach.text);
        let diagnostic = Diagnostic::error(Code::OutsideDomain, span, title)
            .help("the approach channel is at least as wide as the control");
        findings.push(match place {
            Some(place) => diagnostic.context(place, "the control is wider"),
            None => diagnostic,
        });
    }
}

fn unknown_kind(kind: &str, value: &Spanned<DeValue<'_>>, findings: &mut Findings<'_>) {
    report_kind(
        kind,
        value,
        CATALOGUE.iter().map(|each| each.kind).chain([equation::KIND]),
        findings,
    );
}

/// A kind that is none of those that could stand there.
pub(super) fn report_kind<'k>(
    kind: &str,
    value: &Spanned<DeValue<'_>>,
    kinds: impl Iterator<Item = &'k str> + Clone,
    findings: &mut Findings<'_>,
) {
    let shown = shown(kind);
    let title = format!("`{shown}` is no kind of structure that nappe knows");
    let mut diagnostic = Diagnostic::error(Code::UnknownWord, value.span(), title);
    diagnostic = if let Some(near) = nearest(kind, kinds.clone()) {
        diagnostic.help(format!("the nearest is `{near}`")).fix(value.span(), format!("\"{near}\""))
    } else {
        let list: Vec<&str> = kinds.collect();
        diagnostic.help(format!("kinds: {}", list.join(", ")))
    };
    findings.push(diagnostic);
}

/// An input of which the file says nothing: with its default, if it has one.
pub(super) fn input_without_value(input: &InstalledInput) -> StationInput {
    let InstalledInput { key, symbol, spec } = input;
    StationInput {
        key: key.clone(),
        symbol: symbol.clone(),
        dimension: spec.dimension,
        value: spec.default_value(),
        text: String::new(),
        unit: Unit::si(spec.dimension),
        span: None,
        observations: Vec::new(),
        evidence: Evidence::default(),
    }
}

/// Reads one input of a catalogue structure, its default if it has one.
pub(super) fn read_input(
    section: &mut Section<'_, '_>,
    spec: &InputSpec,
    findings: &mut Findings<'_>,
) -> Option<StationInput> {
    let value = if spec.default.is_some() {
        section.get(spec.key)
    } else {
        let help = format!("{}; for example {} = \"{}\"", spec.meaning, spec.key, spec.example);
        Some(section.need(spec.key, &help, findings)?)
    };
    let Some(value) = value else { return Some(input_without_value(&(*spec).into())) };
    let mut input = read_value(spec.key, value, Some(spec.dimension), findings)?;
    spec.symbol.clone_into(&mut input.symbol);
    let [low, high] = spec.domain;
    if !(low..=high).contains(&input.value?) {
        let title = format!("`{}` cannot be {}: {}", spec.key, input.text, spec.domain_reason);
        findings.error(Code::OutsideDomain, value.span(), title);
        return None;
    }
    Some(input)
}

/// Reads the value of an input: a quantity, or a table with a value or observations and its evidence.
pub(super) fn read_value(
    key: &str,
    value: &Spanned<DeValue<'_>>,
    dimension: Option<Dimension>,
    findings: &mut Findings<'_>,
) -> Option<StationInput> {
    let mut input = StationInput {
        key: key.to_owned(),
        symbol: key.to_owned(),
        dimension: dimension.unwrap_or(Dimension::NONE),
        value: None,
        text: String::new(),
        unit: Unit::one(),
        span: Some(value.span()),
        observations: Vec::new(),
        evidence: Evidence::default(),
    };
    let stated = match value.get_ref() {
        DeValue::Table(_) => {
            let mut section = Section::of(format!("`{key}`"), value, findings)?;
            input.evidence = read_evidence(&mut section, findings);
            let single = section.get("value");
            let several = section.get("observations");
            let stated = match (single, several) {
                (Some(single), None) => quantity::read(key, single, dimension, findings),
                (None, Some(several)) => {
                    let observed = read_observations(key, several, dimension, findings)?;
                    let mean = mean(&observed.0);
                    input.observations = observed.0;
                    Some(quantity::Stated { value: mean, ..observed.1 })
                }
                (Some(_), Some(second)) => {
                    let title = format!("`{key}` has both a value and observations: one is due");
                    findings.error(Code::KeysDisagree, second.span(), title);
                    None
                }
                (None, None) => {
                    let title = format!("`{key}` needs `value` or `observations`");
                    findings.error(Code::MissingKey, value.span(), title);
                    None
                }
            };
            section.finish(findings);
            stated?
        }
        _ => quantity::read(key, value, dimension, findings)?,
    };
    input.dimension = stated.unit.dimension();
    input.value = Some(stated.value);
    input.text = stated.text;
    input.unit = stated.unit;
    Some(input)
}

/// Two observations or more of one quantity: their values, and a summary as one stated quantity.
pub(super) fn read_observations(
    what: &str,
    value: &Spanned<DeValue<'_>>,
    dimension: Option<Dimension>,
    findings: &mut Findings<'_>,
) -> Option<(Vec<f64>, quantity::Stated)> {
    let DeValue::Array(items) = value.get_ref() else {
        let title = format!("`{what}`: observations are a list, not {}", article(value.get_ref()));
        findings.error(Code::WrongType, value.span(), title);
        return None;
    };
    let mut due = dimension;
    let mut observed: Vec<quantity::Stated> = Vec::new();
    for item in items {
        // All observations have the dimension of the first.
        let stated = quantity::read(what, item, due, findings)?;
        due = due.or(Some(stated.unit.dimension()));
        observed.push(stated);
    }
    if observed.len() < 2 {
        findings.push(
            Diagnostic::error(
                Code::OutsideDomain,
                value.span(),
                format!("`{what}`: a spread needs two observations or more"),
            )
            .help("state one value with its uncertainty instead"),
        );
        return None;
    }
    let text = format!("{} observations", observed.len());
    let values: Vec<f64> = observed.iter().map(|stated| stated.value).collect();
    Some((values, quantity::Stated { text, ..observed.swap_remove(0) }))
}

/// Arithmetic mean (JCGM 100 equation 3).
pub(super) fn mean(values: &[f64]) -> f64 {
    values.iter().sum::<f64>() / values.len() as f64
}

/// Experimental standard deviation (JCGM 100 equation 4), in two passes.
pub(super) fn standard_deviation(values: &[f64]) -> f64 {
    let mean = mean(values);
    let square: f64 = values.iter().map(|value| (value - mean).powi(2)).sum();
    (square / (values.len() as f64 - 1.0)).sqrt()
}

/// `evidence`, `dated`, `valid_until`.
pub(super) fn read_evidence(
    section: &mut Section<'_, '_>,
    findings: &mut Findings<'_>,
) -> Evidence {
    let evidence = section.text("evidence", findings).map(|(text, _)| text);
    let mut date = |key: &str| {
        let value = section.get(key)?;
        let (text, readable) = match value.get_ref() {
            DeValue::Datetime(date) => (date.to_string(), date.date.is_some()),
            DeValue::String(text) => (
                text.to_string(),
                text.parse::<toml::value::Datetime>().is_ok_and(|d| d.date.is_some()),
            ),
            _ => (String::new(), false),
        };
        if !readable {
            let title = format!("`{key}` is a date such as \"2024-02-20\"");
            findings.error(Code::WrongType, value.span(), title);
            return None;
        }
        Some(text)
    };
    Evidence { dated: date("dated"), valid_until: date("valid_until"), evidence }
}

/// Gravity for an equation of the user's own.
pub(super) fn gravity_of(
    section: &mut Section<'_, '_>,
    findings: &mut Findings<'_>,
) -> StationInput {
    read_input(section, &GRAVITY, findings).unwrap_or_else(|| input_without_value(&GRAVITY.into()))
}
