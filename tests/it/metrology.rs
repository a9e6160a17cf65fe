//! Worked examples of the guides, through station files of kind `equation`.

use nappe::propagation::monte_carlo::Amount;
use nappe::propagation::{Coverage, DegreesOfFreedom};
use nappe::station::read;
use nappe::study::{At, Budget, Question, budget};

/// A budget of an equation without head, `trials` of 0 for the linear method alone.
pub(crate) fn solve(text: &str, trials: u64) -> Budget {
    let (station, findings) = read(text.as_bytes());
    assert!(findings.is_empty(), "{findings:#?}");
    let question = Question {
        at: At::Middle,
        coverage: Coverage::Probability(0.95),
        trials: (trials > 0).then_some(Amount::Fixed(trials)),
        seed: 3,
        tailwater: None,
        month: None,
    };
    budget(&station.expect("a station"), &question, &|_| {}).expect("a budget")
}

/// `y = x1 + ... + xn` with one source for each term, in the words of a station file.
fn sum_of(sources: &[&str]) -> String {
    let names: Vec<String> = (1..=sources.len()).map(|i| format!("x{i}")).collect();
    let inputs: Vec<String> = names.iter().map(|name| format!("{name} = 0")).collect();
    let tables: Vec<String> = names
        .iter()
        .zip(sources)
        .map(|(name, size)| {
            format!("[[error_source]]\nname = \"of {name}\"\nacts_on = \"{name}\"\n{size}\n")
        })
        .collect();
    format!(
        "name = \"a sum\"\n[structure]\nkind = \"equation\"\nresult = \"y\"\nunit = \"1\"\n\
         [structure.definitions]\ny = \"{}\"\n[structure.inputs]\n{}\n{}",
        names.join(" + "),
        inputs.join("\n"),
        tables.join("\n")
    )
}

const NORMAL: &str = "standard_uncertainty = 1";
const RECTANGULAR: &str = "half_width = 1.7320508075688772\nshape = \"rectangular\"";

fn near(ours: f64, printed: f64, tolerance: f64) {
    assert!((ours - printed).abs() <= tolerance, "{ours} against {printed}");
}

/// JCGM 101:2008 9.2.2, table 2: four standard normal inputs.
#[test]
fn four_normal_inputs_as_in_table_2() {
    let found = solve(&sum_of(&[NORMAL; 4]), 4_000_000);
    near(found.linear.standard_uncertainty, 2.00, 0.005);
    near(found.expanded_uncertainty, 3.92, 0.005);
    let part = found.monte_carlo.unwrap();
    let statistics = part.result.outputs[0];
    // Printed to two decimals; five standard errors of an end at 4e6 trials are 0.013.
    near(statistics.intervals.symmetric[0], -3.92, 0.018);
    near(statistics.intervals.symmetric[1], 3.92, 0.018);
    near(statistics.standard_uncertainty, 2.00, 0.01);
    assert!(part.agreement.linear_is_adequate());
}

/// JCGM 101:2008 9.2.3, table 3: four rectangular inputs of the same variance; the Monte Carlo interval is
/// [-3.88, 3.88], the exact ends are 3.8794 (clause 9.2.3.3 gives the same to its digits).
#[test]
fn four_rectangular_inputs_as_in_table_3() {
    let found = solve(&sum_of(&[RECTANGULAR; 4]), 4_000_000);
    near(found.linear.standard_uncertainty, 2.00, 0.005);
    near(found.expanded_uncertainty, 3.92, 0.005);
    let part = found.monte_carlo.unwrap();
    near(part.result.outputs[0].intervals.symmetric[0], -3.88, 0.018);
    near(part.result.outputs[0].intervals.symmetric[1], 3.88, 0.018);
}

/// JCGM 101:2008 9.2.4, table 4: one dominant rectangular input. The linear interval ±19.9 is not
/// adequate, that of Monte Carlo is ±17.0.
#[test]
fn a_dominant_rectangular_input_as_in_table_4() {
    let wide = "half_width = 17.320508075688772\nshape = \"rectangular\"";
    let found = solve(&sum_of(&[RECTANGULAR, RECTANGULAR, RECTANGULAR, wide]), 4_000_000);
    near(found.linear.standard_uncertainty, 10.1, 0.05);
    near(found.expanded_uncertainty, 19.9, 0.05);
    let part = found.monte_carlo.unwrap();
    near(part.result.outputs[0].intervals.symmetric[1], 17.0, 0.06);
    assert!(!part.agreement.linear_is_adequate());
}

