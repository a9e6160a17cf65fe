//! The compiled form: a list of operations on registers, each register a block of lanes.
//!
//! A lane is one trial. An operation runs over all lanes of a block before the next begins, which the
//! compiler turns into vector code; nothing is allocated while a tape runs.

use std::ops::Range;

use super::expression::{Extremum, Function, Relation, Table};
use super::solve::smallest_root;

/// Lanes in a block. Part of the reproducible format of Monte Carlo results.
pub const BLOCK: usize = 512;

pub(super) type Lanes = [f64; BLOCK];
/// A register's number.
pub(super) type Register = u32;

/// One operation. The target is never one of its operands.
#[derive(Clone, Debug)]
pub(super) enum Operation {
    Add(Register, Register),
    AddConstant(Register, f64),
    Subtract(Register, Register),
    SubtractFrom(f64, Register),
    Multiply(Register, Register),
    Scale(Register, f64),
    Divide(Register, Register),
    DivideInto(f64, Register),
    Root(Register),
    Power(Register, f64),
    PowerOf(Register, Register),
    Apply(Function, Register),
    Extremum(Extremum, Register, Register),
    LookUp { table: u32, at: [Register; 2], order: [u8; 2] },
    Choose { relation: Relation, sides: [Register; 2], then: Register, otherwise: Register },
    Solve(Box<Solve>),
}

/// An operation and where its result goes.
#[derive(Clone, Debug)]
pub(super) struct Step {
    pub(super) to: Register,
    pub(super) operation: Operation,
}

/// An unknown, solved for all lanes of a block together.
#[derive(Clone, Debug)]
pub(super) struct Solve {
    /// Bounds of the unknown.
    pub(super) lower: Register,
    pub(super) upper: Register,
    /// Gives the residual and its slope from the unknown, which it finds in the step's target.
    pub(super) body: Vec<Step>,
    pub(super) residual: Register,
    pub(super) slope: Register,
    /// How far above the lower bound the search starts, and the sign of the slope at the root that is
    /// meant: both from the solution at the nominal values.
    pub(super) start: f64,
    pub(super) rising: f64,
    /// Only a root at which the residual rises through zero is meant.
    pub(super) only_rising: bool,
}

/// The registers of a running tape.
#[derive(Debug)]
pub(super) struct Registers {
    pub(super) lanes: Vec<Box<Lanes>>,
    spare: Box<Lanes>,
    /// Lanes in which a table was left.
    pub(super) outside: Box<[bool; BLOCK]>,
    /// Lanes that a solve has still to do one by one.
    unsettled: Box<[bool; BLOCK]>,
}

/// Newton steps of a block before the lanes that have not settled are solved one by one.
const BLOCK_STEPS: u32 = 12;
/// A relative step below this is the last one: the next would be below rounding.
const SETTLED: f64 = 1e-9;

/// Rows to read.
struct Rows<'r> {
    lanes: &'r [Box<Lanes>],
    range: &'r Range<usize>,
}

impl Rows<'_> {
    fn at(&self, register: Register) -> &[f64] {
        &self.lanes[register as usize][self.range.clone()]
    }
}

impl Registers {
    pub(super) fn new(count: usize) -> Self {
        Self {
            lanes: (0..count).map(|_| Box::new([0.0; BLOCK])).collect(),
            spare: Box::new([0.0; BLOCK]),
            outside: Box::new([false; BLOCK]),
            unsettled: Box::new([false; BLOCK]),
        }
    }

    /// Runs steps on a range of lanes. `mark` notes the lanes that leave a table.
    pub(super) fn run(
        &mut self,
        steps: &[Step],
        tables: &[Table],
        range: &Range<usize>,
        mark: bool,
    ) {
        for step in steps {
            match &step.operation {
                Operation::Solve(solve) => self.solve(step.to, solve, tables, range),
                operation => {
                    self.compute(operation, tables, range, mark);
                    // Every operation writes the spare block, which then takes the target's place: no
                    // operand is written while it is read.
                    std::mem::swap(&mut self.spare, &mut self.lanes[step.to as usize]);
                }
            }
        }
    }

    fn compute(
        &mut self,
        operation: &Operation,
        tables: &[Table],
        range: &Range<usize>,
        mark: bool,
    ) {
        let Self { lanes, spare, outside, .. } = self;
        let read = |register: &Register| &lanes[*register as usize][range.clone()];
        let to = &mut spare[range.clone()];
        match operation {
            Operation::Add(a, b) => binary(to, read(a), read(b), |a, b| a + b),
            Operation::AddConstant(a, c) => unary(to, read(a), |a| a + c),
            Operation::Subtract(a, b) => binary(to, read(a), read(b), |a, b| a - b),
            Operation::SubtractFrom(c, a) => unary(to, read(a), |a| c - a),
            Operation::Multiply(a, b) => binary(to, read(a), read(b), |a, b| a * b),
            Operation::Scale(a, c) => unary(to, read(a), |a| a * c),
            Operation::Divide(a, b) => binary(to, read(a), read(b), |a, b| a / b),
            Operation::DivideInto(c, a) => unary(to, read(a), |a| c / a),
            Operation::Root(a) => unary(to, read(a), f64::sqrt),
            Operation::Power(a, exponent) => unary(to, read(a), |a| a.powf(*exponent)),
            Operation::PowerOf(a, b) => binary(to, read(a), read(b), f64::powf),
            Operation::Apply(function, a) => unary(to, read(a), |a| function.value(a)),
            Operation::Extremum(extremum, a, b) => {
                binary(to, read(a), read(b), |a, b| extremum.of(a, b));
            }
            Operation::LookUp { table, at, order } => {
                let table = &tables[*table as usize];
                let (first, second) = (read(&at[0]), read(&at[1]));
                let second = if table.arguments() == 2 { second } else { first };
                binary(to, first, second, |a, b| table.look_up([a, b], *order));
                if mark {
                    let outside = &mut outside[range.clone()];
                    for ((outside, a), b) in outside.iter_mut().zip(first).zip(second) {
                        *outside |= table.excludes([*a, *b]);
                    }
                }
            }
            Operation::Choose { relation, sides, then, otherwise } => {
                let sides = read(&sides[0]).iter().zip(read(&sides[1]));
                let branches = read(then).iter().zip(read(otherwise));
                for ((to, (left, right)), (then, otherwise)) in
                    to.iter_mut().zip(sides).zip(branches)
                {
                    *to = if relation.holds(*left, *right) { *then } else { *otherwise };
                }
            }
            Operation::Solve(_) => {}
        }
    }

