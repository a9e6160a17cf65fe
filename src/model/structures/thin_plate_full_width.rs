//! Thin-plate weir over the full width of the channel, Rehbock form; drowned flow by two published
//! factors.

use super::drowned::DROWNED_FACTOR;
use super::thin_plate::{self, HEAD_ADJUSTMENT, PUBLISHED_HEAD_ADJUSTMENT};
use super::{
    CoefficientRule, Constant, DrownedFlow, Implicit, InputSpec, ModularRatio, Regime,
    SecondHeadAt, Structure,
};
use crate::model::source::{ISO_1438, REHBOCK, VILLEMONTE};
use crate::model::{Citation, Confidence, Limit};
use crate::units::Dimension;

pub(super) static STRUCTURE: Structure = Structure {
    kind: "thin-plate-full-width",
    title: "Full-width thin-plate weir (Rehbock)",
    standard: ISO_1438,
    inputs: &[
        InputSpec::length("crest_width", "b", "width of the crest and of the channel", "0.80 m"),
        InputSpec::length("crest_height", "p", "height of the crest above the bed", "0.45 m"),
        HEAD_ADJUSTMENT,
    ],
    choice: None,
    constants: &[
        Constant {
            symbol: "k_h_published",
            value: 0.0012,
            dimension: Dimension::LENGTH,
            meaning: "head adjustment k_h",
            source: REHBOCK,
            confidence: Confidence::MemoryConfirmed,
        },
        Constant {
            symbol: "C_0",
            value: 0.602,
            dimension: Dimension::NONE,
            meaning: "coefficient at h/p = 0",
            source: REHBOCK,
            confidence: Confidence::MemoryConfirmed,
        },
        Constant {
            symbol: "C_1",
            value: 0.083,
            dimension: Dimension::NONE,
            meaning: "growth of the coefficient with h/p",
            source: REHBOCK,
            confidence: Confidence::MemoryConfirmed,
        },
    ],
    tables: &[],
    regimes: &[Regime {
        name: "Rehbock",
        when: "always",
        definitions: &[
            ("C_e", "C_0 + C_1*h/p"),
            ("k_h", "k_h_published + dk_h"),
            ("h_e", "h + k_h"),
            ("Q_modular", "2/3*sqrt(2*g)*F_C*C_e*b*h_e^1.5"),
        ],
        discharge: "f*Q_modular",
        implicit: Implicit::Nothing,
        solved: None,
        flowing: "h + k_h_published + dk_h",
        beyond: None,
        borders: |_| &[],
        limits: &[
            Limit::at_least("h", "0.03", "head").by(ISO_1438, Confidence::Memory),
            Limit::at_most("h", "0.75", "head").by(ISO_1438, Confidence::Memory),
            Limit::at_least("b", "0.30", "crest width").by(ISO_1438, Confidence::Memory),
            Limit::at_least("p", "0.10", "crest height").by(ISO_1438, Confidence::Memory),
            Limit::at_most(
                "h/p",
                "1",
                "head over crest height (edition of 1980; later ones are wider)",
            )
            .by(ISO_1438, Confidence::Memory),
        ],
        coefficient: thin_plate::COEFFICIENT,
    }],
    regime_for: |_| 0,
    adjustments: &[PUBLISHED_HEAD_ADJUSTMENT],
    drowned: &[
        drowned(
            "ISO 1438",
            &[RATIO, ISO_FACTOR, VILLEMONTE_FACTOR, ("f_published", "f_ISO"), DROWNED_FACTOR],
            "0 when f_published >= 1 otherwise 200/sqrt(3)*abs(f_Villemonte/f_ISO - 1)",
            (ISO_1438, Confidence::MemoryConfirmed),
        ),
        drowned(
            "Villemonte",
            &[
                RATIO,
                ISO_FACTOR,
                VILLEMONTE_FACTOR,
                ("f_published", "f_Villemonte"),
                DROWNED_FACTOR,
            ],
            "0 when f_published >= 1 otherwise 200/sqrt(3)*abs(f_ISO/f_Villemonte - 1)",
            (VILLEMONTE, Confidence::Memory),
        ),
    ],
    modular: thin_plate::FREE_NAPPE,
    critical: None,
    velocity_of_approach: "inside the coefficient, through h/p: the gauged head is used",
    head_measured: thin_plate::HEAD_MEASURED,
    head_in_approach: true,
    control_width: Some("crest_width"),
};

/// Water below the crest drowns nothing.
const RATIO: (&str, &str) = ("S", "max(h_2, 0)/h");
const ISO_FACTOR: (&str, &str) = ("f_ISO", "1.007*(0.975 - S^1.45)^0.265");
const VILLEMONTE_FACTOR: (&str, &str) = ("f_Villemonte", "(1 - S^1.5)^0.385");

/// One of the two factors; that they differ, by 4 % at a ratio of heads of 0.5 and 13 % at 0.8, is the uncertainty of
/// each.
const fn drowned(
    name: &'static str,
    definitions: &'static [(&'static str, &'static str)],
    percent: &'static str,
    (source, confidence): (Citation, Confidence),
) -> DrownedFlow {
    DrownedFlow {
        name,
        when: "ventilated nappe; the second head is read where the flow has recovered, about 10 times \
               the largest head downstream",
        definitions,
        needs: &[],
        beyond: None,
        limits: &[],
        reads: SecondHeadAt::Tailwater,
        ratio: ModularRatio::OfStructure,
        uncertainty: Some(CoefficientRule {
            words: "the difference of the two published factors, as the half-width of a rectangular \
                    distribution",
            // Per cent at 95 % are halved: 2/sqrt(3) of the half-width gives its standard uncertainty.
            percent,
            source,
            confidence,
        }),
        source,
        confidence,
    }
}
