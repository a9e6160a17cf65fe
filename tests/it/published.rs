//! Published values of the structures: every row of `tests/data/structures/published.csv`.
//!
//! A row is held to the larger of its printed digits and its own known difference, rounded up to one
//! digit; the cause of that difference stands in the row's note.

use std::collections::BTreeMap;

use nappe::model::Model;
use nappe::model::structures::{Structure, find};

struct Row {
    structure: String,
    inputs: BTreeMap<String, f64>,
    quantity: String,
    value: String,
    source: String,
    known_difference: f64,
}

/// Splits a line of CSV with quoted cells.
fn cells(line: &str) -> Vec<String> {
    let mut cells = vec![String::new()];
    let mut quoted = false;
    for letter in line.chars() {
        match letter {
            '"' => quoted = !quoted,
            ',' if !quoted => cells.push(String::new()),
            _ => cells.last_mut().expect("there is always a cell").push(letter),
        }
    }
    cells
}

fn rows() -> Vec<Row> {
    let text = std::fs::read_to_string("tests/data/structures/published.csv").unwrap();
    text.lines()
        .skip(1)
        .map(|line| {
            let cells = cells(line);
            let inputs = cells[1]
                .split(';')
                .filter_map(|pair| {
                    let (name, value) = pair.split_once('=')?;
                    let value = value.split_whitespace().next()?.parse().ok()?;
                    Some((name.to_owned(), value))
                })
                .collect();
            Row {
                structure: cells[0].clone(),
                inputs,
                quantity: cells[2].clone(),
                value: cells[3].clone(),
                source: cells[5].clone(),
                known_difference: cells[8].parse::<f64>().unwrap().abs(),
            }
        })
        .collect()
}

/// Half a unit of the last printed digit, relative.
fn printed_digits(value: &str) -> f64 {
    let decimals = value.split_once('.').map_or(0, |(_, fraction)| fraction.len());
    0.5 / 10_f64.powf(decimals as f64) / value.parse::<f64>().unwrap().abs()
}

/// The next larger number of one digit: 0.00157 gives 0.002.
fn rounded_up(difference: f64) -> f64 {
    if difference == 0.0 {
        return 0.0;
    }
    let unit = 10_f64.powf(difference.log10().floor());
    (difference / unit).ceil() * unit
}

/// Evaluates an expression of a structure; inputs that are not given have their defaults, or 1.
fn evaluate(
    structure: &'static Structure,
    regime: usize,
    text: &str,
    given: &[(&str, f64)],
) -> f64 {
    let mut model = Model::build(&structure.blueprint(regime)).unwrap();
    let inputs: Vec<f64> = structure
        .all_inputs()
        .iter()
        .map(|spec| {
            let stated = given.iter().find(|(key, _)| *key == spec.key).map(|(_, value)| *value);
            stated.or(spec.default.filter(|value| value.is_finite())).unwrap_or(1.0)
        })
        .collect();
    let (id, _) = model.expression(text).unwrap();
    model.evaluate(&[id], &inputs).0[0]
}

