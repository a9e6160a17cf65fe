//! Trapezoidal-profile (embankment) weir with both faces at 1:2.

use super::approach::{
    APPROACH_WIDTH, FROUDE, RECTANGULAR, RECTANGULAR_CONTROL, THROUGH_TOTAL_HEAD, TOTAL_HEAD,
    VELOCITY_COEFFICIENT, WHILE_MODULAR, froude_at_most,
};
use super::{
    Coefficient, HeadPosition, Implicit, InputSpec, KINETIC_ENERGY_COEFFICIENT, ModularLimit,
    Regime, Structure,
};
use crate::model::Confidence;
use crate::model::source::{FRITZ_HAGER, ISO_4362, PRACTICE};

pub(super) static STRUCTURE: Structure = Structure {
    kind: "trapezoidal-profile",
    title: "Trapezoidal-profile weir, both faces 1:2",
    standard: ISO_4362,
    inputs: &[
        InputSpec::length("crest_width", "b", "width of the crest", "2.00 m"),
        InputSpec::length("crest_height", "p", "height of the crest above the bed", "0.50 m"),
        InputSpec::length(
            "crest_length_along_flow",
            "L",
            "length of the level crest along the flow",
            "0.40 m",
        ),
        InputSpec { example: "2.00 m", ..APPROACH_WIDTH },
        KINETIC_ENERGY_COEFFICIENT,
    ],
    choice: None,
    constants: &[
        super::Constant {
            symbol: "C_mean",
            value: 0.43,
            dimension: crate::units::Dimension::NONE,
            meaning: "mean coefficient of the embankment; stands in for the standard's tables, which are \
                      not known here",
            source: FRITZ_HAGER,
            confidence: Confidence::Memory,
        },
        super::Constant {
            symbol: "C_swing",
            value: 0.06,
            dimension: crate::units::Dimension::NONE,
            meaning: "swing of the coefficient with H/(H + L)",
            source: FRITZ_HAGER,
            confidence: Confidence::Memory,
        },
    ],
    tables: &[],
    regimes: &[Regime {
        name: "slopes 1:2",
        when: WHILE_MODULAR,
        definitions: &[
            RECTANGULAR,
            TOTAL_HEAD,
            ("xi", "H/(H + L)"),
            ("C_q", "C_mean + C_swing*sin(pi*(xi - 0.55))"),
            VELOCITY_COEFFICIENT,
            FROUDE,
        ],
        discharge: "F_C*C_q*b*sqrt(2*g)*H^1.5",
        implicit: Implicit::Discharge,
        solved: None,
        flowing: "h",
        beyond: None,
        borders: |_| &[],
        limits: &[froude_at_most("0.6").by(PRACTICE, Confidence::Doubtful)],
        coefficient: Coefficient::FromUser {
            inputs: &["coefficient_factor"],
            why: "no uncertainty of this coefficient is known here: state one (4 % at 95 % would be prudent)",
        },
    }],
    regime_for: |_| 0,
    adjustments: &[],
    drowned: &[],
    modular: ModularLimit {
        words: "downstream total head not above 0.75 to 0.80 of the upstream one; no drowned-flow equation",
        ratio: Some(0.75),
        highest: "M_L*H",
        source: PRACTICE,
        confidence: Confidence::Doubtful,
    },
    critical: Some(RECTANGULAR_CONTROL),
    velocity_of_approach: THROUGH_TOTAL_HEAD,
    head_measured: HeadPosition {
        words: "at least 3 times the largest total head upstream of the toe",
        nearest: Some("2*p + 3*H"),
        farthest: None,
        source: PRACTICE,
        confidence: Confidence::Doubtful,
    },
    head_in_approach: true,
    control_width: Some("crest_width"),
};