/// The coverage factor that the warning of a dominant rectangular part gives, if there is one.
fn factor_of_limits(sources: &[&str]) -> Option<f64> {
    let found = solve(&sum_of(sources), 0);
    let warning =
        found.warnings.iter().find(|each| each.code.as_str() == "rectangular_dominates")?;
    let words = warning.text.split("belongs to it is ").nth(1).unwrap();
    words.split(',').next().unwrap().parse().ok()
}

/// EA-4/02 S9 (from memory): limits of 0.05 V against a rest of 0.0064 V have k = 1.65 at 95 %. JCGM 101:2008
/// 9.2.4: the Monte Carlo interval of ±17.0 for u = 10.1 is 1.68 u. Two equal rectangulars make a triangle, whose
/// factor is (1 - sqrt(0.05)) sqrt(6) = 1.90 (JCGM 100 4.3.9).
#[test]
fn a_dominant_rectangular_part_has_its_own_factor() {
    let limits = |half: f64| format!("half_width = {half}\nshape = \"rectangular\"");
    let meter = [&limits(0.05), &limits(0.011), "standard_uncertainty = 0.001"];
    near(factor_of_limits(&meter).unwrap(), 1.65, 0.005);
    let dominated = [RECTANGULAR, RECTANGULAR, RECTANGULAR, &limits(17.320_508)];
    near(factor_of_limits(&dominated).unwrap(), 1.645, 0.005);
    near(
        factor_of_limits(&[RECTANGULAR; 2]).unwrap(),
        (1.0 - 0.05_f64.sqrt()) * 6.0_f64.sqrt(),
        0.005,
    );
    // Three of the same size: none outweighs the others.
    assert_eq!(factor_of_limits(&[RECTANGULAR; 3]), None);
    assert_eq!(factor_of_limits(&[NORMAL]), None);
    // Limits of 3 and 2 in a Monte Carlo run of their own: the ends of 95 % over the standard uncertainty.
    let unequal = [&limits(3.0)[..], &limits(2.0)[..]];
    let part = solve(&sum_of(&unequal), 4_000_000).monte_carlo.unwrap();
    let statistics = part.result.outputs[0];
    let drawn = statistics.intervals.symmetric[1] / statistics.standard_uncertainty;
    near(factor_of_limits(&unequal).unwrap(), drawn, 0.01);
}

/// JCGM 100:2008 G.4.1, example: Y = b X1 X2 X3 with relative uncertainties 0.25 %, 0.57 % and 0.82 % of
/// 10, 5 and 15 readings: u = 1.03 %, 19.0 degrees of freedom, `t_95(19)` = 2.09.
#[test]
fn welch_satterthwaite_as_in_the_guide() {
    let found = solve(
        r#"
name = "a product"
[structure]
kind = "equation"
result = "y"
unit = "1"
[structure.definitions]
y = "x1 * x2 * x3"
[structure.inputs]
x1 = 1
x2 = 1
x3 = 1
[[error_source]]
name = "first"
acts_on = "x1"
standard_uncertainty = "0.25 %"
degrees_of_freedom = 9
[[error_source]]
name = "second"
acts_on = "x2"
standard_uncertainty = "0.57 %"
degrees_of_freedom = 4
[[error_source]]
name = "third"
acts_on = "x3"
standard_uncertainty = "0.82 %"
degrees_of_freedom = 14
"#,
        0,
    );
    near(100.0 * found.linear.standard_uncertainty, 1.03, 0.005);
    let DegreesOfFreedom::Finite(freedom) = found.linear.degrees_of_freedom else {
        panic!("finite degrees of freedom")
    };
    near(freedom, 19.0, 0.05);
    near(found.coverage_factor, 2.09, 0.005);
}

/// JCGM 100:2008 table G.2, a row from each part of it.
#[test]
fn coverage_factors_are_those_of_table_g_2() {
    for (freedom, p, t) in [
        (1.0, 0.95, 12.71),
        (2.0, 0.99, 9.92),
        (5.0, 0.90, 2.02),
        (10.0, 0.95, 2.23),
        (10.0, 0.99, 3.17),
        (20.0, 0.95, 2.09),
        (50.0, 0.95, 2.01),
        (100.0, 0.99, 2.626),
    ] {
        let k = Coverage::Probability(p).factor(DegreesOfFreedom::Finite(freedom));
        near(k, t, 0.005);
    }
    near(Coverage::Probability(0.95).factor(DegreesOfFreedom::Infinite), 1.960, 0.0005);
    near(Coverage::Factor(2.0).probability(), 0.9545, 0.00005);
}

