//! Modular and critical flow, limits over the range of heads, branches: what a station file says comes out
//! in the budget.

use nappe::propagation::Coverage;
use nappe::propagation::monte_carlo::Amount;
use nappe::station::{Station, read, template};
use nappe::study::{At, Budget, FlowState, Question, budget, check};

fn station(text: &str) -> Station {
    let (station, findings) = read(text.as_bytes());
    assert!(findings.is_empty(), "{findings:#?}");
    station.unwrap()
}

fn ask(station: &Station, head: f64, tailwater: Option<f64>, trials: Option<u64>) -> Budget {
    let question = Question {
        at: At::Head(head),
        coverage: Coverage::Probability(0.95),
        trials: trials.map(Amount::Fixed),
        seed: 1,
        tailwater,
        month: None,
    };
    budget(station, &question, &|_| {}).unwrap()
}

fn codes(budget: &Budget) -> Vec<&'static str> {
    budget.warnings.iter().map(|warning| warning.code.as_str()).collect()
}

const HEAD_ERROR: &str = r#"
[[error_source]]
name = "zero"
acts_on = "head"
standard_uncertainty = "2 mm"
"#;

fn profile(tailwater: &str) -> Station {
    station(&format!(
        r#"
name = "Marren ford"
[structure]
kind = "triangular-profile"
crest_width = "2.00 m"
crest_height = "0.40 m"
approach_width = "2.00 m"
[head]
range = ["0.02 m", "0.90 m"]
{tailwater}
{HEAD_ERROR}
"#
    ))
}

#[test]
fn beyond_the_modular_limit_the_drowned_equation_takes_over_and_the_second_head_joins() {
    let drowned = r#"
[tailwater]
level = "0.25 m"
[[error_source]]
name = "tailwater gauge"
acts_on = "tailwater_head"
standard_uncertainty = "5 mm"
[[error_source]]
name = "drowned-flow equation"
acts_on = "drowned_flow_factor"
expanded_uncertainty = "10 %"
coverage_factor = 2
"#;
    let station = profile(drowned);
    let found = ask(&station, 0.28, None, None);
    let hydraulics = found.hydraulics.as_ref().unwrap();
    assert_eq!(hydraulics.state, FlowState::Drowned);
    assert!(hydraulics.factor.unwrap() < 1.0);
    assert!(codes(&found).contains(&"drowned_flow"));
    let by_tailwater = found.rows.iter().find(|row| row.name == "tailwater gauge").unwrap();
    assert!(by_tailwater.contribution > 0.0);
    // Well above it the same station is modular, and the second head means nothing.
    let free = ask(&station, 0.60, None, None);
    assert_eq!(free.hydraulics.as_ref().unwrap().state, FlowState::Modular);
    assert!(!codes(&free).contains(&"drowned_flow"));
    let by_tailwater = free.rows.iter().find(|row| row.name == "tailwater gauge").unwrap();
    assert_eq!(by_tailwater.contribution, 0.0);
    // And equals the station that says nothing of its tailwater.
    let unknown = ask(&profile(""), 0.60, None, None);
    assert_eq!(unknown.hydraulics.as_ref().unwrap().state, FlowState::NotChecked);
    assert!((free.result.value / unknown.result.value - 1.0).abs() < 1e-14);
    // The level can be asked about in place of the file's.
    let asked = ask(&station, 0.28, Some(-0.1), None);
    assert_eq!(asked.hydraulics.as_ref().unwrap().state, FlowState::Modular);
}

#[test]
fn a_tailwater_that_follows_the_discharge_is_solved_together_with_it() {
    let rated = r#"
[tailwater]
table = [["0 l/s", "-300 mm"], ["200 l/s", "150 mm"], ["2 m3/s", "600 mm"]]
"#;
    let station = profile(rated);
    let found = ask(&station, 0.35, None, None);
    let level = found.hydraulics.as_ref().unwrap().tailwater_head.unwrap();
    let by_hand = 0.150 + (found.result.value - 0.2) / 1.8 * 0.450;
    assert!((level - by_hand).abs() < 1e-12, "{level} against {by_hand}");
    assert_eq!(found.tailwater, Some(level));
    // The same level as a constant gives the same discharge.
    let constant = profile(&format!("[tailwater]\nlevel = \"{level} m\"\n"));
    let same = ask(&constant, 0.35, None, None);
    assert!((same.result.value / found.result.value - 1.0).abs() < 1e-12);
    // But an error of the head now moves the tailwater as well, so it acts less.
    assert!(found.linear.standard_uncertainty < same.linear.standard_uncertainty);
}

