//! Expressions of a model, compiled, and run on blocks of trials.

use super::compile::Compiler;
use super::expression::{Id, Relation, Table};
use super::system::Model;
use super::tape::{BLOCK, Operation, Register, Registers, Step};

/// Some expressions of a model, compiled for blocks of trials.
///
/// Inputs that are fixed are folded into the constants; the others are registers that the caller fills,
/// lane by lane, before each run.
#[derive(Clone, Debug)]
pub struct Program {
    pub(super) steps: Vec<Step>,
    pub(super) tables: Vec<Table>,
    /// Registers that hold constants, filled once for each workspace.
    pub(super) constants: Vec<(Register, f64)>,
    pub(super) registers: usize,
    /// The register of each input of the model; `None` for those that are fixed.
    pub(super) inputs: Vec<Option<Register>>,
    pub(super) outputs: Vec<Register>,
    /// Positive where water flows.
    pub(super) flowing: Option<Register>,
    /// Positive where a published curve is left.
    pub(super) beyond: Option<Register>,
    /// Conditions of which it is watched how they come out.
    pub(super) watched: Vec<Watched>,
}

/// A condition of the equation, and how it comes out at the nominal inputs.
#[derive(Clone, Debug)]
pub(super) struct Watched {
    pub(super) relation: Relation,
    pub(super) sides: [Register; 2],
    pub(super) nominal: bool,
}

/// What a running program needs: its registers. One for each thread, reused from block to block.
#[derive(Debug)]
pub struct Workspace {
    registers: Registers,
}

/// What became of one lane.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Outcome {
    /// A value.
    Value,
    /// No water passes the crest: the outputs are 0.
    Dry,
    /// A published table was left and its end value held.
    OutsideTable,
    /// The equation has no value; the outputs are NaN.
    Undefined,
}

impl Program {
    /// Compiles `outputs` of a model. `fixed` has a value for each input that is the same in all lanes,
    /// `None` for those that vary; `nominal` has all inputs' values, near which the unknowns are sought.
    pub fn compile(
        model: &mut Model,
        outputs: &[Id],
        fixed: &[Option<f64>],
        nominal: &[f64],
    ) -> Self {
        let mut program = Compiler::new(model, fixed).compile(outputs, &[]);
        program.start_near(nominal);
        program
    }

    /// The same, and it is watched on which branches of the equation each lane falls
    /// ([`Program::across_branch`]).
    pub fn watching_branches(
        model: &mut Model,
        outputs: &[Id],
        fixed: &[Option<f64>],
        nominal: &[f64],
    ) -> Self {
        let branches = model.branches();
        let mut program = Compiler::new(model, fixed).compile(outputs, &branches);
        program.start_near(nominal);
        let mut workspace = program.workspace();
        program.fill(&mut workspace, nominal);
        program.run(&mut workspace, 1, &mut [Outcome::Value; BLOCK]);
        for watched in &mut program.watched {
            watched.nominal = watched.holds(&workspace.registers, 0);
        }
        program
    }

    /// How many of the first `lanes` lanes, after a run, fall on another branch of the equation than the
    /// nominal inputs. Lanes without a value or without flow do not count.
    pub fn across_branch(&self, workspace: &Workspace, outcomes: &[Outcome]) -> u64 {
        if self.watched.is_empty() {
            return 0;
        }
        let registers = &workspace.registers;
        let across = |lane: usize| {
            self.watched.iter().any(|each| each.holds(registers, lane) != each.nominal)
        };
        let counts = |outcome: &Outcome| matches!(outcome, Outcome::Value | Outcome::OutsideTable);
        outcomes
            .iter()
            .enumerate()
            .filter(|(lane, outcome)| counts(outcome) && across(*lane))
            .count() as u64
    }

    /// A fresh workspace.
    pub fn workspace(&self) -> Workspace {
        let mut registers = Registers::new(self.registers);
        for (register, value) in &self.constants {
            registers.lanes[*register as usize].fill(*value);
        }
        Workspace { registers }
    }

