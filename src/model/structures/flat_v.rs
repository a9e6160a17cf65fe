//! Flat-V weir, slopes 1:2 and 1:5 along the flow, vertical side walls; drowned flow by a crest tapping.

use super::approach::{
    APPROACH_WIDTH, FROUDE, RECTANGULAR, THROUGH_TOTAL_HEAD, TOTAL_HEAD, froude_at_most,
};
use super::drowned::DROWNED_FACTOR;
use super::{
    Coefficient, CoefficientRule, CriticalFlow, DrownedFlow, HeadPosition, Implicit, InputSpec,
    KINETIC_ENERGY_COEFFICIENT, ModularLimit, ModularRatio, PublishedTable, Regime, SecondHeadAt,
    Structure, Values,
};
use crate::model::source::{ISO_4377, PRACTICE};
use crate::model::{Confidence, Limit};

pub(super) static STRUCTURE: Structure = Structure {
    kind: "flat-v",
    title: "Flat-V weir, slopes 1:2 and 1:5 along the flow",
    standard: ISO_4377,
    inputs: &[
        InputSpec::length(
            "crest_width",
            "b",
            "width of the crest between its vertical walls",
            "4.00 m",
        ),
        InputSpec::number(
            "cross_slope",
            "n",
            "cross-slope of the crest, horizontal per vertical",
            [5.0, 100.0],
            "a slope of 1:5 to 1:100 is due; coefficients are published for 1:10 to 1:40",
            "20",
        ),
        InputSpec::length(
            "crest_height",
            "p",
            "height of the lowest point of the crest above the bed",
            "0.40 m",
        ),
        InputSpec { example: "4.00 m", ..APPROACH_WIDTH },
        KINETIC_ENERGY_COEFFICIENT,
    ],
    choice: None,
    constants: &[],
    tables: &[
        PublishedTable {
            name: "k_slope",
            meaning: "head adjustment k_h; flatter than 1:40 as at 1:40",
            first: ("n", "1", SLOPES),
            second: None,
            unit: "mm",
            values: &[0.8, 0.5, 0.4],
            source: ISO_4377,
            confidence: Confidence::MemoryConfirmed,
        },
        PublishedTable {
            name: "C_inside",
            meaning: "coefficient, head inside the V; flatter than 1:40 as at 1:40",
            first: ("n", "1", SLOPES),
            second: None,
            unit: "1",
            values: &[0.615, 0.620, 0.625],
            source: ISO_4377,
            confidence: Confidence::MemoryConfirmed,
        },
        PublishedTable {
            name: "C_above",
            meaning: "coefficient, head above the V; flatter than 1:40 as at 1:40",
            first: ("n", "1", SLOPES),
            second: None,
            unit: "1",
            values: &[0.620, 0.625, 0.630],
            source: ISO_4377,
            confidence: Confidence::MemoryConfirmed,
        },
    ],
    regimes: &[
        regime(
            "inside the V",
            "the head is at most the depth of the V, b/(2 n)",
            &[
                ("C_D", "C_inside(min(n, 40))"),
                K_H,
                H_E,
                Z,
                MODULAR,
                RECTANGULAR,
                TOTAL_HEAD,
                C_V,
                FROUDE,
            ],
        ),
        regime(
            "above the V",
            "the head is above the depth of the V, b/(2 n)",
            &[
                ("C_D", "C_above(min(n, 40))"),
                K_H,
                H_E,
                Z,
                MODULAR,
                RECTANGULAR,
                TOTAL_HEAD,
                C_V,
                FROUDE,
            ],
        ),
    ],
    regime_for: |values: &Values| {
        let depth = values.value("crest_width") / (2.0 * values.value("cross_slope"));
        usize::from(values.value("head") > depth)
    },
    adjustments: &[],
    drowned: &[DrownedFlow {
        name: "crest tapping",
        when: "the second head is that at the crest tapping",
        definitions: &[
            ("S", "max(h_2 - k_h, 0)/h_e"),
            ("f_published", "1.078*(0.909 - S^1.5)^0.183"),
            DROWNED_FACTOR,
        ],
        needs: &[],
        beyond: None,
        limits: &[],
        reads: SecondHeadAt::CrestTapping,
        ratio: ModularRatio::Own(0.4),
        uncertainty: None,
        source: ISO_4377,
        confidence: Confidence::MemoryConfirmed,
    }],
    modular: ModularLimit {
        words: "tapping head not above 0.4 of the upstream total head; downstream total head not above \
                about 0.67 of it inside the V, more when it is full",
        ratio: Some(0.67),
        highest: "M_L*H",
        source: ISO_4377,
        confidence: Confidence::Doubtful,
    },
    critical: Some(CriticalFlow {
        energy: "1.25*(2*alpha*Q^2/(g*n^2))^(1/5) when (2*alpha*Q^2/(g*n^2))^(1/5) <= b/(2*n) \
                 otherwise b/(4*n) + 1.5*(alpha*(Q/b)^2/g)^(1/3)",
        sill: "p",
        width: None,
        approach: ("B", None),
    }),
    velocity_of_approach: THROUGH_TOTAL_HEAD,
    head_measured: HeadPosition {
        words: "10 times the depth of the V upstream of the crest line, not less than 3 times the largest \
                total head",
        nearest: Some("max(10*b/(2*n), 3*H)"),
        farthest: None,
        source: PRACTICE,
        confidence: Confidence::Doubtful,
    },
    head_in_approach: true,
    control_width: Some("crest_width"),
};