#[test]
fn a_structure_without_a_drowned_equation_says_that_its_flow_is_too_high() {
    let text = r#"
name = "Lower sluice"
[structure]
kind = "rectangular-throated-flume"
throat_width = "0.60 m"
throat_length = "1.20 m"
throat_invert_height = "0.10 m"
approach_width = "1.00 m"
[head]
range = ["0.08 m", "0.50 m"]
[tailwater]
level = "0.35 m"
modular_limit = 0.85
"#;
    let station = station(&format!("{text}{HEAD_ERROR}"));
    let found = ask(&station, 0.38, None, None);
    assert_eq!(found.hydraulics.as_ref().unwrap().state, FlowState::NotModular);
    assert!(codes(&found).contains(&"not_modular"));
    let coefficient = found.rows.iter().find(|row| row.name == "published coefficient").unwrap();
    assert!(coefficient.outside_limits);
    // The energy of a tailwater as high as that drowns the control as well.
    let lower = ask(&station, 0.352, None, None);
    assert!(codes(&lower).contains(&"not_critical"), "{:?}", codes(&lower));
    let higher = ask(&station, 0.48, None, None);
    assert_eq!(higher.hydraulics.as_ref().unwrap().state, FlowState::Modular);
}

#[test]
fn each_limit_says_at_which_heads_it_fails() {
    let found = ask(&profile(""), 0.3, None, None);
    let heads = |quantity: &str| {
        let limit = found.limits.iter().find(|state| state.limit.quantity == quantity).unwrap();
        limit.fails_at.clone().unwrap()
    };
    // h >= 0.03 m fails from the foot of the range to 0.03 m; p does not depend on the head.
    let [[from, to]] = heads("h")[..] else { panic!("{:?}", heads("h")) };
    assert!((from - 0.02).abs() < 1e-12 && (to - 0.03).abs() < 1e-6, "{from} {to}");
    assert!(heads("p").is_empty());
    let margin = |quantity: &str| {
        found.limits.iter().find(|state| state.limit.quantity == quantity).unwrap().margin
    };
    assert!((margin("h") - 0.27).abs() < 1e-12);
    // b/h >= 2 fails above 1 m, beyond this range.
    assert!(heads("b/h").is_empty());
}

#[test]
fn the_largest_head_and_the_place_of_the_gauge_are_checked() {
    let text = r#"
name = "Lower sluice"
[structure]
kind = "thin-plate-full-width"
crest_width = "1.00 m"
crest_height = "0.50 m"
[head]
range = ["0.05 m", "0.30 m"]
maximum = "0.35 m"
gauge_distance = "1.0 m"
"#;
    let station = station(&format!("{text}{HEAD_ERROR}"));
    let found = ask(&station, 0.36, None, None);
    assert!(codes(&found).contains(&"above_maximum"));
    // 4 times the largest head is 1.4 m.
    assert!(codes(&found).contains(&"gauge_misplaced"));
    let bounds: Vec<f64> = found
        .limits
        .iter()
        .filter(|state| state.limit.quantity == "gauge_distance")
        .map(|state| state.bound)
        .collect();
    assert!((bounds[0] - 1.4).abs() < 1e-12 && (bounds[1] - 1.75).abs() < 1e-12, "{bounds:?}");
    assert!(!codes(&ask(&station, 0.2, None, None)).contains(&"above_maximum"));
}

