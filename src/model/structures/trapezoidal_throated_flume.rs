//! Long-throated flume with a trapezoidal throat: exact critical flow in the throat, total head.

use super::approach::{
    APPROACH_SIDE_SLOPE, FROUDE_TRAPEZOIDAL, THROUGH_TOTAL_HEAD, TOP_WIDTH, TOTAL_HEAD,
    TRAPEZOIDAL, VELOCITY_COEFFICIENT, WHILE_MODULAR,
};
use super::{Implicit, InputSpec, KINETIC_ENERGY_COEFFICIENT, Regime, Structure, throat};
use crate::model::source::ISO_4359;
use crate::model::{Confidence, Limit};

pub(super) static STRUCTURE: Structure = Structure {
    kind: "trapezoidal-throated-flume",
    title: "Trapezoidal-throated flume",
    standard: ISO_4359,
    inputs: &[
        InputSpec::length("throat_bottom_width", "b", "width of the throat's bottom", "0.30 m"),
        InputSpec::number(
            "side_slope",
            "m",
            "side slope of the throat, horizontal per vertical",
            APPROACH_SIDE_SLOPE.domain,
            APPROACH_SIDE_SLOPE.domain_reason,
            "1",
        ),
        InputSpec::length("throat_length", "L", "length of the throat along the flow", "1.20 m"),
        InputSpec::height(
            "throat_invert_height",
            "p",
            "height of the throat's invert above the approach bed; 0 if level",
            "0.15 m",
        ),
        InputSpec::length(
            "approach_bottom_width",
            "B",
            "width of the approach channel at its bed",
            "0.60 m",
        ),
        InputSpec {
            meaning: "side slope of the approach channel, horizontal per vertical",
            default: None,
            example: "1",
            ..APPROACH_SIDE_SLOPE
        },
        KINETIC_ENERGY_COEFFICIENT,
    ],
    choice: None,
    constants: &[throat::DISPLACEMENT],
    tables: &[],
    regimes: &[Regime {
        name: "free",
        when: WHILE_MODULAR,
        definitions: &[
            throat::BED_LOSS,
            ("C_D", "(1 - 2*x_delta*(sqrt(1 + m^2) - m)*L/b)*C_h"),
            TRAPEZOIDAL,
            TOP_WIDTH,
            TOTAL_HEAD,
            // The closed form (4 m H - 3 b + s)/(10 m) loses its digits as m goes to 0; multiplied out
            // with s + 3 b - 4 m H it keeps them, and is 2 H/3 at m = 0.
            ("s", "sqrt(16*m^2*H^2 + 16*m*b*H + 9*b^2)"),
            ("y_c", "4*b*H/(s + 3*b - 4*m*H)"),
            ("A_c", "(b + m*y_c)*y_c"),
            ("W_c", "b + 2*m*y_c"),
            VELOCITY_COEFFICIENT,
            FROUDE_TRAPEZOIDAL,
        ],
        discharge: "F_C*C_D*sqrt(g*A_c^3/W_c)",
        implicit: Implicit::Discharge,
        solved: None,
        flowing: "h - x_delta*L",
        beyond: None,
        borders: |_| &[],
        limits: &[
            throat::LEAST_HEAD,
            throat::LEAST_RATIO,
            throat::MOST_HEAD,
            Limit::at_least("b", "0.10", "width of the throat's bottom")
                .by(ISO_4359, Confidence::Memory),
            throat::MOST_RATIO,
            throat::MOST_FROUDE,
        ],
        coefficient: throat::COEFFICIENT,
    }],
    regime_for: |_| 0,
    adjustments: &[],
    drowned: &[],
    modular: throat::MODULAR,
    critical: Some(throat::CRITICAL_FLOW),
    velocity_of_approach: THROUGH_TOTAL_HEAD,
    head_measured: throat::HEAD_MEASURED,
    head_in_approach: true,
    control_width: Some("throat_bottom_width"),
};
