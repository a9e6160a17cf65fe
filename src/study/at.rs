//! At which head a question is asked.

use crate::station::{Moment, Refusal, Station, Tailwater};
use crate::units::significant;

/// At which head a question is asked.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum At {
    /// The middle of the range of heads; no head where the equation reads none.
    Middle,
    /// An indicated head, m.
    Head(f64),
    /// The indicated head at which the corrected result has this value, m3/s.
    Flow(f64),
}

/// The moment that is asked about: `moment` with its head.
pub(super) fn find_moment(station: &Station, at: At, moment: Moment) -> Result<Moment, Refusal> {
    Ok(Moment { head: find_head(station, at, moment)?, ..moment })
}

fn find_head(station: &Station, at: At, moment: Moment) -> Result<Option<f64>, Refusal> {
    match at {
        At::Head(head) => Ok(Some(head)),
        At::Flow(flow) => head_for_flow(station, flow, moment).map(Some),
        At::Middle => match &station.head {
            None => Ok(None),
            Some(head) => match &head.range {
                Some([low, high]) => Ok(Some(f64::midpoint(low.value, high.value))),
                None => Err(Refusal::NoHead),
            },
        },
    }
}

/// Heads beyond these are none that a station shows.
const HIGHEST_HEAD: f64 = 20.0;
const LOWEST_HEAD: f64 = -5.0;

/// The indicated head at which the corrected result is `flow`, by bisection: the result grows with the
/// head, but may jump where the form of the equation changes.
fn head_for_flow(station: &Station, flow: f64, moment: Moment) -> Result<f64, Refusal> {
    if station.head.is_none() {
        return Err(Refusal::HeadNotRead);
    }
    let flow_at = |head: f64| -> Result<f64, Refusal> {
        let mut setting = station.at(Moment { head: Some(head), ..moment })?;
        let corrected = setting.problem.corrected();
        let outputs = setting.problem.outputs.clone();
        Ok(setting.problem.model.evaluate(&outputs, &corrected).0[0])
    };
    let range = station.head.as_ref().and_then(|head| head.range.as_ref());
    let mut high = range.map_or(1.0, |[_, high]| high.value.max(1e-3));
    while !(flow_at(high)? >= flow) {
        // Beyond the last head with a solution the flow is NaN, and so is all above.
        if high >= HIGHEST_HEAD || flow_at(high)?.is_nan() {
            return Err(Refusal::NoHeadForFlow { flow, highest: high });
        }
        high = (high * 1.5).min(HIGHEST_HEAD);
    }
    // With a zero above the crest water flows at indicated heads below 0.
    let mut low = LOWEST_HEAD;
    for _ in 0..100 {
        let middle = f64::midpoint(low, high);
        if middle <= low || middle >= high {
            break;
        }
        if flow_at(middle)? < flow {
            low = middle;
        } else {
            high = middle;
        }
    }
    let (below, above) = (flow_at(low)?, flow_at(high)?);
    if above - below > JUMP * flow {
        return Err(Refusal::FlowJumps {
            flow,
            head: rounded(high),
            below: rounded(below),
            above: rounded(above),
        });
    }
    Ok(high)
}

/// Two neighbouring heads whose flows differ by more than this share are on both sides of a jump.
const JUMP: f64 = 1e-6;

/// Six digits, for words.
fn rounded(value: f64) -> f64 {
    significant(value, 6).parse().unwrap_or(value)
}

/// A moment at which the station can be looked at, and whether its tailwater is known there: one that is a
/// column of the record is taken to stand at the crest, where it drowns nothing.
pub(super) fn without_column(station: &Station, moment: Moment) -> (Moment, bool) {
    let unknown =
        matches!(station.tailwater, Some(Tailwater::Column { .. })) && moment.tailwater.is_none();
    let tailwater = moment.tailwater.or(unknown.then_some(0.0));
    (Moment { tailwater, ..moment }, !unknown)
}
