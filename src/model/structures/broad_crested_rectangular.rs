//! Broad-crested weir of rectangular profile, over the full width; the coefficient is a table.

use super::approach::WHILE_MODULAR;
use super::{
    Coefficient, CoefficientRule, CriticalFlow, HeadPosition, Implicit, InputSpec, ModularLimit,
    PublishedTable, Regime, Structure,
};
use crate::model::source::{BOS, ISO_3846};
use crate::model::{Confidence, Limit};

pub(super) static STRUCTURE: Structure = Structure {
    kind: "broad-crested-rectangular",
    title: "Broad-crested weir, rectangular profile",
    standard: ISO_3846,
    inputs: &[
        InputSpec::length("crest_width", "b", "width of the crest and of the channel", "1.50 m"),
        InputSpec::length("crest_height", "p", "height of the crest above the bed", "0.40 m"),
        InputSpec::length(
            "crest_length_along_flow",
            "L",
            "length of the crest along the flow",
            "0.60 m",
        ),
    ],
    choice: None,
    constants: &[],
    tables: &[PublishedTable {
        name: "C_table",
        meaning: "coefficient, square edges and vertical faces; the columns for h/L of 1.5 and 1.6 are \
                  the least certain",
        first: ("h/p", "1", RATIOS),
        second: Some(("h/L", "1", RATIOS)),
        unit: "1",
        values: COEFFICIENTS,
        source: ISO_3846,
        confidence: Confidence::MemoryConfirmed,
    }],
    regimes: &[Regime {
        name: "free",
        when: WHILE_MODULAR,
        definitions: &[("C", "C_table(h/p, h/L)"), ("Fr", "Q/((h + p)*b*sqrt(g*(h + p)))")],
        discharge: "(2/3)^1.5*sqrt(g)*F_C*C*b*h^1.5",
        implicit: Implicit::Nothing,
        solved: None,
        flowing: "h",
        beyond: None,
        borders: |_| &[],
        limits: &[
            Limit::at_least("h", "0.06", "head").by(ISO_3846, Confidence::Seen),
            Limit::at_least("b", "0.30", "crest width").by(ISO_3846, Confidence::Memory),
            Limit::at_least("p", "0.15", "crest height").by(ISO_3846, Confidence::Memory),
            Limit::at_least("h/L", "0.1", "head over crest length")
                .by(ISO_3846, Confidence::Memory),
            Limit::at_most("h/L", "1.6", "head over crest length").by(ISO_3846, Confidence::Memory),
            Limit::at_most("h/p", "1.6", "head over crest height").by(ISO_3846, Confidence::Memory),
            Limit::at_least("L/p", "0.1", "crest length over crest height")
                .by(ISO_3846, Confidence::Memory),
            Limit::at_most("L/p", "4", "crest length over crest height")
                .by(ISO_3846, Confidence::Memory),
        ],
        coefficient: Coefficient::Published(CoefficientRule {
            words: "3 % at 95 %; about 2 % where h/L and h/p are small",
            percent: "3",
            source: ISO_3846,
            confidence: Confidence::Doubtful,
        }),
    }],
    regime_for: |_| 0,
    adjustments: &[],
    drowned: &[],
    modular: ModularLimit {
        words: "tailwater head not above 0.66 of the head; higher with h/p, lower for short crests; no \
                drowned-flow equation",
        ratio: Some(0.66),
        highest: "M_L*h",
        source: BOS,
        confidence: Confidence::Memory,
    },
    critical: Some(CriticalFlow {
        energy: "1.5*((Q/b)^2/g)^(1/3)",
        sill: "p",
        width: None,
        approach: ("b", None),
    }),
    velocity_of_approach: "inside the coefficient, through h/p: the gauged head is used",
    head_measured: HeadPosition {
        words: "3 to 4 times the largest head upstream of the upstream face",
        nearest: Some("3*h"),
        farthest: Some("4*h"),
        source: ISO_3846,
        confidence: Confidence::Memory,
    },
    head_in_approach: true,
    control_width: Some("crest_width"),
};

/// The nodes of both ratios.
const RATIOS: &[f64] =
    &[0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0, 1.1, 1.2, 1.3, 1.4, 1.5, 1.6];

/// Row by row of h/p.
#[rustfmt::skip] // a row of the published table a line
const COEFFICIENTS: &[f64] = &[
    0.850, 0.850, 0.850, 0.861, 0.870, 0.885, 0.893, 0.925, 0.948, 0.971, 0.993, 1.016, 1.039, 1.062, 1.085, 1.106,
    0.855, 0.855, 0.855, 0.864, 0.874, 0.888, 0.907, 0.930, 0.954, 0.977, 1.001, 1.026, 1.050, 1.074, 1.096, 1.120,
    0.864, 0.864, 0.864, 0.868, 0.879, 0.894, 0.913, 0.936, 0.961, 0.986, 1.011, 1.037, 1.061, 1.085, 1.110, 1.132,
    0.873, 0.873, 0.873, 0.874, 0.885, 0.901, 0.920, 0.945, 0.969, 0.995, 1.021, 1.047, 1.072, 1.097, 1.122, 1.144,
    0.882, 0.882, 0.882, 0.883, 0.894, 0.909, 0.929, 0.954, 0.978, 1.005, 1.032, 1.057, 1.083, 1.109, 1.133, 1.154,
    0.892, 0.892, 0.892, 0.894, 0.904, 0.920, 0.941, 0.964, 0.990, 1.016, 1.043, 1.067, 1.094, 1.120, 1.143, 1.164,
    0.901, 0.901, 0.901, 0.906, 0.916, 0.932, 0.952, 0.975, 1.000, 1.026, 1.052, 1.077, 1.104, 1.129, 1.152, 1.171,
    0.911, 0.911, 0.912, 0.916, 0.926, 0.942, 0.962, 0.985, 1.010, 1.036, 1.062, 1.086, 1.112, 1.136, 1.158, 1.176,
    0.921, 0.921, 0.922, 0.926, 0.936, 0.952, 0.972, 0.996, 1.021, 1.046, 1.072, 1.096, 1.120, 1.143, 1.163, 1.181,
    0.929, 0.929, 0.931, 0.936, 0.946, 0.962, 0.982, 1.006, 1.031, 1.056, 1.081, 1.106, 1.128, 1.150, 1.169, 1.187,
    0.935, 0.937, 0.940, 0.946, 0.956, 0.972, 0.993, 1.017, 1.042, 1.066, 1.092, 1.115, 1.138, 1.159, 1.177, 1.195,
    0.941, 0.944, 0.949, 0.956, 0.966, 0.982, 1.004, 1.028, 1.053, 1.077, 1.103, 1.126, 1.148, 1.168, 1.186, 1.204,
    0.946, 0.951, 0.957, 0.966, 0.977, 0.993, 1.016, 1.040, 1.063, 1.089, 1.114, 1.136, 1.158, 1.178, 1.196, 1.214,
    0.953, 0.959, 0.967, 0.975, 0.986, 1.005, 1.028, 1.050, 1.075, 1.101, 1.124, 1.147, 1.168, 1.187, 1.206, 1.224,
    0.961, 0.968, 0.975, 0.984, 0.997, 1.018, 1.040, 1.061, 1.086, 1.111, 1.134, 1.155, 1.176, 1.196, 1.215, 1.235,
    0.972, 0.978, 0.985, 0.994, 1.010, 1.030, 1.050, 1.073, 1.096, 1.119, 1.142, 1.164, 1.184, 1.204, 1.224, 1.245,
];