#[test]
fn trials_on_another_branch_are_counted_and_a_near_branch_is_warned_of() {
    let text = r#"
name = "Hollow bridge"
[structure]
kind = "flat-v"
crest_width = "4.00 m"
cross_slope = "1:20"
crest_height = "0.40 m"
approach_width = "4.00 m"
"#;
    let station = station(&format!("{text}{HEAD_ERROR}"));
    // The V is 0.1 m deep.
    let near = ask(&station, 0.099, None, Some(20_000));
    assert_eq!(near.regime, "inside the V");
    assert!(codes(&near).contains(&"near_branch"));
    assert!(codes(&near).contains(&"trials_across_branch"));
    let across = near.monte_carlo.unwrap().result.tally.across as f64 / 20_000.0;
    // Half a standard uncertainty from the border: 31 % of a normal distribution lie beyond.
    assert!((across - 0.3085).abs() < 0.01, "{across}");
    let far = ask(&station, 0.06, None, Some(20_000));
    assert_eq!(far.monte_carlo.as_ref().unwrap().result.tally.across, 0);
    assert!(!codes(&far).contains(&"near_branch"));
    assert_eq!(ask(&station, 0.101, None, None).regime, "above the V");
}

#[test]
fn close_to_no_flow_every_structure_stays_finite_and_counts_its_dry_trials() {
    for structure in nappe::model::structures::CATALOGUE {
        let file = template(structure)
            .replace("standard_uncertainty = \"1.5 mm\"", "standard_uncertainty = \"30 mm\"");
        let station = station(&file);
        let found = ask(&station, 0.03, None, Some(10_000));
        let part = found.monte_carlo.expect(structure.kind);
        let statistics = part.result.outputs[0];
        assert!(statistics.mean.is_finite(), "{}", structure.kind);
        assert!(statistics.standard_uncertainty.is_finite(), "{}", structure.kind);
        assert!(part.result.tally.dry > 500, "{}: {:?}", structure.kind, part.result.tally);
        assert_eq!(part.result.tally.undefined, 0, "{}", structure.kind);
    }
}

#[test]
fn leaving_a_published_curve_is_counted() {
    let text = r#"
name = "Stone gully"
[structure]
kind = "broad-crested-v-shaped"
vertex_angle = "120 deg"
v_depth = "0.30 m"
crest_height = "0.30 m"
crest_length_along_flow = "0.80 m"
approach_width = "1.50 m"
"#;
    let station = station(&format!("{text}{HEAD_ERROR}"));
    // The coefficient is published from H/L = 0.1, which is 0.08 m.
    let found = ask(&station, 0.081, None, Some(20_000));
    let tally = found.monte_carlo.as_ref().unwrap().result.tally;
    assert!(tally.outside_table > 1000, "{tally:?}");
    assert!(codes(&found).contains(&"trials_outside_table"));
}

#[test]
fn like_sections_of_a_compound_weir_share_the_error_of_their_coefficient() {
    let text = r#"
name = "Three bays"
[structure]
kind = "compound"
approach_width = "4.00 m"
crest_height = "0.40 m"
[[structure.section]]
kind = "triangular-profile"
crest_level = "0 m"
crest_width = "1.00 m"
[[structure.section]]
kind = "triangular-profile"
crest_level = "0.20 m"
crest_width = "3.00 m"
"#;
    let plain = station(&format!("{text}{HEAD_ERROR}"));
    let found = ask(&plain, 0.5, None, None);
    let of = |name: &str| found.rows.iter().find(|row| row.name == name).unwrap().contribution;
    let (first, second) =
        (of("published coefficient, section 1"), of("published coefficient, section 2"));
    let head = of("zero");
    let together = (first + second).hypot(head);
    assert!((found.linear.standard_uncertainty / together - 1.0).abs() < 1e-12);
    // What the file says of them stands.
    let apart = station(&format!(
        "{text}{HEAD_ERROR}[[correlation]]\nsources = [\"published coefficient, section 1\", \
         \"published coefficient, section 2\"]\ncoefficient = 0\n"
    ));
    let apart = ask(&apart, 0.5, None, None);
    let expected = (first * first + second * second + head * head).sqrt();
    assert!((apart.linear.standard_uncertainty / expected - 1.0).abs() < 1e-12);
}

