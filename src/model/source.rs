//! Where a number comes from, and how far it can be trusted.

use serde::Serialize;

/// How well a published number is known here.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Confidence {
    /// Seen in the source named, or recomputed from figures that were.
    Seen,
    /// Quoted from memory, and confirmed by a second route (a limiting case, another formula).
    MemoryConfirmed,
    /// Quoted from memory: confirm against your copy of the standard.
    Memory,
    /// Remembered, and not to be relied on without the standard in hand.
    Doubtful,
}

impl Confidence {
    /// In words, for reports, which explain "from memory" in a line of their own.
    pub fn words(self) -> &'static str {
        match self {
            Self::Seen => "seen in the source",
            Self::MemoryConfirmed => "from memory, confirmed by a second route",
            Self::Memory => "from memory",
            Self::Doubtful => "from memory, doubtful",
        }
    }

    /// It rests on memory alone.
    pub fn is_memory(self) -> bool {
        matches!(self, Self::Memory | Self::Doubtful)
    }
}

/// A published document. `docs/sources.md` lists them all.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
pub struct Citation {
    /// Number and edition, or author and year.
    pub document: &'static str,
    /// What it is about.
    pub title: &'static str,
}

macro_rules! bibliography {
    ($($(#[doc = $doc:literal])+ $name:ident = $document:literal, $title:literal;)+) => {
        $($(#[doc = $doc])+
        pub const $name: Citation = Citation { document: $document, title: $title };)+

        /// Every document that a number of the catalogue is taken from.
        pub const BIBLIOGRAPHY: &[Citation] = &[$($name,)+];
    };
}

bibliography! {
    /// Thin-plate weirs.
    ISO_1438 = "ISO 1438:2017", "Hydrometry - Open channel flow measurement using thin-plate weirs";
    /// Flumes.
    ISO_4359 = "ISO 4359:2013", "Flow measurement structures - Rectangular, trapezoidal and U-shaped flumes";
    /// Triangular profile weirs.
    ISO_4360 = "ISO 4360:2020", "Hydrometry - Open channel flow measurement using triangular profile weirs";
    /// The experiments behind the rectangular thin-plate equation.
    KINDSVATER_CARTER = "Kindsvater and Carter 1957", "Discharge characteristics of rectangular thin-plate weirs";
    /// Charts of notch coefficients.
    NBS_421 = "NBS SP 421 (Kulin and Compton 1975)", "A guide to methods and standards for the measurement of water flow, figures 4-3 and 4-5, as digitised by others";
    /// A manual of water measurement.
    USBR_MANUAL = "USBR Water Measurement Manual, 3rd ed.", "Chapter 7, weirs";
    /// A textbook table of thin-plate coefficients.
    NOVAK = "Novak and others, Hydraulic Structures, 4th ed.", "Table 8.1 and worked example 8.3";
    /// A quotation of the thin-plate equation and a polynomial for its coefficient.
    FENTON = "Fenton 2015", "Alternative Hydraulics Paper 6";
    /// A validation case that quotes the modular limit of the triangular profile.
    ISO_4360_2008 = "BS ISO 4360:2008", "Modular limit, as quoted in a published validation case";
    /// The rule of this program where no document gives one.
    PRACTICE = "common practice", "A rule of the trade, no single document";
}
