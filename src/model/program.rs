//! Expressions of a model, compiled, and run on blocks of trials.

use super::compile::Compiler;
use super::expression::{Id, Table};
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
        let mut program = Compiler::new(model, fixed).compile(outputs);
        program.start_near(nominal);
        program
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
        let mut workspace = self.workspace();
        for (input, value) in inputs.iter().enumerate() {
            if let Some(lanes) = self.input(&mut workspace, input) {
                lanes[0] = *value;
            }
        }
        let mut outcomes = [Outcome::Value; BLOCK];
        self.run(&mut workspace, 1, &mut outcomes);
        let values = (0..self.outputs.len()).map(|k| self.output(&workspace, k)[0]).collect();
        (values, outcomes[0])
    }

    /// Registers in use, as a measure of how much of the cache a block takes.
    pub fn register_count(&self) -> usize {
        self.registers
    }

    /// Sets where each solve starts from the solution at the nominal inputs.
    fn start_near(&mut self, nominal: &[f64]) {
        let mut workspace = self.workspace();
        for (input, value) in nominal.iter().enumerate() {
            if let Some(lanes) = self.input(&mut workspace, input) {
                lanes[0] = *value;
            }
        }
        for index in 0..self.steps.len() {
            let registers = &mut workspace.registers;
            registers.run(&self.steps[index..=index], &self.tables, &(0..1), false);
            let Step { to, operation: Operation::Solve(solve) } = &mut self.steps[index] else {
                continue;
            };
            let solution = registers.lanes[*to as usize][0];
            if solution.is_finite() {
                solve.start = solution - registers.lanes[solve.lower as usize][0];
                registers.run(&solve.body, &self.tables, &(0..1), false);
                solve.rising = registers.lanes[solve.slope as usize][0].signum();
            }
        }
    }
}
