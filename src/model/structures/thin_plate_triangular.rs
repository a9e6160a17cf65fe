//! Triangular thin-plate notch, Kindsvater-Shen equation, 20 to 100 degrees.

use super::approach::{APPROACH_SIDE_SLOPE, APPROACH_WIDTH, MEAN_WIDTH};
use super::thin_plate::{self, HEAD_ADJUSTMENT, PUBLISHED_HEAD_ADJUSTMENT};
use super::{
    Coefficient, CoefficientRule, Constant, Implicit, InputSpec, ModularLimit, PublishedTable,
    Regime, Structure, Values,
};
use crate::model::source::{ISO_1438, NBS_421, USBR_MANUAL};
use crate::model::{Confidence, Limit};
use crate::units::Dimension;

/// Angles at which the curves are read, degrees.
const ANGLES: &[f64] = &[20.0, 30.0, 40.0, 50.0, 60.0, 70.0, 80.0, 90.0, 100.0];
const DEGREE: f64 = std::f64::consts::PI / 180.0;
/// A notch this near to a right angle counts as one for partial contraction.
const RIGHT_ANGLE_TOLERANCE: f64 = 1.0;
/// Relative room for the rounding of a quotient.
const ROUNDING: f64 = 1e-12;

pub(super) static STRUCTURE: Structure = Structure {
    kind: "thin-plate-triangular",
    title: "Triangular thin-plate notch (Kindsvater-Shen)",
    standard: ISO_1438,
    inputs: &[
        InputSpec {
            key: "notch_angle",
            symbol: "theta",
            dimension: Dimension::ANGLE,
            meaning: "full angle of the notch",
            default: None,
            domain: [19.0 * DEGREE, 101.0 * DEGREE],
            domain_reason: "a coefficient is published for notches of 20 to 100 degrees only",
            example: "90 deg",
        },
        InputSpec::length("crest_height", "p", "height of the vertex above the bed", "0.45 m"),
        APPROACH_WIDTH,
        APPROACH_SIDE_SLOPE,
        HEAD_ADJUSTMENT,
    ],
    choice: None,
    constants: &[Constant {
        symbol: "k_h_right",
        value: 0.00085,
        dimension: Dimension::LENGTH,
        meaning: "head adjustment k_h of a partially contracted right-angled notch",
        source: NBS_421,
        confidence: Confidence::MemoryConfirmed,
    }],
    tables: &[
        PublishedTable {
            name: "C_chart",
            meaning: "coefficient, fully contracted",
            first: ("notch angle", "deg", ANGLES),
            second: None,
            unit: "1",
            values: &[0.592, 0.586, 0.581, 0.579, 0.577, 0.5765, 0.577, 0.5785, 0.581],
            source: ISO_1438,
            confidence: Confidence::MemoryConfirmed,
        },
        PublishedTable {
            name: "k_chart",
            meaning: "head adjustment, read from the chart and rounded to 0.05 mm",
            first: ("notch angle", "deg", ANGLES),
            second: None,
            unit: "mm",
            values: &[2.80, 2.10, 1.65, 1.35, 1.15, 1.00, 0.90, 0.85, 0.85],
            source: NBS_421,
            confidence: Confidence::Seen,
        },
        PublishedTable {
            name: "C_partial",
            meaning: "coefficient of a right-angled notch, partially contracted; beyond the end of a \
                      published curve its last value is held",
            first: ("p/B", "1", &[0.1, 0.2, 0.3, 0.4, 0.6, 0.8, 1.0]),
            second: Some((
                "h/p",
                "1",
                &[0.1, 0.2, 0.3, 0.35, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0, 1.1],
            )),
            unit: "1",
            values: PARTIAL,
            source: NBS_421,
            confidence: Confidence::Seen,
        },
        PublishedTable {
            name: "C_end",
            meaning: "h/p at which the published curve for this p/B ends",
            first: ("p/B", "1", &[0.1, 0.2, 0.3, 0.4, 0.6, 0.8, 1.0]),
            second: None,
            unit: "1",
            values: &[1.18, 1.18, 1.16, 1.00, 0.66, 0.50, 0.39],
            source: NBS_421,
            confidence: Confidence::Seen,
        },
    ],
    regimes: &[
        Regime {
            name: "fully contracted",
            when: "h/p <= 0.4, h/B <= 0.2, p >= 0.45 m and B >= 0.90 m; and for every \
                   other notch that is not within 1 degree of 90",
            definitions: &[
                MEAN_WIDTH,
                ("C_e", "C_chart(theta)"),
                ("k_h", "k_chart(theta) + dk_h"),
                ("h_e", "h + k_h"),
            ],
            discharge: "8/15*sqrt(2*g)*F_C*C_e*tan(theta/2)*h_e^2.5",
            implicit: Implicit::Nothing,
            solved: None,
            flowing: "h + k_chart(theta) + dk_h",
            beyond: None,
            borders,
            limits: &[
                Limit::at_least("h", "0.06", "head").by(ISO_1438, Confidence::Memory),
                Limit::at_most("h", "0.38", "head").by(ISO_1438, Confidence::Memory),
                Limit::at_most("h/p", "0.4", "head over vertex height")
                    .by(ISO_1438, Confidence::Memory),
                Limit::at_most("h/B_m", "0.2", "head over approach width")
                    .by(ISO_1438, Confidence::Memory),
                Limit::at_least("p", "0.45", "vertex height").by(ISO_1438, Confidence::Memory),
                Limit::at_least("B_m", "0.90", "approach width").by(ISO_1438, Confidence::Memory),
            ],
            coefficient: COEFFICIENT,
        },
        Regime {
            name: "partially contracted",
            when: "a notch within 1 degree of 90 that is not fully contracted",
            definitions: &[
                MEAN_WIDTH,
                ("C_e", "C_partial(p/B_m, min(h/p, C_end(p/B_m)))"),
                ("k_h", "k_h_right + dk_h"),
                ("h_e", "h + k_h"),
            ],
            discharge: "8/15*sqrt(2*g)*F_C*C_e*tan(theta/2)*h_e^2.5",
            implicit: Implicit::Nothing,
            solved: None,
            flowing: "h + k_h_right + dk_h",
            beyond: Some("h/p - C_end(p/B_m)"),
            borders,
            limits: &[
                Limit::at_least("h", "0.05", "head").by(ISO_1438, Confidence::Memory),
                Limit::at_most("h", "0.60", "head").by(ISO_1438, Confidence::Memory),
                Limit::at_most("h/p", "1.2", "head over vertex height")
                    .by(ISO_1438, Confidence::Memory),
                Limit::at_most("h/B_m", "0.4", "head over approach width")
                    .by(ISO_1438, Confidence::Memory),
                Limit::at_least("p", "0.10", "vertex height").by(ISO_1438, Confidence::Memory),
                Limit::at_least("B_m", "0.60", "approach width").by(ISO_1438, Confidence::Memory),
                Limit::at_most(
                    "h/p/C_end(p/B_m)",
                    "1.0",
                    "h/p over the end of the published curve for this p/B",
                )
                .by(NBS_421, Confidence::Seen),
            ],
            coefficient: COEFFICIENT,
        },
    ],
    regime_for,
    adjustments: &[PUBLISHED_HEAD_ADJUSTMENT],
    critical: None,
    velocity_of_approach: "inside the coefficient: the gauged head is used; in an approach with sloping \
                           sides B is area over depth at each head",
    drowned: &[],
    modular: ModularLimit {
        ratio: None,
        highest: "-0.061",
        words: "tailwater at least 0.2 ft (0.061 m) below the vertex",
        source: USBR_MANUAL,
        confidence: Confidence::Seen,
    },
    head_measured: thin_plate::HEAD_MEASURED,
    head_in_approach: true,
    control_width: None,
};

