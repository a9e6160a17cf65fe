//! Each equation a second way: limits in which one structure becomes another, closed forms, strips, printed
//! shape tables (methods, critical flow in a throat of any shape).

use nappe::model::Model;
use nappe::model::structures::{CATALOGUE, Installation, Section, Values, find};

use crate::case::{Case, STILL};

const GRAVITY: f64 = 9.80665;
/// Rounding of the two ways.
const SAME: f64 = 1e-12;

fn assert_same(a: f64, b: f64, tolerance: f64, what: &str) {
    assert!((a / b - 1.0).abs() <= tolerance, "{what}: {a} against {b}, {:.1e}", a / b - 1.0);
}

/// Ideal critical flow of a rectangle, (2/3)^1.5 sqrt(g) b H^1.5.
fn rectangle(width: f64, head: f64) -> f64 {
    (2.0_f64 / 3.0).powf(1.5) * GRAVITY.sqrt() * width * head.powf(1.5)
}

fn trapezoid(head: f64, bottom: f64, slope: f64) -> Case {
    Case::of(
        "trapezoidal-throated-flume",
        &[
            ("head", head),
            ("throat_bottom_width", bottom),
            ("side_slope", slope),
            ("throat_length", 0.0),
            ("throat_invert_height", STILL),
            ("approach_bottom_width", STILL),
            ("approach_side_slope", 0.0),
        ],
    )
}

fn u_throat(head: f64, diameter: f64) -> Case {
    Case::of(
        "u-throated-flume",
        &[
            ("head", head),
            ("throat_diameter", diameter),
            ("throat_length", 0.0),
            ("throat_invert_height", STILL),
            ("approach_width", STILL),
        ],
    )
}

#[test]
fn a_trapezoid_without_side_slope_is_the_rectangular_flume() {
    for head in [0.08, 0.3, 0.55] {
        let shared = [("head", head), ("throat_length", 0.9), ("throat_invert_height", 0.15)];
        let own = [("throat_width", 0.4), ("approach_width", 0.9)];
        let rectangular = Case::of("rectangular-throated-flume", &[&shared[..], &own].concat());
        let own = [
            ("throat_bottom_width", 0.4),
            ("side_slope", 0.0),
            ("approach_bottom_width", 0.9),
            ("approach_side_slope", 0.0),
        ];
        let trapezoidal = Case::of("trapezoidal-throated-flume", &[&shared[..], &own].concat());
        assert_same(trapezoidal.value("Q"), rectangular.value("Q"), SAME, "discharge");
        assert_same(trapezoidal.value("C_V"), rectangular.value("C_V"), SAME, "C_V");
    }
}

#[test]
fn a_trapezoid_without_bottom_is_a_triangle() {
    for (head, slope) in [(0.2_f64, 1.0_f64), (0.5, 0.5), (0.9, 3.0)] {
        let triangle = 0.8_f64.powf(2.5) * (GRAVITY / 2.0).sqrt() * slope * head.powf(2.5);
        // A bottom of b adds about b/(2 m H) to the flow.
        let bottom = 1e-9;
        assert_same(trapezoid(head, bottom, slope).value("Q"), triangle, 1e-6, "discharge");
    }
}

/// Table of shape coefficients of trapezoids against mH/b (methods, derived there).
#[test]
fn shape_coefficients_of_trapezoids_are_those_printed() {
    for (ratio, shape, depth) in [
        (0.01, 1.0067, 0.6681),
        (0.1, 1.0674, 0.6802),
        (0.5, 1.3462, 0.7165),
        (1.0, 1.7058, 0.7403),
        (2.0, 2.4377, 0.7623),
        (5.0, 4.6577, 0.7823),
        (10.0, 8.3710, 0.7906),
    ] {
        let case = trapezoid(0.5, 0.5, ratio);
        let printed = 0.5e-4;
        assert!((case.value("Q") / rectangle(0.5, 0.5) - shape).abs() <= printed, "{ratio}");
        assert!((case.value("y_c/H") - depth).abs() <= printed, "{ratio}");
    }
}

/// Table of shape coefficients of U throats against H/D (methods, derived there).
#[test]
fn shape_coefficients_of_u_throats_are_those_printed() {
    for (ratio, shape, depth) in [
        (0.1, 0.3477, 0.7470),
        (0.3, 0.5731, 0.7398),
        (0.5, 0.7003, 0.7304),
        (0.6, 0.7445, 0.7246),
        (0.7, 0.7791, 0.7178),
        (1.0, 0.8434, 0.7024),
        (2.0, 0.9206, 0.6846),
        (3.0, 0.9468, 0.6786),
    ] {
        let case = u_throat(0.4 * ratio, 0.4);
        let printed = 0.5e-4;
        assert!(
            (case.value("Q") / rectangle(0.4, 0.4 * ratio) - shape).abs() <= printed,
            "{ratio}"
        );
        assert!((case.value("y_c/H") - depth).abs() <= printed, "{ratio}");
    }
}

