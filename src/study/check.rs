//! The check of a station file beyond its reading: does it answer over its whole range of heads.

use crate::diagnostic::Warning;
use crate::propagation::linear;
use crate::station::{Refusal, Station};

use super::limits::{LimitState, limit_states};

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
    /// For each end of the range of heads: the head, the discharge, and the limits that are not kept.
    pub ends: Vec<CheckedEnd>,
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
    let mut automatic_sources = 0;
    let ends = heads
        .into_iter()
        .map(|head| match station.at(head, None) {
            Err(refusal) => CheckedEnd { head, result: Err(refusal), broken: Vec::new() },
            Ok(mut setting) => {
                automatic_sources =
                    setting.rows.iter().filter(|row| row.published.is_some()).count();
                let found = linear(&mut setting.problem).swap_remove(0);
                let finite = found.value.is_finite() && found.standard_uncertainty.is_finite();
                let unit = setting.problem.model.result_dimension().to_string();
                let result = station
                    .check_outcome(found.outcome, head, finite)
                    .map(|()| (found.value, unit));
                let corrected = setting.problem.corrected();
                let limits = setting.regime.map_or_else(Vec::new, |(_, regime)| {
                    limit_states(&mut setting.problem.model, regime, &corrected)
                });
                let broken = limits.into_iter().filter(|limit| !limit.kept).collect();
                CheckedEnd { head, result, broken }
            }
        })
        .collect();
    let kind = match &station.kind {
        crate::station::Kind::Catalogue(structure) => structure.kind.to_owned(),
        crate::station::Kind::Own(_) => "equation".to_owned(),
    };
    Check {
        station: station.name.clone(),
        kind,
        stated_sources: station.sources.len(),
        automatic_sources,
        ends,
        warnings: station.warnings.clone(),
    }
}