/// Contraction is a matter of the installation and of the head that the gauge shows: it is decided once,
/// and no trial changes it.
fn regime_for(values: &Values) -> usize {
    let [h, p] = ["head", "crest_height"].map(|key| values.value(key));
    let width = approach_width(values);
    let full =
        at_most(h / p, 0.4) && at_most(h / width, 0.2) && at_most(0.45, p) && at_most(0.90, width);
    usize::from(!full && is_right(values))
}

/// Where contraction becomes full, or partial, for an installation in which it can.
fn borders(values: &Values) -> &'static [&'static str] {
    let roomy =
        at_most(0.45, values.value("crest_height")) && at_most(0.90, approach_width(values));
    if is_right(values) && roomy { &["h/p - 0.4", "h/B_m - 0.2"] } else { &[] }
}

/// The mean width of the approach: area over depth.
fn approach_width(values: &Values) -> f64 {
    let [h, p, bed] = ["head", "crest_height", "approach_width"].map(|key| values.value(key));
    bed + values.given("approach_side_slope").unwrap_or(0.0) * (h + p)
}

fn at_most(value: f64, bound: f64) -> bool {
    value <= bound * (1.0 + ROUNDING)
}

fn is_right(values: &Values) -> bool {
    let degrees = values.value("notch_angle") / DEGREE;
    (degrees - 90.0).abs() <= RIGHT_ANGLE_TOLERANCE + 1e-9
}

