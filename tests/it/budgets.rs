//! Budgets computed outside the project: `tests/data/budgets`.

use nappe::propagation::Coverage;
use nappe::propagation::monte_carlo::Amount;
use nappe::station::read;
use nappe::study::{At, Budget, Question, budget};
use serde_json::Value;

/// Exact results, against figures of double precision.
const VALUE: f64 = 1e-9;
const LINEAR: f64 = 1e-7;
/// Monte Carlo with 1e7 trials against 1.6e7 draws: standard uncertainty, and the ends of intervals in
/// units of it. The standard error of an end is about 0.0011 of it, that of the uncertainty 0.0002.
const MONTE_CARLO_UNCERTAINTY: f64 = 0.005;
const MONTE_CARLO_END: f64 = 0.01;

fn reference(name: &str, trials: Option<Amount>) -> (Budget, Value) {
    let text = std::fs::read_to_string("tests/data/budgets/expected.json").unwrap();
    let all: Value = serde_json::from_str(&text).unwrap();
    let expected = all[name].clone();
    let file = std::fs::read(format!("tests/data/budgets/{name}.toml")).unwrap();
    let (station, findings) = read(&file);
    assert!(findings.is_empty(), "{findings:?}");
    let question = Question {
        at: At::Head(expected["head_m"].as_f64().unwrap()),
        coverage: Coverage::Probability(0.95),
        trials,
        seed: 7,
        tailwater: None,
        month: None,
    };
    (budget(&station.unwrap(), &question, &|_| {}).unwrap(), expected)
}

fn close(ours: f64, theirs: &Value, tolerance: f64, what: &str) {
    let theirs = theirs.as_f64().unwrap();
    let difference = (ours - theirs).abs();
    assert!(difference <= tolerance * theirs.abs(), "{what}: {ours} against {theirs}");
}

fn check_linear(name: &str) {
    let (found, expected) = reference(name, None);
    close(found.linear.value, &expected["value"], VALUE, "value");
    close(found.linear.standard_uncertainty, &expected["u_linear"], LINEAR, "u");
    let ranked: Vec<&str> = found.rows.iter().map(|row| row.name.as_str()).collect();
    let theirs: Vec<&str> =
        expected["ranked"].as_array().unwrap().iter().map(|v| v.as_str().unwrap()).collect();
    assert_eq!(ranked, theirs);
    for row in &found.rows {
        let theirs = &expected["sources"][&row.name];
        close(row.standard_uncertainty, &theirs["u"], LINEAR, &row.name);
        close(row.sensitivity, &theirs["sensitivity_to_error"], LINEAR, &row.name);
        close(row.contribution, &theirs["contribution"], LINEAR, &row.name);
        close(row.share_linear, &theirs["share"], LINEAR, &row.name);
    }
}

fn check_monte_carlo(name: &str) {
    let (found, expected) = reference(name, Some(Amount::Fixed(10_000_000)));
    let expected = &expected["mc"];
    let statistics = found.monte_carlo.unwrap().result.outputs[0];
    let u = expected["u"].as_f64().unwrap();
    close(statistics.standard_uncertainty, &expected["u"], MONTE_CARLO_UNCERTAINTY, "u");
    let theirs = |interval: &str, end: usize| expected[interval][end].as_f64().unwrap();
    for end in [0, 1] {
        let difference = statistics.intervals.symmetric[end] - theirs("symmetric", end);
        assert!(difference.abs() <= MONTE_CARLO_END * u, "end {end} off by {}", difference / u);
    }
    let [low, high] = statistics.intervals.shortest;
    let difference = (high - low) - (theirs("shortest", 1) - theirs("shortest", 0));
    assert!(difference.abs() <= MONTE_CARLO_END * u, "length off by {}", difference / u);
}

#[test]
fn the_notch_agrees_by_the_linear_method() {
    check_linear("notch");
}

#[test]
fn the_flume_agrees_by_the_linear_method() {
    check_linear("flume");
}

#[test]
fn the_notch_agrees_by_monte_carlo() {
    check_monte_carlo("notch");
}

#[test]
fn the_flume_agrees_by_monte_carlo() {
    check_monte_carlo("flume");
}
