//! Broad-crested weir of V-shaped section: critical flow in a triangle, or in a triangle between vertical
//! walls.

use super::approach::{
    APPROACH_WIDTH, FROUDE, RECTANGULAR, THROUGH_TOTAL_HEAD, TOTAL_HEAD, VELOCITY_COEFFICIENT,
    WHILE_MODULAR,
};
use super::{
    Coefficient, CoefficientRule, Constant, CriticalFlow, HeadPosition, Implicit, InputSpec,
    KINETIC_ENERGY_COEFFICIENT, ModularLimit, Regime, Structure,
};
use crate::model::source::{ISO_8333, LONG_THROATED, PRACTICE};
use crate::model::{Confidence, Limit};
use crate::units::Dimension;

const DEGREE: f64 = std::f64::consts::PI / 180.0;

pub(super) static STRUCTURE: Structure = Structure {
    kind: "broad-crested-v-shaped",
    title: "Broad-crested weir, V-shaped",
    standard: ISO_8333,
    inputs: &[
        InputSpec {
            key: "vertex_angle",
            symbol: "theta",
            dimension: Dimension::ANGLE,
            meaning: "full angle of the V",
            default: None,
            domain: [60.0 * DEGREE, 175.0 * DEGREE],
            domain_reason: "60 to 175 degrees are due; a standard describes 90 to 150",
            example: "120 deg",
        },
        InputSpec::length(
            "v_depth",
            "H_b",
            "height of the vertical walls' foot above the vertex",
            "0.30 m",
        ),
        InputSpec::length("crest_height", "p", "height of the vertex above the bed", "0.30 m"),
        InputSpec::length(
            "crest_length_along_flow",
            "L",
            "length of the crest along the flow",
            "0.50 m",
        ),
        InputSpec { example: "1.50 m", ..APPROACH_WIDTH },
        KINETIC_ENERGY_COEFFICIENT,
    ],
    choice: None,
    constants: &[
        Constant {
            symbol: "C_shift",
            value: 0.07,
            dimension: Dimension::NONE,
            meaning: "shift of H/L in the coefficient of long-throated structures, which stands in for the \
                      standard's table, not known here",
            source: LONG_THROATED,
            confidence: Confidence::Memory,
        },
        Constant {
            symbol: "C_exponent",
            value: 0.018,
            dimension: Dimension::NONE,
            meaning: "exponent in the same coefficient",
            source: LONG_THROATED,
            confidence: Confidence::Memory,
        },
    ],
    tables: &[],
    regimes: &[Regime {
        name: "free",
        when: WHILE_MODULAR,
        definitions: &[
            RECTANGULAR,
            TOTAL_HEAD,
            // The coefficient is published for H/L from 0.1 to 1: its ends are held.
            ("C_D", "(min(max(H/L, 0.1), 1) - C_shift)^C_exponent"),
            ("b_top", "2*H_b*tan(theta/2)"),
            (
                "Q_ideal",
                "(4/5)^2.5*sqrt(g/2)*tan(theta/2)*H^2.5 when H <= 1.25*H_b \
                 otherwise (2/3)^1.5*sqrt(g)*b_top*(H - H_b/2)^1.5",
            ),
            VELOCITY_COEFFICIENT,
            FROUDE,
        ],
        discharge: "F_C*C_D*Q_ideal",
        implicit: Implicit::Discharge,
        solved: None,
        flowing: "h",
        beyond: Some("max(0.1 - H/L, H/L - 1)"),
        borders: |_| &[],
        limits: &[
            Limit::at_least("h", "0.06", "head").by(ISO_8333, Confidence::Memory),
            Limit::at_least("h/L", "0.05", "head over crest length")
                .by(ISO_8333, Confidence::Memory),
            Limit::at_least("p", "0.15", "height of the vertex").by(ISO_8333, Confidence::Memory),
            Limit::at_least("theta", "pi/2", "full angle of the V, in rad (90 deg)")
                .by(ISO_8333, Confidence::Memory),
            Limit::at_most("theta", "5/6*pi", "full angle of the V, in rad (150 deg)")
                .by(ISO_8333, Confidence::Memory),
            Limit::at_least("H/L", "0.1", "total head over crest length")
                .by(LONG_THROATED, Confidence::Memory),
            Limit::at_most("H/L", "0.7", "total head over crest length")
                .by(ISO_8333, Confidence::Doubtful),
        ],
        coefficient: Coefficient::Published(CoefficientRule {
            words: "at 95 %: 4 + 3 |H/L - 0.55|^1.5 per cent, of the relation for long-throated structures \
                    that stands in for the standard's table, which is not known here",
            percent: "4 + 3*abs(H/L - 0.55)^1.5",
            source: LONG_THROATED,
            confidence: Confidence::Memory,
        }),
    }],
    regime_for: |_| 0,
    adjustments: &[],
    drowned: &[],
    modular: ModularLimit {
        words: "downstream total head not above about 0.8 of the upstream one; no drowned-flow equation",
        ratio: Some(0.8),
        highest: "M_L*H",
        source: PRACTICE,
        confidence: Confidence::Doubtful,
    },
    critical: Some(CriticalFlow {
        energy: "1.25*(2*alpha*Q^2/(g*tan(theta/2)^2))^(1/5) \
                 when (2*alpha*Q^2/(g*tan(theta/2)^2))^(1/5) <= H_b \
                 otherwise H_b/2 + 1.5*(alpha*(Q/b_top)^2/g)^(1/3)",
        sill: "p",
        width: None,
        approach: ("B", None),
    }),
    velocity_of_approach: THROUGH_TOTAL_HEAD,
    head_measured: HeadPosition {
        words: "3 to 4 times the largest total head upstream",
        nearest: Some("3*H"),
        farthest: Some("4*H"),
        source: ISO_8333,
        confidence: Confidence::Memory,
    },
    head_in_approach: true,
    control_width: None,
};