#[test]
fn a_u_throat_above_its_springing_has_a_closed_form() {
    let pi = std::f64::consts::PI;
    for (head, diameter) in [(0.30_f64, 0.4_f64), (0.5, 0.3), (1.2, 0.5)] {
        assert!(head > 0.69635 * diameter);
        let depth = 2.0 / 3.0 * (head + diameter * (0.25 - pi / 16.0));
        let area = pi * diameter.powi(2) / 8.0 + diameter * (depth - diameter / 2.0);
        let closed = (GRAVITY * area.powi(3) / diameter).sqrt();
        assert_same(u_throat(head, diameter).value("Q"), closed, SAME, "discharge");
    }
}

#[test]
fn the_two_branches_of_a_u_throat_and_of_a_v_meet_in_value_and_slope() {
    let gradient = |kind: &str, inputs: &[(&str, f64)]| {
        let installed = Installation::plain(find(kind).unwrap());
        let given = |key: &str| inputs.iter().find(|(k, _)| *k == key).map(|(_, value)| *value);
        let specs = installed.inputs();
        let values: Vec<f64> = specs
            .iter()
            .map(|input| given(&input.key).or(input.spec.default_value()).unwrap())
            .collect();
        let mut model = Model::build(&installed.forms()[0].blueprint).unwrap();
        let slope = model.derivative(model.result(), model.input("head").unwrap());
        let found = model.evaluate(&[model.result(), slope], &values).0;
        [found[0], found[1]]
    };
    let near = 1e-9;
    let u = |head: f64| {
        gradient(
            "u-throated-flume",
            &[
                ("head", head),
                ("throat_diameter", 0.4),
                ("throat_length", 0.6),
                ("throat_invert_height", STILL),
                ("approach_width", STILL),
            ],
        )
    };
    let springing = 0.4 * (0.5 + std::f64::consts::PI / 16.0);
    let v = |head: f64| {
        gradient(
            "broad-crested-v-shaped",
            &[
                ("head", head),
                ("vertex_angle", 2.0),
                ("v_depth", 0.2),
                ("crest_height", STILL),
                ("crest_length_along_flow", 0.8),
                ("approach_width", STILL),
            ],
        )
    };
    for [below, above] in
        [[u(springing - near), u(springing + near)], [v(0.25 - near), v(0.25 + near)]]
    {
        assert_same(below[0], above[0], 1e-7, "value");
        assert_same(below[1], above[1], 1e-6, "slope");
    }
}

/// The flat V as strips of triangular profile, each at the head above its own piece of the crest.
#[test]
fn a_flat_v_is_strips_of_triangular_profile() {
    let (slope, width) = (20.0, 4.0);
    let depth = width / (2.0 * slope);
    for head in [0.06_f64, 0.099, 0.15, 0.6] {
        let case = Case::of(
            "flat-v",
            &[
                ("head", head),
                ("crest_width", width),
                ("cross_slope", slope),
                ("crest_height", STILL),
                ("approach_width", STILL),
            ],
        );
        // The sum over strips of H^1.5 of each, by the midpoint rule over a transformed height, which
        // takes out the root at the water's edge.
        let effective = case.value("h_e");
        let wetted = effective.min(depth);
        let lowest = (effective - wetted).sqrt();
        let highest = effective.sqrt();
        let strips = 20_000;
        let step = (highest - lowest) / f64::from(strips);
        let sum: f64 = (0..strips)
            .map(|strip| {
                let root = lowest + step * (f64::from(strip) + 0.5);
                // Head of a strip root^2, its height effective - root^2, d(height) = 2 root d(root).
                root.powi(3) * 2.0 * root * step
            })
            .sum();
        let by_strips = 2.0 * slope * sum;
        let closed = case.value("4/5*n*Z*h_e^2.5");
        assert_same(closed, by_strips, 1e-8, "sum over the strips");
    }
}

#[test]
fn without_a_boundary_layer_the_round_nosed_weir_is_ideal_critical_flow() {
    let shared =
        [("head", 0.35), ("crest_width", 1.6), ("crest_height", 0.5), ("approach_width", 2.0)];
    let round = Case::of(
        "broad-crested-round-nosed",
        &[&shared[..], &[("displacement_thickness_ratio", 0.0), ("crest_length_along_flow", 0.9)]]
            .concat(),
    );
    let streamlined = Case::of(
        "streamlined-triangular-profile",
        &[&shared[..], &[("discharge_coefficient", 1.0)]].concat(),
    );
    assert_same(round.value("Q"), streamlined.value("Q"), SAME, "discharge");
    assert_same(
        round.value("Q"),
        rectangle(1.6, round.value("H")),
        SAME,
        "discharge by total head",
    );
}

