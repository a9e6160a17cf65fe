//! Streamlined triangular profile weir: the coefficient comes from the user.

use super::approach::{
    APPROACH_WIDTH, FROUDE, RECTANGULAR, RECTANGULAR_CONTROL, THROUGH_TOTAL_HEAD, TOTAL_HEAD,
    VELOCITY_COEFFICIENT, WHILE_MODULAR,
};
use super::{
    Coefficient, HeadPosition, Implicit, InputSpec, KINETIC_ENERGY_COEFFICIENT, ModularLimit,
    Regime, Structure,
};
use crate::model::Confidence;
use crate::model::source::{ISO_9827, PRACTICE};

pub(super) static STRUCTURE: Structure = Structure {
    kind: "streamlined-triangular-profile",
    title: "Streamlined triangular profile weir, coefficient from the user",
    standard: ISO_9827,
    inputs: &[
        InputSpec::length("crest_width", "b", "width of the crest", "2.00 m"),
        InputSpec::length("crest_height", "p", "height of the crest above the bed", "0.40 m"),
        InputSpec { example: "2.00 m", ..APPROACH_WIDTH },
        InputSpec::number(
            "discharge_coefficient",
            "C_D",
            "coefficient of critical flow over the crest, from your copy of the standard or a rating",
            [0.5, 2.0],
            "as it multiplies ideal critical flow it is near 1.2",
            "1.2",
        ),
        KINETIC_ENERGY_COEFFICIENT,
    ],
    choice: None,
    constants: &[],
    tables: &[],
    regimes: &[Regime {
        name: "free",
        when: WHILE_MODULAR,
        definitions: &[RECTANGULAR, TOTAL_HEAD, VELOCITY_COEFFICIENT, FROUDE],
        discharge: "(2/3)^1.5*sqrt(g)*F_C*C_D*b*H^1.5",
        implicit: Implicit::Discharge,
        solved: None,
        flowing: "h",
        beyond: None,
        borders: |_| &[],
        limits: &[super::approach::froude_at_most("0.6").by(PRACTICE, Confidence::Doubtful)],
        coefficient: Coefficient::FromUser {
            inputs: &["discharge_coefficient", "coefficient_factor"],
            why: "the coefficient of this profile and its uncertainty are not known here: state both from \
                  your copy of ISO 9827 or from a rating",
        },
    }],
    regime_for: |_| 0,
    adjustments: &[],
    drowned: &[],
    modular: ModularLimit {
        words: "not known here: state modular_limit in [tailwater] from your copy of the standard",
        ratio: None,
        highest: "M_L*H",
        source: ISO_9827,
        confidence: Confidence::Doubtful,
    },
    critical: Some(RECTANGULAR_CONTROL),
    velocity_of_approach: THROUGH_TOTAL_HEAD,
    head_measured: HeadPosition {
        words: "not known here: see your copy of the standard",
        nearest: None,
        farthest: None,
        source: ISO_9827,
        confidence: Confidence::Doubtful,
    },
    head_in_approach: true,
    control_width: Some("crest_width"),
};