/// JCGM 100:2008 5.2.2, example: ten resistors of 1000 ohm, each compared with one standard of 100 mohm
/// uncertainty: correlated with r = 1, the uncertainty of the sum is 1 ohm, not 0.32 ohm. In units of
/// 1000 ohm here.
#[test]
fn full_correlation_adds_linearly() {
    let mut text = sum_of(&["standard_uncertainty = 0.0001"; 10]);
    for (i, j) in (1..=10).flat_map(|i| (1..i).map(move |j| (j, i))) {
        let names = format!("sources = [\"of x{i}\", \"of x{j}\"]");
        text += &["\n[[correlation]]\n", &names, "\ncoefficient = 1\n"].concat();
    }
    let found = solve(&text, 100_000);
    near(found.linear.standard_uncertainty, 0.001, 1e-12);
    let drawn = found.monte_carlo.unwrap().result.outputs[0].standard_uncertainty;
    // The standard error at 1e5 trials is 0.22 %; five of them.
    near(drawn, 0.001, 0.000_012);
    // One source for all ten inputs says the same without a coefficient.
    let shared = solve(
        &sum_of(&["standard_uncertainty = 0.0001\n"])
            .replace("y = \"x1\"", "y = \"x1 + x2\"")
            .replace("x1 = 0\n", "x1 = 0\nx2 = 0\n")
            .replace("acts_on = \"x1\"", "acts_on = [\"x1\", \"x2\"]"),
        0,
    );
    near(shared.linear.standard_uncertainty, 0.0002, 1e-15);
}

/// Ishigami and Homma 1990, a = 7, b = 0.1; indices recomputed from the closed form, and from memory in
/// Saltelli and others 2008. Five of the standard errors that are printed.
#[test]
fn variance_based_shares_of_the_ishigami_function() {
    let found = solve(
        r#"
name = "a test function"
[structure]
kind = "equation"
result = "y"
unit = "1"
[structure.definitions]
y = "sin(x1) + 7*sin(x2)^2 + 0.1*x3^4*sin(x1)"
[structure.inputs]
x1 = 0
x2 = 0
x3 = 0
[[error_source]]
name = "one"
acts_on = "x1"
half_width = 3.141592653589793
shape = "rectangular"
[[error_source]]
name = "two"
acts_on = "x2"
half_width = 3.141592653589793
shape = "rectangular"
[[error_source]]
name = "three"
acts_on = "x3"
half_width = 3.141592653589793
shape = "rectangular"
"#,
        200_000,
    );
    for (name, first, total) in
        [("one", 0.313_905, 0.557_589), ("two", 0.442_411, 0.442_411), ("three", 0.0, 0.243_684)]
    {
        let share = found.rows.iter().find(|row| row.name == name).unwrap().share.unwrap();
        assert!(share.first_order_error < 0.03 && share.total_error < 0.03);
        near(share.first_order, first, 5.0 * share.first_order_error);
        near(share.total, total, 5.0 * share.total_error);
    }
    // Variance 13.8446.
    let u = found.monte_carlo.unwrap().result.outputs[0].standard_uncertainty;
    near(u * u, 13.844_588, 0.15);
}

/// The curvature of Q = K h^n: a noise of relative size w on h shifts the mean of Q by n(n-1)/2 w^2
/// (JCGM 100 H.2.4, equation H.10), 15/8 w^2 for a notch.
#[test]
fn the_mean_of_the_trials_is_shifted_by_curvature() {
    let found = solve(
        r#"
name = "a power law"
[structure]
kind = "equation"
result = "q"
unit = "1"
[structure.definitions]
q = "h^2.5"
[structure.inputs]
h = 1
[[error_source]]
name = "noise"
acts_on = "h"
standard_uncertainty = 0.05
"#,
        4_000_000,
    );
    let mean = found.monte_carlo.unwrap().result.outputs[0].mean;
    // 15/8 w^2 = 0.0046875, and a fourth-order term of (2.5*1.5*0.5*-0.5/24)*3 w^4 = -7e-7.
    near(mean - 1.0, 0.004_687, 5.0 * 0.125 / 2000.0);
}
