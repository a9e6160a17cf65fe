//! Error sources that a structure brings with it: its published uncertainties.

use super::input::{COEFFICIENT_FACTOR, DROWNED_FLOW_FACTOR};
use super::published::{Coefficient, CoefficientRule, DrownedFlow};
use super::structure::{Regime, Structure};
use crate::model::{Citation, Confidence};

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

/// A coefficient of which no uncertainty is published.
#[derive(Clone, Debug, PartialEq)]
pub struct Unstated {
    /// The inputs of which a source of the user's must act on one.
    pub inputs: Vec<String>,
    /// Why that is so.
    pub why: String,
    /// It counts only where the flow is drowned.
    pub when_drowned: bool,
}

/// The published uncertainties of a structure, and what it leaves to the user.
pub(super) fn sources(
    structure: &Structure,
    regime: &Regime,
    drowned: Option<&DrownedFlow>,
) -> (Vec<AutomaticSource>, Vec<Unstated>) {
    let (mut automatic, mut unstated) = (Vec::new(), Vec::new());
    let cause = |name: &str| format!("{} {name}", structure.kind);
    let scaling = |name: &str, acts_on: &str, rule: &CoefficientRule| AutomaticSource {
        name: name.to_owned(),
        acts_on: acts_on.to_owned(),
        rule: rule.percent.to_owned(),
        scales: true,
        words: rule.words.to_owned(),
        cause: cause(name),
        is_coefficient: name == PUBLISHED_COEFFICIENT,
        published: (rule.source, rule.confidence),
    };
    match regime.coefficient {
        Coefficient::Published(rule) => {
            automatic.push(scaling(PUBLISHED_COEFFICIENT, COEFFICIENT_FACTOR.key, &rule));
        }
        Coefficient::FromUser { inputs, why } => unstated.push(Unstated {
            inputs: inputs.iter().map(|&key| key.to_owned()).collect(),
            why: why.to_owned(),
            when_drowned: false,
        }),
    }
    automatic.extend(structure.adjustments.iter().map(|each| AutomaticSource {
        name: each.name.to_owned(),
        acts_on: each.acts_on.to_owned(),
        rule: each.standard_uncertainty.to_owned(),
        scales: false,
        words: each.words.to_owned(),
        cause: cause(each.name),
        is_coefficient: false,
        published: (each.source, each.confidence),
    }));
    match drowned.map(|drowned| drowned.uncertainty) {
        Some(Some(rule)) => {
            automatic.push(scaling(PUBLISHED_DROWNED_FACTOR, DROWNED_FLOW_FACTOR.key, &rule));
        }
        Some(None) => unstated.push(Unstated {
            inputs: vec![DROWNED_FLOW_FACTOR.key.to_owned()],
            why: "no uncertainty of the drowned-flow factor is published: state one, it counts where the \
                  flow is drowned"
                .to_owned(),
            when_drowned: true,
        }),
        None => {}
    }
    (automatic, unstated)
}
