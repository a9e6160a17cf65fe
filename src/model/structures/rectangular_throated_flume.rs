//! Long-throated flume with a rectangular throat, total head with velocity of approach.

use super::approach::{
    APPROACH_SIDE_SLOPE, APPROACH_WIDTH, FROUDE_TRAPEZOIDAL, RECTANGULAR_CONTROL,
    THROUGH_TOTAL_HEAD, TOP_WIDTH, TOTAL_HEAD, TRAPEZOIDAL, VELOCITY_COEFFICIENT, WHILE_MODULAR,
};
use super::{
    CriticalFlow, Implicit, InputSpec, KINETIC_ENERGY_COEFFICIENT, Regime, Structure, throat,
};
use crate::model::source::ISO_4359;
use crate::model::{Confidence, Limit};

pub(super) static STRUCTURE: Structure = Structure {
    kind: "rectangular-throated-flume",
    title: "Rectangular-throated flume",
    standard: ISO_4359,
    inputs: &[
        InputSpec::length("throat_width", "b", "width of the throat", "0.60 m"),
        InputSpec::length("throat_length", "L", "length of the throat along the flow", "1.20 m"),
        InputSpec::height(
            "throat_invert_height",
            "p",
            "height of the throat's invert above the approach bed; 0 if level",
            "0.20 m",
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
            ("C_D", "(1 - 2*x_delta*L/b)*C_h"),
            TRAPEZOIDAL,
            TOP_WIDTH,
            TOTAL_HEAD,
            VELOCITY_COEFFICIENT,
            FROUDE_TRAPEZOIDAL,
        ],
        discharge: "(2/3)^1.5*sqrt(g)*F_C*C_D*b*H^1.5",
        implicit: Implicit::Discharge,
        solved: None,
        flowing: "h - x_delta*L",
        beyond: None,
        borders: |_| &[],
        limits: &[
            throat::LEAST_HEAD,
            throat::LEAST_RATIO,
            throat::MOST_HEAD,
            Limit::at_least("b", "0.10", "throat width").by(ISO_4359, Confidence::Memory),
            Limit::at_most("h/b", "3", "head over throat width").by(ISO_4359, Confidence::Memory),
            throat::MOST_RATIO,
            Limit::at_most(
                "min(b*h/A/0.7, Fr/0.5)",
                "1",
                "the smaller of area ratio over 0.7 and Froude number of the approach over 0.5",
            )
            .by(ISO_4359, Confidence::Memory),
        ],
        coefficient: throat::COEFFICIENT,
    }],
    regime_for: |_| 0,
    adjustments: &[],
    drowned: &[],
    modular: throat::MODULAR,
    critical: Some(CriticalFlow { approach: ("B", Some("m_a")), ..RECTANGULAR_CONTROL }),
    velocity_of_approach: THROUGH_TOTAL_HEAD,
    head_measured: throat::HEAD_MEASURED,
    head_in_approach: true,
    control_width: Some("throat_width"),
};
