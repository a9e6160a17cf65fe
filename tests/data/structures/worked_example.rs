//! A rectangular brink: what it is, which equation.

use super::{
    Coefficient, CoefficientRule, Constant, HeadPosition, Implicit, InputSpec, ModularLimit,
    Regime, Structure,
};
use crate::model::source::PRACTICE;
use crate::model::{Confidence, Limit};
use crate::units::Dimension;

pub(super) static STRUCTURE: Structure = Structure {
    kind: "brink",
    title: "Rectangular brink",
    standard: PRACTICE,
    inputs: &[InputSpec::length("channel_width", "b", "width of the channel", "0.60 m")],
    choice: None,
    constants: &[Constant {
        symbol: "C",
        value: 1.66,
        dimension: Dimension::NONE,
        meaning: "coefficient",
        source: PRACTICE,
        confidence: Confidence::Memory,
    }],
    tables: &[],
    regimes: &[Regime {
        name: "free",
        when: "always",
        definitions: &[("y_c", "h/0.715")],
        discharge: "F_C*C*b*sqrt(g)*h^1.5",
        implicit: Implicit::Nothing,
        solved: None,
        flowing: "h",
        beyond: None,
        borders: |_| &[],
        limits: &[
            Limit::at_least("h", "0.04", "depth at the brink").by(PRACTICE, Confidence::Memory)
        ],
        coefficient: Coefficient::Published(CoefficientRule {
            words: "2 % at 95 %",
            percent: "2",
            source: PRACTICE,
            confidence: Confidence::Doubtful,
        }),
    }],
    regime_for: |_| 0,
    adjustments: &[],
    drowned: &[],
    modular: ModularLimit {
        words: "not submerged",
        ratio: None,
        highest: "-y_c",
        source: PRACTICE,
        confidence: Confidence::Memory,
    },
    critical: None,
    velocity_of_approach: "none: inside the coefficient",
    head_measured: HeadPosition {
        words: "at the brink",
        nearest: None,
        farthest: None,
        source: PRACTICE,
        confidence: Confidence::Memory,
    },
    head_in_approach: false,
    control_width: None,
};
