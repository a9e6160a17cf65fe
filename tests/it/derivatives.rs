//! Derivatives of every equation of the catalogue against mpmath: `tests/data/derivatives`.

use nappe::model::expression::Table;
use nappe::model::structures::{
    CATALOGUE, Installation, SecondHead, Section, TailwaterCurve, Values, find,
};
use nappe::model::{Model, Outcome};
use serde_json::Value;

/// Relative to the derivative; where that is 0, to the discharge over the input.
const RELATIVE: f64 = 1e-10;

fn data(name: &str) -> Value {
    let text = std::fs::read_to_string(format!("tests/data/derivatives/{name}.json")).unwrap();
    serde_json::from_str(&text).unwrap()
}

fn points() -> Vec<Value> {
    let list = |name| data(name)["points"].as_array().unwrap().clone();
    list("derivatives").into_iter().chain(list("catalogue")).collect()
}

/// The installation that a point is about: its size, its drowned flow, its sections.
fn installation(point: &Value) -> Installation {
    let mut installed = Installation::plain(find(point["kind"].as_str().unwrap()).unwrap());
    if let Some(word) = point["choice"].as_str() {
        installed.set = installed.structure.choice.unwrap().find(word).unwrap();
    }
    if let Some(sections) = point["sections"].as_array() {
        installed.sections = sections
            .iter()
            .enumerate()
            .map(|(index, section)| {
                let prefix = format!("section {} ", index + 1);
                let keys = point["inputs"].as_object().unwrap().keys();
                let given = keys.filter_map(|key| Some(key.strip_prefix(&prefix)?.to_owned()));
                let structure = find(section["kind"].as_str().unwrap()).unwrap();
                Section { installation: Installation::plain(structure), given: given.collect() }
            })
            .collect();
    }
    if let Some(name) = point["drowned"].as_str() {
        let drowned = installed.structure.drowned.iter().position(|each| each.name == name);
        assert!(installed.drowned().contains(&drowned.unwrap()), "{point}");
        let curve = point["tailwater_table"].as_object().map(|table| {
            let column = |key: &str| -> Vec<f64> {
                table[key].as_array().unwrap().iter().map(|x| x.as_f64().unwrap()).collect()
            };
            let table = Table::line("tailwater_curve", &column("discharge"), &column("level"));
            let level = point["inputs"]["tailwater_head"].as_f64().unwrap();
            TailwaterCurve { table: table.unwrap(), level }
        });
        installed.second_head = Some(SecondHead { drowned, modular_limit: None, curve });
    }
    installed
}

/// A model of a point, the keys of its inputs, and their values.
fn model(point: &Value) -> (Model, Vec<String>, Vec<f64>) {
    let installed = installation(point);
    let inputs = installed.inputs();
    let stated = |key: &str| point["inputs"][key].as_f64();
    let keys: Vec<String> = inputs.iter().map(|input| input.key.clone()).collect();
    for key in point["inputs"].as_object().unwrap().keys() {
        assert!(keys.contains(key), "{} has no input {key}", point["kind"]);
    }
    let given = Values::new(
        inputs
            .iter()
            .map(|input| (input.key.clone(), stated(&input.key).or(input.spec.default_value()))),
    );
    let form = installed.form(&given);
    if let Some(regime) = point["regime"].as_str() {
        assert_eq!(form.regime, regime);
    }
    let model = Model::build(&form.blueprint).unwrap();
    // An input that does not enter this form has no value in the data.
    let values = keys.iter().map(|key| given.given(key).unwrap_or(0.0)).collect();
    (model, keys, values)
}

/// The discharge and its derivatives by all inputs.
fn gradient(model: &mut Model, values: &[f64]) -> (f64, Vec<f64>) {
    let result = model.result();
    let mut wanted = vec![result];
    for input in 0..values.len() {
        wanted.push(model.derivative(result, input));
    }
    let (found, outcome) = model.evaluate(&wanted, values);
    assert_ne!(outcome, Outcome::Undefined);
    (found[0], found[1..].to_vec())
}

fn check(point: &Value) {
    let (mut model, keys, values) = model(point);
    let (ours, derivatives) = gradient(&mut model, &values);
    let discharge = point["discharge"].as_f64().unwrap();
    assert!((ours / discharge - 1.0).abs() < RELATIVE, "{ours} for {point}");
    for (index, key) in keys.iter().enumerate() {
        let Some(expected) = point["derivatives"][key].as_f64() else { continue };
        let ours = derivatives[index];
        let scale = match (expected, values[index]) {
            (0.0, 0.0) => discharge,
            (0.0, input) => discharge / input.abs(),
            (expected, _) => expected.abs(),
        };
        assert!(
            (ours - expected).abs() <= RELATIVE * scale,
            "by {key}: {ours} against {expected} in {point}"
        );
    }
}

#[test]
fn derivatives_agree_with_mpmath_through_every_unknown_table_and_branch() {
    let points = points();
    assert!(points.len() >= 600);
    points.iter().for_each(check);
    for structure in CATALOGUE {
        let count = points.iter().filter(|point| point["kind"] == structure.kind).count();
        assert!(count >= 20, "{} has {count} points", structure.kind);
        for drowned in structure.drowned {
            let of_factor = |point: &&Value| {
                point["kind"] == structure.kind && point["drowned"] == drowned.name
            };
            let count = points.iter().filter(of_factor).count();
            assert!(count >= 10, "{}, {}: {count} points", structure.kind, drowned.name);
        }
    }
}

/// Past a node by more than what counts as the node itself (1e-12), by less than the tolerance.
const PAST_THE_NODE: f64 = 5e-12;

#[test]
fn at_a_node_the_slope_is_that_of_the_segment_above_and_just_past_it_that_of_the_other() {
    let nodes = data("catalogue")["nodes"].as_array().unwrap().clone();
    assert!(nodes.len() >= 10);
    for node in &nodes {
        let (mut model, keys, values) = model(node);
        let by = keys.iter().position(|key| node["by"] == key.as_str()).unwrap();
        let slope = |model: &mut Model, shift: f64| {
            let mut values = values.clone();
            values[by] *= 1.0 + shift;
            gradient(model, &values).1[by]
        };
        let expected = |side: &str| node[side].as_f64().unwrap();
        let close = |ours: f64, side: &str| {
            assert!((ours / expected(side) - 1.0).abs() <= RELATIVE, "{ours}, {side} of {node}");
        };
        assert!((expected("below") / expected("above") - 1.0).abs() > 1e-6, "no node: {node}");
        close(slope(&mut model, 0.0), node["segment_above"].as_str().unwrap());
        close(slope(&mut model, -PAST_THE_NODE), "below");
        close(slope(&mut model, PAST_THE_NODE), "above");
    }
}
