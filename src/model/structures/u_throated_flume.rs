//! Long-throated flume with a U-shaped throat: exact critical flow, the critical depth an unknown.

use super::approach::{
    APPROACH_SIDE_SLOPE, APPROACH_WIDTH, FROUDE_TRAPEZOIDAL, THROUGH_TOTAL_HEAD, TOP_WIDTH,
    TOTAL_HEAD, TRAPEZOIDAL, VELOCITY_COEFFICIENT, WHILE_MODULAR,
};
use super::{Implicit, InputSpec, KINETIC_ENERGY_COEFFICIENT, Regime, Solved, Structure, throat};
use crate::model::source::ISO_4359;
use crate::model::{Confidence, Limit};

pub(super) static STRUCTURE: Structure = Structure {
    kind: "u-throated-flume",
    title: "U-throated flume",
    standard: ISO_4359,
    inputs: &[
        InputSpec::length(
            "throat_diameter",
            "D",
            "diameter of the throat's invert, and width between its walls",
            "0.30 m",
        ),
        InputSpec::length("throat_length", "L", "length of the throat along the flow", "0.60 m"),
        InputSpec::height(
            "throat_invert_height",
            "p",
            "height of the throat's invert above the approach bed; 0 if level",
            "0 m",
        ),
        APPROACH_WIDTH,
        APPROACH_SIDE_SLOPE,
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
            ("C_D", "(1 - 2*x_delta*L/D)*C_h"),
            TRAPEZOIDAL,
            TOP_WIDTH,
            // Below the springing the water fills a segment of the circle, above it a rectangle as well.
            ("theta", "2*arccos(1 - 2*y_c/D)"),
            (
                "A_c",
                "D^2/8*(theta - sin(theta)) when y_c <= D/2 otherwise pi*D^2/8 + D*(y_c - D/2)",
            ),
            ("W_c", "D*sin(theta/2) when y_c <= D/2 otherwise D"),
            TOTAL_HEAD,
            VELOCITY_COEFFICIENT,
            FROUDE_TRAPEZOIDAL,
        ],
        discharge: "F_C*C_D*sqrt(g*A_c^3/W_c)",
        implicit: Implicit::Discharge,
        // Critical depth is between 2/3 of the total head (rectangle) and 3/4 (deep in the circle).
        solved: Some(Solved {
            name: "y_c",
            equation: "H = y_c + A_c/(2*W_c)",
            from: "0.66*H",
            to: "0.76*H",
        }),
        flowing: "h - x_delta*L",
        beyond: None,
        borders: |_| &[],
        limits: &[
            throat::LEAST_HEAD,
            throat::LEAST_RATIO,
            throat::MOST_HEAD,
            Limit::at_least("D", "0.10", "diameter of the throat").by(ISO_4359, Confidence::Memory),
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
    control_width: Some("throat_diameter"),
};
