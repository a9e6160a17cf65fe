//! The linear method: law of propagation of uncertainty (JCGM 100 clause 5).

use super::problem::Action;
use super::{Coverage, Problem};
use crate::model::Outcome;

/// The result of the linear method for one output.
#[derive(Clone, Debug, PartialEq)]
pub struct Linear {
    /// The output at the corrected inputs.
    pub value: f64,
    /// The output at the indicated inputs, known biases left in.
    pub indicated: f64,
    /// Combined standard uncertainty (JCGM 100 equations 10 and 13).
    pub standard_uncertainty: f64,
    /// Effective degrees of freedom (JCGM 100 G.4.1).
    pub degrees_of_freedom: DegreesOfFreedom,
    /// For each source, in their order.
    pub contributions: Vec<Contribution>,
    /// What became of the equation at the corrected inputs.
    pub outcome: Outcome,
}

/// What one source contributes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Contribution {
    /// Standard uncertainty of the source's error.
    pub standard_uncertainty: f64,
    /// Derivative of the output by the source's error.
    pub sensitivity: f64,
    /// Absolute sensitivity times standard uncertainty.
    pub contribution: f64,
    /// Share of the combined variance, its correlations included: `c_i` `u_i` `sum_j(r_ij` `c_j` `u_j`) / `u_c^2`.
    pub share: f64,
}

/// Degrees of freedom of a combined standard uncertainty.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum DegreesOfFreedom {
    /// A number.
    Finite(f64),
    /// Every part is taken as exactly known.
    Infinite,
    /// Correlated parts with finite degrees of freedom, for which the guide has no rule
    /// (JCGM 101 5.7.2).
    Undefined,
}

impl Linear {
    /// Coverage factor and expanded uncertainty.
    pub fn expanded(&self, coverage: Coverage) -> (f64, f64) {
        let factor = coverage.factor(self.degrees_of_freedom);
        (factor, factor * self.standard_uncertainty)
    }

    /// Places of the sources, the largest contribution first; equal ones (within 1e-9) in their order.
    pub fn ranking(&self) -> Vec<usize> {
        let mut order: Vec<usize> = (0..self.contributions.len()).collect();
        // Equal within 1e-9 is no order (it does not carry over), so equal ones are put on one level
        // first, and levels are sorted.
        let size = |place: &usize| self.contributions[*place].contribution;
        order.sort_by(|a, b| size(b).total_cmp(&size(a)));
        let mut levels: Vec<Vec<usize>> = Vec::new();
        for place in order {
            match levels.last_mut() {
                Some(level) if size(&level[0]) - size(&place) <= 1e-9 * size(&level[0]) => {
                    level.push(place);
                }
                _ => levels.push(vec![place]),
            }
        }
        for level in &mut levels {
            level.sort_unstable();
        }
        levels.concat()
    }
}

/// Propagates by the linear method, for each output of the problem.
///
/// The sensitivities are exact derivatives at the corrected inputs. Where no water flows, the value and
/// all sensitivities are 0; where the equation has no value or no slope they are NaN.
pub fn linear(problem: &mut Problem) -> Vec<Linear> {
    let corrected = problem.corrected();
    let varying: Vec<usize> = (0..corrected.len()).filter(|input| problem.varies(*input)).collect();
    let outputs = problem.outputs.clone();
    outputs
        .into_iter()
        .map(|output| {
            let mut wanted = vec![output];
            for input in &varying {
                wanted.push(problem.model.derivative(output, *input));
            }
            let (values, outcome) = problem.model.evaluate(&wanted, &corrected);
            let (indicated, _) = problem.model.evaluate(&[output], &problem.indicated);
            let mut derivatives = vec![0.0; corrected.len()];
            for (input, value) in varying.iter().zip(&values[1..]) {
                derivatives[*input] = *value;
            }
            combine(problem, &derivatives, &corrected, values[0], indicated[0], outcome)
        })
        .collect()
}

fn combine(
    problem: &Problem,
    derivatives: &[f64],
    corrected: &[f64],
    value: f64,
    indicated: f64,
    outcome: Outcome,
) -> Linear {
    let mut contributions: Vec<Contribution> = problem
        .sources
        .iter()
        .map(|source| {
            let mean = source.distribution.mean();
            let sensitivity: f64 = source
                .effects
                .iter()
                .map(|effect| -derivatives[effect.input] * slope(problem, corrected, *effect, mean))
                .sum();
            let standard_uncertainty = source.distribution.standard_uncertainty();
            let contribution = (sensitivity * standard_uncertainty).abs();
            Contribution { standard_uncertainty, sensitivity, contribution, share: 0.0 }
        })
        .collect();
    let signed: Vec<f64> =
        contributions.iter().map(|each| each.sensitivity * each.standard_uncertainty).collect();
    // c_i u_i sum_j r_ij c_j u_j: the parts of the combined variance.
    let parts: Vec<f64> = (0..signed.len())
        .map(|i| {
            let others: f64 = problem
                .correlations
                .iter()
                .filter_map(|each| match each.sources {
                    [a, b] if a == i => Some(each.coefficient * signed[b]),
                    [a, b] if b == i => Some(each.coefficient * signed[a]),
                    _ => None,
                })
                .sum();
            signed[i] * (signed[i] + others)
        })
        .collect();
    let variance: f64 = parts.iter().sum::<f64>().max(0.0);
    for (contribution, part) in contributions.iter_mut().zip(&parts) {
        contribution.share = if variance > 0.0 { part / variance } else { 0.0 };
    }
    let degrees_of_freedom = effective_degrees_of_freedom(problem, &contributions, variance);
    Linear {
        value,
        indicated,
        standard_uncertainty: variance.sqrt(),
        degrees_of_freedom,
        contributions,
        outcome,
    }
}

/// How the true value of an input falls with a source's error, at the mean errors.
fn slope(problem: &Problem, corrected: &[f64], effect: super::Effect, mean: f64) -> f64 {
    match effect.action {
        Action::Scale => corrected[effect.input] / (1.0 - mean),
        Action::Shift { gain, .. } => {
            let scales: f64 = problem
                .sources
                .iter()
                .flat_map(|source| source.effects.iter().map(move |each| (source, each)))
                .filter(|(_, each)| each.input == effect.input && each.action == Action::Scale)
                .map(|(source, _)| 1.0 - source.distribution.mean())
                .product();
            gain * scales
        }
    }
}

/// Welch-Satterthwaite (JCGM 100 G.4.1), which holds for independent parts. A correlated set of exactly
/// known parts counts as one such part; one with finite degrees of freedom has no rule.
fn effective_degrees_of_freedom(
    problem: &Problem,
    contributions: &[Contribution],
    variance: f64,
) -> DegreesOfFreedom {
    let mut sum = 0.0;
    for group in problem.groups() {
        let finite = group.iter().any(|source| {
            problem.sources[*source].degrees_of_freedom.is_finite()
                && contributions[*source].contribution > 0.0
        });
        if finite && group.len() > 1 {
            return DegreesOfFreedom::Undefined;
        }
        if finite {
            // Scaled by the variance, so that tiny results do not underflow.
            let part = contributions[group[0]].contribution.powi(2) / variance;
            sum += part * part / problem.sources[group[0]].degrees_of_freedom;
        }
    }
    if sum > 0.0 { DegreesOfFreedom::Finite(1.0 / sum) } else { DegreesOfFreedom::Infinite }
}
