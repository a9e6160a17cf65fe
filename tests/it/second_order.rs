//! What curvature adds to the linear method: examples of the guides, and equations whose variance is known.

use nappe::propagation::SecondOrder;
use nappe::study::Budget;

use crate::metrology::solve;

/// A budget of `y` of named inputs by the linear method; each with its value and the keys of its error.
fn budget_of(equation: &str, inputs: &[(&str, f64, &str)], rest: &str) -> Budget {
    let values: Vec<String> =
        inputs.iter().map(|(name, value, _)| format!("{name} = {value:e}\n")).collect();
    let sources: Vec<String> = inputs
        .iter()
        .filter(|(_, _, size)| !size.is_empty())
        .map(|(name, _, size)| {
            format!("[[error_source]]\nname = \"of {name}\"\nacts_on = \"{name}\"\n{size}\n")
        })
        .collect();
    let text = format!(
        "name = \"curved\"\n[structure]\nkind = \"equation\"\nresult = \"y\"\nunit = \"1\"\n\
         [structure.definitions]\ny = \"{equation}\"\n[structure.inputs]\n{}{}{rest}",
        values.concat(),
        sources.concat()
    );
    solve(&text, 0)
}

fn second_order(budget: &Budget) -> (f64, f64) {
    let SecondOrder { standard_uncertainty, mean_shift, .. } = budget.second_order.unwrap();
    (standard_uncertainty.unwrap(), mean_shift)
}

fn near(ours: f64, known: f64, relative: f64) {
    assert!((ours - known).abs() <= relative * known.abs(), "{ours:e} against {known:e}");
}

fn normal(u: f64) -> String {
    format!("standard_uncertainty = {u:e}")
}

fn limits(half_width: f64, shape: &str) -> String {
    format!("half_width = {half_width:e}\nshape = \"{shape}\"")
}

/// JCGM 100:2008 5.1.2 note and H.2.4 (H.10) in closed form for Q = h^n and a normal error of h:
/// u² = (n w)² + (n² (n-1)²/2 + n² (n-1)(n-2)) w⁴ and a shift of n (n-1)/2 w², relative to Q, w = u(h)/h.
#[test]
fn a_power_law_has_the_terms_of_the_guide() {
    for (n, h, u) in [(1.5, 0.3, 0.003), (1.5, 0.05, 0.005), (2.5, 0.05, 0.005), (2.5, 0.1, 0.02)] {
        let size = normal(u);
        let found = budget_of(&format!("h^{n}"), &[("h", h, &size)], "");
        let (with_terms, shift) = second_order(&found);
        let w: f64 = u / h;
        let terms = n * n * (n - 1.0) * ((n - 1.0) / 2.0 + n - 2.0) * w.powi(4);
        let value = found.result.value;
        near(with_terms / value, ((n * w).powi(2) + terms).sqrt(), 1e-7);
        near(shift / value, n * (n - 1.0) / 2.0 * w * w, 1e-7);
    }
    // Recomputed apart, in mpmath: u of second order over y for n = 2.5, h = 0.1, u = 0.02.
    let found = budget_of("h^2.5", &[("h", 0.1, &normal(0.02))], "");
    near(second_order(&found).0 / found.result.value, 0.518_411_033_833_193, 1e-7);
}

/// JCGM 100:2008 H.1: the end gauge, in nm: `u_c` = 32 to first order, 34 with the terms of H.1.7; 16.7
/// effective degrees of freedom.
#[test]
fn the_end_gauge_has_34_nm() {
    let [standard, mean, random, systematic] =
        [(25.0, 18), (5.813_776_741_499_453, 24), (3.891_050_583_657_588, 5), (20.0 / 3.0, 8)]
            .map(|(u, freedom)| format!("{}\ndegrees_of_freedom = {freedom}", normal(u)));
    let found = budget_of(
        "lS + d + d1 + d2 - lS*(da*(th0 + De) + aS*dth)",
        &[
            ("lS", 50_000_623.0, &standard),
            ("d", 215.0, &mean),
            ("d1", 0.0, &random),
            ("d2", 0.0, &systematic),
            ("aS", 11.5e-6, &limits(2e-6, "rectangular")),
            ("th0", -0.1, &normal(0.2)),
            ("De", 0.0, &limits(0.5, "arcsine")),
            ("da", 0.0, &(limits(1e-6, "rectangular") + "\ndegrees_of_freedom = 50")),
            ("dth", 0.0, &(limits(0.05, "rectangular") + "\ndegrees_of_freedom = 2")),
        ],
        "",
    );
    near(found.result.value, 50_000_838.0, 1e-12);
    // The printed parts without rounding: 1002.246 nm² to first order, 11.726 nm and 1.667 nm beside.
    near(found.linear.standard_uncertainty, 31.658_268_421_466, 1e-9);
    near(second_order(&found).0, 33.801_290_403_879, 1e-7);
    let nappe::propagation::DegreesOfFreedom::Finite(freedom) = found.linear.degrees_of_freedom
    else {
        panic!("finite degrees of freedom")
    };
    near(freedom, 16.741_366_263_307, 1e-6);
}

