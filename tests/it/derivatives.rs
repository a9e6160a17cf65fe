//! Derivatives of every equation of the catalogue against mpmath: `tests/data/derivatives`.

use nappe::model::structures::{Structure, Values, find};
use nappe::model::{Model, Outcome};
use serde_json::Value;

/// Relative to the derivative; where that is 0, to the discharge over the input.
const RELATIVE: f64 = 1e-10;

fn points() -> Vec<Value> {
    let text = std::fs::read_to_string("tests/data/derivatives/derivatives.json").unwrap();
    let all: Value = serde_json::from_str(&text).unwrap();
    all["points"].as_array().unwrap().clone()
}

fn check(structure: &'static Structure, point: &Value) {
    let given = |key: &str| point["inputs"][key].as_f64();
    let specs = structure.all_inputs();
    let stated: Vec<(&'static str, Option<f64>)> =
        specs.iter().map(|spec| (spec.key, given(spec.key))).collect();
    let regime = (structure.regime_for)(&Values(&stated));
    let name = point["regime"].as_str().unwrap();
    assert_eq!(structure.regimes[regime].name, name);
    let mut model = Model::build(&structure.blueprint(regime)).unwrap();
    // An input that does not enter this form has no value in the data.
    let inputs: Vec<f64> = stated.iter().map(|(_, value)| value.unwrap_or(0.0)).collect();
    let result = model.result();
    let mut wanted = vec![result];
    for input in 0..inputs.len() {
        wanted.push(model.derivative(result, input));
    }
    let (values, outcome) = model.evaluate(&wanted, &inputs);
    assert_ne!(outcome, Outcome::Undefined);
    let discharge = point["discharge"].as_f64().unwrap();
    assert!((values[0] / discharge - 1.0).abs() < RELATIVE, "{point}");
    for (index, (key, _)) in stated.iter().enumerate() {
        let Some(expected) = point["derivatives"][*key].as_f64() else { continue };
        let ours = values[index + 1];
        let scale = if expected == 0.0 { discharge / inputs[index].abs() } else { expected.abs() };
        assert!(
            (ours - expected).abs() <= RELATIVE * scale,
            "{} {name}, by {key}: {ours} against {expected}",
            structure.kind
        );
    }
}

#[test]
fn derivatives_agree_with_mpmath_through_every_unknown_and_table() {
    let points = points();
    assert!(points.len() >= 120);
    for point in &points {
        check(find(point["kind"].as_str().unwrap()).unwrap(), point);
    }
    for structure in nappe::model::structures::CATALOGUE {
        let count = points.iter().filter(|point| point["kind"] == structure.kind).count();
        assert!(count >= 20, "{} has {count} points", structure.kind);
    }
}
