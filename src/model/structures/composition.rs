//! The equation of a compound weir: structures of the catalogue side by side, one total head for all.
//!
//! Every section keeps its own texts; their names get the number of the section. What the sections share
//! (gravity, the approach, its total head) is put in the place of their own.

use std::collections::{BTreeMap, BTreeSet};

use super::approach::{LARGEST_FLOW, RECTANGULAR, TOTAL_HEAD};
use super::automatic::{AutomaticSource, Unstated, sources};
use super::form::{
    Form, PublishedNumber, add_tailwater, constants, drowned_flow, extend, factor_definitions,
    identifiers, numbers,
};
use super::input::{
    COEFFICIENT_FACTOR, DROWNED_FLOW_FACTOR, InputSpec, InstalledInput, KINETIC_ENERGY_COEFFICIENT,
    Values,
};
use super::installation::{Installation, Section};
use super::limit::{InstalledLimit, modular_limit};
use super::structure::{Implicit, Regime, Structure};
use crate::model::{Blueprint, UnknownText};
use crate::units::Dimension;

/// The level of a section's crest above the lowest crest.
pub const CREST_LEVEL: InputSpec = InputSpec {
    domain: [0.0, 20.0],
    domain_reason: "it is the height above the lowest crest, between 0 m and 20 m",
    ..InputSpec::length("crest_level", "z", "level of its crest above the lowest crest", "0.15 m")
};

/// The head that stands in for that of a dry section.
const LEAST_HEAD: &str = "h_least";
/// Names that all sections share.
const SHARED: [&str; 2] = ["g", "alpha"];
/// Definitions of a section that the shared approach takes the place of.
const REPLACED: [&str; 5] = ["A", "H", "Fr", "W_a", "B_m"];

/// The keys that a section can give, besides its kind, level and choice.
pub fn section_inputs(structure: &'static Structure) -> Vec<InputSpec> {
    let used = names_in_use(structure);
    structure
        .inputs
        .iter()
        .copied()
        .filter(|spec| spec.key != KINETIC_ENERGY_COEFFICIENT.key)
        .filter(|spec| used.contains(spec.symbol))
        // The height above the bed follows from that of the whole and the level of the crest.
        .map(|spec| if spec.symbol == "p" { spec.optional() } else { spec })
        .chain([COEFFICIENT_FACTOR])
        .collect()
}

