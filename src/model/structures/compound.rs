//! Compound weir: structures side by side, separated by divide piers, that share one total head.

use super::approach::{APPROACH_WIDTH, FROUDE, froude_at_most};
use super::installation::{Installation, Section};
use super::published::{Coefficient, HeadPosition, ModularLimit};
use super::structure::{Implicit, Regime, Structure};
use super::{InputSpec, KINETIC_ENERGY_COEFFICIENT, triangular_profile};
use crate::model::Confidence;
use crate::model::source::{ISO_14139, PRACTICE};

/// Its name in a station file.
pub const KIND: &str = "compound";

pub(super) static STRUCTURE: Structure = Structure {
    kind: KIND,
    title: "Compound weir of several sections",
    standard: ISO_14139,
    inputs: &[
        InputSpec { example: "3.20 m", ..APPROACH_WIDTH },
        InputSpec::length(
            "crest_height",
            "p",
            "height of the lowest crest above the bed",
            "0.40 m",
        ),
        KINETIC_ENERGY_COEFFICIENT,
    ],
    choice: None,
    constants: &[],
    tables: &[],
    regimes: &[Regime {
        name: "sections",
        when: "divide piers stand between sections of different crest level",
        definitions: &[FROUDE],
        discharge: "0",
        implicit: Implicit::Discharge,
        solved: None,
        flowing: "h",
        beyond: None,
        borders: |_| &[],
        limits: &[froude_at_most("0.6").by(PRACTICE, Confidence::Doubtful)],
        coefficient: Coefficient::FromUser { inputs: &[], why: "each section has its own" },
    }],
    regime_for: |_| 0,
    adjustments: &[],
    drowned: &[],
    modular: ModularLimit {
        words: "section by section, each at the heads above its own crest",
        ratio: None,
        highest: "0",
        source: ISO_14139,
        confidence: Confidence::Memory,
    },
    critical: None,
    velocity_of_approach: "through the total head H, which all sections share; a section whose own \
                           equation is in the gauged head has its velocity of approach in its coefficient",
    head_measured: HeadPosition {
        words: "at one place 3 to 4 times the largest total head upstream",
        nearest: Some("3*H"),
        farthest: Some("4*H"),
        source: ISO_14139,
        confidence: Confidence::Memory,
    },
    head_in_approach: false,
    control_width: None,
};

/// Two sections of triangular profile, for a sheet of the catalogue.
pub(super) fn example() -> Vec<Section> {
    let section = || Section {
        installation: Installation::plain(&triangular_profile::STRUCTURE),
        given: vec!["crest_width".to_owned()],
    };
    vec![section(), section()]
}