/// Cross-slopes at which coefficients are published; between them they are interpolated here.
const SLOPES: &[f64] = &[10.0, 20.0, 40.0];

const K_H: (&str, &str) = ("k_h", "k_slope(min(n, 40))");
const H_E: (&str, &str) = ("h_e", "H - k_h");
/// The share of the full V that the vertical walls leave (strips across the V, methods).
const Z: (&str, &str) = ("Z", "1 when h_e <= b/(2*n) otherwise 1 - (1 - b/(2*n)/h_e)^2.5");
const MODULAR: (&str, &str) = ("Q_modular", "4/5*sqrt(g)*F_C*C_D*n*Z*h_e^2.5");
const C_V: (&str, &str) = ("C_V", "(H/h)^2.5");

const LIMITS: &[Limit] = &[
    Limit::at_least("h", "0.03", "head (metal crest; 0.06 m for concrete)")
        .by(ISO_4377, Confidence::Memory),
    Limit::at_least("n", "10", "cross-slope").by(ISO_4377, Confidence::Memory),
    Limit::at_most("n", "40", "cross-slope").by(ISO_4377, Confidence::Memory),
    Limit::at_most("b/(2*n*p)", "2.5", "depth of the V over crest height")
        .by(ISO_4377, Confidence::Doubtful),
    Limit::at_most("H/p", "2.5", "total head over crest height").by(ISO_4377, Confidence::Doubtful),
    Limit::at_least("b/h", "2", "crest width over head").by(ISO_4377, Confidence::Memory),
    froude_at_most("0.6").by(ISO_4377, Confidence::Doubtful),
];

const fn regime(
    name: &'static str,
    when: &'static str,
    definitions: &'static [(&'static str, &'static str)],
) -> Regime {
    Regime {
        name,
        when,
        definitions,
        discharge: "f*Q_modular",
        implicit: Implicit::Discharge,
        solved: None,
        flowing: "h - k_h",
        beyond: None,
        borders: |_| &["h - b/(2*n)"],
        limits: LIMITS,
        coefficient: Coefficient::Published(CoefficientRule {
            words: "at 95 %: 10 C_V - 8 per cent, C_V = (H/h)^2.5",
            percent: "10*C_V - 8",
            source: ISO_4377,
            confidence: Confidence::Memory,
        }),
    }
}
