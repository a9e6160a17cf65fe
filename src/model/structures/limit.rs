//! Limits as they stand in one installation: those of use, and what modular and critical flow need.

use super::form::drowned_flow;
use super::installation::Installation;
use super::published::{CriticalFlow, ModularRatio};
use super::structure::Structure;
use crate::model::source::{SPECIFIC_ENERGY, STATION_FILE};
use crate::model::{Blueprint, Citation, Confidence, Limit, Side};

/// What a limit is about.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LimitKind {
    /// A standard's limit of use.
    Use,
    /// The flow is modular: the tailwater does not act on the control.
    Modular {
        /// An equation for drowned flow takes over where it is not.
        drowned: bool,
    },
    /// The flow at the control is critical.
    Critical,
}

/// A limit in the symbols of an installation.
#[derive(Clone, Debug, PartialEq)]
pub struct InstalledLimit {
    /// What it is about.
    pub kind: LimitKind,
    /// The quantity.
    pub quantity: String,
    /// Which end the bound is.
    pub side: Side,
    /// The bound: a number, or an expression.
    pub bound: String,
    /// Positive where the limit applies; `None` if it always does.
    pub applies: Option<String>,
    /// What the quantity is, in words.
    pub meaning: String,
    /// Who set it.
    pub source: Citation,
    /// How well the bound is known.
    pub confidence: Confidence,
}

impl From<&Limit> for InstalledLimit {
    fn from(limit: &Limit) -> Self {
        Self {
            kind: LimitKind::Use,
            quantity: limit.quantity.to_owned(),
            side: limit.side,
            bound: limit.bound.to_owned(),
            applies: None,
            meaning: limit.meaning.to_owned(),
            source: limit.source,
            confidence: limit.confidence,
        }
    }
}

/// The sill that critical flow needs, and the throat: the undisturbed flow, whose level the tailwater
/// fixes, must have less energy above the sill than the control takes (specific energy; methods,
/// critical control).
pub(super) fn critical_limits(
    structure: &Structure,
    blueprint: &mut Blueprint,
) -> Vec<InstalledLimit> {
    let Some(CriticalFlow { energy, sill, width, approach }) = structure.critical else {
        return Vec::new();
    };
    let (bed, slope) = approach;
    let has_alpha = structure.inputs.iter().any(|input| input.symbol == "alpha");
    let alpha = if has_alpha { "alpha" } else { "1" };
    let area = match slope {
        Some(slope) => format!("({bed} + {slope}*y_2)*y_2"),
        None => format!("{bed}*y_2"),
    };
    let definitions = &mut blueprint.definitions;
    // No flow has less energy than critical flow in the channel itself.
    let depth = format!("max(h_2 + {sill}, ({alpha}*Q^2/(g*{bed}^2))^(1/3))");
    definitions.push(("y_2".to_owned(), depth));
    definitions.push(("E_2".to_owned(), format!("y_2 + {alpha}*Q^2/(2*g*({area})^2)")));
    definitions.push(("E_c".to_owned(), energy.to_owned()));
    let limit = |quantity: &str, side, bound: String, applies: Option<String>, meaning: &str| {
        InstalledLimit {
            kind: LimitKind::Critical,
            quantity: quantity.to_owned(),
            side,
            bound,
            applies,
            meaning: meaning.to_owned(),
            source: SPECIFIC_ENERGY,
            confidence: Confidence::Derived,
        }
    };
    let by_sill = limit(
        sill,
        Side::AtLeast,
        "E_2 - E_c".to_owned(),
        None,
        "sill height against the least at which the flow over it is critical",
    );
    let by_width = width.map(|width| {
        limit(
            width,
            Side::AtMost,
            format!("Q*sqrt({alpha}/g)/(2/3*(E_2 - {sill}))^1.5"),
            Some(format!("E_2 - {sill}")),
            "width against the largest at which the flow through it is critical",
        )
    });
    std::iter::once(by_sill).chain(by_width).collect()
}

/// The tailwater against the modular limit.
pub(super) fn modular_limit(installation: &Installation) -> InstalledLimit {
    let modular = installation.structure.modular;
    let second = installation.second_head.as_ref();
    let stated = second.is_some_and(|second| second.modular_limit.is_some());
    let (source, confidence) = match drowned_flow(installation) {
        _ if stated => (STATION_FILE, Confidence::Stated),
        Some(drowned) if drowned.ratio != ModularRatio::OfStructure => {
            (drowned.source, drowned.confidence)
        }
        _ => (modular.source, modular.confidence),
    };
    InstalledLimit {
        kind: LimitKind::Modular { drowned: drowned_flow(installation).is_some() },
        quantity: "h_2".to_owned(),
        side: Side::AtMost,
        bound: modular.highest.to_owned(),
        applies: None,
        meaning: "tailwater head against the highest at which the flow is modular".to_owned(),
        source,
        confidence,
    }
}