#[test]
fn a_coefficient_without_a_published_uncertainty_is_asked_for() {
    let text = r#"
name = "Dyke overflow"
[structure]
kind = "trapezoidal-profile"
crest_width = "3.00 m"
crest_height = "0.50 m"
crest_length_along_flow = "0.40 m"
approach_width = "3.00 m"
"#;
    let silent = ask(&station(&format!("{text}{HEAD_ERROR}")), 0.3, None, None);
    assert!(codes(&silent).contains(&"no_coefficient_source"));
    let stated = "[[error_source]]\nname = \"coefficient\"\nacts_on = \"coefficient_factor\"\n\
                  expanded_uncertainty = \"4 %\"\ncoverage_factor = 2\n";
    let stated = ask(&station(&format!("{text}{HEAD_ERROR}{stated}")), 0.3, None, None);
    assert!(!codes(&stated).contains(&"no_coefficient_source"));
}

fn refusal(station: &Station, at: At, tailwater: Option<f64>) -> String {
    let question = Question {
        at,
        coverage: Coverage::Probability(0.95),
        trials: None,
        seed: 1,
        tailwater,
        month: None,
    };
    budget(station, &question, &|_| {}).unwrap_err().to_string()
}

#[test]
fn where_a_drowned_factor_has_no_value_no_discharge_is_stated() {
    let plate = |equation: &str| {
        station(&format!(
            "name = \"Sallow Lane\"\n[structure]\nkind = \"thin-plate-full-width\"\n\
             crest_width = \"0.7 m\"\ncrest_height = \"0.5 m\"\n[tailwater]\nlevel = \"0.19 m\"\n\
             drowned_flow = \"{equation}\"\n{HEAD_ERROR}"
        ))
    };
    // 0.975 - S^1.45 is below 0 from S = 0.983.
    let iso = plate("ISO 1438");
    assert!(refusal(&iso, At::Head(0.2), Some(0.198)).contains("no value"));
    assert!(refusal(&iso, At::Head(0.2), Some(0.2)).contains("not below the head"));
    let villemonte = plate("Villemonte");
    assert!(ask(&villemonte, 0.2, Some(0.194), None).result.value > 0.0);
    // Where the other equation has ended, the two cannot be compared, and the size of the error is not known.
    let words = refusal(&villemonte, At::Head(0.2), Some(0.198));
    assert!(words.contains("replaces = \"published drowned-flow factor\""), "{words}");
    assert!(refusal(&villemonte, At::Head(0.2), Some(0.21)).contains("not below the head"));
    // A check states no discharge that a budget would refuse.
    let high = station(&format!(
        "name = \"Sallow Lane\"\n[structure]\nkind = \"thin-plate-full-width\"\n\
         crest_width = \"0.7 m\"\ncrest_height = \"0.5 m\"\n[head]\nrange = [\"0.1 m\", \"0.4 m\"]\n\
         [tailwater]\nlevel = \"0.19 m\"\ndrowned_flow = \"Villemonte\"\n{HEAD_ERROR}"
    ));
    let ends = check(&high).ends;
    assert!(ends[0].result.as_ref().unwrap_err().to_string().contains("not below the head"));
    assert!(ends[1].result.is_ok());
    // Near the end of the curve some trials have no value: they are counted, never given the modular flow.
    let near = ask(&iso, 0.2, Some(0.1945), Some(20_000));
    assert!(codes(&near).contains(&"trials_undefined"), "{:?}", codes(&near));
    let modular = ask(&iso, 0.2, Some(-0.5), None).result.value;
    if let Some(part) = &near.monte_carlo {
        assert!(part.result.outputs[0].intervals.symmetric[1] < 0.7 * modular);
    }
    // The triangular profile's curve ends at 0.985, and beyond nothing is published.
    let profile = profile("[tailwater]\nlevel = \"0.1 m\"\n");
    assert!(refusal(&profile, At::Head(0.2), Some(0.2012)).contains("not below the head"));
    assert!(refusal(&profile, At::Head(0.2), Some(0.1999)).contains("no value"));
    // The curve of Skogerboe 1967 would turn up again beyond 0.95.
    let flume = station(&format!(
        "name = \"Gravel pit\"\n[structure]\nkind = \"parshall-flume\"\nsize = \"3 in\"\n\
         [tailwater]\nlevel = \"0.2 m\"\n{HEAD_ERROR}"
    ));
    assert!(ask(&flume, 0.25, Some(0.237), None).result.value > 0.0);
    assert!(refusal(&flume, At::Head(0.25), Some(0.238)).contains("no value"));
}

