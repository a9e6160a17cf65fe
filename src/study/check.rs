//! The check of a station file beyond its reading: does it answer over its whole range of heads.

use crate::diagnostic::Warning;
use crate::station::{Kind, Moment, Refusal, Station};
use crate::units::Unit;

use super::answer::{Answer, answer};
use super::limits::{LimitState, limit_states, station_limits};
use super::range::{FailingLimit, failing_heads};

/// What a station is, and how it fares over its range.
#[derive(Clone, Debug)]
pub struct Check {
    /// Its name.
    pub station: String,
    /// The kind of its structure.
    pub kind: String,
    /// How many sources are stated.
    pub stated_sources: usize,
    /// How many the structure brings with it.
    pub automatic_sources: usize,
    /// The unit that an own equation states for its result.
    pub stated_unit: Option<Unit>,
    /// For each end of the range of heads: the head, the discharge, and the limits that are not kept.
    pub ends: Vec<CheckedEnd>,
    /// Limits that are not kept somewhere in the range, with the heads; `None` where no range is stated, or
    /// the equation is the user's own.
    pub failing: Option<Vec<FailingLimit>>,
    /// The flow is taken to be modular: nothing is known of the tailwater.
    pub modular_not_tested: bool,
    /// What the station states of itself that does not fit: the gauge too near, say.
    pub misfits: Vec<LimitState>,
    /// What is doubtful about the file.
    pub warnings: Vec<Warning>,
}

/// One end of the range of heads.
#[derive(Clone, Debug)]
pub struct CheckedEnd {
    /// Indicated head, m; `None` for an equation without one.
    pub head: Option<f64>,
    /// The result, in SI units, and its SI unit; or why there is none.
    pub result: Result<(f64, String), Refusal>,
    /// Limits that are not kept here.
    pub broken: Vec<LimitState>,
}

/// Checks a station at both ends of its range.
pub fn check(station: &Station) -> Check {
    let heads: Vec<Option<f64>> = match &station.head {
        None => vec![None],
        Some(head) => head.range.iter().flatten().map(|stated| Some(stated.value)).collect(),
    };
    let ends = heads
        .into_iter()
        .map(|head| match answer(station, Moment { head, ..Moment::default() }) {
            Err(refusal) => CheckedEnd { head, result: Err(refusal), broken: Vec::new() },
            Ok(Answer { mut setting, corrected, linear }) => {
                let model = &mut setting.problem.model;
                let unit = model.result_dimension().to_string();
                let limits = setting
                    .form
                    .as_ref()
                    .map_or_else(Vec::new, |form| limit_states(model, form, &corrected));
                let broken = limits.into_iter().filter(|limit| !limit.kept).collect();
                CheckedEnd { head, result: Ok((linear.value, unit)), broken }
            }
        })
        .collect();
    let replaced = station.sources.iter().filter(|source| source.replaces.is_some()).count();
    let (kind, automatic_sources, stated_unit) = match &station.kind {
        Kind::Catalogue(installation) => {
            let brought = installation.automatic_sources().len();
            (installation.structure.kind.to_owned(), brought.saturating_sub(replaced), None)
        }
        Kind::Own(equation) => ("equation".to_owned(), 0, Some(equation.unit.clone())),
    };
    Check {
        station: station.name.clone(),
        kind,
        stated_sources: station.sources.len(),
        automatic_sources,
        stated_unit,
        ends,
        failing: failing_heads(station, Moment::default())
            .map(|found| found.into_iter().filter(|each| !each.heads.is_empty()).collect()),
        modular_not_tested: station.tailwater.is_none()
            && matches!(station.kind, Kind::Catalogue(_)),
        misfits: station_limits(station, Moment::default())
            .into_iter()
            .filter(|state| !state.kept)
            .collect(),
        warnings: station.warnings.clone(),
    }
}
