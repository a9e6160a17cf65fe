//! What the curvature of the equation adds to the linear method: the terms of the next order in the variance
//! (JCGM 100 5.1.2, note) and the shift of the mean (H.2.4, equation H.10).

use super::linear::sensitivity;
use super::{Linear, Problem};
use crate::model::{BLOCK, Outcome, Program};

/// The standard uncertainty with the terms of the next order, and the shift of the mean.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SecondOrder {
    /// Standard uncertainty, those terms included; `None` where they take off more than there is.
    pub standard_uncertainty: Option<f64>,
    /// What they add to the variance.
    pub added_variance: f64,
    /// Expectation of the output minus its value at the corrected inputs: half the sum of second derivatives
    /// times covariances.
    pub mean_shift: f64,
}

/// Steps in which derivatives of the sensitivities are taken, in standard uncertainties of each error.
const STEP: f64 = 0.01;
/// Two steps have to agree within this share of what the terms add ...
const AGREE: f64 = 0.01;
/// ... or within this share of the variance, which no figure shows.
const UNSEEN: f64 = 1e-6;

/// The terms of the next order for the first output, or `None` where the equation has none: where a table's
/// node, another branch or the end of its domain is as close as a step.
///
/// `linear` is the linear result for that output. The derivatives are differences of the exact
/// sensitivities. For normal errors with covariances U, the gradient c, the second derivatives H and the third
/// derivatives D it is
///
/// ```text
/// u² = cᵀ U c + tr(H U H U)/2 + Σ_ijkl c_i U_ij D_jkl U_kl
/// ```
///
/// which for independent errors is the note of JCGM 100 5.1.2. An independent error that is not normal adds
/// c H μ₃ + (H²/4 + c D/3)(μ₄ - 3 u⁴) by its third and fourth central moments. Errors drawn from a t
/// distribution count as normal with their scale, as the linear method takes them.
pub fn second_order(problem: &mut Problem, linear: &Linear) -> Option<SecondOrder> {
    let errors = Errors::new(problem, linear);
    let steps = [STEP, 2.0 * STEP];
    let points: Vec<Point> = steps.iter().flat_map(|step| errors.points(*step)).collect();
    let gradients = gradients(problem, linear, &errors.sources, &points)?;
    let (near, far) = gradients.split_at(points.len() / 2);
    let fine = Curvature::new(&errors, near, steps[0]).terms(&errors, problem);
    let coarse = Curvature::new(&errors, far, steps[1]).terms(&errors, problem);
    let first = linear.standard_uncertainty;
    for (place, unseen) in [UNSEEN * first * first, UNSEEN * first].into_iter().enumerate() {
        let room = AGREE * fine[place].abs().max(coarse[place].abs()) + unseen;
        if !((fine[place] - coarse[place]).abs() <= room) {
            return None;
        }
    }
    // The error of a central difference goes with the square of its step: that part cancels.
    let [added_variance, mean_shift] = [0, 1].map(|i| (4.0 * fine[i] - coarse[i]) / 3.0);
    let variance = first * first + added_variance;
    let standard_uncertainty = (variance >= 0.0).then(|| variance.sqrt());
    Some(SecondOrder { standard_uncertainty, added_variance, mean_shift })
}

/// The errors that have an uncertainty, each measured in it.
struct Errors {
    /// Their sources.
    sources: Vec<usize>,
    /// Pairs that are correlated, by their places here, with their coefficients.
    pairs: Vec<([usize; 2], f64)>,
    /// All correlation coefficients.
    correlations: Vec<Vec<f64>>,
    /// First derivatives of the output.
    first: Vec<f64>,
}

/// Errors that are off their mean, by their places, and by how many standard uncertainties.
type Point = Vec<(usize, f64)>;

impl Errors {
    fn new(problem: &Problem, linear: &Linear) -> Self {
        let u = |source: usize| linear.contributions[source].standard_uncertainty;
        let sources: Vec<usize> = (0..problem.sources.len()).filter(|s| u(*s) > 0.0).collect();
        let place = |source: usize| sources.iter().position(|each| *each == source);
        let stated = problem.correlations.iter().filter(|each| each.coefficient != 0.0);
        let pairs = stated.filter_map(|each| {
            let [a, b] = each.sources;
            Some(([place(a)?, place(b)?], each.coefficient))
        });
        let pairs: Vec<([usize; 2], f64)> = pairs.collect();
        let mut correlations = vec![vec![0.0; sources.len()]; sources.len()];
        for (i, row) in correlations.iter_mut().enumerate() {
            row[i] = 1.0;
        }
        for ([k, l], coefficient) in &pairs {
            correlations[*k][*l] = *coefficient;
            correlations[*l][*k] = *coefficient;
        }
        let first = sources.iter().map(|s| linear.contributions[*s].sensitivity * u(*s)).collect();
        Self { sources, pairs, correlations, first }
    }

    /// Up and down by one error at a time, then the four corners of each correlated pair.
    fn points(&self, step: f64) -> Vec<Point> {
        let axes = (0..self.sources.len()).flat_map(|j| [vec![(j, step)], vec![(j, -step)]]);
        let corners = [(step, step), (step, -step), (-step, step), (-step, -step)];
        let pairs = self.pairs.iter().flat_map(|([k, l], _)| {
            corners.map(|(by_first, by_second)| vec![(*k, by_first), (*l, by_second)])
        });
        axes.chain(pairs).collect()
    }
}

