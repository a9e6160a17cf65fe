//! Limits over the whole range of heads: the heads at which each is not kept.

use crate::model::structures::{Form, InstalledLimit, LimitKind};
use crate::model::{Model, Outcome, Program, Workspace};
use crate::station::{Moment, Sketch, Station};

use super::at::without_column;
use super::limits::{LimitState, limit_expressions, limit_values};

/// Heads at which the range is looked at; what happens between two of them twice is not seen.
const HEADS: usize = 65;
/// Halvings of a step of the range: the head at which a limit fails is known to 1e-6 of a step.
const HALVINGS: usize = 20;

/// A limit, and where in the range it is not kept.
#[derive(Clone, Debug)]
pub struct FailingLimit {
    /// The limit.
    pub limit: InstalledLimit,
    /// The indicated heads at which it is not kept, from and to, m; none if it is kept at all.
    pub heads: Vec<[f64; 2]>,
}

/// A form of the equation, compiled for its limits.
struct Compiled {
    form: Form,
    regimes: Vec<usize>,
    program: Program,
    workspace: Workspace,
}

/// Looks at a station over its range of heads.
struct Sweep<'s> {
    station: &'s Station,
    moment: Moment,
    compiled: Vec<Compiled>,
}

/// The limits of every form that the equation takes over the station's range, with the heads at which
/// each is not kept. `None` where no range is stated, or the equation is the user's own.
///
/// Where the tailwater is a column of the record and no level is asked about, what needs it is left out.
pub(super) fn failing_heads(station: &Station, moment: Moment) -> Option<Vec<FailingLimit>> {
    let [low, high] = station.head.as_ref()?.range.as_ref()?;
    let (moment, tailwater_known) = without_column(station, moment);
    let step = (high.value - low.value) / (HEADS - 1) as f64;
    let heads: Vec<f64> = (0..HEADS).map(|index| low.value + step * index as f64).collect();
    let mut sweep = Sweep { station, moment, compiled: Vec::new() };
    let states: Vec<(usize, Vec<bool>)> =
        heads.iter().map(|head| sweep.kept_at(*head)).collect::<Option<_>>()?;
    let mut limits: Vec<InstalledLimit> = Vec::new();
    for limit in sweep.compiled.iter().flat_map(|each| &each.form.limits) {
        let is_asked = limit.kind == LimitKind::Use || tailwater_known;
        if is_asked && !limits.contains(limit) {
            limits.push(limit.clone());
        }
    }
    let found = limits.into_iter().map(|limit| {
        let failing: Vec<bool> = states.iter().map(|state| sweep.fails_in(state, &limit)).collect();
        let heads = sweep.intervals(&heads, &failing, &limit);
        FailingLimit { limit, heads }
    });
    Some(found.collect())
}

/// Notes with each limit at one head where in the range it is not kept.
pub(super) fn note_failing_heads(states: &mut [LimitState], failing: &[FailingLimit]) {
    for state in states {
        let found = failing.iter().find(|each| each.limit == state.limit);
        state.fails_at = found.map(|each| each.heads.clone());
    }
}

impl Sweep<'_> {
    /// Which form holds at a head, and which of its limits are kept there.
    fn kept_at(&mut self, head: f64) -> Option<(usize, Vec<bool>)> {
        let moment = Moment { head: Some(head), ..self.moment };
        let Sketch { regimes, corrected: inputs } = self.station.sketch(moment).ok()??;
        let known = self.compiled.iter().position(|each| each.regimes == regimes);
        let index = if let Some(index) = known {
            index
        } else {
            let form = self.station.form(moment)?;
            self.compiled.push(compile(form, regimes, &inputs)?);
            self.compiled.len() - 1
        };
        let Compiled { form, program, workspace, .. } = &mut self.compiled[index];
        let (values, outcome) = program.evaluate_in(workspace, &inputs);
        let kept = limit_values(form, &values).map(|(limit, values)| {
            // Where nothing flows, there is nothing to hold against the limits.
            let stands = values.filter(|_| outcome != Outcome::Dry);
            stands.is_none_or(|[quantity, bound]| limit.side.allows(quantity, bound))
        });
        Some((index, kept.collect()))
    }

    /// Whether a limit is there and not kept, in the form that holds at a head.
    fn fails_in(&self, (form, kept): &(usize, Vec<bool>), limit: &InstalledLimit) -> bool {
        let limits = &self.compiled[*form].form.limits;
        limits.iter().zip(kept).any(|(each, kept)| each == limit && !kept)
    }

    fn fails(&mut self, head: f64, limit: &InstalledLimit) -> bool {
        self.kept_at(head).is_some_and(|state| self.fails_in(&state, limit))
    }

    /// Where a limit is not kept, with the ends found by halving the steps in which it changes.
    fn intervals(
        &mut self,
        heads: &[f64],
        failing: &[bool],
        limit: &InstalledLimit,
    ) -> Vec<[f64; 2]> {
        let mut intervals: Vec<[f64; 2]> = Vec::new();
        for (index, fails) in failing.iter().enumerate() {
            if !fails {
                continue;
            }
            if index == 0 || !failing[index - 1] {
                let start = match index {
                    0 => heads[0],
                    _ => self.border(heads[index], heads[index - 1], limit),
                };
                intervals.push([start, heads[index]]);
            }
            let end = match heads.get(index + 1) {
                Some(next) if !failing[index + 1] => self.border(heads[index], *next, limit),
                _ => heads[index],
            };
            if let Some(last) = intervals.last_mut() {
                last[1] = end;
            }
        }
        intervals
    }

    /// The last head at which the limit still fails, between one at which it does and one at which not.
    fn border(&mut self, mut failing: f64, mut kept: f64, limit: &InstalledLimit) -> f64 {
        for _ in 0..HALVINGS {
            let middle = f64::midpoint(failing, kept);
            if self.fails(middle, limit) {
                failing = middle;
            } else {
                kept = middle;
            }
        }
        failing
    }
}

fn compile(form: Form, regimes: Vec<usize>, inputs: &[f64]) -> Option<Compiled> {
    let mut model = Model::build(&form.blueprint).ok()?;
    let outputs = limit_expressions(&mut model, &form);
    let free = vec![None; model.inputs().len()];
    let program = Program::compile(&mut model, &outputs, &free, inputs);
    let workspace = program.workspace();
    Some(Compiled { form, regimes, program, workspace })
}
