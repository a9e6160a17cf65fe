//! How long the Monte Carlo method and what surrounds it take.
//!
//! ```text
//! cargo bench --bench weir              # all of them
//! cargo bench --bench weir -- million   # those with that word in their name
//! python benches/compare.py             # whole runs beside the same model in numpy
//! ```
//!
//! | bench | what it measures |
//! | --- | --- |
//! | `million_trials` | `weir.toml`: the file read, the station set at one head, a million trials run, their mean, deviation and intervals found; on one thread and on all |
//! | `million_flume_trials` | the same for `flume.toml`, whose total head is solved in every trial |
//! | `evaluation::weir`, `evaluation::flume` | the compiled equation alone, a million lanes on one thread, its inputs filled once |
//! | `linear_budget::weir`, `linear_budget::flume` | the whole budget without trials: derivatives, contributions, limits of use |
//! | `reading::weir`, `reading::flume` | a station file read and checked |
//!
//! Trials are counted, so that the figures also stand as trials a second.

use std::hint::black_box;

use divan::Bencher;
use divan::counter::{BytesCount, ItemsCount};
use nappe::model::{BLOCK, Outcome, Program};
use nappe::propagation::monte_carlo::{Amount, MonteCarlo, monte_carlo};
use nappe::propagation::{Coverage, Problem};
use nappe::station::{Moment, Station};
use nappe::study::{At, Budget, Question, budget};

const WEIR: &[u8] = include_bytes!("weir.toml");
const WEIR_HEAD: f64 = 0.2;
const FLUME: &[u8] = include_bytes!("flume.toml");
const FLUME_HEAD: f64 = 0.3;

const TRIALS: u64 = 1_000_000;
const SEED: u64 = 1;

/// How many threads share the trials.
#[derive(Clone, Copy, Debug)]
enum Threads {
    One,
    All,
}

const THREADS: [Threads; 2] = [Threads::One, Threads::All];

fn main() {
    divan::main();
}

#[divan::bench(args = THREADS, sample_count = 20)]
fn million_trials(bencher: Bencher<'_, '_>, threads: Threads) {
    in_pool(bencher, threads, || trials(WEIR, WEIR_HEAD));
}

#[divan::bench(args = THREADS, sample_count = 10)]
fn million_flume_trials(bencher: Bencher<'_, '_>, threads: Threads) {
    in_pool(bencher, threads, || trials(FLUME, FLUME_HEAD));
}

#[divan::bench_group(sample_count = 20)]
mod evaluation {
    use super::{Bencher, FLUME, FLUME_HEAD, WEIR, WEIR_HEAD, evaluate};

    #[divan::bench]
    fn weir(bencher: Bencher<'_, '_>) {
        evaluate(bencher, WEIR, WEIR_HEAD);
    }

    #[divan::bench]
    fn flume(bencher: Bencher<'_, '_>) {
        evaluate(bencher, FLUME, FLUME_HEAD);
    }
}

#[divan::bench_group]
mod linear_budget {
    use super::{Bencher, FLUME, FLUME_HEAD, WEIR, WEIR_HEAD, linear, read};

    #[divan::bench]
    fn weir(bencher: Bencher<'_, '_>) {
        let station = read(WEIR);
        bencher.bench(|| linear(&station, WEIR_HEAD));
    }

    #[divan::bench]
    fn flume(bencher: Bencher<'_, '_>) {
        let station = read(FLUME);
        bencher.bench(|| linear(&station, FLUME_HEAD));
    }
}

#[divan::bench_group]
mod reading {
    use super::{Bencher, BytesCount, FLUME, WEIR, black_box, read};

    #[divan::bench]
    fn weir(bencher: Bencher<'_, '_>) {
        bencher.counter(BytesCount::of_slice(WEIR)).bench(|| read(black_box(WEIR)));
    }

    #[divan::bench]
    fn flume(bencher: Bencher<'_, '_>) {
        bencher.counter(BytesCount::of_slice(FLUME)).bench(|| read(black_box(FLUME)));
    }
}

fn read(file: &[u8]) -> Station {
    let (station, findings) = nappe::station::read(file);
    station.unwrap_or_else(|| unreachable!("the file of a bench has faults: {findings:?}"))
}

fn problem(station: &Station, head: f64) -> Problem {
    station
        .at(Moment { head: Some(head), ..Moment::default() })
        .expect("a bench is run at a head that has a flow")
        .problem
}

/// What a user's run comes to, from the bytes of the file to both intervals.
fn trials(file: &[u8], head: f64) -> MonteCarlo {
    let mut problem = problem(&read(black_box(file)), head);
    monte_carlo(&mut problem, Amount::Fixed(TRIALS), SEED, 0.95, &|_| {})
        .expect("nearly all trials have a value")
}

fn in_pool(bencher: Bencher<'_, '_>, threads: Threads, run: impl Fn() -> MonteCarlo + Sync) {
    let count = match threads {
        Threads::One => 1,
        // rayon's word for as many as there are cores.
        Threads::All => 0,
    };
    let pool = rayon::ThreadPoolBuilder::new().num_threads(count).build();
    let pool = pool.expect("threads can be started");
    bencher.counter(ItemsCount::new(TRIALS)).bench(|| pool.install(&run));
}

/// Runs a million lanes of the compiled equation; each lane of a block has inputs of its own.
fn evaluate(bencher: Bencher<'_, '_>, file: &[u8], head: f64) {
    let mut problem = problem(&read(file), head);
    let fixed = problem.fixed();
    let corrected = problem.corrected();
    let program = Program::compile(&mut problem.model, &problem.outputs, &fixed, &corrected);
    let mut workspace = program.workspace();
    for (input, value) in corrected.iter().enumerate() {
        if let Some(lanes) = program.input(&mut workspace, input) {
            for (lane, at) in lanes.iter_mut().enumerate() {
                // Within 1 % of the nominal value, spread as a low-discrepancy sequence.
                let place = (lane as f64 * std::f64::consts::SQRT_2 + input as f64 * 0.3).fract();
                *at = value * (1.0 + 0.02 * (place - 0.5));
            }
        }
    }
    let mut outcomes = [Outcome::Value; BLOCK];
    bencher.counter(ItemsCount::new(TRIALS)).bench_local(|| {
        let mut left = TRIALS as usize;
        while left > 0 {
            let lanes = left.min(BLOCK);
            program.run(&mut workspace, lanes, &mut outcomes);
            black_box(program.output(&workspace, 0));
            left -= lanes;
        }
    });
}

fn linear(station: &Station, head: f64) -> Budget {
    let question = Question {
        at: At::Head(black_box(head)),
        coverage: Coverage::Probability(0.95),
        trials: None,
        seed: SEED,
        tailwater: None,
        month: None,
    };
    budget(station, &question, &|_| {}).expect("a bench is run at a head that has a flow")
}
