//! The catalogue of structures. To add one: a file here, and its line in the list below.
//!
//! A structure is data: its inputs, its equation in the notation of [`super::expression`], its limits of
//! use, its coefficient's published uncertainty, its drowned flow, and a source with a confidence for
//! every number. [`Installation`] is a structure as a station has it, [`Form`] its equation there.

mod approach;
mod automatic;
mod composition;
mod drowned;
mod form;
mod input;
mod installation;
mod limit;
mod published;
mod structure;
mod thin_plate;
mod throat;

pub use automatic::{AutomaticSource, PUBLISHED_COEFFICIENT, Unstated};
pub use composition::{CREST_LEVEL, section_inputs, section_key, section_symbol};
pub use compound::KIND as COMPOUND;
pub use form::{Form, PublishedNumber};
pub use input::{
    COEFFICIENT_FACTOR, DROWNED_FLOW_FACTOR, GRAVITY, HEAD, InputSpec, InstalledInput,
    KINETIC_ENERGY_COEFFICIENT, TAILWATER_HEAD, Values,
};
pub use installation::{Installation, SecondHead, Section, TailwaterCurve};
pub use limit::{InstalledLimit, LimitKind};
pub use published::{
    Adjustment, Choice, Coefficient, CoefficientRule, Constant, CriticalFlow, DrownedFlow,
    HeadPosition, ModularLimit, ModularRatio, PublishedTable, SecondHeadAt,
};
pub use structure::{Implicit, Regime, Solved, Structure};

/// Declares the module of each structure and lists them all.
macro_rules! catalogue {
    ($($module:ident)+) => {
        $(mod $module;)+

        /// Every structure, in the order of the help.
        pub const CATALOGUE: &[&Structure] = &[$(&$module::STRUCTURE),+];
    };
}

catalogue! {
    thin_plate_rectangular
    thin_plate_full_width
    thin_plate_triangular
    thin_plate_trapezoidal
    broad_crested_rectangular
    broad_crested_round_nosed
    broad_crested_v_shaped
    trapezoidal_profile
    triangular_profile
    streamlined_triangular_profile
    flat_v
    rectangular_throated_flume
    trapezoidal_throated_flume
    u_throated_flume
    parshall_flume
    end_depth
    compound
}

/// The structure of a kind.
pub fn find(kind: &str) -> Option<&'static Structure> {
    CATALOGUE.iter().find(|structure| structure.kind == kind).copied()
}

#[cfg(test)]
mod tests;
/// The structure that the contributor's guide adds; a test compares the two.
#[cfg(test)]
#[path = "../../../tests/data/structures/worked_example.rs"]
mod worked_example;