#[test]
fn where_the_drowned_curve_has_no_value_at_little_flow_the_discharge_is_still_found() {
    // At little flow the tailwater of the table lies higher than the curve of drowned flow reaches: the search
    // for Q begins where the equation has no value.
    let text = |tailwater: &str| {
        station(&format!(
            "name = \"Sallow Lane\"\n[structure]\nkind = \"triangular-profile\"\ncrest_width = \"2 m\"\n\
             crest_height = \"1 m\"\napproach_width = \"2.2 m\"\n[tailwater]\n{tailwater}\n{HEAD_ERROR}"
        ))
    };
    let knots = [(0.0, -0.05), (0.01, 0.0), (0.04, 0.045), (0.1, 0.095), (0.5, 0.24)];
    let rows: Vec<String> =
        knots.iter().map(|(q, level)| format!("[\"{q} m3/s\", \"{level} m\"]")).collect();
    let moving = text(&format!("table = [{}]", rows.join(", ")));
    let still = text("level = \"0 m\"");
    for head in [0.05, 0.08, 0.1] {
        let discharge = ask(&moving, head, None, None).result.value;
        let knot = knots.iter().position(|(q, _)| *q > discharge).unwrap();
        let ((q, level), (next, higher)) = (knots[knot - 1], knots[knot]);
        let tailwater = level + (higher - level) * (discharge - q) / (next - q);
        let again = ask(&still, head, Some(tailwater), None).result.value;
        assert!((discharge / again - 1.0).abs() < 1e-12, "{head} m: {discharge} and {again} m3/s");
    }
}

#[test]
fn a_flow_that_the_discharge_jumps_over_is_not_answered_with_another() {
    let flume = station(&format!(
        "name = \"Gravel pit\"\n[structure]\nkind = \"parshall-flume\"\nsize = \"2 ft\"\n\
         [tailwater]\nlevel = \"0.21 m\"\n{HEAD_ERROR}"
    ));
    let words = refusal(&flume, At::Flow(0.215), None);
    assert!(words.contains("jumps from"), "{words}");
}

#[test]
fn sections_without_a_drowned_equation_are_told_apart_from_those_with_one() {
    let text = r#"
name = "Two ways"
[structure]
kind = "compound"
approach_width = "5.00 m"
crest_height = "0.50 m"
[[structure.section]]
kind = "triangular-profile"
crest_level = "0 m"
crest_width = "2.00 m"
[[structure.section]]
kind = "trapezoidal-profile"
crest_level = "0.05 m"
crest_width = "2.00 m"
crest_length_along_flow = "0.40 m"
[tailwater]
level = "0.30 m"
"#;
    let found = ask(&station(&format!("{text}{HEAD_ERROR}")), 0.36, None, None);
    let codes = codes(&found);
    assert!(codes.contains(&"drowned_flow") && codes.contains(&"not_modular"), "{codes:?}");
    assert_eq!(found.hydraulics.unwrap().state, FlowState::NotModular);
}

#[test]
fn a_factor_on_the_coefficient_needs_something_behind_it() {
    let with = |factor: &str| {
        let text = format!(
            "name = \"Marren ford\"\n[structure]\nkind = \"triangular-profile\"\ncrest_width = \"2 m\"\n\
             crest_height = \"0.4 m\"\napproach_width = \"2 m\"\n{factor}\n{HEAD_ERROR}"
        );
        codes(&ask(&station(&text), 0.2, None, None)).contains(&"bare_factor")
    };
    assert!(with("coefficient_factor = 1.25"));
    assert!(!with("coefficient_factor = { value = 1.02, evidence = \"gaugings of 2024\" }"));
    assert!(!with(""));
}
