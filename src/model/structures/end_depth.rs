//! Free overfall of a rectangular channel: discharge from the depth at the brink.

use super::{
    Choice, Coefficient, CoefficientRule, HeadPosition, Implicit, InputSpec, ModularLimit, Regime,
    Structure,
};
use crate::model::source::ISO_18481;
use crate::model::{Confidence, Limit};
use crate::units::Dimension;

pub(super) static STRUCTURE: Structure = Structure {
    kind: "end-depth",
    title: "Free overfall, end depth of a rectangular channel",
    standard: ISO_18481,
    inputs: &[InputSpec::length("channel_width", "b", "width of the channel", "0.80 m")],
    choice: Some(Choice {
        key: "nappe",
        meaning: "coefficient of the nappe: confined between walls that go on, or unconfined",
        symbols: &[
            ("C", Dimension::NONE, "coefficient"),
            ("X", Dimension::NONE, "its uncertainty, per cent at 95 %"),
        ],
        sets: &[("confined", &[1.66, 2.0]), ("unconfined", &[1.69, 3.0])],
        example: "confined",
        source: ISO_18481,
        confidence: Confidence::MemoryConfirmed,
    }),
    constants: &[],
    tables: &[],
    regimes: &[Regime {
        name: "free",
        when: "horizontal or mild slope, subcritical approach, ventilated nappe",
        definitions: &[],
        discharge: "F_C*C*b*sqrt(g)*h^1.5",
        implicit: Implicit::Nothing,
        solved: None,
        flowing: "h",
        beyond: None,
        borders: |_| &[],
        limits: &[
            Limit::at_least("h", "0.04", "depth at the brink").by(ISO_18481, Confidence::Memory),
            Limit::at_least("b", "0.30", "channel width").by(ISO_18481, Confidence::Memory),
        ],
        coefficient: Coefficient::Published(CoefficientRule {
            words: "at 95 %: 2 % confined, 3 % unconfined; more on a slope",
            percent: "X",
            source: ISO_18481,
            confidence: Confidence::Doubtful,
        }),
    }],
    regime_for: |_| 0,
    adjustments: &[],
    drowned: &[],
    modular: ModularLimit {
        words: "free fall: the tailwater stays below the bed by at least the depth at the brink",
        ratio: None,
        highest: "-h",
        source: ISO_18481,
        confidence: Confidence::Memory,
    },
    critical: None,
    velocity_of_approach: "inside the coefficient: depth at the brink over critical depth is 0.713 \
                           confined, 0.705 unconfined",
    head_measured: HeadPosition {
        words: "depth at the brink itself, on the centre line",
        nearest: None,
        farthest: None,
        source: ISO_18481,
        confidence: Confidence::Memory,
    },
    head_in_approach: false,
    control_width: None,
};
