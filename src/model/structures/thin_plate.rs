//! What thin-plate weirs have in common: adjustments, the step rule of the coefficient, the free nappe, the
//! place of the gauge.

use super::input::InputSpec;
use super::published::{Adjustment, Coefficient, CoefficientRule, HeadPosition, ModularLimit};
use crate::model::Confidence;
use crate::model::source::ISO_1438;
use crate::units::Dimension;

/// Shifts the published head adjustment.
pub(super) const HEAD_ADJUSTMENT: InputSpec = InputSpec {
    dimension: Dimension::LENGTH,
    ..InputSpec::number(
        "head_adjustment",
        "dk_h",
        "shift of the published head adjustment k_h",
        [-0.01, 0.01],
        "it shifts an adjustment of about a millimetre",
        "0 mm",
    )
    .or(0.0)
};

/// Shifts the published width adjustment.
pub(super) const WIDTH_ADJUSTMENT: InputSpec = InputSpec {
    key: "width_adjustment",
    symbol: "dk_b",
    meaning: "shift of the published width adjustment k_b",
    ..HEAD_ADJUSTMENT
};

/// The published uncertainty of `k_h`.
pub(super) const PUBLISHED_HEAD_ADJUSTMENT: Adjustment = Adjustment {
    name: "published head adjustment",
    acts_on: "head_adjustment",
    standard_uncertainty: "0.00015",
    words: "0.3 mm at 95 % for k_h",
    source: ISO_1438,
    confidence: Confidence::Memory,
};

/// The published uncertainty of the coefficient of rectangular plates, contracted or full width.
pub(super) const COEFFICIENT: Coefficient = Coefficient::Published(CoefficientRule {
    words: "at 95 %: 1.5 % for h/p up to 1.0, 2 % up to 1.5, 3 % up to 2.5",
    percent: "1.5 when h <= p otherwise 2 when h <= 1.5*p otherwise 3",
    source: ISO_1438,
    confidence: Confidence::Memory,
});

/// Tailwater below rectangular plates.
pub(super) const FREE_NAPPE: ModularLimit = ModularLimit {
    words: "free, ventilated nappe: tailwater at least about 0.1 m below the crest",
    ratio: None,
    highest: "-0.1",
    source: ISO_1438,
    confidence: Confidence::Memory,
};

/// Where the head is measured.
pub(super) const HEAD_MEASURED: HeadPosition = HeadPosition {
    words: "4 to 5 times the largest head upstream of the plate",
    nearest: Some("4*h"),
    farthest: Some("5*h"),
    source: ISO_1438,
    confidence: Confidence::Memory,
};