    /// Newton's method on all lanes at once, from near the nominal solution; lanes that have not settled
    /// on a root of the right kind are then solved one by one over the whole range. A lane without a
    /// solution is NaN.
    fn solve(&mut self, to: Register, solve: &Solve, tables: &[Table], range: &Range<usize>) {
        let unknown = to as usize;
        // The unknown's own row is taken out while others are read beside it: rows as slices, one
        // operation over all lanes, are what becomes vector code.
        self.with_row(unknown, range, |x, rows, _| {
            let bounds = rows.at(solve.lower).iter().zip(rows.at(solve.upper));
            for (x, (lower, upper)) in x.iter_mut().zip(bounds) {
                *x = (lower + solve.start).min(*upper).max(*lower);
            }
        });
        for _ in 0..BLOCK_STEPS {
            self.run(&solve.body, tables, range, false);
            let mut moving = false;
            self.with_row(unknown, range, |x, rows, _| {
                let steps = rows.at(solve.residual).iter().zip(rows.at(solve.slope));
                for (x, (residual, slope)) in x.iter_mut().zip(steps) {
                    let step = residual / slope;
                    *x -= step;
                    // A NaN never compares larger: such lanes do not hold up the block.
                    moving |= step.abs() > SETTLED * x.abs();
                }
            });
            if !moving {
                break;
            }
        }
        // Residual and slope are those before the last step, which is below rounding where it settled.
        let mut any = false;
        self.with_row(unknown, range, |x, rows, unsettled| {
            let steps = rows.at(solve.residual).iter().zip(rows.at(solve.slope));
            let bounds = rows.at(solve.lower).iter().zip(rows.at(solve.upper));
            let lanes = x.iter().zip(unsettled).zip(steps.zip(bounds));
            for ((x, unsettled), ((residual, slope), (lower, upper))) in lanes {
                let settled = (residual / slope).abs() <= SETTLED * x.abs();
                // Where the sign is not known yet, the search below decides.
                let meant = slope * solve.rising > 0.0;
                *unsettled = !(settled && meant && *lower <= *x && *x <= *upper);
                any |= *unsettled;
            }
        });
        if !any {
            return;
        }
        for lane in range.clone() {
            if self.unsettled[lane] {
                let root = self.solve_lane(unknown, solve, tables, lane);
                self.lanes[unknown][lane] = root.unwrap_or(f64::NAN);
            }
        }
    }

    /// Works on one row while the others are read.
    fn with_row(
        &mut self,
        place: usize,
        range: &Range<usize>,
        mut work: impl FnMut(&mut [f64], &Rows<'_>, &mut [bool]),
    ) {
        std::mem::swap(&mut self.spare, &mut self.lanes[place]);
        let Self { lanes, spare, unsettled, .. } = self;
        let rows = Rows { lanes, range };
        work(&mut spare[range.clone()], &rows, &mut unsettled[range.clone()]);
        std::mem::swap(&mut self.spare, &mut self.lanes[place]);
    }

    /// One lane by itself, over the whole range of the unknown.
    fn solve_lane(
        &mut self,
        unknown: usize,
        solve: &Solve,
        tables: &[Table],
        lane: usize,
    ) -> Option<f64> {
        let lower = self.lanes[solve.lower as usize][lane];
        let upper = self.lanes[solve.upper as usize][lane];
        let mut residual = |x: f64| {
            self.lanes[unknown][lane] = x;
            self.run(&solve.body, tables, &(lane..lane + 1), false);
            (self.lanes[solve.residual as usize][lane], self.lanes[solve.slope as usize][lane])
        };
        smallest_root(&mut residual, lower, upper, solve.only_rising)
    }
}

#[inline]
fn unary(to: &mut [f64], a: &[f64], function: impl Fn(f64) -> f64) {
    for (to, a) in to.iter_mut().zip(a) {
        *to = function(*a);
    }
}

#[inline]
fn binary(to: &mut [f64], a: &[f64], b: &[f64], function: impl Fn(f64, f64) -> f64) {
    for ((to, a), b) in to.iter_mut().zip(a).zip(b) {
        *to = function(*a, *b);
    }
}
