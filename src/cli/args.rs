//! Arguments and their help.

use std::path::PathBuf;

use clap::{Args, Parser, Subcommand, ValueEnum};

use crate::propagation::Coverage;
use crate::propagation::monte_carlo::Amount;
use crate::report::UnitSystem;
use crate::units::{Dimension, Quantity};

/// How wrong the flow of a weir or flume may be, why, and what would make it better.
#[derive(Debug, Parser)]
#[command(
    name = "nappe",
    version,
    propagate_version = true,
    after_help = "Exit status: 0 the question was answered; 2 bad input or usage, or something that \
                  cannot be read or written; 3 it cannot be stated.\n\n\
                  Results support, and never replace, local codes, the permit and licensed practice. \
                  Work in and beside water is dangerous."
)]
pub(super) struct Arguments {
    #[command(subcommand)]
    pub(super) command: Command,
}

/// What to do.
#[derive(Debug, Subcommand)]
pub(super) enum Command {
    /// Ranked contributions to the uncertainty of one discharge, by both methods.
    Budget(BudgetArgs),
    /// Reads and checks a station file; runs nothing.
    Check(CheckArgs),
    /// The catalogue of structures: equation, derivatives, limits, sources.
    Structures(StructuresArgs),
    /// A commented station file to start from.
    New(NewArgs),
    /// Completions for a shell, on standard output.
    Completions {
        /// The shell.
        shell: clap_complete::Shell,
    },
    /// The manual page, on standard output.
    Manual,
    /// The JSON schema of `budget --format json`, on standard output.
    Schema,
}

/// How a result is written.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub(super) enum Format {
    /// Tables for a terminal.
    Table,
    /// One JSON object; SI units, full precision.
    Json,
    /// Comma-separated values; SI units, full precision.
    Csv,
    /// Markdown.
    Markdown,
}

/// Units of a page.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub(super) enum UnitsArg {
    /// m, mm, m3/s, l/s.
    Si,
    /// ft, cfs, gpm.
    Us,
}

impl From<UnitsArg> for UnitSystem {
    fn from(units: UnitsArg) -> Self {
        match units {
            UnitsArg::Si => Self::Si,
            UnitsArg::Us => Self::Us,
        }
    }
}

/// Arguments of `budget`.
#[derive(Debug, Args)]
pub(super) struct BudgetArgs {
    /// The station file.
    pub(super) station: PathBuf,
    /// Indicated head, such as "0.25 m"; without it, the middle of the range of heads.
    #[arg(long, value_name = "HEAD", allow_hyphen_values = true, value_parser = length)]
    pub(super) head: Option<f64>,
    /// Corrected flow, such as "20 l/s", at whose head the budget is drawn up.
    #[arg(long, value_name = "FLOW", conflicts_with = "head", value_parser = discharge, allow_hyphen_values = true)]
    pub(super) flow: Option<f64>,
    /// Month, 1 to 12, for sources that are there in some months only.
    #[arg(long, value_parser = clap::value_parser!(u32).range(1..=12))]
    pub(super) month: Option<u32>,
    /// Indicated head of the tailwater above the crest, in place of what [tailwater] says.
    #[arg(long, value_name = "HEAD", value_parser = tailwater, allow_hyphen_values = true)]
    pub(super) tailwater: Option<f64>,
    /// Monte Carlo trials: a number, `auto` (as many as two digits need) or 0 (none).
    #[arg(long, default_value = "auto", value_parser = trials, allow_hyphen_values = true)]
    pub(super) trials: Trials,
    /// Seed of the random numbers: the same seed gives the same bits.
    #[arg(long, default_value_t = 1, allow_hyphen_values = true)]
    pub(super) seed: u64,
    /// Coverage probability, such as "95 %".
    #[arg(long, value_name = "PROBABILITY", value_parser = probability)]
    pub(super) coverage: Option<f64>,
    /// Coverage factor, such as 2, in place of a probability.
    #[arg(long, value_name = "K", conflicts_with = "coverage", value_parser = factor)]
    pub(super) coverage_factor: Option<f64>,
    /// Threads; the result does not depend on it.
    #[arg(long, value_parser = clap::value_parser!(u16).range(1..=256))]
    pub(super) threads: Option<u16>,
    #[command(flatten)]
    pub(super) output: OutputArgs,
}

