//! Limits of use at one head: what is there against what a standard allows.

use schemars::JsonSchema;
use serde::Serialize;

use crate::diagnostic::{Code, Warning};
use crate::model::Model;
use crate::model::structures::Regime;
use crate::units::significant;

/// A limit against what is there.
#[derive(Clone, Debug, PartialEq, Serialize, JsonSchema)]
pub struct LimitState {
    /// The quantity, in the symbols of the structure.
    pub quantity: String,
    /// What it is, in words.
    pub meaning: String,
    /// What is there, in SI units.
    pub value: f64,
    /// `>=` or `<=`.
    pub sign: String,
    /// The bound, in SI units.
    pub bound: f64,
    /// The SI unit of both.
    pub unit: String,
    /// It is kept.
    pub kept: bool,
    /// Who set it.
    pub standard: String,
    /// How well it is known, in words.
    pub confidence: String,
    /// It is quoted from memory.
    pub from_memory: bool,
}

/// The limits of a regime at given values of the inputs.
pub(super) fn limit_states(model: &mut Model, regime: &Regime, inputs: &[f64]) -> Vec<LimitState> {
    regime
        .limits
        .iter()
        .filter_map(|limit| {
            // A limit of the catalogue always reads; a test holds it so.
            let (quantity, dimension) = model.expression(limit.quantity).ok()?;
            let (values, _) = model.evaluate(&[quantity], inputs);
            Some(LimitState {
                quantity: limit.quantity.to_owned(),
                meaning: limit.meaning.to_owned(),
                value: values[0],
                sign: limit.bound.sign().to_owned(),
                bound: limit.bound.value(),
                unit: dimension.to_string(),
                kept: limit.bound.allows(values[0]),
                standard: limit.source.document.to_owned(),
                confidence: limit.confidence.words().to_owned(),
                from_memory: limit.confidence.is_memory(),
            })
        })
        .collect()
}

/// A warning for each limit that is not kept.
pub(super) fn limit_warnings(states: &[LimitState]) -> Vec<Warning> {
    states
        .iter()
        .filter(|state| !state.kept)
        .map(|state| {
            let unit = if state.unit == "1" { String::new() } else { format!(" {}", state.unit) };
            let side = if state.sign == "<=" { "above" } else { "below" };
            let text = format!(
                "{} ({}) is {}{unit}, {side} the limit of {}{unit} in {} ({})",
                state.quantity,
                state.meaning,
                significant(state.value, 4),
                significant(state.bound, 4),
                state.standard,
                state.confidence
            );
            Warning::new(Code::OutsideLimits, text)
        })
        .collect()
}
