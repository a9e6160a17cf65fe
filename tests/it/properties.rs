//! Properties that hold for anything: of expressions, units, distributions.

use nappe::model::{Blueprint, Input, Model};
use nappe::propagation::Distribution;
use nappe::units::{Dimension, Quantity, Rational, Unit};
use proptest::prelude::*;
use statrs::distribution::{Beta, ContinuousCDF, Triangular, Uniform};
use statrs::statistics::Distribution as _;

use super::metrology::solve;

/// A model of three pure numbers with a definition of this text.
fn model(text: &str) -> Model {
    let blueprint = Blueprint {
        inputs: ["x", "y", "z"]
            .iter()
            .map(|name| Input {
                key: (*name).to_owned(),
                symbol: (*name).to_owned(),
                dimension: Dimension::NONE,
            })
            .collect(),
        definitions: vec![("f".to_owned(), text.to_owned())],
        result: "f".to_owned(),
        ..Blueprint::default()
    };
    Model::build(&blueprint).unwrap_or_else(|faults| panic!("{text}: {faults:?}"))
}

/// Random expressions that have a value wherever x, y and z are between 0.5 and 2.
fn expression() -> impl Strategy<Value = String> {
    let leaf = prop_oneof![
        Just("x".to_owned()),
        Just("y".to_owned()),
        Just("z".to_owned()),
        (1_u32..40).prop_map(|n| n.to_string()),
        (1_u32..400).prop_map(|n| format!("{}", f64::from(n) / 64.0)),
    ];
    leaf.prop_recursive(5, 48, 3, |inner| {
        let two = (inner.clone(), inner.clone());
        prop_oneof![
            two.clone().prop_map(|(a, b)| format!("({a}) + ({b})")),
            two.clone().prop_map(|(a, b)| format!("({a}) - ({b})")),
            two.clone().prop_map(|(a, b)| format!("({a}) * ({b})")),
            two.clone().prop_map(|(a, b)| format!("({a}) / (2 + abs({b}))")),
            two.clone().prop_map(|(a, b)| format!("min({a}, {b})")),
            two.prop_map(|(a, b)| format!("max({a}, {b})")),
            inner.clone().prop_map(|a| format!("sqrt(1 + abs({a}))")),
            inner.clone().prop_map(|a| format!("(1 + abs({a}))^1.522")),
            inner.clone().prop_map(|a| format!("({a})^3")),
            inner.clone().prop_map(|a| format!("(1 + abs({a}))^(-2)")),
            inner.clone().prop_map(|a| format!("sin({a}) + arctan({a})")),
            inner.clone().prop_map(|a| format!("ln(1 + abs({a}))")),
            (inner.clone(), inner.clone(), inner)
                .prop_map(|(a, b, c)| format!("({a}) when ({b}) <= ({c}) otherwise ({c})")),
        ]
    })
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 400, ..ProptestConfig::default() })]

    #[test]
    fn what_is_printed_reads_as_the_same_expression(text in expression()) {
        let mut model = model(&text);
        let id = model.graph().unnamed(model.result());
        let printed = model.text(id);
        let (again, _) = model.expression(&printed).unwrap_or_else(|e| panic!("{printed}: {e:?}"));
        prop_assert_eq!(id, again, "{} was printed as {}", text, printed);
    }

    #[test]
    fn derivatives_print_and_read_as_well(text in expression()) {
        let mut model = model(&text);
        for input in 0..3 {
            let derivative = model.derivative(model.result(), input);
            let printed = model.text(derivative);
            let (again, _) = model.expression(&printed).unwrap();
            prop_assert_eq!(derivative, again, "{}", printed);
        }
    }

    #[test]
    fn derivatives_agree_with_central_differences(
        text in expression(),
        x in 0.5_f64..2.0,
        y in 0.5_f64..2.0,
        z in 0.5_f64..2.0,
    ) {
        let mut model = model(&text);
        let result = model.result();
        let at = [x, y, z];
        for input in 0..3 {
            let derivative = model.derivative(result, input);
            let exact = model.evaluate(&[derivative], &at).0[0];
            let difference = |step: f64| {
                let moved = |sign: f64| {
                    let mut there = at;
                    there[input] += sign * step;
                    there
                };
                let value = |at: [f64; 3], model: &mut Model| model.evaluate(&[result], &at).0[0];
                (value(moved(1.0), &mut model.clone()) - value(moved(-1.0), &mut model.clone()))
                    / (2.0 * step)
            };
            // Two steps: where they disagree a kink lies between, and no difference says anything.
            let (wide, narrow) = (difference(1e-4), difference(1e-5));
            let size = 1.0 + wide.abs() + narrow.abs();
            prop_assume!(exact.is_finite() && size < 1e8);
            prop_assume!((wide - narrow).abs() < 1e-5 * size);
            let value = model.evaluate(&[result], &at).0[0].abs();
            let rounding = 1e-10 * value;
            prop_assert!((exact - narrow).abs() < 1e-4 * size + rounding, "{text}: {exact} {narrow}");
        }
    }

    #[test]
    fn dimensions_form_a_group(
        a in -6_i64..6, b in -6_i64..6, c in -6_i64..6, n in 1_i64..5, d in 1_i64..5,
    ) {
        let left = Dimension::of(a, b, c, 0, 0);
        let right = Dimension::of(c, a, b, 1, 0);
        let product = left.times(right).unwrap();
        prop_assert_eq!(product, right.times(left).unwrap());
        prop_assert_eq!(product.per(right).unwrap(), left);
        let exponent = Rational::new(n, d).unwrap();
        let back = left.power(exponent).unwrap().power(exponent.reciprocal().unwrap()).unwrap();
        prop_assert_eq!(back, left);
        // The name of the SI unit reads as the same dimension.
        prop_assert_eq!(Unit::parse(&left.to_string()).unwrap().dimension(), left);
    }

    #[test]
    fn units_convert_there_and_back(value in -1e6_f64..1e6) {
        for unit in ["mm", "ft", "in", "l/s", "cfs", "gpm", "mgd", "Ml/d", "deg", "hPa", "%"] {
            let unit = Unit::parse(unit).unwrap();
            let back = unit.from_si(unit.to_si(value));
            prop_assert!((back - value).abs() <= 4.0 * f64::EPSILON * value.abs());
        }
    }

    #[test]
    fn no_text_makes_a_reader_panic(text in "\\PC{0,60}") {
        let _ = Unit::parse(&text);
        let _ = Quantity::parse(&text);
        let _ = nappe::model::expression::parse(&text);
        let _ = nappe::model::expression::parse_equation(&text);
        let _ = nappe::station::read(text.as_bytes());
    }

    #[test]
    fn no_bytes_make_the_file_reader_panic(bytes in proptest::collection::vec(any::<u8>(), 0..200)) {
        let _ = nappe::station::read(&bytes);
    }
}

