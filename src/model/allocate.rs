//! Sharing out registers: operations on as many virtual registers as there are values become operations
//! on few real ones, so that a block of trials stays in the processor's nearest cache.

use std::collections::{HashMap, HashSet};

use super::expression::{Extremum, Function, Relation};
use super::tape::{Operation, Register, Solve, Step};

/// An operation on virtual registers; the same variants as the tape's.
#[derive(Clone, Debug)]
pub(super) enum Draft {
    Plain(DraftKind, Vec<u32>),
    Solve {
        lower: u32,
        upper: u32,
        body: Vec<(u32, Draft)>,
        residual: u32,
        slope: u32,
        only_rising: bool,
    },
}

/// What a plain operation does; operands are apart from it.
#[derive(Clone, Copy, Debug)]
pub(super) enum DraftKind {
    Add,
    AddConstant(f64),
    Subtract,
    SubtractFrom(f64),
    Multiply,
    Scale(f64),
    Divide,
    DivideInto(f64),
    Root,
    Power(f64),
    PowerOf,
    Apply(Function),
    Extremum(Extremum),
    LookUp(u32, [u8; 2]),
    Choose(Relation),
}

/// Shares out real registers: one is free again after the last step that reads it.
pub(super) struct Allocation {
    pub(super) places: HashMap<u32, Register>,
    /// Constants, inputs and outputs keep theirs to the end.
    kept: HashSet<u32>,
    free: Vec<Register>,
    pub(super) count: Register,
}

impl Allocation {
    pub(super) fn new(kept: &[u32]) -> Self {
        let mut allocation = Self {
            places: HashMap::new(),
            kept: kept.iter().copied().collect(),
            free: Vec::new(),
            count: 0,
        };
        for register in kept {
            if !allocation.places.contains_key(register) {
                allocation.place(*register);
            }
        }
        allocation
    }

    fn place(&mut self, register: u32) -> Register {
        if let Some(place) = self.places.get(&register) {
            return *place;
        }
        let place = self.free.pop().unwrap_or_else(|| {
            self.count += 1;
            self.count - 1
        });
        self.places.insert(register, place);
        place
    }

    pub(super) fn allocate(&mut self, drafts: &[(u32, Draft)]) -> Vec<Step> {
        let mut last_use: HashMap<u32, usize> = HashMap::new();
        for (index, (target, draft)) in drafts.iter().enumerate() {
            last_use.insert(*target, index);
            for operand in reads(draft) {
                last_use.insert(operand, index);
            }
        }
        let mut steps = Vec::with_capacity(drafts.len());
        for (index, (target, draft)) in drafts.iter().enumerate() {
            let to = self.place(*target);
            let operation = self.operation(draft);
            steps.push(Step { to, operation });
            let mut done: Vec<u32> = reads(draft)
                .into_iter()
                .chain([*target])
                .filter(|register| last_use.get(register) == Some(&index))
                .filter(|register| !self.kept.contains(register))
                .collect();
            done.sort_unstable();
            done.dedup();
            for register in done {
                self.free.extend(self.places.get(&register));
            }
        }
        steps
    }

    fn operation(&mut self, draft: &Draft) -> Operation {
        match draft {
            Draft::Plain(kind, operands) => {
                let at: Vec<Register> = operands.iter().map(|r| self.places[r]).collect();
                plain_operation(*kind, &at)
            }
            Draft::Solve { lower, upper, body, residual, slope, only_rising } => {
                let inside: Vec<Step> = body
                    .iter()
                    .map(|(target, draft)| {
                        // Nothing inside a body is shared: it runs many times over the same registers.
                        let to = self.place(*target);
                        Step { to, operation: self.operation(draft) }
                    })
                    .collect();
                let solve = Solve {
                    lower: self.places[lower],
                    upper: self.places[upper],
                    residual: self.places[residual],
                    slope: self.places[slope],
                    body: inside,
                    start: 0.0,
                    rising: 0.0,
                    only_rising: *only_rising,
                };
                for (target, _) in body {
                    self.free.push(self.places[target]);
                }
                Operation::Solve(Box::new(solve))
            }
        }
    }
}

/// The registers that a draft reads from outside itself.
fn reads(draft: &Draft) -> Vec<u32> {
    match draft {
        Draft::Plain(_, operands) => operands.clone(),
        Draft::Solve { lower, upper, body, residual, slope, .. } => {
            let own: Vec<u32> = body.iter().map(|(target, _)| *target).collect();
            body.iter()
                .flat_map(|(_, draft)| reads(draft))
                .chain([*lower, *upper, *residual, *slope])
                .filter(|register| !own.contains(register))
                .collect()
        }
    }
}

fn plain_operation(kind: DraftKind, at: &[Register]) -> Operation {
    match kind {
        DraftKind::Add => Operation::Add(at[0], at[1]),
        DraftKind::AddConstant(c) => Operation::AddConstant(at[0], c),
        DraftKind::Subtract => Operation::Subtract(at[0], at[1]),
        DraftKind::SubtractFrom(c) => Operation::SubtractFrom(c, at[0]),
        DraftKind::Multiply => Operation::Multiply(at[0], at[1]),
        DraftKind::Scale(c) => Operation::Scale(at[0], c),
        DraftKind::Divide => Operation::Divide(at[0], at[1]),
        DraftKind::DivideInto(c) => Operation::DivideInto(c, at[0]),
        DraftKind::Root => Operation::Root(at[0]),
        DraftKind::Power(exponent) => Operation::Power(at[0], exponent),
        DraftKind::PowerOf => Operation::PowerOf(at[0], at[1]),
        DraftKind::Apply(function) => Operation::Apply(function, at[0]),
        DraftKind::Extremum(extremum) => Operation::Extremum(extremum, at[0], at[1]),
        DraftKind::LookUp(table, order) => Operation::LookUp { table, at: [at[0], at[1]], order },
        DraftKind::Choose(relation) => {
            Operation::Choose { relation, sides: [at[0], at[1]], then: at[2], otherwise: at[3] }
        }
    }
}