/// Names in the equation of a structure when the total head comes from outside.
fn names_in_use(structure: &'static Structure) -> BTreeSet<&'static str> {
    let mut used = BTreeSet::new();
    for regime in structure.regimes {
        let kept = kept_definitions(regime).into_iter().map(|(_, text)| text);
        used.extend(kept.chain([regime.discharge]).flat_map(identifiers));
        used.extend(regime.solved.iter().flat_map(|solved| identifiers(solved.equation)));
        if let super::published::Coefficient::Published(rule) = regime.coefficient {
            used.extend(identifiers(rule.percent));
        }
    }
    used.extend(
        structure.adjustments.iter().flat_map(|each| identifiers(each.standard_uncertainty)),
    );
    // Limits that need the crest's height above the bed have it from the whole.
    used.insert("p");
    used
}

fn kept_definitions(regime: &Regime) -> Vec<(&'static str, &'static str)> {
    let replaced = |name: &str| regime.implicit == Implicit::Discharge && REPLACED.contains(&name);
    regime.definitions.iter().copied().filter(|(name, _)| !replaced(name)).collect()
}

/// The structure of a section; its drowned flow is left out where nothing is known of the tailwater.
fn installed(section: &Section, tailwater_known: bool) -> Installation {
    let second_head = section.installation.second_head.clone().filter(|_| tailwater_known);
    Installation { second_head, ..section.installation.clone() }
}

/// The inputs of one section, numbered from 1.
pub(super) fn inputs(
    section: &Section,
    number: usize,
    tailwater_known: bool,
) -> Vec<InstalledInput> {
    let installation = installed(section, tailwater_known);
    let structure = installation.structure;
    let given = |spec: &InputSpec| {
        spec.default_value().is_some() || section.given.iter().any(|key| key == spec.key)
    };
    let mut specs = vec![CREST_LEVEL];
    specs.extend(section_inputs(structure).into_iter().filter(given));
    if drowned_flow(&installation).is_some() {
        specs.push(DROWNED_FLOW_FACTOR);
    }
    specs
        .into_iter()
        .map(|spec| InstalledInput {
            key: section_key(number, spec.key),
            symbol: section_symbol(number, spec.symbol),
            spec,
        })
        .collect()
}

/// The key of an input of a section, numbered from 1.
pub fn section_key(number: usize, key: &str) -> String {
    format!("section {number} {key}")
}

/// Its symbol. Not `_2`: that is how the second head is written.
pub fn section_symbol(number: usize, symbol: &str) -> String {
    format!("{symbol}_s{number}")
}

/// Names of a section and what stands for them in the whole.
type Renamed = BTreeMap<String, String>;

/// A text of a section with its own names replaced.
fn rename(text: &str, names: &Renamed) -> String {
    let mut result = String::new();
    let mut rest = text;
    while let Some(start) = rest.find(|c: char| c.is_alphabetic()) {
        // A letter inside a number, as in 1e-3, begins no name.
        let inside_number = rest[..start].ends_with(|c: char| c.is_ascii_digit() || c == '.');
        let length = rest[start..]
            .find(|c: char| !(c.is_alphanumeric() || c == '_'))
            .unwrap_or(rest.len() - start);
        let word = &rest[start..start + length];
        result.push_str(&rest[..start]);
        result.push_str(names.get(word).filter(|_| !inside_number).map_or(word, String::as_str));
        rest = &rest[start + length..];
    }
    result.push_str(rest);
    result
}

/// The form of a compound weir: the discharge is the sum of the sections, each at the head above its own
/// crest; the total head is shared (methods, compound structures).
pub(super) fn form(installation: &Installation, values: &Values) -> Form {
    let structure = installation.structure;
    let whole = &structure.regimes[0];
    let mut blueprint = Blueprint {
        inputs: installation.inputs().iter().map(Into::into).collect(),
        result: "Q".to_owned(),
        ..Blueprint::default()
    };
    extend(&mut blueprint.definitions, &[RECTANGULAR, TOTAL_HEAD]);
    extend(&mut blueprint.definitions, whole.definitions);
    add_tailwater(installation, &mut blueprint);
    let mut result = Form {
        structure,
        regime: String::new(),
        when: "every section passes what its own equation gives at the head above its crest"
            .to_owned(),
        blueprint,
        limits: whole.limits.iter().map(Into::into).collect(),
        automatic: Vec::new(),
        unstated: Vec::new(),
        standards: Vec::new(),
        numbers: Vec::new(),
        highest_tailwater: None,
    };
    let (mut regimes, mut flowing, mut beyond) = (Vec::new(), Vec::new(), Vec::new());
    for (index, section) in installation.sections.iter().enumerate() {
        let number = index + 1;
        let added = add_section(installation, section, number, values, &mut result);
        let structure = section.installation.structure;
        let mut words = format!("{number}: {}", structure.kind);
        if structure.regimes.len() > 1 {
            words = format!("{words}, {}", added.regime);
        }
        regimes.push(words);
        flowing.push(added.flowing);
        beyond.extend(added.beyond);
    }
    result.regime = regimes.join("; ");
    let sum: Vec<String> =
        (1..=installation.sections.len()).map(|n| section_symbol(n, "Q")).collect();
    let discharge = UnknownText {
        name: "Q".to_owned(),
        equation: format!("Q = {}", sum.join(" + ")),
        from: "0".to_owned(),
        to: LARGEST_FLOW.to_owned(),
        rising: true,
    };
    // The discharge comes first: what the sections solve for follows it.
    result.blueprint.unknowns.insert(0, discharge);
    result.blueprint.flowing =
        flowing.into_iter().reduce(|all, next| format!("max({all}, {next})"));
    result.blueprint.beyond = beyond.into_iter().reduce(|all, next| format!("{all} + {next}"));
    result
}

/// Which regime holds in each section.
pub(super) fn regimes(installation: &Installation, values: &Values) -> Vec<usize> {
    let sections = installation.sections.iter().zip(1..);
    sections.map(|(section, number)| regime(section, &section_values(values, number))).collect()
}

fn regime(section: &Section, values: &Values) -> usize {
    (section.installation.structure.regime_for)(values)
}

/// What a section adds to the conditions of the whole.
struct Added {
    regime: &'static str,
    flowing: String,
    beyond: Option<String>,
}

fn add_section(
    whole: &Installation,
    section: &Section,
    number: usize,
    values: &Values,
    to: &mut Form,
) -> Added {
    let tailwater_known = whole.second_head.is_some();
    let installation = &installed(section, tailwater_known);
    let structure = installation.structure;
    let own_values = section_values(values, number);
    let regime = &structure.regimes[regime(section, &own_values)];
    let drowned = drowned_flow(installation);
    let inputs = inputs(section, number, tailwater_known);
    let mut own: BTreeSet<String> = ["Q", "h", "h_2"].into_iter().map(str::to_owned).collect();
    own.extend(inputs.iter().map(|input| input.spec.symbol.to_owned()));
    let constants = constants(installation);
    own.extend(constants.iter().map(|(symbol, ..)| symbol.clone()));
    own.extend(structure.tables.iter().map(|table| table.name.to_owned()));
    let definitions = kept_definitions(regime);
    let factor = factor_definitions(installation);
    own.extend(definitions.iter().chain(factor).map(|(name, _)| (*name).to_owned()));
    let has_height = structure.inputs.iter().any(|spec| spec.symbol == "p");
    if regime.implicit == Implicit::Discharge {
        own.insert("H".to_owned());
    }
    own.extend(regime.solved.map(|solved| solved.name.to_owned()));
    if has_height {
        own.insert("p".to_owned());
    }
    let names: Renamed =
        own.iter().map(|name| (name.clone(), section_symbol(number, name))).collect();
    let name = |text: &str| rename(text, &names);

    let level = section_symbol(number, CREST_LEVEL.symbol);
    let texts = &mut to.blueprint.definitions;
    texts.push((name("h"), format!("h - {level}")));
    if regime.implicit == Implicit::Discharge {
        texts.push((name("H"), format!("H - {level}")));
    }
    if tailwater_known {
        texts.push((name("h_2"), format!("h_2 - {level}")));
    }
    if has_height && !inputs.iter().any(|input| input.spec.symbol == "p") {
        texts.push((name("p"), format!("p + {level}")));
    }
    texts.extend(definitions.iter().chain(factor).map(|(left, right)| (name(left), name(right))));
    // A section passes water from where the total head is above its crest.
    let by_total_head = regime.implicit == Implicit::Discharge && regime.flowing == "h";
    let flowing = name(if by_total_head { "H" } else { regime.flowing });
    if let Some(solved) = regime.solved {
        // A dry section has no such quantity; a hair of water in its place keeps every slope a number.
        let wet = section_symbol(number, "H_wet");
        texts.push((wet.clone(), format!("max({}, {LEAST_HEAD})", name("H"))));
        let mut of_wet_names = names.clone();
        of_wet_names.insert("H".to_owned(), wet);
        let of_wet = |text: &str| rename(text, &of_wet_names);
        to.blueprint.unknowns.push(UnknownText {
            name: name(solved.name),
            equation: of_wet(solved.equation),
            from: of_wet(solved.from),
            to: of_wet(solved.to),
            rising: false,
        });
        let least = (LEAST_HEAD.to_owned(), 1e-3, Dimension::LENGTH);
        if !to.blueprint.constants.contains(&least) {
            to.blueprint.constants.push(least);
        }
    }
    let texts = &mut to.blueprint.definitions;
    let discharge = format!("({}) when {flowing} > 0 otherwise 0", name(regime.discharge));
    texts.push((name("Q"), discharge));
    let blueprint = &mut to.blueprint;
    blueprint.constants.extend(constants.into_iter().map(|(s, value, d)| (name(&s), value, d)));
    blueprint.tables.extend(structure.tables.iter().filter_map(super::PublishedTable::in_si).map(
        |(table, dimension)| {
            let numbered = name(table.name());
            (table.renamed(numbered), dimension)
        },
    ));
    if !to.standards.contains(&structure.standard.document) {
        to.standards.push(structure.standard.document);
    }
    let modular = tailwater_known.then(|| modular_limit(installation));
    add_limits(structure, regime, &name, (number, &flowing), &own, modular, to);
    add_sources((number, &flowing), sources(structure, regime, drowned), &name, to);
    to.blueprint.borders.extend((regime.borders)(&own_values).iter().map(|text| name(text)));
    to.numbers.extend(
        numbers(installation, regime, drowned).into_iter().map(|each| PublishedNumber {
            what: format!("section {number}: {}", each.what),
            ..each
        }),
    );
    let left = [regime.beyond, drowned.and_then(|drowned| drowned.beyond)];
    let left: Vec<String> = left
        .into_iter()
        .flatten()
        .map(|text| {
            let text = name(text);
            format!("(1 when {flowing} > 0 otherwise 0)*(1 when {text} > 0 otherwise 0)")
        })
        .collect();
    let beyond = (!left.is_empty()).then(|| left.join(" + "));
    Added { regime: regime.name, flowing, beyond }
}

/// The section's published uncertainties, and what it leaves to the user.
fn add_sources(
    (number, flowing): (usize, &str),
    (automatic, unstated): (Vec<AutomaticSource>, Vec<Unstated>),
    name: &dyn Fn(&str) -> String,
    to: &mut Form,
) {
    to.automatic.extend(automatic.into_iter().map(|source| AutomaticSource {
        name: format!("{}, section {number}", source.name),
        acts_on: section_key(number, &source.acts_on),
        // A section that passes nothing adds nothing.
        rule: format!("({}) when {flowing} > 0 otherwise 0", name(&source.rule)),
        ..source
    }));
    to.unstated.extend(unstated.into_iter().map(|each| Unstated {
        inputs: each.inputs.iter().map(|key| section_key(number, key)).collect(),
        ..each
    }));
}

/// The section's limits that the shared approach leaves a meaning, and its modular limit.
fn add_limits(
    structure: &Structure,
    regime: &Regime,
    name: &dyn Fn(&str) -> String,
    (number, flowing): (usize, &str),
    own: &BTreeSet<String>,
    modular: Option<InstalledLimit>,
    to: &mut Form,
) {
    let known = |text: &str| {
        let replaced = regime.implicit == Implicit::Discharge;
        let mut words = identifiers(text);
        !words.any(|word| {
            let foreign = replaced && REPLACED.contains(&word) && word != "H";
            let input = structure.inputs.iter().any(|spec| spec.symbol == word);
            foreign || (input && !own.contains(word) && !SHARED.contains(&word))
        })
    };
    let install = |mut limit: InstalledLimit| {
        limit.quantity = name(&limit.quantity);
        limit.bound = name(&limit.bound);
        limit.applies = Some(flowing.to_owned());
        limit.meaning = format!("section {number}: {}", limit.meaning);
        limit
    };
    let of_use = regime.limits.iter().filter(|l| known(l.quantity) && known(l.bound));
    to.limits.extend(of_use.map(|limit| install(limit.into())));
    to.limits.extend(modular.map(install));
}

/// The indicated values of one section: its own inputs, and the head above its crest.
fn section_values(values: &Values, number: usize) -> Values {
    let prefix = section_key(number, "");
    let level = values.given(&format!("{prefix}{}", CREST_LEVEL.key)).unwrap_or(0.0);
    let own = values
        .iter()
        .filter_map(|(key, value)| Some((key.strip_prefix(&prefix)?.to_owned(), value)))
        .collect::<Vec<_>>();
    let whole = values.given("crest_height").map(|height| height + level);
    let stated = own.iter().any(|(key, _)| key == "crest_height");
    let derived = (!stated).then(|| ("crest_height".to_owned(), whole));
    let head = ("head".to_owned(), values.given("head").map(|head| head - level));
    Values::new(own.into_iter().chain(derived).chain([head]))
}
