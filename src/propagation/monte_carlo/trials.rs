//! Running trials: errors drawn, inputs made wrong, the compiled model run, block by block.

use rayon::prelude::*;

use super::draw;
use super::stream::{Stream, StreamKey};
use crate::model::{BLOCK, Outcome, Program, Workspace};
use crate::propagation::correlation::factor;
use crate::propagation::{Action, Distribution, Problem};

/// Trials that share a stream: the unit of work. Part of the reproducible format of results.
pub const SUPER_BLOCK: usize = 8 * BLOCK;

/// How many trials were special.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Tally {
    /// No water passed the crest: the result is 0.
    pub dry: u64,
    /// A published table was left and its end value held.
    pub outside_table: u64,
    /// The equation had no value: the trial is left out.
    pub undefined: u64,
    /// Another branch of the equation held than at the corrected inputs.
    pub across: u64,
}

impl Tally {
    fn count(&mut self, outcomes: &[Outcome]) {
        for outcome in outcomes {
            match outcome {
                Outcome::Value => {}
                Outcome::Dry => self.dry += 1,
                Outcome::OutsideTable => self.outside_table += 1,
                Outcome::Undefined => self.undefined += 1,
            }
        }
    }

    pub(super) fn plus(self, other: Self) -> Self {
        Self {
            dry: self.dry + other.dry,
            outside_table: self.outside_table + other.outside_table,
            undefined: self.undefined + other.undefined,
            across: self.across + other.across,
        }
    }
}

/// How the errors of a problem are drawn: independent sources from their own distribution, correlated
/// ones jointly normal.
#[derive(Debug)]
pub(in crate::propagation) struct Sampler<'p> {
    problem: &'p Problem,
    groups: Vec<(Vec<usize>, Vec<Vec<f64>>)>,
}

/// Errors of one block: a row of lanes for each source.
pub(in crate::propagation) type Errors = Vec<Box<[f64; BLOCK]>>;

impl<'p> Sampler<'p> {
    pub(in crate::propagation) fn new(problem: &'p Problem) -> Self {
        let groups = problem
            .groups()
            .into_iter()
            .map(|group| {
                // Impossible coefficients are refused where they are read; here they draw nothing.
                let rows = factor(problem, &group).unwrap_or_default();
                (group, rows)
            })
            .collect();
        Self { problem, groups }
    }

    /// The groups of sources that are drawn together.
    pub(in crate::propagation) fn groups(&self) -> impl Iterator<Item = &[usize]> {
        self.groups.iter().map(|(group, _)| group.as_slice())
    }

    pub(in crate::propagation) fn errors(&self) -> Errors {
        self.problem.sources.iter().map(|_| Box::new([0.0; BLOCK])).collect()
    }

    /// A stream for each source.
    pub(in crate::propagation) fn streams(
        &self,
        key: StreamKey,
        seed: u64,
        super_block: u64,
    ) -> Vec<Stream> {
        let sources = self.problem.sources.iter();
        sources.map(|source| key.stream(seed, &source.name, super_block)).collect()
    }

    /// Draws the errors of the next block.
    pub(in crate::propagation) fn draw(&self, streams: &mut [Stream], errors: &mut Errors) {
        for (group, rows) in &self.groups {
            if let [only] = group.as_slice() {
                let distribution = &self.problem.sources[*only].distribution;
                draw(distribution, &mut streams[*only], &mut errors[*only][..]);
            } else {
                self.draw_jointly(group, rows, streams, errors);
            }
        }
    }

    /// JCGM 101 6.4.8: independent standard normals, combined by the rows of the factor.
    fn draw_jointly(
        &self,
        group: &[usize],
        rows: &[Vec<f64>],
        streams: &mut [Stream],
        errors: &mut Errors,
    ) {
        let standard = Distribution::Normal { mean: 0.0, standard_uncertainty: 1.0 };
        for source in group {
            draw(&standard, &mut streams[*source], &mut errors[*source][..]);
        }
        // From the last row up: a row needs only the independent numbers of those before it and its own.
        for (i, row) in rows.iter().enumerate().rev() {
            let distribution = &self.problem.sources[group[i]].distribution;
            let (mean, u) = (distribution.mean(), distribution.standard_uncertainty());
            let mut combined = [0.0; BLOCK];
            for (weight, source) in row.iter().zip(group) {
                for (sum, z) in combined.iter_mut().zip(errors[*source].iter()) {
                    *sum += weight * z;
                }
            }
            for (error, z) in errors[group[i]].iter_mut().zip(combined) {
                *error = mean + u * z;
            }
        }
    }