const COEFFICIENT: Coefficient = Coefficient::Published(CoefficientRule {
    words: "1.0 % at 95 % within the limits",
    percent: "1",
    source: ISO_1438,
    confidence: Confidence::Memory,
});

/// Row by row of p/B; beyond the end of a curve its last printed value stands.
#[rustfmt::skip] // a row of the published chart a line
const PARTIAL: &[f64] = &[
    0.578, 0.5785, 0.579,  0.579,  0.579,  0.579,  0.5785, 0.578,  0.5775, 0.5775, 0.577,  0.5765,
    0.578, 0.5785, 0.579,  0.579,  0.579,  0.579,  0.5785, 0.5785, 0.5785, 0.5795, 0.5805, 0.5815,
    0.578, 0.5785, 0.579,  0.579,  0.579,  0.579,  0.5795, 0.5805, 0.5825, 0.585,  0.5875, 0.5905,
    0.578, 0.5785, 0.579,  0.579,  0.579,  0.579,  0.581,  0.5845, 0.5885, 0.5935, 0.599,  0.599,
    0.578, 0.5785, 0.579,  0.5795, 0.5805, 0.584,  0.5895, 0.5895, 0.5895, 0.5895, 0.5895, 0.5895,
    0.578, 0.5785, 0.5795, 0.5815, 0.5845, 0.5925, 0.5925, 0.5925, 0.5925, 0.5925, 0.5925, 0.5925,
    0.578, 0.5785, 0.5815, 0.585,  0.5905, 0.5905, 0.5905, 0.5905, 0.5905, 0.5905, 0.5905, 0.5905,
];

#[cfg(test)]
mod tests {
    use super::*;
    use crate::model::Model;
    use crate::model::structures::Installation;

    #[test]
    fn the_derivative_by_head_reads_as_a_person_would_write_it() {
        let form = Installation::plain(&STRUCTURE).forms().swap_remove(0);
        let mut model = Model::build(&form.blueprint).unwrap();
        let derivative = model.derivative(model.result(), 0);
        assert_eq!(model.text(derivative), "4/3*F_C*C_e*sqrt(2*g)*tan(theta/2)*h_e^1.5");
    }

    #[test]
    fn contraction_follows_the_installation() {
        let regime = |h: f64, p: f64, width: f64, degrees: f64| {
            regime_for(&Values::new(
                [
                    ("head", h),
                    ("crest_height", p),
                    ("approach_width", width),
                    ("notch_angle", degrees * DEGREE),
                ]
                .map(|(key, value)| (key.to_owned(), Some(value))),
            ))
        };
        assert_eq!(regime(0.18, 0.45, 1.2, 89.7), 0);
        assert_eq!(regime(0.19, 0.45, 1.2, 89.7), 1);
        assert_eq!(regime(0.10, 0.41, 1.2, 90.0), 1);
        assert_eq!(regime(0.10, 0.45, 0.8, 91.0), 1);
        assert_eq!(regime(0.10, 0.30, 0.8, 60.0), 0);
    }
}