/// Derivatives of the output by the errors, each error in its standard uncertainty.
struct Curvature {
    /// Second derivatives, row by row.
    second: Vec<Vec<f64>>,
    /// Third derivatives, the last two by the same error: those by i, j and j in row i.
    third: Vec<Vec<f64>>,
    /// Third derivatives by each error and the two of a correlated pair.
    third_of_pairs: Vec<Vec<f64>>,
}

impl Curvature {
    /// From the first derivatives at the points of a step.
    fn new(errors: &Errors, gradients: &[Vec<f64>], step: f64) -> Self {
        let (first, count) = (&errors.first, errors.sources.len());
        let mut second = vec![vec![0.0; count]; count];
        let mut third = vec![vec![0.0; count]; count];
        for i in 0..count {
            for j in 0..count {
                let [up, down] = [gradients[2 * j][i], gradients[2 * j + 1][i]];
                second[i][j] = (up - down) / (2.0 * step);
                third[i][j] = ((up - first[i]) - (first[i] - down)) / (step * step);
            }
        }
        let mixed = gradients[2 * count..].chunks(4).map(|at| {
            let by = |i: usize| (at[0][i] - at[1][i] - at[2][i] + at[3][i]) / (4.0 * step * step);
            (0..count).map(by).collect()
        });
        Self { second, third, third_of_pairs: mixed.collect() }
    }

    /// What the terms add to the variance, and the shift of the mean.
    fn terms(&self, errors: &Errors, problem: &Problem) -> [f64; 2] {
        let all = 0..errors.sources.len();
        let (first, second, correlations) = (&errors.first, &self.second, &errors.correlations);
        // H U, in units of the standard uncertainties.
        let row = |i: usize| {
            let entry = move |j: usize| all_sum(&second[i], |k| correlations[k][j] * second[i][k]);
            all.clone().map(entry).collect::<Vec<f64>>()
        };
        let product: Vec<Vec<f64>> = all.clone().map(row).collect();
        let square: f64 =
            all.clone().map(|i| all_sum(&product[i], |j| product[i][j] * product[j][i])).sum();
        let trace: f64 = all.clone().map(|i| product[i][i]).sum();
        let mut added = square / 2.0;
        for i in all.clone() {
            let own: f64 = self.third[i].iter().sum();
            let mixed = errors.pairs.iter().zip(&self.third_of_pairs);
            let pairs: f64 = mixed.map(|((_, r), by)| 2.0 * r * by[i]).sum();
            let along = all_sum(first, |j| first[j] * correlations[j][i]);
            added += along * (own + pairs);
        }
        for (i, source) in errors.sources.iter().enumerate() {
            let alone = all.clone().all(|j| i == j || correlations[i][j] == 0.0);
            if alone {
                let [third, excess] = problem.sources[*source].distribution.shape_moments();
                added += first[i] * second[i][i] * third;
                added += (second[i][i].powi(2) / 4.0 + first[i] * self.third[i][i] / 3.0) * excess;
            }
        }
        [added, trace / 2.0]
    }
}

fn all_sum(values: &[f64], term: impl Fn(usize) -> f64) -> f64 {
    (0..values.len()).map(term).sum()
}

/// The first derivatives at points that are off the mean errors by some steps; `None` where the equation
/// has no value at one of them or no water flows.
fn gradients(
    problem: &mut Problem,
    linear: &Linear,
    sources: &[usize],
    points: &[Point],
) -> Option<Vec<Vec<f64>>> {
    let u = |source: usize| linear.contributions[source].standard_uncertainty;
    let corrected = problem.corrected();
    let varying: Vec<usize> = (0..corrected.len()).filter(|input| problem.varies(*input)).collect();
    let output = *problem.outputs.first()?;
    let wanted: Vec<_> =
        varying.iter().map(|input| problem.model.derivative(output, *input)).collect();
    let fixed = problem.fixed();
    let program = Program::compile(&mut problem.model, &wanted, &fixed, &corrected);
    let mut workspace = program.workspace();
    let mut outcomes = [Outcome::Value; BLOCK];
    let mut found = Vec::with_capacity(points.len());
    for block in points.chunks(BLOCK) {
        let errors: Vec<Vec<f64>> = block
            .iter()
            .map(|point| {
                let means = problem.sources.iter().map(|source| source.distribution.mean());
                let mut errors: Vec<f64> = means.collect();
                for (place, steps) in point {
                    errors[sources[*place]] += steps * u(sources[*place]);
                }
                errors
            })
            .collect();
        let inputs: Vec<Vec<f64>> =
            errors.iter().map(|errors| problem.true_values(|source| errors[source])).collect();
        for input in &varying {
            if let Some(lanes) = program.input(&mut workspace, *input) {
                lanes.iter_mut().zip(&inputs).for_each(|(lane, values)| *lane = values[*input]);
            }
        }
        program.run(&mut workspace, block.len(), &mut outcomes);
        for (lane, (errors, values)) in errors.iter().zip(&inputs).enumerate() {
            if matches!(outcomes[lane], Outcome::Dry | Outcome::Undefined) {
                return None;
            }
            let mut derivatives = vec![0.0; corrected.len()];
            for (place, input) in varying.iter().enumerate() {
                derivatives[*input] = program.output(&workspace, place)[lane];
            }
            let by = |source: &usize| {
                u(*source) * sensitivity(problem, &derivatives, values, *source, |at| errors[at])
            };
            found.push(sources.iter().map(by).collect());
        }
    }
    Some(found)
}
