//! Parshall flumes of all sizes, free flow and two published equations for drowned flow.

use super::{
    Choice, Coefficient, CoefficientRule, Constant, DrownedFlow, HeadPosition, Implicit,
    ModularLimit, ModularRatio, Regime, SecondHeadAt, Structure,
};
use crate::model::source::{ISO_9826, PARSHALL, SKOGERBOE};
use crate::model::{Confidence, Limit};
use crate::units::Dimension;

pub(super) static STRUCTURE: Structure = Structure {
    kind: "parshall-flume",
    title: "Parshall flume",
    standard: ISO_9826,
    inputs: &[],
    choice: Some(Choice {
        key: "size",
        meaning: "constants of the size",
        symbols: &[
            ("C", Dimension::NONE, "coefficient, for heads in m and flows in m3/s"),
            ("n", Dimension::NONE, "exponent"),
            ("h_lowest", Dimension::LENGTH, "lowest head"),
            ("h_highest", Dimension::LENGTH, "highest head"),
            ("M_L", Dimension::NONE, "modular limit, ratio of the two heads"),
            ("X", Dimension::NONE, "uncertainty of the rating, per cent at 95 %"),
            (
                "b_throat",
                Dimension::NONE,
                "width of the throat, m, for the drowned-flow equation of 1936",
            ),
            ("C_1", Dimension::NONE, "coefficient of drowned flow, in feet and seconds"),
            ("n_1", Dimension::NONE, "its exponent of the difference of heads"),
            ("C_2", Dimension::NONE, "its constant beside the logarithm"),
            ("n_2", Dimension::NONE, "its exponent of the logarithm"),
            ("S_t", Dimension::NONE, "ratio of heads at which it takes over"),
        ],
        sets: SIZES,
        example: "1 ft",
        source: ISO_9826,
        confidence: Confidence::MemoryConfirmed,
    }),
    constants: &[
        Constant {
            symbol: "metre",
            value: 1.0,
            dimension: Dimension::LENGTH,
            meaning: "unit of the rating's head",
            source: ISO_9826,
            confidence: Confidence::Seen,
        },
        Constant {
            symbol: "m3_per_s",
            value: 1.0,
            dimension: Dimension::DISCHARGE,
            meaning: "unit of the rating's discharge",
            source: ISO_9826,
            confidence: Confidence::Seen,
        },
        Constant {
            symbol: "foot",
            value: 0.3048,
            dimension: Dimension::LENGTH,
            meaning: "unit of the drowned-flow equations",
            source: PARSHALL,
            confidence: Confidence::Seen,
        },
    ],
    tables: &[],
    regimes: &[Regime {
        name: "free",
        when: "always",
        definitions: &[("Q_modular", "F_C*C*m3_per_s*(h/metre)^n")],
        discharge: "f*Q_modular",
        implicit: Implicit::Nothing,
        solved: None,
        flowing: "h",
        beyond: None,
        borders: |_| &[],
        limits: &[
            Limit::at_least("h", "h_lowest", "head, for this size")
                .by(ISO_9826, Confidence::Memory),
            Limit::at_most("h", "h_highest", "head, for this size")
                .by(ISO_9826, Confidence::Memory),
        ],
        coefficient: Coefficient::Published(CoefficientRule {
            words: "at 95 %: 3 % for 1 ft to 8 ft and 0.30 m to 2.40 m; 3 % to 5 % for others, 5 % taken",
            percent: "X",
            source: ISO_9826,
            confidence: Confidence::Memory,
        }),
    }],
    regime_for: |_| 0,
    adjustments: &[],
    drowned: &[
        DrownedFlow {
            name: "Parshall 1936",
            when: "1 ft to 8 ft and 0.30 m to 2.40 m; the second head is read in the throat, 51 mm \
                   upstream of its end; at the modular limit it takes off 1 % to 6 % at once at middle \
                   and high heads, and far more at the lowest",
            definitions: &[
                ("S", "h_2/h"),
                (
                    "Q_E",
                    "m3_per_s*0.0746*b_throat^0.815*((h/(foot*((1.8/S)^1.8 - 2.45)))^(4.57 - 3.14*S) + 0.093*S)",
                ),
                ("f_left", "1 - Q_E/(C*m3_per_s*(h/metre)^n)"),
                // At low heads the correction takes off more than there is: no value.
                ("f_published", "f_left when f_left > 0 otherwise sqrt(f_left)"),
                ("f", "1 when S <= M_L otherwise min(1, F_f*f_published)"),
            ],
            needs: &["b_throat"],
            beyond: None,
            limits: &[CEILING.by(PARSHALL, Confidence::Seen)],
            reads: SecondHeadAt::Tailwater,
            ratio: ModularRatio::OfStructure,
            uncertainty: None,
            source: PARSHALL,
            confidence: Confidence::Memory,
        },
        DrownedFlow {
            name: "Skogerboe 1967",
            when: "1 in, 2 in, 3 in, 6 in, 9 in, 1 ft and 2 ft, above a ratio of heads of the size's own",
            definitions: &[
                ("S", "h_2/h"),
                (
                    "Q_drowned",
                    "m3_per_s*(foot/metre)^3*C_1*((h - h_2)/foot)^n_1/(-(ln(S)/ln(10) + C_2))^n_2",
                ),
                // Towards 0.97 the curve turns up again, to a pole at 0.99: no value beyond 0.95.
                (
                    "f_published",
                    "Q_drowned/(C*m3_per_s*(h/metre)^n) when S <= 0.95 otherwise sqrt(0.95 - S)",
                ),
                ("f", "1 when S <= M_L otherwise min(1, F_f*f_published)"),
            ],
            needs: &["C_1"],
            beyond: None,
            limits: &[CEILING.by(PARSHALL, Confidence::Seen)],
            reads: SecondHeadAt::Tailwater,
            ratio: ModularRatio::OfChoice("S_t"),
            uncertainty: None,
            source: SKOGERBOE,
            confidence: Confidence::MemoryConfirmed,
        },
    ],
    modular: ModularLimit {
        words: "ratio of the head in the throat to the gauged head: 0.50 for 1 in to 3 in, 0.60 for 6 in, \
                9 in and up to 0.90 m, 0.70 for 1 ft to 8 ft and 1.00 m to 2.40 m, 0.80 above",
        ratio: None,
        highest: "M_L*h",
        source: ISO_9826,
        confidence: Confidence::Memory,
    },
    critical: None,
    velocity_of_approach: "inside the rating: the gauged head is used",
    head_measured: HeadPosition {
        words: "in the converging section, 2/3 of the length of its wall back from the crest; the flume's \
                drawing fixes the place",
        nearest: None,
        farthest: None,
        source: ISO_9826,
        confidence: Confidence::Memory,
    },
    head_in_approach: false,
    control_width: None,
};

