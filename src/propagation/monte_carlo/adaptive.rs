//! How many trials: a fixed number, or as many as the figures need to settle (JCGM 101 7.9).

use rayon::prelude::*;

use super::interval::{Intervals, intervals};
use super::trials::{SUPER_BLOCK, Sampler, Tally, Trials};
use crate::model::Program;
use crate::propagation::{Problem, numerical_tolerance};

/// How many trials to run.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Amount {
    /// This many.
    Fixed(u64),
    /// The adaptive procedure with two digits.
    Adaptive,
}

/// The result of the Monte Carlo method.
#[derive(Clone, Debug, PartialEq)]
pub struct MonteCarlo {
    /// Trials run.
    pub trials: u64,
    /// The seed.
    pub seed: u64,
    /// Special trials among them.
    pub tally: Tally,
    /// The adaptive procedure met its tolerance; true for a fixed number.
    pub settled: bool,
    /// For each output.
    pub outputs: Vec<OutputStatistics>,
}

/// Statistics of one output.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct OutputStatistics {
    /// Mean of the trials (7.6, equation 16).
    pub mean: f64,
    /// Their standard deviation (7.6, equation 17).
    pub standard_uncertainty: f64,
    /// Coverage intervals (7.7).
    pub intervals: Intervals,
}

/// Fewer blocks can settle by luck: with two or three the four deviations are sometimes all small. The
/// guide asks for two; this is stricter.
const LEAST_BLOCKS: u64 = 10;
/// Where figures have not settled by then they will not for any price. All values are kept until then.
const MOST_TRIALS: u64 = 12_288_000;
/// The largest block, reached at a coverage of 99.99 %: with ten of them the work stays bounded.
const LARGEST_BLOCK: f64 = 1e6;

/// Runs the Monte Carlo method. `progress` is told of trials as they are done, from any thread.
///
/// `None` where too few trials have a value for an interval.
pub fn monte_carlo(
    problem: &mut Problem,
    amount: Amount,
    seed: u64,
    probability: f64,
    progress: &(dyn Fn(u64) + Sync),
) -> Option<MonteCarlo> {
    let fixed = problem.fixed();
    let outputs = problem.outputs.clone();
    let corrected = problem.corrected();
    let program = Program::watching_branches(&mut problem.model, &outputs, &fixed, &corrected);
    let sampler = Sampler::new(problem);
    let (mut trials, count, settled) = match amount {
        Amount::Fixed(count) => {
            let size = usize::try_from(count).unwrap_or(usize::MAX);
            (Trials::run(&sampler, &program, seed, 0, size, progress), count, true)
        }
        Amount::Adaptive => adaptive(&sampler, &program, seed, probability, progress),
    };
    let outputs = trials
        .values
        .iter_mut()
        .map(|values| statistics(values, probability))
        .collect::<Option<Vec<_>>>()?;
    Some(MonteCarlo { trials: count, seed, tally: trials.tally, settled, outputs })
}

/// Trials of one block of the adaptive procedure: the smallest multiple of the engine's super-block
/// not below max(J, 10^4), with J the smallest whole number not below 100/(1 - p).
fn block_size(probability: f64) -> usize {
    // 1 - 0.95 is not 0.05 to the last bit: a hair is taken off, so that J is 2000 and not 2001.
    let j = (100.0 / (1.0 - probability) - 1e-6).ceil().clamp(1e4, LARGEST_BLOCK) as usize;
    j.div_ceil(SUPER_BLOCK) * SUPER_BLOCK
}

fn adaptive(
    sampler: &Sampler<'_>,
    program: &Program,
    seed: u64,
    probability: f64,
    progress: &(dyn Fn(u64) + Sync),
) -> (Trials, u64, bool) {
    let size = block_size(probability);
    let mut all = Trials::default();
    let mut blocks: Vec<Vec<[f64; 4]>> = Vec::new();
    // Blocks are run several at a time for the sake of many threads; whether to stop is asked after each,
    // and those run beyond are thrown away, so that the answer does not depend on how many that was.
    let most_blocks = (MOST_TRIALS / size as u64).max(LEAST_BLOCKS);
    for batch in (0..most_blocks).step_by(LEAST_BLOCKS as usize) {
        let runs: Vec<(Trials, Vec<[f64; 4]>)> = (batch..batch + LEAST_BLOCKS)
            .into_par_iter()
            .map(|block| {
                let from = block * size as u64;
                let run = Trials::run(sampler, program, seed, from, size, progress);
                let figures = run.values.iter().map(|values| figures(values, probability));
                let figures = figures.collect();
                (run, figures)
            })
            .collect();
        for (run, figures) in runs {
            if all.values.is_empty() {
                all = run;
            } else {
                all.append(run);
            }
            blocks.push(figures);
            let done = blocks.len() as u64;
            if done >= LEAST_BLOCKS && settled(&blocks, &all.values) {
                return (all, done * size as u64, true);
            }
        }
    }
    (all, blocks.len() as u64 * size as u64, false)
}

/// Mean, standard deviation and both ends of the symmetric interval of one block.
fn figures(values: &[f64], probability: f64) -> [f64; 4] {
    let mut values = values.to_vec();
    match statistics(&mut values, probability) {
        Some(OutputStatistics { mean, standard_uncertainty, intervals }) => {
            [mean, standard_uncertainty, intervals.symmetric[0], intervals.symmetric[1]]
        }
        None => [f64::NAN; 4],
    }
}

/// Twice the standard deviation of the mean of each figure over the blocks is within the tolerance
/// (7.9.4 steps g to k).
fn settled(blocks: &[Vec<[f64; 4]>], values: &[Vec<f64>]) -> bool {
    values.iter().enumerate().all(|(output, values)| {
        let tolerance = numerical_tolerance(moments(values).1);
        (0..4).all(|figure| {
            let series: Vec<f64> = blocks.iter().map(|block| block[output][figure]).collect();
            let spread = moments(&series).1 / (series.len() as f64).sqrt();
            2.0 * spread <= tolerance
        })
    })
}

fn statistics(values: &mut [f64], probability: f64) -> Option<OutputStatistics> {
    let (mean, standard_uncertainty) = moments(values);
    let intervals = intervals(values, probability)?;
    Some(OutputStatistics { mean, standard_uncertainty, intervals })
}

/// Mean and standard deviation in two passes, summed by super-block in their order: the same bits for
/// any number of threads, and little rounding.
pub(super) fn moments(values: &[f64]) -> (f64, f64) {
    let count = values.len() as f64;
    // Shifted by the first value, so that values that are all the same have that mean exactly.
    let shift = values.first().copied().unwrap_or(f64::NAN);
    let mean = shift + sum(values, |value| value - shift) / count;
    let square = sum(values, |value| (value - mean) * (value - mean));
    (mean, (square / (count - 1.0)).sqrt())
}

/// Partial sums of a super-block: no addition waits for the one before.
const PARTIAL: usize = 8;

fn sum(values: &[f64], term: impl Fn(f64) -> f64 + Sync) -> f64 {
    let parts: Vec<f64> = values
        .par_chunks(SUPER_BLOCK)
        .map(|chunk| {
            let mut partial = [0.0; PARTIAL];
            let (groups, rest) = chunk.as_chunks::<PARTIAL>();
            for group in groups {
                for (sum, value) in partial.iter_mut().zip(group) {
                    *sum += term(*value);
                }
            }
            for (sum, value) in partial.iter_mut().zip(rest) {
                *sum += term(*value);
            }
            partial.iter().sum::<f64>()
        })
        .collect();
    parts.iter().sum()
}