fn ours(row: &Row) -> f64 {
    let at = |name: &str| row.inputs[name];
    let gravity = ("gravity", row.inputs.get("g").copied().unwrap_or(9.80665));
    let rectangular = find("thin-plate-rectangular").unwrap();
    let triangular = find("thin-plate-triangular").unwrap();
    let flume = find("rectangular-throated-flume").unwrap();
    let profile = find("triangular-profile").unwrap();
    match (row.structure.as_str(), row.quantity.as_str()) {
        (name, quantity) if name.starts_with("1 ") && quantity.starts_with("Ce") => {
            let ratio = at("b/B");
            let given = [("head", at("h/p")), ("crest_width", ratio)];
            // At full width there is one pair of walls, a form of its own.
            evaluate(rectangular, usize::from(ratio == 1.0), "C_e", &given)
        }
        (name, "Q") if name.starts_with("1 ") => {
            let given = [
                ("head", at("h")),
                ("crest_height", at("p")),
                ("crest_width", at("b")),
                ("width_adjustment", at("kb") + 0.0009),
                gravity,
            ];
            evaluate(rectangular, 1, "Q", &given)
        }
        (name, "Ce") if name.starts_with("3 ") => {
            let given = [("head", at("h/p")), ("approach_width", 1.0 / at("p/B"))];
            evaluate(triangular, 1, "C_e", &given)
        }
        (name, quantity) if name.starts_with("3 ") && quantity.starts_with('Q') => {
            let given = [("head", at("h")), ("notch_angle", at("alpha").to_radians()), gravity];
            evaluate(triangular, 0, "Q", &given)
        }
        (name, "Cd*(2/3)^1.5") if name.starts_with("7 ") => {
            evaluate(profile, 0, "C_D*(2/3)^1.5", &[("head", at("h"))])
        }
        (name, "Q regression value") if name.starts_with("7 ") => {
            let given = [
                ("head", at("h")),
                ("crest_height", at("p")),
                ("crest_width", at("b")),
                ("approach_width", at("B")),
                gravity,
            ];
            evaluate(profile, 0, "Q", &given)
        }
        (name, "Cv from closed form") if name.starts_with("10 ") => {
            // Half the approach width, level, and a throat without length: C_D is 1.
            let given = [
                ("head", 0.3),
                ("throat_width", 0.5),
                ("throat_length", 0.0),
                ("throat_invert_height", 0.0),
            ];
            evaluate(flume, 0, "C_V", &given)
        }
        (name, "Q by total-head iteration = Q by Cv") if name.starts_with("10 ") => {
            let given = [
                ("head", at("h")),
                ("throat_width", at("b")),
                ("approach_width", at("B")),
                ("throat_invert_height", at("p")),
                ("throat_length", at("L")),
                gravity,
            ];
            evaluate(flume, 0, "Q", &given)
        }
        // The drowned factor is no part of the modular form.
        (name, "f branch 2 against branch 1") if name.starts_with("7 ") => f64::NAN,
        (name, quantity) => panic!("no way to compute {quantity} of {name}"),
    }
}

#[test]
fn published_values_are_reached() {
    let rows = rows();
    let mut compared = 0;
    for row in &rows {
        let ours = ours(row);
        if ours.is_nan() {
            continue;
        }
        let published: f64 = row.value.parse().unwrap();
        let tolerance = printed_digits(&row.value).max(rounded_up(row.known_difference));
        let difference = (ours / published - 1.0).abs();
        assert!(
            difference <= tolerance,
            "{} {:?} {}: {ours} against {published} ({}), off by {difference:.2e}, allowed {tolerance:.0e}",
            row.structure,
            row.inputs,
            row.quantity,
            row.source
        );
        compared += 1;
    }
    assert_eq!(compared, rows.len() - 1, "all rows but that of drowned flow are compared");
}

/// The total head against the velocity-of-approach coefficient: two published routes to one discharge
/// (ISO 4359; the closed form is quoted in Novak and others, example 8.3).
#[test]
fn total_head_and_velocity_of_approach_coefficient_give_one_discharge() {
    let profile = find("triangular-profile").unwrap();
    for head in [0.05_f64, 0.2, 0.45, 0.8] {
        let given =
            [("head", head), ("crest_height", 0.4), ("crest_width", 1.7), ("approach_width", 2.0)];
        let by_total_head = evaluate(profile, 0, "Q", &given);
        let coefficient = evaluate(profile, 0, "C_D", &given);
        // (4/27) x^2 Cv^2 - Cv^(2/3) + 1 = 0, by fixed-point iteration from 1.
        let x = coefficient * 1.7 * head / (2.0 * (head + 0.4));
        let mut cv = 1.0_f64;
        for _ in 0..500 {
            cv = (1.0 + 4.0 / 27.0 * x * x * cv * cv).powf(1.5);
        }
        let by_coefficient = (2.0_f64 / 3.0).powf(1.5)
            * 9.80665_f64.sqrt()
            * coefficient
            * cv
            * 1.7
            * head.powf(1.5);
        assert!((by_total_head / by_coefficient - 1.0).abs() < 1e-12);
    }
}
