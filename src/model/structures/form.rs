//! The equation of an installation at some values, with everything that goes with it.

use super::input::{COEFFICIENT_FACTOR, DROWNED_FLOW_FACTOR, Values};
use super::installation::{Installation, SHIFTED_TAILWATER};
use super::published::{
    Coefficient, CoefficientRule, CriticalFlow, DrownedFlow, ModularRatio, PublishedTable,
    SecondHeadAt,
};
use super::structure::{Implicit, Regime, Solved, Structure};
use crate::model::{Blueprint, Citation, Confidence, Limit, Side, UnknownText};
use crate::units::Dimension;

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
    /// Where no uncertainty of the coefficient is published: the inputs that a source of the user's must
    /// act on, and why.
    pub unstated: Vec<(Vec<String>, String)>,
    /// The documents that its numbers are to be confirmed against.
    pub standards: Vec<&'static str>,
    /// Published numbers in the equation: what each is, and how well it is known.
    pub numbers: Vec<(String, Confidence)>,
    /// The highest tailwater above the crest at which the flow is modular; `None` for several sections.
    pub highest_tailwater: Option<String>,
}

impl Form {
    /// An equation for drowned flow is in force.
    pub fn uses_drowned_flow(&self) -> bool {
        self.blueprint.inputs.iter().any(|input| input.key.ends_with(DROWNED_FLOW_FACTOR.key))
    }
}

/// What a limit is about.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LimitKind {
    /// A standard's limit of use.
    Use,
    /// The flow is modular: the tailwater does not act on the control.
    Modular,
    /// The flow at the control is critical.
    Critical,
    /// The station's own: the largest head that it can take, the place of its gauge.
    Station,
}

/// A limit in the symbols of an installation.
#[derive(Clone, Debug, PartialEq)]
pub struct InstalledLimit {
    /// What it is about.
    pub kind: LimitKind,
    /// The quantity.
    pub quantity: String,
    /// Which end the bound is.
    pub side: Side,
    /// The bound: a number, or an expression.
    pub bound: String,
    /// Positive where the limit applies; `None` if it always does.
    pub applies: Option<String>,
    /// What the quantity is, in words.
    pub meaning: String,
    /// Who set it.
    pub source: Citation,
    /// How well the bound is known.
    pub confidence: Confidence,
}

/// An error source that a structure brings with it.
#[derive(Clone, Debug, PartialEq)]
pub struct AutomaticSource {
    /// Its name.
    pub name: String,
    /// The input that it acts on.
    pub acts_on: String,
    /// Its size, in the symbols of the structure: a standard uncertainty in SI units, or, where it
    /// scales, per cent at 95 %.
    pub rule: String,
    /// It scales its input.
    pub scales: bool,
    /// The rule in words.
    pub words: String,
    /// Sources with the same one share their cause, and are fully correlated.
    pub cause: String,
    /// It is the uncertainty of a coefficient, which is published for use within limits.
    pub is_coefficient: bool,
    /// Who published it, and how well that is known here.
    pub published: (Citation, Confidence),
}

/// The name of the error source of the coefficient.
pub const PUBLISHED_COEFFICIENT: &str = "published coefficient";
/// The name of the error source of the drowned-flow factor.
const PUBLISHED_DROWNED_FACTOR: &str = "published drowned-flow factor";

impl From<&Limit> for InstalledLimit {
    fn from(limit: &Limit) -> Self {
        Self {
            kind: LimitKind::Use,
            quantity: limit.quantity.to_owned(),
            side: limit.side,
            bound: limit.bound.to_owned(),
            applies: None,
            meaning: limit.meaning.to_owned(),
            source: limit.source,
            confidence: limit.confidence,
        }
    }
}

/// Adds definitions to a list of owned ones.
pub(super) fn extend(to: &mut Vec<(String, String)>, definitions: &[(&str, &str)]) {
    to.extend(definitions.iter().map(|(name, text)| ((*name).to_owned(), (*text).to_owned())));
}