/// Moments against statrs; the arcsine is a beta distribution with both parameters 1/2.
#[test]
fn moments_agree_with_statrs() {
    let (mean, half_width) = (0.3, 2.0);
    let close = |ours: &Distribution, std_dev: f64| {
        assert!((ours.standard_uncertainty() / std_dev - 1.0).abs() < 1e-12, "{ours:?}");
        assert!((ours.mean() - mean).abs() < 1e-12);
    };
    let (low, high) = (mean - half_width, mean + half_width);
    let uniform = Uniform::new(low, high).unwrap();
    close(&Distribution::Rectangular { mean, half_width }, uniform.std_dev().unwrap());
    let triangular = Triangular::new(low, high, mean).unwrap();
    close(&Distribution::Triangular { mean, half_width }, triangular.std_dev().unwrap());
    let beta = Beta::new(0.5, 0.5).unwrap();
    close(&Distribution::Arcsine { mean, half_width }, 2.0 * half_width * beta.std_dev().unwrap());
    // A trapezoid is the sum of two rectangulars (JCGM 101 6.4.4).
    let flat_half_width = 0.7;
    let parts = [1.35, 0.65].map(|half| Uniform::new(-half, half).unwrap().variance().unwrap());
    close(
        &Distribution::Trapezoidal { mean, half_width, flat_half_width },
        (parts[0] + parts[1]).sqrt(),
    );
    // JCGM 101 6.4.3.3.
    close(
        &Distribution::CurvilinearTrapezoid { mean, half_width, limit_half_width: 0.5 },
        (uniform.variance().unwrap() + 0.25 / 9.0).sqrt(),
    );
    // A mixture: mean p m, variance p (s^2 + m^2) - (p m)^2.
    let inside = Distribution::Rectangular { mean: 1.2, half_width };
    let variance = 0.25 * (inside.standard_uncertainty().powi(2) + 1.44) - 0.09;
    close(
        &Distribution::Occasional { present: 0.25, distribution: Box::new(inside) },
        variance.sqrt(),
    );
}

