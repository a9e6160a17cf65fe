//! One or two rectangular parts that outweigh all others: the coverage factor that belongs to them.

use super::{Distribution, Linear, Problem};

/// Sources whose shape is that of the output, and the coverage factor that follows from it.
#[derive(Clone, Debug, PartialEq)]
pub struct Dominant {
    /// The one or two sources, the larger contribution first.
    pub sources: Vec<usize>,
    /// The coverage factor of a rectangular distribution, or of the trapezoidal one of two.
    pub coverage_factor: f64,
}

/// All other parts together count for little up to this share of the dominant ones (EA-4/02 S9 and S10, from
/// memory).
const OUTWEIGHED: f64 = 0.3;

/// The rectangular sources that outweigh all others at a coverage probability, if there are any: one, or else
/// two. Where it is so, t times the standard uncertainty reaches beyond what is possible (JCGM 100 G.6.5).
///
/// The factor is p √3 for one. Two of contributions a and b make a trapezoid with β = (a - b)/(a + b), whose
/// standard deviation is √((1 + β²)/6) of its half-width, and whose quantile is on the flat top where
/// β > p/(2 - p), on the slope otherwise.
pub fn dominant(problem: &Problem, linear: &Linear, probability: f64) -> Option<Dominant> {
    let size = |source: usize| linear.contributions[source].contribution;
    let alone = |source: usize| {
        problem
            .correlations
            .iter()
            .all(|each| each.coefficient == 0.0 || !each.sources.contains(&source))
    };
    let is_rectangular = |source: usize| {
        matches!(problem.sources[source].distribution, Distribution::Rectangular { .. })
    };
    let mut found: Vec<usize> = (0..problem.sources.len())
        .filter(|source| size(*source) > 0.0 && is_rectangular(*source) && alone(*source))
        .collect();
    found.sort_by(|a, b| size(*b).total_cmp(&size(*a)));
    let variance = linear.standard_uncertainty.powi(2);
    let outweigh = |sources: &[usize]| {
        let own: f64 = sources.iter().map(|source| size(*source).powi(2)).sum();
        (variance - own).max(0.0) <= OUTWEIGHED.powi(2) * own
    };
    let count = (1..=found.len().min(2)).find(|count| outweigh(&found[..*count]))?;
    found.truncate(count);
    let second = found.get(1).map_or(0.0, |source| size(*source));
    let first = size(found[0]);
    let flat = (first - second) / (first + second);
    let quantile = if flat > probability / (2.0 - probability) {
        probability * (1.0 + flat) / 2.0
    } else {
        1.0 - ((1.0 - probability) * (1.0 - flat * flat)).sqrt()
    };
    let coverage_factor = quantile / ((1.0 + flat * flat) / 6.0).sqrt();
    Some(Dominant { sources: found, coverage_factor })
}