/// The form of a structure that stands by itself, in one regime.
pub(super) fn single(installation: &Installation, regime: usize, values: &Values) -> Form {
    let structure = installation.structure;
    let form = &structure.regimes[regime];
    let drowned = drowned_flow(installation);
    let mut blueprint = Blueprint {
        inputs: installation.inputs().iter().map(Into::into).collect(),
        constants: constants(installation),
        tables: structure.tables.iter().filter_map(PublishedTable::in_si).collect(),
        definitions: Vec::new(),
        unknowns: Vec::new(),
        result: "Q".to_owned(),
        flowing: Some(form.flowing.to_owned()),
        beyond: beyond(form.beyond, drowned.and_then(|drowned| drowned.beyond)),
        borders: (form.borders)(values).iter().map(|&text| text.to_owned()).collect(),
    };
    extend(&mut blueprint.definitions, form.definitions);
    extend(&mut blueprint.definitions, factor_definitions(installation));
    let rated = add_tailwater(installation, &mut blueprint);
    solve(form, rated && drowned.is_some(), &mut blueprint);
    let mut limits: Vec<InstalledLimit> = form.limits.iter().map(Into::into).collect();
    if installation.second_head.is_some() {
        // A tapping does not tell the level of the tailwater, and with it the energy.
        if drowned.is_none_or(|drowned| drowned.reads == SecondHeadAt::Tailwater) {
            limits.extend(critical_limits(structure, &mut blueprint));
        }
        limits.push(modular_limit(installation));
        limits.extend(drowned.iter().flat_map(|drowned| drowned.limits).map(InstalledLimit::from));
    }
    let known = |name: &str| blueprint.constants.iter().any(|(symbol, ..)| symbol == name);
    let highest = structure.modular.highest;
    let highest_tailwater = (known("M_L") || !identifiers(highest).any(|word| word == "M_L"))
        .then(|| highest.to_owned());
    let mut result = Form {
        structure,
        regime: form.name.to_owned(),
        when: form.when.to_owned(),
        limits,
        automatic: Vec::new(),
        unstated: Vec::new(),
        standards: vec![structure.standard.document],
        numbers: Vec::new(),
        highest_tailwater,
        blueprint,
    };
    add_sources(structure, form, drowned, &mut result);
    result.numbers = numbers(installation, form, drowned);
    result
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

/// Constants of the structure, of its option, and its modular limit.
pub(super) fn constants(installation: &Installation) -> Vec<(String, f64, Dimension)> {
    let structure = installation.structure;
    let stated = installation.second_head.as_ref().and_then(|second| second.modular_limit);
    let of_option = installation.constants_of_option();
    let of_choice = |name: &str| {
        let found = of_option.iter().find(|(symbol, _)| *symbol == name);
        found.map(|(_, value)| *value).filter(|value| !value.is_nan())
    };
    let of_equation = drowned_flow(installation).and_then(|drowned| match drowned.ratio {
        ModularRatio::OfStructure => None,
        ModularRatio::Own(ratio) => Some(ratio),
        ModularRatio::OfChoice(name) => of_choice(name),
    });
    let modular_limit = stated.or(of_equation).or(structure.modular.ratio);
    let own = structure.constants.iter().map(|each| (each.symbol, each.value, each.dimension));
    let of_option = of_option
        .into_iter()
        // What is not published does not enter; that an equation needs it is asked beforehand.
        .filter(|(symbol, value)| !(value.is_nan() || *symbol == "M_L" && modular_limit.is_some()))
        .map(|(symbol, value)| (symbol, value, Dimension::NONE));
    own.chain(of_option)
        .chain(modular_limit.map(|ratio| ("M_L", ratio, Dimension::NONE)))
        .map(|(symbol, value, dimension)| (symbol.to_owned(), value, dimension))
        .collect()
}

/// The level of a tailwater that follows the discharge: what the rating says, shifted as the input is
/// against the level that the rating gave. True if there is a rating.
pub(super) fn add_tailwater(installation: &Installation, blueprint: &mut Blueprint) -> bool {
    let second = installation.second_head.as_ref();
    let Some((rating, level)) = second.and_then(|second| second.rating.as_ref()) else {
        return false;
    };
    blueprint.tables.push((rating.clone(), Dimension::LENGTH));
    blueprint.constants.push(("Q_unit".to_owned(), 1.0, Dimension::DISCHARGE));
    blueprint.constants.push(("h_rated".to_owned(), *level, Dimension::LENGTH));
    let text = format!("{}(Q/Q_unit) + {SHIFTED_TAILWATER} - h_rated", rating.name());
    blueprint.definitions.push(("h_2".to_owned(), text));
    true
}

/// Makes the discharge a definition or, where it stands on both sides, the unknown.
fn solve(form: &Regime, through_tailwater: bool, blueprint: &mut Blueprint) {
    let largest = match form.implicit {
        Implicit::Discharge => Some(super::approach::LARGEST_FLOW.to_owned()),
        // Drowned flow is below modular flow, but for a factor on its factor in a trial.
        Implicit::Nothing if through_tailwater => Some("2*Q_modular".to_owned()),
        Implicit::Nothing => None,
    };
    match largest {
        Some(to) => blueprint.unknowns.push(UnknownText {
            name: "Q".to_owned(),
            equation: format!("Q = {}", form.discharge),
            from: "0".to_owned(),
            to,
        }),
        None => blueprint.definitions.push(("Q".to_owned(), form.discharge.to_owned())),
    }
    if let Some(Solved { name, equation, from, to }) = form.solved {
        let [name, equation, from, to] = [name, equation, from, to].map(str::to_owned);
        blueprint.unknowns.push(UnknownText { name, equation, from, to });
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

/// The sill that critical flow needs, and the throat: the undisturbed flow, whose level the tailwater
/// fixes, must have less energy above the sill than the control takes (specific energy; methods,
/// critical control).
fn critical_limits(structure: &Structure, blueprint: &mut Blueprint) -> Vec<InstalledLimit> {
    let Some(CriticalFlow { energy, sill, width, approach }) = structure.critical else {
        return Vec::new();
    };
    let (bed, slope) = approach;
    let has_alpha = structure.inputs.iter().any(|input| input.symbol == "alpha");
    let alpha = if has_alpha { "alpha" } else { "1" };
    let area = match slope {
        Some(slope) => format!("({bed} + {slope}*y_2)*y_2"),
        None => format!("{bed}*y_2"),
    };
    let definitions = &mut blueprint.definitions;
    // No flow has less energy than critical flow in the channel itself.
    let depth = format!("max(h_2 + {sill}, ({alpha}*Q^2/(g*{bed}^2))^(1/3))");
    definitions.push(("y_2".to_owned(), depth));
    definitions.push(("E_2".to_owned(), format!("y_2 + {alpha}*Q^2/(2*g*({area})^2)")));
    definitions.push(("E_c".to_owned(), energy.to_owned()));
    let limit = |quantity: &str, side, bound: String, applies: Option<String>, meaning: &str| {
        InstalledLimit {
            kind: LimitKind::Critical,
            quantity: quantity.to_owned(),
            side,
            bound,
            applies,
            meaning: meaning.to_owned(),
            source: crate::model::source::SPECIFIC_ENERGY,
            confidence: Confidence::Seen,
        }
    };
    let by_sill = limit(
        sill,
        Side::AtLeast,
        "E_2 - E_c".to_owned(),
        None,
        "sill height against the least at which the flow over it is critical",
    );
    let by_width = width.map(|width| {
        limit(
            width,
            Side::AtMost,
            format!("Q*sqrt({alpha}/g)/(2/3*(E_2 - {sill}))^1.5"),
            Some(format!("E_2 - {sill}")),
            "width against the largest at which the flow through it is critical",
        )
    });
    std::iter::once(by_sill).chain(by_width).collect()
}

/// The tailwater against the modular limit.
pub(super) fn modular_limit(installation: &Installation) -> InstalledLimit {
    let modular = installation.structure.modular;
    let second = installation.second_head.as_ref();
    let stated = second.is_some_and(|second| second.modular_limit.is_some());
    let (source, confidence) = match drowned_flow(installation) {
        _ if stated => (crate::model::source::STATION_FILE, Confidence::Seen),
        Some(drowned) if drowned.ratio != ModularRatio::OfStructure => {
            (drowned.source, drowned.confidence)
        }
        _ => (modular.source, modular.confidence),
    };
    InstalledLimit {
        kind: LimitKind::Modular,
        quantity: "h_2".to_owned(),
        side: Side::AtMost,
        bound: modular.highest.to_owned(),
        applies: None,
        meaning: "tailwater head against the highest at which the flow is modular".to_owned(),
        source,
        confidence,
    }
}

/// Adds the published uncertainties of a structure, or notes that the user states them.
pub(super) fn add_sources(
    structure: &Structure,
    form: &Regime,
    drowned: Option<&DrownedFlow>,
    to: &mut Form,
) {
    match form.coefficient {
        Coefficient::Published(rule) => {
            let acts_on = COEFFICIENT_FACTOR.key;
            to.automatic.push(scaling_source(PUBLISHED_COEFFICIENT, acts_on, &rule, true));
        }
        Coefficient::FromUser(why) => {
            let keys = [COEFFICIENT_FACTOR.key, "discharge_coefficient"];
            let keys = keys.into_iter().filter(|key| {
                *key == COEFFICIENT_FACTOR.key || structure.inputs.iter().any(|i| i.key == *key)
            });
            to.unstated.push((keys.map(str::to_owned).collect(), why.to_owned()));
        }
    }
    to.automatic.extend(structure.adjustments.iter().map(|each| AutomaticSource {
        name: each.name.to_owned(),
        acts_on: each.acts_on.to_owned(),
        rule: each.standard_uncertainty.to_owned(),
        scales: false,
        words: each.words.to_owned(),
        cause: format!("{} {}", structure.kind, each.name),
        is_coefficient: false,
        published: (each.source, each.confidence),
    }));
    let acts_on = DROWNED_FLOW_FACTOR.key;
    match drowned.map(|drowned| drowned.uncertainty) {
        Some(Some(rule)) => {
            to.automatic.push(scaling_source(PUBLISHED_DROWNED_FACTOR, acts_on, &rule, false));
        }
        Some(None) => to.unstated.push((
            vec![acts_on.to_owned()],
            "no uncertainty of the drowned-flow factor is published: state one, it counts where the flow \
             is drowned"
                .to_owned(),
        )),
        None => {}
    }
    for source in &mut to.automatic {
        if source.cause.is_empty() {
            source.cause = format!("{} {}", structure.kind, source.name);
        }
    }
}

fn scaling_source(
    name: &str,
    acts_on: &str,
    rule: &CoefficientRule,
    is_coefficient: bool,
) -> AutomaticSource {
    AutomaticSource {
        name: name.to_owned(),
        acts_on: acts_on.to_owned(),
        rule: rule.percent.to_owned(),
        scales: true,
        words: rule.words.to_owned(),
        cause: String::new(),
        is_coefficient,
        published: (rule.source, rule.confidence),
    }
}

/// Constants and tables that the equation of a regime uses.
pub(super) fn numbers(
    installation: &Installation,
    form: &Regime,
    drowned: Option<&DrownedFlow>,
) -> Vec<(String, Confidence)> {
    let structure = installation.structure;
    let texts = form.definitions.iter().map(|(_, text)| *text).chain([form.discharge]);
    let used: Vec<&str> = texts.flat_map(identifiers).collect();
    let uses = |name: &str| used.contains(&name);
    let constants = structure
        .constants
        .iter()
        .filter(|each| uses(each.symbol))
        .map(|each| (each.meaning.to_owned(), each.confidence));
    let tables = structure
        .tables
        .iter()
        .filter(|each| uses(each.name))
        .map(|each| (format!("table {}", each.name), each.confidence));
    let choice = structure.choice.map(|choice| (choice.meaning.to_owned(), choice.confidence));
    let factor =
        drowned.map(|each| (format!("drowned-flow factor {}", each.name), each.confidence));
    constants.chain(tables).chain(choice).chain(factor).collect()
}

/// The names in a text of equations.
pub(super) fn identifiers(text: &str) -> impl Iterator<Item = &str> {
    text.split(|c: char| !(c.is_alphanumeric() || c == '_'))
        .filter(|word| word.starts_with(|c: char| c.is_alphabetic()))
}