/// Velocity-of-approach coefficient against x = b h/(B (h + p)), and the Froude number on a level bed
/// (methods; the closed form is quoted in Novak and others).
#[test]
fn the_velocity_of_approach_coefficient_is_that_printed() {
    for (x, coefficient, froude) in [
        (0.1, 1.0022, 0.055),
        (0.3, 1.0209, 0.167),
        (0.5, 1.0635, 0.289),
        (0.7, 1.1465, 0.437),
        (0.8, 1.2184, 0.531),
        (0.9, 1.3401, 0.657),
    ] {
        let case = Case::of(
            "rectangular-throated-flume",
            &[
                ("head", 0.4),
                ("throat_width", x),
                ("approach_width", 1.0),
                ("throat_length", 0.0),
                ("throat_invert_height", 0.0),
            ],
        );
        assert!((case.value("C_V") - coefficient).abs() <= 0.5e-4, "{x}");
        assert!((case.value("Fr") - froude).abs() <= 0.5e-3, "{x}");
    }
}

/// A compound of sections, each with the inputs given.
fn compound(head: f64, sections: &[(&str, &[(&str, f64)])]) -> f64 {
    let mut installed = Installation::plain(find("compound").unwrap());
    installed.sections = sections
        .iter()
        .map(|(kind, inputs)| Section {
            installation: Installation::plain(find(kind).unwrap()),
            given: inputs.iter().map(|(key, _)| (*key).to_owned()).collect(),
        })
        .collect();
    let mut given = vec![("head".to_owned(), head), ("approach_width".to_owned(), 3.0)];
    given.push(("crest_height".to_owned(), 0.4));
    for (index, (_, inputs)) in sections.iter().enumerate() {
        let named = |(key, value): &(&str, f64)| (format!("section {} {key}", index + 1), *value);
        given.extend(inputs.iter().map(named));
    }
    let specs = installed.inputs();
    let value = |key: &str| given.iter().find(|(k, _)| k == key).map(|(_, value)| *value);
    let values: Vec<Option<f64>> =
        specs.iter().map(|input| value(&input.key).or(input.spec.default_value())).collect();
    let keys = specs.iter().map(|input| input.key.clone());
    let form = installed.form(&Values::new(keys.zip(values.iter().copied())));
    let mut model = Model::build(&form.blueprint).unwrap();
    let inputs: Vec<f64> = values.into_iter().map(Option::unwrap).collect();
    model.evaluate(&[model.result()], &inputs).0[0]
}

#[test]
fn a_compound_of_equal_crests_is_one_weir() {
    for head in [0.1, 0.4, 0.8] {
        let whole = Case::of(
            "triangular-profile",
            &[("head", head), ("crest_width", 2.5), ("crest_height", 0.4), ("approach_width", 3.0)],
        );
        let of = |width: f64| [("crest_level", 0.0), ("crest_width", width)];
        let parts =
            compound(head, &[("triangular-profile", &of(1.0)), ("triangular-profile", &of(1.5))]);
        assert_same(parts, whole.value("Q"), SAME, "discharge");
    }
}

#[test]
fn a_dry_section_passes_nothing_and_joins_in_without_a_jump() {
    let low: &[(&str, f64)] = &[("crest_level", 0.0), ("crest_width", 1.0)];
    let high: &[(&str, f64)] = &[("crest_level", 0.3), ("crest_width", 2.0)];
    let alone = Case::of(
        "triangular-profile",
        &[("head", 0.25), ("crest_width", 1.0), ("crest_height", 0.4), ("approach_width", 3.0)],
    );
    let both = compound(0.25, &[("triangular-profile", low), ("triangular-profile", high)]);
    assert_same(both, alone.value("Q"), SAME, "discharge");
    // Its head adjustment is 0.3 mm: there its flow begins, but for that of the total head, which is a few
    // millimetres ahead of the gauged one.
    let sections = [("triangular-profile", low), ("triangular-profile", high)];
    let [before, after] = [0.3002, 0.3004].map(|head| compound(head, &sections));
    assert!(after > before && after / before < 1.002, "{before} {after}");
}

/// With the tailwater as high as the water upstream, the undisturbed flow has just the energy that ideal
/// critical flow takes: the sill that it needs is the one that is there, and so is the width.
#[test]
fn the_sill_and_width_that_critical_flow_needs_are_those_of_an_ideal_structure() {
    for head in [0.1, 0.3, 0.7] {
        let case = Case::of(
            "streamlined-triangular-profile",
            &[
                ("head", head),
                ("tailwater_head", head),
                ("crest_width", 1.5),
                ("crest_height", 0.5),
                ("approach_width", 2.0),
                ("discharge_coefficient", 1.0),
            ],
        )
        .tailwater();
        assert_same(case.critical_bound("p"), 0.5, 1e-9, "sill");
        assert_same(case.critical_bound("b"), 1.5, 1e-9, "width");
    }
}