/// A million draws of each shape, through a station file: mean and standard deviation within five
/// standard errors, ends of the 95 % interval where the quantile is known.
#[test]
fn draws_have_the_moments_and_quantiles_of_their_shape() {
    let beta = Beta::new(0.5, 0.5).unwrap();
    let triangular = Triangular::new(-2.0, 2.0, 0.0).unwrap();
    for (size, u, upper) in [
        ("half_width = 2\nshape = \"rectangular\"", 2.0 / 3.0_f64.sqrt(), Some(1.9)),
        (
            "half_width = 2\nshape = \"triangular\"",
            2.0 / 6.0_f64.sqrt(),
            Some(triangular.inverse_cdf(0.975)),
        ),
        (
            "half_width = 2\nshape = \"arcsine\"",
            2.0_f64.sqrt(),
            Some(4.0 * beta.inverse_cdf(0.975) - 2.0),
        ),
        (
            "half_width = 2\nshape = \"trapezoidal\"\nflat_half_width = 1",
            (5.0_f64 / 6.0).sqrt(),
            None,
        ),
        (
            "half_width = 2\nshape = \"curvilinear-trapezoid\"\nlimit_half_width = 0.5",
            (4.0_f64 / 3.0 + 0.25 / 9.0).sqrt(),
            None,
        ),
        ("standard_uncertainty = 2", 2.0, Some(3.919_928)),
        // t with 10 degrees of freedom: 2.2281 times the scale; variance 10/8 of its square.
        (
            "standard_uncertainty = 2\ndegrees_of_freedom = 10",
            2.0 * 1.25_f64.sqrt(),
            Some(4.456_278),
        ),
        ("table = [[-1, 1], [3, 3]]", 3.0_f64.sqrt(), Some(3.0)),
        ("resolution = 4", 2.0 / 3.0_f64.sqrt(), Some(1.9)),
        ("standard_uncertainty = 2\nshape = \"arcsine\"", 2.0, None),
    ] {
        let found = solve(&one_source(size), 1_000_000);
        let part = found.monte_carlo.unwrap().result.outputs[0];
        let off = (part.standard_uncertainty / u - 1.0).abs();
        // A kurtosis of 4 (t with 10 degrees of freedom) gives 0.09 %; five of them.
        assert!(off < 0.0045, "{size}: {} against {u}", part.standard_uncertainty);
        let bias = -found.corrections.iter().map(|each| each.bias).sum::<f64>();
        assert!((part.mean - bias).abs() < 5.0 * u / 1000.0, "{size}: mean {}", part.mean);
        if let Some(upper) = upper {
            // The error of the source lowers y; all shapes here but the table are symmetric.
            let end = part.intervals.symmetric[0].abs().max(part.intervals.symmetric[1].abs());
            assert!((end - upper).abs() < 0.02 * u, "{size}: {end} against {upper}");
        }
    }
}

fn one_source(size: &str) -> String {
    format!(
        "name = \"one source\"\n[structure]\nkind = \"equation\"\nresult = \"y\"\nunit = \"1\"\n\
         [structure.definitions]\ny = \"x\"\n[structure.inputs]\nx = 0\n\
         [[error_source]]\nname = \"it\"\nacts_on = \"x\"\n{size}\n"
    )
}

#[test]
fn linear_and_monte_carlo_agree_for_linear_models_and_shares_add_up() {
    let found = solve(
        &one_source("standard_uncertainty = 0.5")
            .replace("y = \"x\"", "y = \"3*x - 2*w\"")
            .replace("x = 0\n", "x = 1\nw = 4\n")
            .replace(
                "[[error_source]]",
                "[[error_source]]\nname = \"other\"\nacts_on = \"w\"\nstandard_uncertainty = 1\n\
                 [[error_source]]",
            ),
        1_000_000,
    );
    let sum: f64 = found.rows.iter().map(|row| row.share_linear).sum();
    assert!((sum - 1.0).abs() < 1e-12);
    let part = found.monte_carlo.unwrap().result.outputs[0];
    assert!((part.standard_uncertainty / found.linear.standard_uncertainty - 1.0).abs() < 0.004);
    for row in &found.rows {
        let share = row.share.unwrap();
        assert!((share.first_order - row.share_linear).abs() < 5.0 * share.first_order_error);
        assert!((share.total - row.share_linear).abs() < 5.0 * share.total_error);
    }
}
