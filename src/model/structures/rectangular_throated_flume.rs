//! Long-throated flume with a rectangular throat, total head with velocity of approach.

use super::{
    CoefficientRule, Constant, InputSpec, KINETIC_ENERGY_COEFFICIENT, LENGTH_REASON, Regime,
    Statement, Structure,
};
use crate::model::source::{ISO_4359, PRACTICE};
use crate::model::{Confidence, Limit};
use crate::units::Dimension;

pub(super) static STRUCTURE: Structure = Structure {
    kind: "rectangular-throated-flume",
    title: "Rectangular-throated flume",
    standard: ISO_4359,
    inputs: &[
        InputSpec::length("throat_width", "b", "width of the throat", "0.60 m"),
        InputSpec::length("throat_length", "L", "length of the throat along the flow", "1.20 m"),
        InputSpec {
            domain: [0.0, 100.0],
            domain_reason: LENGTH_REASON,
            ..InputSpec::length(
                "throat_invert_height",
                "p",
                "height of the throat's invert above the approach bed; 0 if level",
                "0.20 m",
            )
        },
        InputSpec::length("approach_width", "B", "width of the approach channel", "1.00 m"),
        KINETIC_ENERGY_COEFFICIENT,
    ],
    constants: &[Constant {
        symbol: "x_delta",
        value: 0.003,
        dimension: Dimension::NONE,
        meaning: "displacement thickness of the boundary layer over throat length, smooth surface",
        source: ISO_4359,
        confidence: Confidence::Memory,
    }],
    tables: &[],
    regimes: &[Regime {
        name: "modular",
        when: "always: the equation holds while the flow is modular",
        definitions: &[
            ("C_D", "(1 - 2*x_delta*L/b)*(1 - x_delta*L/h)^1.5"),
            ("Q", "(2/3)^1.5*sqrt(g)*F_C*C_D*b*H^1.5"),
            ("A", "B*(h + p)"),
            ("C_V", "(H/h)^1.5"),
        ],
        // At the largest possible flow the velocity head is a third of the total head.
        unknown: Some(["H", "H = h + alpha*Q^2/(2*g*A^2)", "h", "1.5*h"]),
        flowing: "h - x_delta*L",
        beyond: None,
        limits: &[
            Limit::at_least("h", 0.05, "head").by(ISO_4359, Confidence::Memory),
            Limit::at_least("h/L", 0.05, "head over throat length")
                .by(ISO_4359, Confidence::Memory),
            Limit::at_most("h", 2.0, "head").by(ISO_4359, Confidence::Memory),
            Limit::at_least("b", 0.10, "throat width").by(ISO_4359, Confidence::Memory),
            Limit::at_most("h/b", 3.0, "head over throat width").by(ISO_4359, Confidence::Memory),
            Limit::at_most("h/L", 0.67, "head over throat length").by(ISO_4359, Confidence::Memory),
            Limit::at_most(
                "min(b*h/A/0.7, Q/(A*sqrt(g*A/B))/0.5)",
                1.0,
                "the smaller of area ratio over 0.7 and Froude number of the approach over 0.5",
            )
            .by(ISO_4359, Confidence::Memory),
        ],
        coefficient: CoefficientRule {
            words: "at 95 %: 1 + 20 (C_V - C_D) per cent; 2 per cent more where h/L is above 0.5",
            percent: "1 + 20*(C_V - C_D) + (0 when h <= 0.5*L otherwise 2)",
            source: ISO_4359,
            confidence: Confidence::Memory,
        },
    }],
    regime_for: |_| 0,
    adjustments: &[],
    velocity_of_approach: "through the total head H, an unknown solved with the discharge",
    modular: Statement {
        text: "upstream total head at least 1.25 times the downstream one (a limit of 0.80); 0.75 for \
               an abrupt exit, up to 0.9 with a gradual expansion of 1:6",
        source: PRACTICE,
        confidence: Confidence::Doubtful,
    },
    head_measured: Statement {
        text: "3 to 4 times the largest head upstream of the start of the contraction",
        source: ISO_4359,
        confidence: Confidence::Memory,
    },
};
