//! Same seed, same bits: for any number of threads, for the rest of the file, from release to release.
//!
//! A number that changes here changes users' results: it needs a line in CHANGELOG, "Results".

use nappe::propagation::Coverage;
use nappe::propagation::monte_carlo::Amount;
use nappe::report::budget_json;
use nappe::station::read;
use nappe::study::{At, Question, budget};

fn json(file: &str, trials: Amount, threads: usize) -> String {
    let (station, _) = read(&std::fs::read(file).unwrap());
    let question = Question {
        at: At::Middle,
        coverage: Coverage::Probability(0.95),
        trials: Some(trials),
        seed: 11,
        tailwater: None,
        month: None,
    };
    let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
    pool.install(|| budget_json(&budget(&station.unwrap(), &question, &|_| {}).unwrap()))
}

#[test]
fn any_number_of_threads_gives_the_same_bytes() {
    for file in ["tests/data/budgets/notch.toml", "tests/data/budgets/flume.toml"] {
        for trials in [Amount::Fixed(100_001), Amount::Adaptive] {
            let one = json(file, trials, 1);
            for threads in [2, 3, 16] {
                assert_eq!(one, json(file, trials, threads), "{file}, {threads} threads");
            }
        }
    }
}

/// The mean and the interval of the notch with seed 11, as this version gives them.
#[test]
fn results_are_stable_from_release_to_release() {
    let text = json("tests/data/budgets/notch.toml", Amount::Fixed(20_000), 2);
    let value: serde_json::Value = serde_json::from_str(&text).unwrap();
    let part = &value["monte_carlo"];
    let stable = include_str!("../data/stability/notch.json");
    let stable: serde_json::Value = serde_json::from_str(stable).unwrap();
    for key in ["mean", "standard_uncertainty", "interval_symmetric", "interval_shortest"] {
        assert_eq!(part[key], stable[key], "{key}");
    }
}

#[test]
fn the_same_question_has_the_same_bits_and_another_number_of_trials_others() {
    let of = |count| -> f64 {
        let text = json("tests/data/budgets/notch.toml", Amount::Fixed(count), 1);
        let value: serde_json::Value = serde_json::from_str(&text).unwrap();
        value["monte_carlo"]["mean"].as_f64().unwrap()
    };
    assert_eq!(of(4096).to_bits(), of(4096).to_bits());
    assert_ne!(of(4096).to_bits(), of(8192).to_bits());
}
