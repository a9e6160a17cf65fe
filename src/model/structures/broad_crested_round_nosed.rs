//! Broad-crested weir with a rounded nose and a horizontal crest; the coefficient follows from the
//! boundary layer on the crest.

use super::approach::{
    APPROACH_WIDTH, FROUDE, RECTANGULAR, RECTANGULAR_CONTROL, THROUGH_TOTAL_HEAD, TOTAL_HEAD,
    VELOCITY_COEFFICIENT, WHILE_MODULAR,
};
use super::{
    Coefficient, CoefficientRule, HeadPosition, Implicit, InputSpec, KINETIC_ENERGY_COEFFICIENT,
    ModularLimit, Regime, Structure,
};
use crate::model::source::{ISO_4374, PRACTICE};
use crate::model::{Confidence, Limit};

pub(super) static STRUCTURE: Structure = Structure {
    kind: "broad-crested-round-nosed",
    title: "Broad-crested weir, round nose and horizontal crest",
    standard: ISO_4374,
    inputs: &[
        InputSpec::length("crest_width", "b", "width of the crest", "1.50 m"),
        InputSpec::length("crest_height", "p", "height of the crest above the bed", "0.40 m"),
        InputSpec::length(
            "crest_length_along_flow",
            "L",
            "length of the level part of the crest along the flow, without the nose",
            "0.80 m",
        ),
        InputSpec { example: "1.50 m", ..APPROACH_WIDTH },
        InputSpec::number(
            "displacement_thickness_ratio",
            "x_delta",
            "displacement thickness over crest length: 0.003 for a well-finished crest, 0.005 for \
             good field concrete",
            [0.0, 0.02],
            "a boundary layer takes between 0 and 0.02 of the length",
            "0.003",
        )
        .or(0.003),
        KINETIC_ENERGY_COEFFICIENT,
    ],
    choice: None,
    constants: &[],
    tables: &[],
    regimes: &[Regime {
        name: "free",
        when: WHILE_MODULAR,
        definitions: &[
            ("C_b", "1 - 2*x_delta*L/b"),
            super::throat::BED_LOSS,
            ("C_D", "C_b*C_h"),
            RECTANGULAR,
            TOTAL_HEAD,
            VELOCITY_COEFFICIENT,
            FROUDE,
        ],
        discharge: "(2/3)^1.5*sqrt(g)*F_C*C_D*b*H^1.5",
        implicit: Implicit::Discharge,
        solved: None,
        flowing: "h - x_delta*L",
        beyond: None,
        borders: |_| &[],
        limits: &[
            Limit::at_least("h", "0.06", "head").by(ISO_4374, Confidence::Memory),
            Limit::at_least("h/L", "0.05", "head over crest length")
                .by(ISO_4374, Confidence::Memory),
            Limit::at_least("p", "0.15", "crest height").by(ISO_4374, Confidence::Memory),
            Limit::at_most("h/p", "1.5", "head over crest height").by(ISO_4374, Confidence::Memory),
            Limit::at_least("b", "0.30", "crest width").by(ISO_4374, Confidence::Memory),
            Limit::at_least("b/H", "1", "crest width over total head")
                .by(ISO_4374, Confidence::Memory),
            Limit::at_least("b/L", "0.2", "crest width over crest length")
                .by(ISO_4374, Confidence::Memory),
            Limit::at_most("H/L", "0.57", "total head over crest length")
                .by(ISO_4374, Confidence::Memory),
        ],
        coefficient: Coefficient::Published(CoefficientRule {
            words: "at 95 %: 2 (21 - 20 C_D) per cent (2 % at C_D = 1, 3.2 % at 0.97)",
            percent: "2*(21 - 20*C_D)",
            source: ISO_4374,
            confidence: Confidence::Memory,
        }),
    }],
    regime_for: |_| 0,
    adjustments: &[],
    drowned: &[],
    modular: ModularLimit {
        words: "downstream total head not above about 0.66 of the upstream one with a vertical face at \
                low H/p, up to 0.8 above H/p of 0.5; no drowned-flow equation",
        ratio: Some(0.66),
        highest: "M_L*H",
        source: PRACTICE,
        confidence: Confidence::Doubtful,
    },
    critical: Some(RECTANGULAR_CONTROL),
    velocity_of_approach: THROUGH_TOTAL_HEAD,
    head_measured: HeadPosition {
        words: "3 to 4 times the largest total head upstream of the nose",
        nearest: Some("3*H"),
        farthest: Some("4*H"),
        source: ISO_4374,
        confidence: Confidence::Memory,
    },
    head_in_approach: true,
    control_width: Some("crest_width"),
};