    /// The lanes of an input, to be filled before a run; `None` if it is fixed.
    pub fn input<'w>(&self, workspace: &'w mut Workspace, input: usize) -> Option<&'w mut [f64]> {
        let register = self.inputs[input]?;
        Some(&mut workspace.registers.lanes[register as usize][..])
    }

    /// Runs the first `lanes` lanes of a block and tells what became of each. True if all are plain
    /// values, which the caller then need not look at one by one.
    pub fn run(
        &self,
        workspace: &mut Workspace,
        lanes: usize,
        outcomes: &mut [Outcome; BLOCK],
    ) -> bool {
        let registers = &mut workspace.registers;
        registers.outside[..lanes].fill(false);
        registers.run(&self.steps, &self.tables, &(0..lanes), true);
        if self.all_plain(registers, lanes) {
            outcomes[..lanes].fill(Outcome::Value);
            return true;
        }
        for (lane, outcome) in outcomes[..lanes].iter_mut().enumerate() {
            *outcome = self.outcome(registers, lane);
            if *outcome == Outcome::Dry {
                for register in &self.outputs {
                    registers.lanes[*register as usize][lane] = 0.0;
                }
            }
        }
        false
    }

    /// Whether water flows, no table is left and the outputs are finite, in all lanes. Without branches
    /// inside, so that it costs next to nothing.
    fn all_plain(&self, registers: &Registers, lanes: usize) -> bool {
        let all = |register: Register, holds: fn(f64) -> bool| {
            registers.lanes[register as usize][..lanes].iter().fold(true, |all, x| all & holds(*x))
        };
        self.flowing.is_none_or(|register| all(register, |x| x > 0.0))
            && self.beyond.is_none_or(|register| all(register, |x| x <= 0.0))
            && !registers.outside[..lanes].contains(&true)
            && self.outputs.iter().all(|register| all(*register, f64::is_finite))
    }

    fn outcome(&self, registers: &Registers, lane: usize) -> Outcome {
        let at = |register: Register| registers.lanes[register as usize][lane];
        let dry = self.flowing.is_some_and(|register| at(register) <= 0.0);
        let outside =
            registers.outside[lane] || self.beyond.is_some_and(|register| at(register) > 0.0);
        let defined = self.outputs.iter().all(|register| at(*register).is_finite());
        match (dry, defined) {
            (true, _) => Outcome::Dry,
            (false, false) => Outcome::Undefined,
            (false, true) if outside => Outcome::OutsideTable,
            (false, true) => Outcome::Value,
        }
    }

    /// The lanes of an output, after a run.
    pub fn output<'w>(&self, workspace: &'w Workspace, output: usize) -> &'w [f64] {
        &workspace.registers.lanes[self.outputs[output] as usize][..]
    }

    /// Values of all outputs for one set of inputs, which are all given in full.
    pub fn evaluate(&self, inputs: &[f64]) -> (Vec<f64>, Outcome) {
        self.evaluate_in(&mut self.workspace(), inputs)
    }

    /// The same in a workspace that is used again and again.
    pub fn evaluate_in(&self, workspace: &mut Workspace, inputs: &[f64]) -> (Vec<f64>, Outcome) {
        self.fill(workspace, inputs);
        let mut outcomes = [Outcome::Value; BLOCK];
        self.run(workspace, 1, &mut outcomes);
        let values = (0..self.outputs.len()).map(|k| self.output(workspace, k)[0]).collect();
        (values, outcomes[0])
    }

    /// Puts the inputs into the first lane.
    fn fill(&self, workspace: &mut Workspace, inputs: &[f64]) {
        for (input, value) in inputs.iter().enumerate() {
            if let Some(lanes) = self.input(workspace, input) {
                lanes[0] = *value;
            }
        }
    }

    /// Sets where each solve starts from the solution at the nominal inputs.
    fn start_near(&mut self, nominal: &[f64]) {
        let mut workspace = self.workspace();
        self.fill(&mut workspace, nominal);
        start_steps(&mut self.steps, &self.tables, &mut workspace.registers);
    }
}

impl Watched {
    fn holds(&self, registers: &Registers, lane: usize) -> bool {
        let [left, right] = self.sides.map(|side| registers.lanes[side as usize][lane]);
        self.relation.holds(left, right)
    }
}

/// Runs steps in the first lane and lets each solve among them start where it ended; those inside of
/// another likewise.
fn start_steps(steps: &mut [Step], tables: &[Table], registers: &mut Registers) {
    for index in 0..steps.len() {
        if let Step { to, operation: Operation::Solve(solve) } = &mut steps[index] {
            // Solves inside start from the lower bound of this one: otherwise each of its steps would search
            // their whole range.
            registers.lanes[*to as usize][0] = registers.lanes[solve.lower as usize][0];
            start_steps(&mut solve.body, tables, registers);
        }
        registers.run(&steps[index..=index], tables, &(0..1), false);
        let Step { to, operation: Operation::Solve(solve) } = &mut steps[index] else { continue };
        let solution = registers.lanes[*to as usize][0];
        if solution.is_finite() {
            solve.start = solution - registers.lanes[solve.lower as usize][0];
            start_steps(&mut solve.body, tables, registers);
            solve.rising = registers.lanes[solve.slope as usize][0].signum();
        }
    }
}