const CEILING: crate::model::Unsourced =
    Limit::at_most("h_2/h", "0.9", "ratio of heads, the most that any correction is good for");

/// Not published.
const N: f64 = f64::NAN;

/// C and n of ISO 9826 in metres; those in inches and feet converted from the equations in feet.
#[rustfmt::skip] // a size a line
const SIZES: &[(&str, &[f64])] = &[
    ("0.152 m", &[0.381, 1.58, 0.03, 0.45, 0.6, 5.0, N, N, N, N, N, N]),
    ("0.25 m", &[0.561, 1.513, 0.03, 0.6, 0.6, 5.0, N, N, N, N, N, N]),
    ("0.30 m", &[0.679, 1.521, 0.03, 0.75, 0.6, 3.0, 0.3, N, N, N, N, N]),
    ("0.45 m", &[1.038, 1.537, 0.03, 0.75, 0.6, 3.0, 0.45, N, N, N, N, N]),
    ("0.60 m", &[1.403, 1.548, 0.05, 0.75, 0.6, 3.0, 0.6, N, N, N, N, N]),
    ("0.75 m", &[1.772, 1.557, 0.06, 0.75, 0.6, 3.0, 0.75, N, N, N, N, N]),
    ("0.90 m", &[2.147, 1.565, 0.06, 0.75, 0.6, 3.0, 0.9, N, N, N, N, N]),
    ("1.00 m", &[2.397, 1.569, 0.06, 0.8, 0.7, 3.0, 1.0, N, N, N, N, N]),
    ("1.20 m", &[2.904, 1.577, 0.06, 0.8, 0.7, 3.0, 1.2, N, N, N, N, N]),
    ("1.50 m", &[3.668, 1.586, 0.06, 0.8, 0.7, 3.0, 1.5, N, N, N, N, N]),
    ("1.80 m", &[4.44, 1.593, 0.08, 0.8, 0.7, 3.0, 1.8, N, N, N, N, N]),
    ("2.10 m", &[5.222, 1.599, 0.08, 0.8, 0.7, 3.0, 2.1, N, N, N, N, N]),
    ("2.40 m", &[6.004, 1.605, 0.08, 0.8, 0.7, 3.0, 2.4, N, N, N, N, N]),
    ("1 in", &[0.0604, 1.550, 0.015, 0.21, 0.50, 5.0, N, 0.299, 1.55, 0.0044, 1.0, 0.56]),
    ("2 in", &[0.1207, 1.550, 0.015, 0.24, 0.50, 5.0, N, 0.612, 1.55, 0.0044, 1.0, 0.61]),
    ("3 in", &[0.1765, 1.547, 0.03, 0.33, 0.50, 5.0, N, 0.915, 1.55, 0.0044, 1.0, 0.64]),
    ("6 in", &[0.3812, 1.580, 0.03, 0.45, 0.60, 5.0, N, 1.66, 1.58, 0.0044, 1.08, 0.55]),
    ("9 in", &[0.5354, 1.530, 0.03, 0.61, 0.60, 5.0, N, 2.51, 1.53, 0.0044, 1.06, 0.63]),
    ("1 ft", &[0.6909, 1.522, 0.03, 0.76, 0.70, 3.0, 0.3048, 3.11, 1.52, 0.0044, 1.08, 0.62]),
    ("1.5 ft", &[1.0564, 1.538, 0.03, 0.76, 0.70, 3.0, 0.4572, N, N, N, N, N]),
    ("2 ft", &[1.4281, 1.550, 0.046, 0.76, 0.70, 3.0, 0.6096, 5.94, 1.55, 0.0044, 1.14, 0.66]),
    ("3 ft", &[2.1843, 1.566, 0.046, 0.76, 0.70, 3.0, 0.9144, N, N, N, N, N]),
    ("4 ft", &[2.9534, 1.578, 0.06, 0.76, 0.70, 3.0, 1.2192, N, N, N, N, N]),
    ("5 ft", &[3.7322, 1.587, 0.06, 0.76, 0.70, 3.0, 1.5240, N, N, N, N, N]),
    ("6 ft", &[4.5189, 1.595, 0.076, 0.76, 0.70, 3.0, 1.8288, N, N, N, N, N]),
    ("7 ft", &[5.3124, 1.601, 0.076, 0.76, 0.70, 3.0, 2.1336, N, N, N, N, N]),
    ("8 ft", &[6.1116, 1.607, 0.076, 0.76, 0.70, 3.0, 2.4384, N, N, N, N, N]),
    ("10 ft", &[7.463, 1.600, 0.09, 1.07, 0.80, 5.0, N, N, N, N, N, N]),
    ("12 ft", &[8.859, 1.600, 0.09, 1.37, 0.80, 5.0, N, N, N, N, N, N]),
    ("15 ft", &[10.96, 1.600, 0.09, 1.67, 0.80, 5.0, N, N, N, N, N, N]),
    ("20 ft", &[14.45, 1.600, 0.09, 1.83, 0.80, 5.0, N, N, N, N, N, N]),
    ("25 ft", &[17.94, 1.600, 0.09, 1.83, 0.80, 5.0, N, N, N, N, N, N]),
    ("30 ft", &[21.44, 1.600, 0.09, 1.83, 0.80, 5.0, N, N, N, N, N, N]),
    ("40 ft", &[28.43, 1.600, 0.09, 1.83, 0.80, 5.0, N, N, N, N, N, N]),
    ("50 ft", &[35.41, 1.600, 0.09, 1.83, 0.80, 5.0, N, N, N, N, N, N]),
];