/// JCGM 101:2008 9.4, tables 8 and 9, annex F: the comparison loss X1² + X2² with normal errors of 0.005,
/// in 1e-6. u² = 4 u² x1² + 4 u⁴ (1 + r²), also where they are correlated.
#[test]
fn the_comparison_loss_has_the_analytic_uncertainty() {
    let size = normal(0.005);
    for (x, r, printed, exact, shift) in [
        (0.0, 0.0, 50.0, 50.0, 50.0),
        (0.01, 0.0, 112.0, 111.803_398_874_989_5, 50.0),
        (0.0, 0.9, 67.0, 67.268_120_235_368_56, 50.0),
        (0.05, 0.9, 505.0, 504.504_707_609_354_3, 50.0),
    ] {
        let pair = format!("[[correlation]]\nsources = [\"of a\", \"of b\"]\ncoefficient = {r}\n");
        let found = budget_of("a^2 + b^2", &[("a", x, &size), ("b", 0.0, &size)], &pair);
        let (with_terms, mean_shift) = second_order(&found);
        near(1e6 * with_terms, exact, 1e-7);
        assert!((1e6 * with_terms - printed).abs() <= 0.5, "{with_terms}");
        near(1e6 * mean_shift, shift, 1e-7);
        let warned = found.warnings.iter().any(|each| each.code.as_str() == "second_order_large");
        assert_eq!(warned, x == 0.0);
    }
}

/// EA-4/02 S4 (from memory): a gauge block of 50 mm, in nm. Its term `L da Dt` has no slope, and adds 11.8 nm:
/// `u` = 36.4 nm.
#[test]
fn the_gauge_block_of_50_mm_has_36_nm() {
    let found = budget_of(
        "lS + dD + dl + dC - L*(alpha*dt + da*Dt) - dV",
        &[
            ("L", 5e7, ""),
            ("alpha", 11.5e-6, ""),
            ("lS", 50_000_020.0, &normal(15.0)),
            ("dD", 0.0, &limits(30.0, "rectangular")),
            ("dl", -94.0, &normal(12.0 / 5.0_f64.sqrt())),
            ("dC", 0.0, &limits(32.0, "rectangular")),
            ("dt", 0.0, &limits(0.05, "rectangular")),
            ("da", 0.0, &limits(2e-6, "triangular")),
            ("Dt", 0.0, &limits(0.5, "rectangular")),
            ("dV", 0.0, &limits(6.7, "rectangular")),
        ],
        "",
    );
    near(second_order(&found).0, 36.393_768_544_750_75, 1e-7);
}

/// A square has no derivative beyond the second, so its variance is exact: 4 x² u² - 4 x μ₃ + μ₄ - u⁴ for
/// an error with these central moments that is taken off x. Moments of the shapes: JCGM 101:2008 6.4.
#[test]
fn the_moments_of_each_shape_are_its_own() {
    let half = 0.3_f64;
    let (flat, off) = (0.1_f64, 0.06_f64);
    let trapezoid = [
        (half.powi(2) + flat.powi(2)) / 6.0,
        0.0,
        // By integration of its density: (a⁶ - f⁶)/(15 (a² - f²)).
        (half.powi(6) - flat.powi(6)) / (15.0 * (half.powi(2) - flat.powi(2))),
    ];
    let unsure = [
        half.powi(2) / 3.0 + off.powi(2) / 9.0,
        0.0,
        (half.powi(4) + 2.0 * half.powi(2) * off.powi(2) + off.powi(4) / 5.0) / 5.0,
    ];
    // There for a third of the time: 0.3 with a normal error of 0.1, 0 otherwise. Raw moments, then central.
    let (p, b, s) = (1.0_f64 / 3.0, 0.3_f64, 0.1_f64);
    let raw = [
        p * b,
        p * (b * b + s * s),
        p * (b.powi(3) + 3.0 * b * s * s),
        p * (b.powi(4) + 6.0 * b * b * s * s + 3.0 * s.powi(4)),
    ];
    let occasional = [
        raw[1] - raw[0].powi(2),
        raw[2] - 3.0 * raw[0] * raw[1] + 2.0 * raw[0].powi(3),
        raw[3] - 4.0 * raw[0] * raw[2] + 6.0 * raw[0].powi(2) * raw[1] - 3.0 * raw[0].powi(4),
    ];
    let cases = [
        (limits(half, "rectangular"), 0.0, [half.powi(2) / 3.0, 0.0, half.powi(4) / 5.0]),
        (limits(half, "triangular"), 0.0, [half.powi(2) / 6.0, 0.0, half.powi(4) / 15.0]),
        (limits(half, "arcsine"), 0.0, [half.powi(2) / 2.0, 0.0, 3.0 * half.powi(4) / 8.0]),
        (limits(half, "trapezoidal") + "\nflat_half_width = 0.1", 0.0, trapezoid),
        (limits(half, "curvilinear-trapezoid") + "\nlimit_half_width = 0.06", 0.0, unsure),
        (format!("{}\nreads_high_by = 0.3\npresent = {p}", normal(s)), raw[0], occasional),
    ];
    for (size, bias, [second, third, fourth]) in cases {
        let found = budget_of("a^2", &[("a", 0.7, &size)], "");
        let x = 0.7 - bias;
        let variance = 4.0 * x * x * second - 4.0 * x * third + fourth - second * second;
        near(second_order(&found).0, variance.sqrt(), 1e-7);
        near(second_order(&found).1, second, 1e-7);
    }
}

/// At a corner of the equation there are no derivatives of higher order, and none are stated.
#[test]
fn at_a_corner_no_terms_are_stated() {
    let corner = "a when a <= 1 otherwise 2*a - 1";
    assert_eq!(budget_of(corner, &[("a", 1.0, &normal(0.1))], "").second_order, None);
    assert!(budget_of(corner, &[("a", 1.1, &normal(0.1))], "").second_order.is_some());
}
