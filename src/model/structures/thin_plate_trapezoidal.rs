//! Trapezoidal thin-plate weir, side slopes 1 horizontal to 4 vertical.

use super::approach::{APPROACH_SIDE_SLOPE, APPROACH_WIDTH, MEAN_WIDTH};
use super::{
    Coefficient, CoefficientRule, Constant, HeadPosition, Implicit, InputSpec, ModularLimit,
    Regime, Structure,
};
use crate::model::source::{BOS, USBR_MANUAL};
use crate::model::{Confidence, Limit};
use crate::units::Dimension;

pub(super) static STRUCTURE: Structure = Structure {
    kind: "thin-plate-trapezoidal",
    title: "Trapezoidal thin-plate weir, side slopes 1:4",
    standard: USBR_MANUAL,
    inputs: &[
        InputSpec::length("crest_width", "b", "width of the crest (bottom)", "1.00 m"),
        InputSpec { example: "2.50 m", ..APPROACH_WIDTH },
        InputSpec::length("crest_height", "p", "height of the crest above the bed", "0.60 m"),
        APPROACH_SIDE_SLOPE,
    ],
    choice: None,
    constants: &[Constant {
        symbol: "C_published",
        // 3.367 ft^0.5/s.
        value: 1.8589,
        dimension: Dimension::ROOT_LENGTH_PER_TIME,
        meaning: "coefficient, 3.367 in feet and seconds; gravity is in it",
        source: USBR_MANUAL,
        confidence: Confidence::Seen,
    }],
    tables: &[],
    regimes: &[Regime {
        name: "fully contracted",
        when: "always",
        definitions: &[MEAN_WIDTH],
        discharge: "F_C*C_published*b*h^1.5",
        implicit: Implicit::Nothing,
        solved: None,
        flowing: "h",
        beyond: None,
        borders: |_| &[],
        limits: &[
            Limit::at_least("h", "0.06", "head").by(BOS, Confidence::Memory),
            Limit::at_most("h", "0.60", "head").by(BOS, Confidence::Memory),
            Limit::at_least("p", "0.30", "crest height").by(BOS, Confidence::Memory),
            Limit::at_most("h/p", "0.5", "head over crest height").by(BOS, Confidence::Memory),
            Limit::at_least("(B_m - b)/2", "0.30", "distance from the crest to the bank")
                .by(BOS, Confidence::Memory),
            Limit::at_least(
                "(B_m - b)/(2*h)",
                "2",
                "distance from the crest to the bank over head",
            )
            .by(BOS, Confidence::Memory),
            Limit::at_most("h/b", "1/3", "head over crest width, for the stated accuracy")
                .by(USBR_MANUAL, Confidence::Seen),
        ],
        coefficient: Coefficient::Published(CoefficientRule {
            words: "5 %; the level is not stated, taken as 95 %",
            percent: "5",
            source: USBR_MANUAL,
            confidence: Confidence::Seen,
        }),
    }],
    regime_for: |_| 0,
    adjustments: &[],
    drowned: &[],
    modular: ModularLimit {
        words: "free nappe: tailwater at least 0.05 m below the crest",
        ratio: None,
        highest: "-0.05",
        source: BOS,
        confidence: Confidence::Memory,
    },
    critical: None,
    velocity_of_approach: "left out: the limits keep the approach slow, and a faster one passes more \
                           than the equation says",
    head_measured: HeadPosition {
        words: "at least 4 times the largest head upstream of the plate",
        nearest: Some("4*h"),
        farthest: None,
        source: BOS,
        confidence: Confidence::Memory,
    },
    head_in_approach: true,
    control_width: Some("crest_width"),
};
