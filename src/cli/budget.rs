//! `nappe budget`.

use std::io::IsTerminal;

use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};

use super::args::{BudgetArgs, Format};
use super::output::{self, Failure};
use super::station_file;
use crate::propagation::monte_carlo::Amount;
use crate::report;
use crate::study::{At, Question, budget};

pub(super) fn run(arguments: &BudgetArgs) -> Result<(), Failure> {
    let station = station_file::open(&arguments.station)?;
    let at = match (arguments.head, arguments.flow) {
        (Some(head), _) => At::Head(head),
        (None, Some(flow)) => At::Flow(flow),
        (None, None) => At::Middle,
    };
    let question = Question {
        at,
        coverage: arguments.coverage(),
        trials: arguments.trials.0,
        seed: arguments.seed,
        tailwater: arguments.tailwater,
        month: arguments.month,
    };
    let mut pool = rayon::ThreadPoolBuilder::new();
    if let Some(threads) = arguments.threads {
        pool = pool.num_threads(usize::from(threads));
    }
    let pool = pool
        .build()
        .map_err(|error| Failure::BadQuestion(format!("threads cannot be started: {error}")))?;
    let bar = progress_bar(arguments.trials.0);
    let found = pool.install(|| budget(&station, &question, &|trials| bar.inc(trials)));
    bar.finish_and_clear();
    let found = found?;
    let units = arguments.output.units.into();
    output::print(&match arguments.output.format {
        Format::Json => report::budget_json(&found),
        Format::Csv => report::budget_csv(&found),
        Format::Markdown => report::markdown(&report::budget_document(&found, units)),
        Format::Table => report::text(&report::budget_document(&found, units), output::width()),
    })
}

/// Fewer trials are done before a bar could be read.
const WORTH_A_BAR: u64 = 5_000_000;

/// A bar on a terminal for long work, nothing elsewhere.
fn progress_bar(amount: Option<Amount>) -> ProgressBar {
    let length = match amount {
        Some(Amount::Fixed(trials)) if trials >= WORTH_A_BAR => Some(trials),
        _ => None,
    };
    let Some(length) = length.filter(|_| std::io::stderr().is_terminal()) else {
        return ProgressBar::hidden();
    };
    let style = ProgressStyle::with_template("{bar:40} {percent} % of {len} trials, {eta} left");
    ProgressBar::with_draw_target(Some(length), ProgressDrawTarget::stderr())
        .with_style(style.unwrap_or_else(|_| ProgressStyle::default_bar()))
}
