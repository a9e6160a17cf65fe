//! The linear answer at one moment, or why there is none: what a budget and a check both begin with.

use crate::model::Outcome;
use crate::model::structures::TAILWATER_HEAD;
use crate::propagation::{Linear, linear};
use crate::station::{Moment, Refusal, Setting, Station};

/// A station at a moment at which a result can be stated.
pub(super) struct Answer {
    pub(super) setting: Setting,
    /// The inputs, known biases taken out.
    pub(super) corrected: Vec<f64>,
    pub(super) linear: Linear,
}

/// Works a station by the linear method, and refuses where no result can be stated.
pub(super) fn answer(station: &Station, moment: Moment) -> Result<Answer, Refusal> {
    let mut setting = station.at(moment)?;
    let corrected = setting.problem.corrected();
    refuse_backwards_flow(&mut setting, &corrected)?;
    let linear = linear(&mut setting.problem).swap_remove(0);
    let finite = linear.value.is_finite() && linear.standard_uncertainty.is_finite();
    station.check_outcome(linear.outcome, moment.head, finite)?;
    Ok(Answer { setting, corrected, linear })
}

/// A tailwater as high as the water upstream: no equation of a weir or flume holds.
fn refuse_backwards_flow(setting: &mut Setting, corrected: &[f64]) -> Result<(), Refusal> {
    let model = &mut setting.problem.model;
    let head = model.input("head").map(|input| corrected[input]);
    let known = model.input(TAILWATER_HEAD.key).is_some();
    let (Some(head), true) = (head, known) else { return Ok(()) };
    let Ok((second, _)) = model.expression("h_2") else { return Ok(()) };
    let (values, outcome) = model.evaluate(&[second], corrected);
    let tailwater = values[0];
    if outcome != Outcome::Dry && head > 0.0 && tailwater >= head {
        return Err(Refusal::TailwaterAbove { tailwater, head });
    }
    Ok(())
}
