//! What the flumes with a long throat have in common: boundary layer, limits, uncertainty, head position.

use super::published::{
    Coefficient, CoefficientRule, Constant, CriticalFlow, HeadPosition, ModularLimit,
};
use crate::model::source::{ISO_4359, PRACTICE};
use crate::model::{Confidence, Limit};
use crate::units::Dimension;

/// Displacement thickness of the boundary layer over throat length.
pub(super) const DISPLACEMENT: Constant = Constant {
    symbol: "x_delta",
    value: 0.003,
    dimension: Dimension::NONE,
    meaning: "displacement thickness of the boundary layer over throat length, smooth surface",
    source: ISO_4359,
    confidence: Confidence::Memory,
};

/// Part of the coefficient that comes from the boundary layer on the bed.
pub(super) const BED_LOSS: (&str, &str) = ("C_h", "(1 - x_delta*L/h)^1.5");

const fn memory(limit: crate::model::Unsourced) -> Limit {
    limit.by(ISO_4359, Confidence::Memory)
}

/// What a shaped throat takes, losses included: a little more than the ideal.
pub(super) const CRITICAL_FLOW: CriticalFlow =
    CriticalFlow { energy: "H", sill: "p", width: None, approach: ("B", Some("m_a")) };

/// Smallest head.
pub(super) const LEAST_HEAD: Limit = memory(Limit::at_least("h", "0.05", "head"));
/// Smallest head for the length.
pub(super) const LEAST_RATIO: Limit =
    memory(Limit::at_least("h/L", "0.05", "head over throat length"));
/// Largest head.
pub(super) const MOST_HEAD: Limit = memory(Limit::at_most("h", "2", "head"));
/// Largest head for the length.
pub(super) const MOST_RATIO: Limit =
    memory(Limit::at_most("h/L", "0.67", "head over throat length"));
/// Largest Froude number of the approach.
pub(super) const MOST_FROUDE: Limit = memory(super::approach::froude_at_most("0.5"));

/// The published uncertainty of the coefficient, in `C_V` and `C_D`.
pub(super) const COEFFICIENT: Coefficient = Coefficient::Published(CoefficientRule {
    words: "at 95 %: 1 + 20 (C_V - C_D) per cent; 2 per cent more where h/L is above 0.5",
    percent: "1 + 20*(C_V - C_D) + (0 when h <= 0.5*L otherwise 2)",
    source: ISO_4359,
    confidence: Confidence::Memory,
});

/// The modular limit.
pub(super) const MODULAR: ModularLimit = ModularLimit {
    words: "upstream total head at least 1.25 times the downstream one (a limit of 0.80); 0.75 for an \
            abrupt exit, up to 0.9 with a gradual expansion of 1:6; no drowned-flow equation",
    ratio: Some(0.80),
    highest: "M_L*H",
    source: PRACTICE,
    confidence: Confidence::Doubtful,
};

/// Where the head is measured.
pub(super) const HEAD_MEASURED: HeadPosition = HeadPosition {
    words: "3 to 4 times the largest head upstream of the start of the contraction",
    nearest: Some("3*h"),
    farthest: None,
    source: ISO_4359,
    confidence: Confidence::Memory,
};
