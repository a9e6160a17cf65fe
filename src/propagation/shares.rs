//! Variance-based shares: how much of the variance each source explains alone, and with others.
//!
//! Unlike the linear shares they hold where the equation is curved. First-order index: Saltelli and
//! others 2010, table 2 (b); total index: Jansen 1999, with samples A, B and A with one source's
//! column taken from B.

use rayon::prelude::*;

use super::Problem;
use super::monte_carlo::{SUPER_BLOCK, Sampler, StreamKey};
use crate::model::{BLOCK, Outcome, Program};

/// The share of one source, or of the correlated set that it belongs to.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Share {
    /// First-order index: the part of the variance that it explains alone.
    pub first_order: f64,
    /// Standard error of the first-order index from the number of trials.
    pub first_order_error: f64,
    /// Total index: the part that would go if it alone were made exact, interactions included.
    pub total: f64,
    /// Standard error of the total index.
    pub total_error: f64,
}

/// Shares of all sources in one output.
#[derive(Clone, Debug, PartialEq)]
pub struct Shares {
    /// For each source, in their order. Members of a correlated set have that set's share.
    pub sources: Vec<Share>,
    /// Base trials; the model was run for (sets + 2) times as many.
    pub base_trials: u64,
}

/// Base trials: 2^14.
const SUPER_BLOCKS: u64 = 4;

/// The samples that are needed: A, B, and A with a set's errors from B.
#[derive(Clone, Copy)]
enum Sample {
    A,
    B,
    Mixed(usize),
}

/// Shares of the sources in the first output.
pub fn shares(problem: &mut Problem, seed: u64) -> Shares {
    let fixed = problem.fixed();
    let outputs = problem.outputs[..1].to_vec();
    let corrected = problem.corrected();
    let program = Program::compile(&mut problem.model, &outputs, &fixed, &corrected);
    let sampler = Sampler::new(problem);
    let groups: Vec<&[usize]> = sampler.groups().collect();
    // One column of values for A, one for B, one for each set.
    let blocks: Vec<Vec<Vec<f64>>> = (0..SUPER_BLOCKS)
        .into_par_iter()
        .flat_map_iter(|index| run_super_block(&sampler, &groups, &program, seed, index))
        .collect();
    let by_group: Vec<Share> = (0..groups.len()).map(|group| estimate(&blocks, group)).collect();
    let mut sources = vec![by_group.first().copied().unwrap_or(NOTHING); problem.sources.len()];
    for (group, share) in groups.iter().zip(&by_group) {
        for source in *group {
            sources[*source] = *share;
        }
    }
    Shares { sources, base_trials: SUPER_BLOCKS * SUPER_BLOCK as u64 }
}

const NOTHING: Share =
    Share { first_order: 0.0, first_order_error: 0.0, total: 0.0, total_error: 0.0 };

/// The values of each block of a super-block: A, B, then one column for each set.
fn run_super_block(
    sampler: &Sampler<'_>,
    groups: &[&[usize]],
    program: &Program,
    seed: u64,
    index: u64,
) -> Vec<Vec<Vec<f64>>> {
    let mut workspace = program.workspace();
    let mut outcomes = [Outcome::Value; BLOCK];
    let (mut a, mut b) = (sampler.errors(), sampler.errors());
    let mut streams_a = sampler.streams(StreamKey::SharesA, seed, index);
    let mut streams_b = sampler.streams(StreamKey::SharesB, seed, index);
    (0..SUPER_BLOCK / BLOCK)
        .map(|_| {
            sampler.draw(&mut streams_a, &mut a);
            sampler.draw(&mut streams_b, &mut b);
            let mixed = (0..groups.len()).map(Sample::Mixed);
            [Sample::A, Sample::B]
                .into_iter()
                .chain(mixed)
                .map(|sample| {
                    sampler.fill_inputs(program, &mut workspace, |source| match sample {
                        Sample::B => &b[source],
                        Sample::Mixed(group) if groups[group].contains(&source) => &b[source],
                        Sample::A | Sample::Mixed(_) => &a[source],
                    });
                    program.run(&mut workspace, BLOCK, &mut outcomes);
                    program.output(&workspace, 0).to_vec()
                })
                .collect()
        })
        .collect()
}

/// The indices of one set, with standard errors from the spread of the blocks.
fn estimate(blocks: &[Vec<Vec<f64>>], group: usize) -> Share {
    let mut first = Vec::with_capacity(blocks.len());
    let mut total = Vec::with_capacity(blocks.len());
    let both = blocks.iter().flat_map(|block| block[0].iter().chain(&block[1]));
    let finite: Vec<f64> = both.copied().filter(|value| value.is_finite()).collect();
    let count = finite.len() as f64;
    let mean = finite.iter().sum::<f64>() / count;
    let variance = finite.iter().map(|value| (value - mean).powi(2)).sum::<f64>() / (count - 1.0);
    if !(variance > 0.0) {
        return NOTHING;
    }
    for block in blocks {
        let columns = block[0].iter().zip(&block[1]).zip(&block[2 + group]);
        let (mut of_first, mut of_total, mut used) = (0.0, 0.0, 0.0);
        for ((a, b), mixed) in columns {
            // A trial without a value in any of the three is left out of all.
            if (a + b + mixed).is_finite() {
                of_first += (b - mean) * (mixed - a);
                of_total += (a - mixed).powi(2) / 2.0;
                used += 1.0;
            }
        }
        if used > 0.0 {
            first.push(of_first / used / variance);
            total.push(of_total / used / variance);
        }
    }
    let (first_order, first_order_error) = mean_and_error(&first);
    let (total, total_error) = mean_and_error(&total);
    Share { first_order, first_order_error, total, total_error }
}

fn mean_and_error(values: &[f64]) -> (f64, f64) {
    let count = values.len() as f64;
    let mean = values.iter().sum::<f64>() / count;
    let square: f64 = values.iter().map(|value| (value - mean).powi(2)).sum();
    (mean, (square / (count - 1.0) / count).sqrt())
}