impl BudgetArgs {
    /// The coverage asked for; 95 % if nothing is.
    pub(super) fn coverage(&self) -> Coverage {
        match (self.coverage, self.coverage_factor) {
            (_, Some(factor)) => Coverage::Factor(factor),
            (Some(probability), None) => Coverage::Probability(probability),
            (None, None) => Coverage::Probability(0.95),
        }
    }
}

/// How results are written.
#[derive(Debug, Args)]
pub(super) struct OutputArgs {
    /// Format of the result.
    #[arg(long, value_enum, default_value_t = Format::Table)]
    pub(super) format: Format,
    /// Units of tables; JSON and CSV are in SI units.
    #[arg(long, value_enum, default_value_t = UnitsArg::Si)]
    pub(super) units: UnitsArg,
}

/// Arguments of `check`.
#[derive(Debug, Args)]
pub(super) struct CheckArgs {
    /// The station file.
    pub(super) station: PathBuf,
    /// Units of the page.
    #[arg(long, value_enum, default_value_t = UnitsArg::Si)]
    pub(super) units: UnitsArg,
}

/// Arguments of `structures`.
#[derive(Debug, Args)]
pub(super) struct StructuresArgs {
    /// A kind, such as thin-plate-triangular; without it, the list of all.
    pub(super) kind: Option<String>,
    /// Format of the result.
    #[arg(long, value_enum, default_value_t = Format::Table)]
    pub(super) format: Format,
}

/// Arguments of `new`.
#[derive(Debug, Args)]
pub(super) struct NewArgs {
    /// The kind of structure; `nappe structures` lists them.
    pub(super) kind: String,
    /// Where to write the file; it must not exist. Standard output without it.
    #[arg(short, long, value_name = "FILE")]
    pub(super) output: Option<PathBuf>,
}

/// A number of trials as asked for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Trials(pub(super) Option<Amount>);

/// All values are kept until the intervals are found: 8 bytes each.
const MOST_TRIALS: f64 = 1e8;

fn trials(text: &str) -> Result<Trials, String> {
    if text == "auto" {
        return Ok(Trials(Some(Amount::Adaptive)));
    }
    let number: f64 = text.parse().map_err(|_| "a number, or `auto`, is due".to_owned())?;
    if number == 0.0 {
        return Ok(Trials(None));
    }
    if number.fract() != 0.0 || !(100.0..=MOST_TRIALS).contains(&number) {
        return Err(format!("0, or a whole number from 100 to {MOST_TRIALS:e}, is due"));
    }
    Ok(Trials(Some(Amount::Fixed(number as u64))))
}

fn quantity(text: &str, dimension: Dimension) -> Result<f64, String> {
    use crate::units::QuantityProblem;

    let units = dimension.usual_units();
    let quantity = Quantity::parse(text).map_err(|error| match error.problem {
        QuantityProblem::DecimalComma(mended) => format!("write \"{mended}\" with a point"),
        QuantityProblem::Unit(unit) => format!("{unit}; units that would do: {units}"),
        QuantityProblem::NoNumber | QuantityProblem::OutOfRange => {
            format!("a number with its unit is due; units that would do: {units}")
        }
    })?;
    if quantity.dimension() != dimension {
        return Err(format!("{} is due; units that would do: {units}", dimension.described()));
    }
    Ok(quantity.value)
}

fn length(text: &str) -> Result<f64, String> {
    quantity(text, Dimension::LENGTH)
}

fn tailwater(text: &str) -> Result<f64, String> {
    let level = length(text)?;
    let [low, high] = crate::model::structures::TAILWATER_HEAD.domain;
    if (low..=high).contains(&level) {
        Ok(level)
    } else {
        Err(format!("a level between {low} m and {high} m above the crest is due"))
    }
}

fn discharge(text: &str) -> Result<f64, String> {
    let flow = quantity(text, Dimension::DISCHARGE)?;
    if flow > 0.0 { Ok(flow) } else { Err("a flow above 0 is due".to_owned()) }
}

fn probability(text: &str) -> Result<f64, String> {
    let value = quantity(text, Dimension::NONE)?;
    if (0.5..=0.9999).contains(&value) {
        Ok(value)
    } else {
        Err("a probability from 50 % to 99.99 % is due, such as \"95 %\"".to_owned())
    }
}

fn factor(text: &str) -> Result<f64, String> {
    match text.parse::<f64>() {
        // 3.89 is the factor of 99.99 % of a normal distribution.
        Ok(factor) if (0.5..=3.89).contains(&factor) => Ok(factor),
        _ => Err("a number from 0.5 to 3.89 is due, such as 2".to_owned()),
    }
}