    /// Fills the varying inputs of a program with true values. `errors` gives each source's lanes.
    pub(in crate::propagation) fn fill_inputs<'e>(
        &self,
        program: &Program,
        workspace: &mut Workspace,
        errors: impl Fn(usize) -> &'e [f64; BLOCK],
    ) {
        for (input, indicated) in self.problem.indicated.iter().enumerate() {
            let Some(lanes) = program.input(workspace, input) else { continue };
            lanes.fill(*indicated);
            // All shifts before all scales: true = (indicated - shifts) * (1 - scale) * ...
            for shifts in [true, false] {
                for (index, source) in self.problem.sources.iter().enumerate() {
                    for effect in source.effects.iter().filter(|effect| effect.input == input) {
                        let errors = errors(index);
                        match effect.action {
                            Action::Shift { gain, offset } if shifts => {
                                lanes
                                    .iter_mut()
                                    .zip(errors)
                                    .for_each(|(x, e)| *x -= offset + gain * e);
                            }
                            Action::Scale if !shifts => {
                                lanes.iter_mut().zip(errors).for_each(|(x, e)| *x *= 1.0 - e);
                            }
                            _ => {}
                        }
                    }
                }
            }
        }
    }
}

/// Values of a run of trials.
#[derive(Clone, Debug, Default)]
pub(in crate::propagation) struct Trials {
    /// For each output its values; trials without one are left out.
    pub(in crate::propagation) values: Vec<Vec<f64>>,
    pub(in crate::propagation) tally: Tally,
}

impl Trials {
    /// Runs trials `from` to `from + count`, both multiples of a super-block but for the last end.
    pub(in crate::propagation) fn run(
        sampler: &Sampler<'_>,
        program: &Program,
        seed: u64,
        from: u64,
        count: usize,
        progress: &(dyn Fn(u64) + Sync),
    ) -> Self {
        let outputs = sampler.problem.outputs.len();
        let mut values = vec![vec![0.0; count]; outputs];
        let mut slices: Vec<Vec<&mut [f64]>> = Vec::new();
        for output in &mut values {
            for (index, slice) in output.chunks_mut(SUPER_BLOCK).enumerate() {
                if slices.len() <= index {
                    slices.push(Vec::new());
                }
                slices[index].push(slice);
            }
        }
        let first = from / SUPER_BLOCK as u64;
        let tallies: Vec<Tally> = slices
            .into_par_iter()
            .enumerate()
            .map_init(
                || (program.workspace(), sampler.errors()),
                |(workspace, errors), (index, mut slices)| {
                    let streams = sampler.streams(StreamKey::Trials, seed, first + index as u64);
                    let tally =
                        super_block(sampler, program, workspace, errors, streams, &mut slices);
                    progress(slices.first().map_or(0, |slice| slice.len() as u64));
                    tally
                },
            )
            .collect();
        let tally = tallies.into_iter().fold(Tally::default(), Tally::plus);
        if tally.undefined > 0 {
            let defined: Vec<bool> = (0..count)
                .map(|trial| values.iter().all(|output| output[trial].is_finite()))
                .collect();
            for output in &mut values {
                let mut keep = defined.iter();
                output.retain(|_| *keep.next().unwrap_or(&false));
            }
        }
        Self { values, tally }
    }

    /// Adds the values of a later run.
    pub(super) fn append(&mut self, other: Self) {
        for (mine, more) in self.values.iter_mut().zip(other.values) {
            mine.extend(more);
        }
        self.tally = self.tally.plus(other.tally);
    }
}

fn super_block(
    sampler: &Sampler<'_>,
    program: &Program,
    workspace: &mut Workspace,
    errors: &mut Errors,
    mut streams: Vec<Stream>,
    slices: &mut [&mut [f64]],
) -> Tally {
    let mut tally = Tally::default();
    let mut outcomes = [Outcome::Value; BLOCK];
    let count = slices.first().map_or(0, |slice| slice.len());
    for start in (0..count).step_by(BLOCK) {
        // A last block that is not full is drawn in full, so that its trials do not depend on the count.
        let lanes = BLOCK.min(count - start);
        sampler.draw(&mut streams, errors);
        sampler.fill_inputs(program, workspace, |source| &errors[source]);
        let plain = program.run(workspace, lanes, &mut outcomes);
        if !plain {
            tally.count(&outcomes[..lanes]);
        }
        tally.across += program.across_branch(workspace, &outcomes[..lanes]);
        for (output, slice) in slices.iter_mut().enumerate() {
            let lanes_of = program.output(workspace, output);
            slice[start..start + lanes].copy_from_slice(&lanes_of[..lanes]);
            if !plain {
                for (value, outcome) in slice[start..].iter_mut().zip(&outcomes[..lanes]) {
                    if *outcome == Outcome::Undefined {
                        *value = f64::NAN;
                    }
                }
            }
        }
    }
    tally
}
