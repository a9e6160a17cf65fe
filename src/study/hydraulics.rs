//! Whether the flow at the control is modular, and up to what tailwater it would be.

use super::limits::{Asked, LimitState};
use crate::model::structures::{DROWNED_FLOW_FACTOR, TAILWATER_HEAD};
use crate::station::Setting;

/// What is known of the flow at the control.
#[derive(Clone, Debug, PartialEq)]
pub struct Hydraulics {
    /// Modular or not.
    pub state: FlowState,
    /// Corrected head of the tailwater above the crest, m; `None` where the file states none.
    pub tailwater_head: Option<f64>,
    /// The highest tailwater at which the flow is modular, m above the crest; `None` where sections differ
    /// or no limit is known.
    pub highest_modular: Option<f64>,
    /// The drowned-flow factor; `None` where no equation for it is in force, and for several sections.
    pub factor: Option<f64>,
    /// The published limit in words, with its source.
    pub limit: String,
}

/// Modular or not.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum FlowState {
    /// The tailwater is below the modular limit.
    Modular,
    /// It is above, and an equation for drowned flow is in force.
    Drowned,
    /// It is above, and the structure's equation no longer holds.
    NotModular,
    /// The file states no tailwater.
    NotChecked,
}

/// What is known of the flow at a moment; `None` for an equation of the user's own.
pub(super) fn hydraulics(
    setting: &mut Setting,
    limits: &[LimitState],
    corrected: &[f64],
) -> Option<Hydraulics> {
    let form = setting.form.as_ref()?;
    let modular = form.structure.modular;
    let limit =
        format!("{} ({}, {})", modular.words, modular.source.document, modular.confidence.words());
    let model = &mut setting.problem.model;
    let has_equation = model.input(DROWNED_FLOW_FACTOR.key).is_some();
    let tailwater_known = model.input(TAILWATER_HEAD.key).is_some();
    let mut value = |text: &str| {
        let id = model.expression(text).ok()?.0;
        Some(model.evaluate(&[id], corrected).0[0]).filter(|value| value.is_finite())
    };
    let highest_modular = form.highest_tailwater.as_deref().and_then(&mut value);
    let tailwater_head = tailwater_known.then(|| value("h_2")).flatten();
    let broken = |drowned: bool| {
        let asked = Asked::Modular { drowned };
        limits.iter().any(|state| state.asked == asked && !state.kept)
    };
    let factor = value("f").filter(|_| tailwater_known && has_equation);
    let state = if !tailwater_known {
        FlowState::NotChecked
    } else if broken(false) {
        FlowState::NotModular
    } else if broken(true) {
        FlowState::Drowned
    } else {
        FlowState::Modular
    };
    Some(Hydraulics { state, tailwater_head, highest_modular, factor, limit })
}