/// Where each published drowned-flow factor takes over: how far from 1 it begins. A jump is the
/// publication's own; the documents report it.
#[test]
fn drowned_factors_begin_at_1_or_their_jump_is_known() {
    let still = |kind, drowned, head: f64, ratio: f64| {
        let mut inputs = vec![("head", head), ("tailwater_head", head * ratio)];
        if kind == "triangular-profile" || kind == "flat-v" {
            inputs.extend([("crest_height", STILL), ("approach_width", STILL)]);
        }
        if kind == "flat-v" {
            inputs.extend([("crest_width", 8.0), ("cross_slope", 20.0)]);
        }
        Case::of(kind, &inputs).drowned(drowned)
    };
    // Kind, equation, the ratio of heads at which it begins, the largest jump there.
    // The ratios are those at which the published formula is 1, solved for it.
    let of_power = |c: f64, a: f64, k: f64, e: f64| (a - c.powf(-1.0 / e)).powf(1.0 / k);
    for (kind, drowned, begins, jump) in [
        ("thin-plate-full-width", "ISO 1438", of_power(1.007, 0.975, 1.45, 0.265), 1e-4),
        ("thin-plate-full-width", "Villemonte", 0.0, 1e-4),
        ("triangular-profile", "tailwater", of_power(1.035, 0.817, 4.0, 0.0647), 1e-4),
        ("triangular-profile", "crest tapping", of_power(1.04, 0.945, 1.5, 0.256), 1e-4),
    ] {
        let before = still(kind, drowned, 0.3, begins - 0.001).value("f");
        assert_eq!(before, 1.0, "{kind}, {drowned}");
        let after = still(kind, drowned, 0.3, begins + 1e-4).value("f");
        assert!((1.0 - after).abs() <= jump && after <= 1.0, "{kind}, {drowned}: {after}");
    }
    let flat_v = still("flat-v", "crest tapping", 0.2, 0.392);
    assert_eq!(flat_v.value("f"), 1.0);
    let flat_v = still("flat-v", "crest tapping", 0.2, 0.396);
    assert!((1.0 - flat_v.value("f")).abs() < 2e-3);
    // Skogerboe: continuity within the two digits of the ratio at which it begins.
    for size in ["1 in", "2 in", "3 in", "6 in", "9 in", "1 ft", "2 ft"] {
        let case = still("parshall-flume", "Skogerboe 1967", 0.2, 0.5).size(size);
        let begins = case.value("S_t");
        let just = still("parshall-flume", "Skogerboe 1967", 0.2, begins + 1e-6).size(size);
        assert!((just.value("f") - 1.0).abs() < 0.012, "{size}: {}", just.value("f"));
    }
    // Parshall 1936: a constant part does not vanish with the head, so the jump is large at low heads.
    let jump = |head: f64| {
        1.0 - still("parshall-flume", "Parshall 1936", head, 0.7001).size("1 ft").value("f")
    };
    assert!((0.01..=0.06).contains(&jump(0.5)), "{}", jump(0.5));
    assert!((0.4..0.6).contains(&jump(0.03)), "{}", jump(0.03));
}

#[test]
fn the_two_factors_of_the_full_width_plate_differ_as_published() {
    for (ratio, difference, printed) in [(0.5, 0.044, 0.0005), (0.8, 0.13, 0.005)] {
        let inputs = [("head", 0.3), ("tailwater_head", 0.3 * ratio)];
        let case = Case::of("thin-plate-full-width", &inputs).drowned("ISO 1438");
        let ours = (case.value("f_ISO/f_Villemonte") - 1.0).abs();
        assert!((ours - difference).abs() <= printed, "{ratio}: {ours}");
    }
}

#[test]
fn every_structure_passes_more_at_a_higher_head() {
    for structure in CATALOGUE.iter().filter(|structure| structure.kind != "compound") {
        let mut last = 0.0;
        for step in 1..=12 {
            let head = 0.03 * f64::from(step);
            let mut inputs: Vec<(&'static str, f64)> = vec![("head", head)];
            for spec in structure.inputs.iter().filter(|spec| spec.default.is_none()) {
                let example = nappe::units::Quantity::parse(spec.example).unwrap();
                inputs.push((spec.key, example.value));
            }
            let flow = Case::of(structure.kind, &inputs).value("Q");
            assert!(flow > last, "{} at {head}: {flow} after {last}", structure.kind);
            last = flow;
        }
    }
}
