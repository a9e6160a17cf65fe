//! Triangular profile weir, slopes 1:2 and 1:5, modular flow, total head with velocity of approach.

use super::{
    CoefficientRule, Constant, InputSpec, KINETIC_ENERGY_COEFFICIENT, Regime, Statement, Structure,
};
use crate::model::source::{ISO_4360, ISO_4360_2008};
use crate::model::{Confidence, Limit};
use crate::units::Dimension;

pub(super) static STRUCTURE: Structure = Structure {
    kind: "triangular-profile",
    title: "Triangular profile weir, slopes 1:2 upstream and 1:5 downstream",
    standard: ISO_4360,
    inputs: &[
        InputSpec::length("crest_width", "b", "width of the crest", "3.00 m"),
        InputSpec::length("crest_height", "p", "height of the crest above the bed", "0.50 m"),
        InputSpec::length("approach_width", "B", "width of the approach channel", "3.00 m"),
        KINETIC_ENERGY_COEFFICIENT,
    ],
    constants: &[
        Constant {
            symbol: "C_published",
            value: 1.163,
            dimension: Dimension::NONE,
            meaning: "coefficient on (2/3)^1.5 sqrt(g) b H^1.5; gives the well-known 0.633",
            source: ISO_4360,
            confidence: Confidence::MemoryConfirmed,
        },
        Constant {
            symbol: "k_h_published",
            value: 0.0003,
            dimension: Dimension::LENGTH,
            meaning: "head taken up by surface tension and viscosity",
            source: ISO_4360,
            confidence: Confidence::MemoryConfirmed,
        },
    ],
    tables: &[],
    regimes: &[Regime {
        name: "modular",
        when: "always: the equation holds while the flow is modular",
        definitions: &[
            ("C_D", "C_published*(1 - k_h_published/h)^1.5"),
            ("Q", "(2/3)^1.5*sqrt(g)*F_C*C_D*b*H^1.5"),
            ("A", "B*(h + p)"),
            ("C_V", "(H/h)^1.5"),
        ],
        // At the largest possible flow the velocity head is a third of the total head.
        unknown: Some(["H", "H = h + alpha*Q^2/(2*g*A^2)", "h", "1.5*h"]),
        flowing: "h - k_h_published",
        beyond: None,
        limits: &[
            Limit::at_least("h", 0.03, "head (smooth metal crest; 0.06 m for fine concrete)")
                .by(ISO_4360, Confidence::Memory),
            Limit::at_least("p", 0.06, "crest height").by(ISO_4360, Confidence::Memory),
            Limit::at_least("b", 0.30, "crest width").by(ISO_4360, Confidence::Memory),
            Limit::at_most("h/p", 3.5, "head over crest height").by(ISO_4360, Confidence::Memory),
            Limit::at_least("b/h", 2.0, "crest width over head").by(ISO_4360, Confidence::Memory),
            Limit::at_most("Q/(A*sqrt(g*A/B))", 0.6, "Froude number of the approach")
                .by(ISO_4360, Confidence::Doubtful),
        ],
        coefficient: CoefficientRule {
            words: "at 95 %: 10 C_V - 9 per cent (1 % at C_V = 1, 2 % at 1.1)",
            percent: "10*C_V - 9",
            source: ISO_4360,
            confidence: Confidence::Memory,
        },
    }],
    regime_for: |_| 0,
    adjustments: &[],
    velocity_of_approach: "through the total head H, an unknown solved with the discharge",
    modular: Statement {
        text: "downstream total head not above 0.75 of the upstream one",
        source: ISO_4360_2008,
        confidence: Confidence::Seen,
    },
    head_measured: Statement {
        text: "6 times the crest height upstream of the crest line, or 2 times the largest total head \
               from the toe of the weir, whichever the edition gives",
        source: ISO_4360,
        confidence: Confidence::Doubtful,
    },
};
