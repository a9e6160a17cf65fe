//! The equation of an installation at some values, with everything that goes with it.

use super::automatic::{AutomaticSource, Unstated, sources};
use super::input::Values;
use super::installation::{Installation, SHIFTED_TAILWATER};
use super::limit::{InstalledLimit, critical_limits, modular_limit};
use super::published::{DrownedFlow, MODULAR_LIMIT, PublishedTable, SecondHeadAt};
use super::structure::{Implicit, Regime, Solved, Structure};
use crate::model::{Blueprint, Citation, Confidence, UnknownText};
use crate::units::{Dimension, with_unit};

/// The equation of an installation, ready to be built, and what is known about it.
#[derive(Clone, Debug)]
pub struct Form {
    /// The structure.
    pub structure: &'static Structure,
    /// The name of the regime.
    pub regime: String,
    /// When it holds, in words.
    pub when: String,
    /// The equations.
    pub blueprint: Blueprint,
    /// Limits of use, and, where the tailwater is known, what critical and modular flow need.
    pub limits: Vec<InstalledLimit>,
    /// The error sources that the structure brings with it.
    pub automatic: Vec<AutomaticSource>,
    /// Coefficients of which no uncertainty is published.
    pub unstated: Vec<Unstated>,
    /// The documents that its numbers are to be confirmed against.
    pub standards: Vec<&'static str>,
    /// Published numbers in the equation.
    pub numbers: Vec<PublishedNumber>,
    /// The highest tailwater above the crest at which the flow is modular; `None` for several sections.
    pub highest_tailwater: Option<String>,
}

/// A published number in an equation.
#[derive(Clone, Debug, PartialEq)]
pub struct PublishedNumber {
    /// What it is.
    pub what: String,
    /// Who published it.
    pub source: Citation,
    /// How well it is known here.
    pub confidence: Confidence,
}

/// Adds definitions to a list of owned ones.
pub(super) fn extend(to: &mut Vec<(String, String)>, definitions: &[(&str, &str)]) {
    to.extend(definitions.iter().map(|(name, text)| ((*name).to_owned(), (*text).to_owned())));
}

/// The form of a structure that stands by itself, in one regime.
pub(super) fn single(installation: &Installation, regime: usize, values: &Values) -> Form {
    let structure = installation.structure;
    let regime = &structure.regimes[regime];
    let drowned = drowned_flow(installation);
    let mut blueprint = Blueprint {
        inputs: installation.inputs().iter().map(Into::into).collect(),
        constants: constants(installation),
        tables: structure.tables.iter().filter_map(PublishedTable::in_si).collect(),
        definitions: Vec::new(),
        unknowns: Vec::new(),
        result: "Q".to_owned(),
        flowing: Some(regime.flowing.to_owned()),
        beyond: beyond(regime.beyond, drowned.and_then(|drowned| drowned.beyond)),
        borders: (regime.borders)(values).iter().map(|&text| text.to_owned()).collect(),
    };
    extend(&mut blueprint.definitions, regime.definitions);
    extend(&mut blueprint.definitions, factor_definitions(installation));
    let rated = add_tailwater(installation, &mut blueprint);
    solve(regime, rated && drowned.is_some(), &mut blueprint);
    let mut limits: Vec<InstalledLimit> = regime.limits.iter().map(Into::into).collect();
    if installation.second_head.is_some() {
        // A tapping does not tell the level of the tailwater, and with it the energy.
        if drowned.is_none_or(|drowned| drowned.reads == SecondHeadAt::Tailwater) {
            limits.extend(critical_limits(structure, &mut blueprint));
        }
        limits.push(modular_limit(installation));
        limits.extend(drowned.iter().flat_map(|drowned| drowned.limits).map(InstalledLimit::from));
    }
    let highest = structure.modular.highest;
    let is_known = !structure.modular.is_ratio() || installation.modular_limit().is_some();
    let (automatic, unstated) = sources(structure, regime, drowned);
    Form {
        structure,
        regime: regime.name.to_owned(),
        when: regime.when.to_owned(),
        limits,
        automatic,
        unstated,
        standards: vec![structure.standard.document],
        numbers: numbers(installation, regime, drowned),
        highest_tailwater: is_known.then(|| highest.to_owned()),
        blueprint,
    }
}

/// The drowned-flow equation that is in force.
pub(super) fn drowned_flow(installation: &Installation) -> Option<&'static DrownedFlow> {
    let second = installation.second_head.as_ref()?;
    second.drowned.map(|index| &installation.structure.drowned[index])
}

/// Definitions that end in the drowned-flow factor: 1 where the tailwater is not known.
pub(super) fn factor_definitions(
    installation: &Installation,
) -> &'static [(&'static str, &'static str)] {
    match drowned_flow(installation) {
        Some(drowned) => drowned.definitions,
        None if installation.structure.drowned.is_empty() => &[],
        None => &[("f", "1")],
    }
}

