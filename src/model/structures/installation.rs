//! A structure as it is installed: with its size, its second head, its sections.

use super::automatic::Unstated;
use super::form::{Form, drowned_flow, identifiers, single};
use super::input::{
    COEFFICIENT_FACTOR, DROWNED_FLOW_FACTOR, GRAVITY, HEAD, InstalledInput, TAILWATER_HEAD, Values,
};
use super::published::{MODULAR_LIMIT, ModularRatio};
use super::structure::Structure;
use super::{composition, compound};
use crate::model::expression::Table;
use crate::units::Dimension;

/// A structure as it is installed.
#[derive(Clone, Debug)]
pub struct Installation {
    /// What it is.
    pub structure: &'static Structure,
    /// Which set of its choice; of no meaning where it has none.
    pub set: usize,
    /// What is known of the second head; `None` where the file says nothing.
    pub second_head: Option<SecondHead>,
    /// Its sections, if it is a compound weir.
    pub sections: Vec<Section>,
}

/// A section of a compound weir.
#[derive(Clone, Debug)]
pub struct Section {
    /// The structure in it; its second head says which drowned-flow equation takes over, the level is that
    /// of the whole.
    pub installation: Installation,
    /// Keys of the inputs that the file gives for it, besides those with a default.
    pub given: Vec<String>,
}

/// The head of the tailwater, or at a crest tapping.
#[derive(Clone, Debug, PartialEq)]
pub struct SecondHead {
    /// Which of the structure's drowned-flow equations takes over; `None` where it has none.
    pub drowned: Option<usize>,
    /// A modular limit in place of the published one, for the check; on Parshall flumes the equation for
    /// drowned flow begins there as well.
    pub modular_limit: Option<f64>,
    /// Its level against the discharge; without it the second head is an input by itself.
    pub curve: Option<TailwaterCurve>,
}

/// The level of a tailwater that follows the discharge.
#[derive(Clone, Debug, PartialEq)]
pub struct TailwaterCurve {
    /// Level above the crest, m, against discharge, m3/s.
    pub table: Table,
    /// The level that it gives at the values asked about, m: the input `tailwater_head` shifts it from
    /// there.
    pub level: f64,
}

impl Installation {
    /// A structure by itself, its usual set, the tailwater unknown; a compound weir with two sections
    /// of triangular profile.
    pub fn plain(structure: &'static Structure) -> Self {
        let sections =
            if structure.kind == compound::KIND { compound::example() } else { Vec::new() };
        let word = structure.choice.map_or("", |choice| choice.example);
        let set = structure.choice.and_then(|choice| choice.find(word)).unwrap_or(0);
        Self { structure, set, second_head: None, sections }
    }

    /// Whether gravity is in its equation by itself; it is inside some published coefficients.
    pub fn uses_gravity(&self) -> bool {
        let in_regimes = self.structure.regimes.iter().any(|regime| {
            let texts = regime.definitions.iter().map(|(_, text)| *text);
            texts.chain([regime.discharge]).flat_map(identifiers).any(|name| name == GRAVITY.symbol)
        });
        in_regimes || !self.sections.is_empty()
    }

    /// Places of the drowned-flow equations that are published for it.
    pub fn drowned(&self) -> Vec<usize> {
        let known = |symbol: &&str| {
            self.constants_of_set().iter().any(|(name, value, _)| name == symbol && !value.is_nan())
        };
        (0..self.structure.drowned.len())
            .filter(|index| self.structure.drowned[*index].needs.iter().all(known))
            .collect()
    }

    /// The constants of its set, NaN where none is published.
    pub(super) fn constants_of_set(&self) -> Vec<(&'static str, f64, Dimension)> {
        let Some(choice) = self.structure.choice else { return Vec::new() };
        let values = choice.sets[self.set].1.iter();
        let symbols = choice.symbols.iter().zip(values);
        symbols.map(|((symbol, dimension, _), value)| (*symbol, *value, *dimension)).collect()
    }

    /// The ratio of heads up to which its flow is modular: the file's, that of the drowned-flow equation in
    /// force, of its set, or of its structure. `None` where the limit is no ratio, or none is known.
    pub fn modular_limit(&self) -> Option<f64> {
        let of_set = |name: &str| {
            let found = self.constants_of_set().into_iter().find(|(symbol, ..)| *symbol == name);
            found.map(|(_, value, _)| value).filter(|value| !value.is_nan())
        };
        let stated = self.second_head.as_ref().and_then(|second| second.modular_limit);
        let of_equation = drowned_flow(self).and_then(|drowned| match drowned.ratio {
            ModularRatio::OfStructure => None,
            ModularRatio::Own(ratio) => Some(ratio),
            ModularRatio::OfChoice(name) => of_set(name),
        });
        stated.or(of_equation).or(self.structure.modular.ratio).or_else(|| of_set(MODULAR_LIMIT))
    }

    /// All inputs: the head, the structure's own, the factor on the coefficient, gravity; those of the
    /// sections and of the second head.
    pub fn inputs(&self) -> Vec<InstalledInput> {
        let mut inputs: Vec<InstalledInput> = vec![HEAD.into()];
        inputs.extend(self.structure.inputs.iter().map(|spec| InstalledInput::from(*spec)));
        if self.sections.is_empty() {
            inputs.push(COEFFICIENT_FACTOR.into());
        }
        inputs.push(GRAVITY.into());
        for (index, section) in self.sections.iter().enumerate() {
            inputs.extend(composition::inputs(section, index + 1, self.second_head.is_some()));
        }
        if let Some(second) = &self.second_head {
            let mut tailwater = InstalledInput::from(TAILWATER_HEAD);
            if second.curve.is_some() {
                SHIFTED_TAILWATER.clone_into(&mut tailwater.symbol);
            }
            inputs.push(tailwater);
            if self.sections.is_empty() && second.drowned.is_some() {
                inputs.push(DROWNED_FLOW_FACTOR.into());
            }
        }
        inputs
    }

    /// The equation that holds at indicated values, with its limits and the error sources it brings.
    pub fn form(&self, values: &Values) -> Form {
        if self.sections.is_empty() {
            single(self, (self.structure.regime_for)(values), values)
        } else {
            composition::form(self, values)
        }
    }

    /// Which regimes hold at indicated values: the structure's, or that of each section.
    pub fn regimes(&self, values: &Values) -> Vec<usize> {
        if self.sections.is_empty() {
            vec![(self.structure.regime_for)(values)]
        } else {
            composition::regimes(self, values)
        }
    }

    /// Every form that the equation of a structure by itself takes; the one of a compound weir.
    pub fn forms(&self) -> Vec<Form> {
        if self.sections.is_empty() {
            let values = Values::default();
            (0..self.structure.regimes.len()).map(|regime| single(self, regime, &values)).collect()
        } else {
            vec![composition::form(self, &Values::default())]
        }
    }

    /// Inputs of which no uncertainty is published, so that a source of the user's must act on one of
    /// each list; and why.
    pub fn unstated(&self) -> Vec<Unstated> {
        self.forms().swap_remove(0).unstated
    }

    /// Names of the error sources that it brings with it, whichever form holds, with the input that each
    /// acts on.
    pub fn automatic_sources(&self) -> Vec<(String, String)> {
        // All forms of a structure bring the same ones; a test holds it so.
        let sources = self.forms().swap_remove(0).automatic;
        sources.into_iter().map(|each| (each.name, each.acts_on)).collect()
    }
}

/// The symbol of the tailwater's head where a rating gives the level: the input then shifts it.
pub(super) const SHIFTED_TAILWATER: &str = "h_t";
