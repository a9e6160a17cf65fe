//! Triangular profile weir 1:2/1:5, total head with velocity of approach; drowned flow by the tailwater
//! or by a crest tapping.

use super::approach::{
    APPROACH_WIDTH, FROUDE, RECTANGULAR, RECTANGULAR_CONTROL, THROUGH_TOTAL_HEAD, TOTAL_HEAD,
    VELOCITY_COEFFICIENT, froude_at_most,
};
use super::drowned::DROWNED_FACTOR;
use super::{
    Coefficient, CoefficientRule, Constant, DrownedFlow, HeadPosition, Implicit, InputSpec,
    KINETIC_ENERGY_COEFFICIENT, ModularLimit, ModularRatio, Regime, SecondHeadAt, Structure,
};
use crate::model::source::{ISO_4360, ISO_4360_2008};
use crate::model::{Confidence, Limit};
use crate::units::Dimension;

pub(super) static STRUCTURE: Structure = Structure {
    kind: "triangular-profile",
    title: "Triangular profile weir, slopes 1:2 and 1:5",
    standard: ISO_4360,
    inputs: &[
        InputSpec::length("crest_width", "b", "width of the crest", "2.00 m"),
        InputSpec::length("crest_height", "p", "height of the crest above the bed", "0.40 m"),
        InputSpec { example: "2.00 m", ..APPROACH_WIDTH },
        KINETIC_ENERGY_COEFFICIENT,
    ],
    choice: None,
    constants: &[
        Constant {
            symbol: "C_published",
            value: 1.163,
            dimension: Dimension::NONE,
            meaning: "coefficient; (2/3)^1.5 of it is the well-known 0.633",
            source: ISO_4360,
            confidence: Confidence::MemoryConfirmed,
        },
        Constant {
            symbol: "k_h_published",
            value: 0.0003,
            dimension: Dimension::LENGTH,
            meaning: "head adjustment for surface tension and viscosity",
            source: ISO_4360,
            confidence: Confidence::MemoryConfirmed,
        },
    ],
    tables: &[],
    regimes: &[Regime {
        name: "1:2/1:5",
        when: "always",
        definitions: &[
            ("C_D", "C_published*(1 - k_h_published/h)^1.5"),
            ("Q_modular", "(2/3)^1.5*sqrt(g)*F_C*C_D*b*H^1.5"),
            RECTANGULAR,
            TOTAL_HEAD,
            VELOCITY_COEFFICIENT,
            FROUDE,
        ],
        discharge: "f*Q_modular",
        implicit: Implicit::Discharge,
        solved: None,
        flowing: "h - k_h_published",
        beyond: None,
        borders: |_| &[],
        limits: &[
            Limit::at_least("h", "0.03", "head (smooth metal crest; 0.06 m for fine concrete)")
                .by(ISO_4360, Confidence::Memory),
            Limit::at_least("p", "0.06", "crest height").by(ISO_4360, Confidence::Memory),
            Limit::at_least("b", "0.30", "crest width").by(ISO_4360, Confidence::Memory),
            Limit::at_most("h/p", "3.5", "head over crest height").by(ISO_4360, Confidence::Memory),
            Limit::at_least("b/h", "2", "crest width over head").by(ISO_4360, Confidence::Memory),
            froude_at_most("0.6").by(ISO_4360, Confidence::Doubtful),
        ],
        coefficient: Coefficient::Published(CoefficientRule {
            words: "at 95 %: 10 C_V - 9 per cent (1 % at C_V = 1, 2 % at 1.1)",
            percent: "10*C_V - 9",
            source: ISO_4360,
            confidence: Confidence::Memory,
        }),
    }],
    regime_for: |_| 0,
    adjustments: &[],
    drowned: &[
        DrownedFlow {
            name: "tailwater",
            when: "the second head is that of the tailwater, whose velocity head is left out",
            definitions: &[
                ("S", "max(h_2, 0)/H"),
                ("f_low", "1.035*(0.817 - S^4)^0.0647"),
                ("f_high", "8.686 - 8.403*S"),
                // Beyond 0.985 nothing is published: the root of a negative number has no value.
                (
                    "f_published",
                    "f_low when S <= 0.93 otherwise f_high when S <= 0.985 otherwise sqrt(0.985 - S)",
                ),
                DROWNED_FACTOR,
            ],
            needs: &[],
            beyond: None,
            limits: &[],
            reads: SecondHeadAt::Tailwater,
            ratio: ModularRatio::OfStructure,
            uncertainty: None,
            source: ISO_4360,
            confidence: Confidence::MemoryConfirmed,
        },
        DrownedFlow {
            name: "crest tapping",
            when: "the second head is that at the tapping, 20 mm downstream of the crest line",
            definitions: &[
                ("S", "max(h_2, 0)/H"),
                ("f_published", "1.04*(0.945 - S^1.5)^0.256"),
                DROWNED_FACTOR,
            ],
            needs: &[],
            beyond: None,
            limits: &[],
            reads: SecondHeadAt::CrestTapping,
            ratio: ModularRatio::Own(0.24),
            uncertainty: None,
            source: ISO_4360,
            confidence: Confidence::MemoryConfirmed,
        },
    ],
    modular: ModularLimit {
        words: "downstream total head not above 0.75 of the upstream one; tapping head not above 0.24 of it",
        ratio: Some(0.75),
        highest: "M_L*H",
        source: ISO_4360_2008,
        confidence: Confidence::Seen,
    },
    critical: Some(RECTANGULAR_CONTROL),
    velocity_of_approach: THROUGH_TOTAL_HEAD,
    head_measured: HeadPosition {
        words: "6 times the crest height upstream of the crest line, or 2 times the largest total head \
                from the toe of the weir, whichever the edition gives",
        nearest: Some("min(6*p, 2*p + 2*H)"),
        farthest: None,
        source: ISO_4360,
        confidence: Confidence::Doubtful,
    },
    head_in_approach: true,
    control_width: Some("crest_width"),
};