/// Constants of the structure, of its set, and its modular limit.
pub(super) fn constants(installation: &Installation) -> Vec<(String, f64, Dimension)> {
    let own = installation.structure.constants.iter();
    let own = own.map(|each| (each.symbol, each.value, each.dimension));
    let of_set = installation.constants_of_set();
    // What is not published does not enter; that an equation needs it is asked beforehand.
    let of_set =
        of_set.into_iter().filter(|(symbol, value, _)| !value.is_nan() && *symbol != MODULAR_LIMIT);
    let limit = installation.modular_limit().map(|ratio| (MODULAR_LIMIT, ratio, Dimension::NONE));
    own.chain(of_set)
        .chain(limit)
        .map(|(symbol, value, dimension)| (symbol.to_owned(), value, dimension))
        .collect()
}

/// The level of a tailwater that follows the discharge: what its curve says, shifted as the input is
/// against the level that the curve gave. True if there is one.
pub(super) fn add_tailwater(installation: &Installation, blueprint: &mut Blueprint) -> bool {
    let second = installation.second_head.as_ref();
    let Some(curve) = second.and_then(|second| second.curve.as_ref()) else { return false };
    blueprint.tables.push((curve.table.clone(), Dimension::LENGTH));
    blueprint.constants.push(("Q_unit".to_owned(), 1.0, Dimension::DISCHARGE));
    blueprint.constants.push(("h_curve".to_owned(), curve.level, Dimension::LENGTH));
    let text = format!("{}(Q/Q_unit) + {SHIFTED_TAILWATER} - h_curve", curve.table.name());
    blueprint.definitions.push(("h_2".to_owned(), text));
    true
}

/// Makes the discharge a definition or, where it stands on both sides, the unknown.
fn solve(regime: &Regime, through_tailwater: bool, blueprint: &mut Blueprint) {
    let largest = match regime.implicit {
        Implicit::Discharge => Some(super::approach::LARGEST_FLOW.to_owned()),
        // Drowned flow is below modular flow, but for a factor on its factor in a trial.
        Implicit::Nothing if through_tailwater => Some("2*Q_modular".to_owned()),
        Implicit::Nothing => None,
    };
    match largest {
        Some(to) => blueprint.unknowns.push(UnknownText {
            name: "Q".to_owned(),
            equation: format!("Q = {}", regime.discharge),
            from: "0".to_owned(),
            to,
            rising: true,
        }),
        None => blueprint.definitions.push(("Q".to_owned(), regime.discharge.to_owned())),
    }
    if let Some(Solved { name, equation, from, to }) = regime.solved {
        let [name, equation, from, to] = [name, equation, from, to].map(str::to_owned);
        blueprint.unknowns.push(UnknownText { name, equation, from, to, rising: false });
    }
}

/// Two conditions of a curve being left, as one.
fn beyond(first: Option<&str>, second: Option<&str>) -> Option<String> {
    match (first, second) {
        (Some(first), Some(second)) => Some(format!("max({first}, {second})")),
        (Some(one), None) | (None, Some(one)) => Some(one.to_owned()),
        (None, None) => None,
    }
}

/// Constants and tables that the equation of a regime uses.
pub(super) fn numbers(
    installation: &Installation,
    regime: &Regime,
    drowned: Option<&DrownedFlow>,
) -> Vec<PublishedNumber> {
    let structure = installation.structure;
    let texts = regime.definitions.iter().map(|(_, text)| *text).chain([regime.discharge]);
    let used: Vec<&str> = texts.flat_map(identifiers).collect();
    let uses = |name: &str| used.contains(&name);
    let number = |what: String, source: Citation, confidence: Confidence| PublishedNumber {
        what,
        source,
        confidence,
    };
    let constants = structure.constants.iter().filter(|each| uses(each.symbol)).map(|each| {
        let value = with_unit(each.value.to_string(), &each.dimension.to_string());
        number(format!("{}, {value}", each.meaning), each.source, each.confidence)
    });
    let tables = structure
        .tables
        .iter()
        .filter(|each| uses(each.name))
        .map(|each| number(format!("table {}", each.name), each.source, each.confidence));
    let choice = structure
        .choice
        .map(|choice| number(choice.meaning.to_owned(), choice.source, choice.confidence));
    let factor = drowned.map(|each| {
        number(format!("drowned-flow factor {}", each.name), each.source, each.confidence)
    });
    constants.chain(tables).chain(choice).chain(factor).collect()
}

/// The names in a text of equations.
pub(super) fn identifiers(text: &str) -> impl Iterator<Item = &str> {
    text.split(|c: char| !(c.is_alphanumeric() || c == '_'))
        .filter(|word| word.starts_with(|c: char| c.is_alphabetic()))
}
