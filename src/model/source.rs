//! Where a number comes from, and how far it can be trusted.

use serde::Serialize;

/// How well a published number is known here.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Confidence {
    /// Seen in the source named, or recomputed from figures that were.
    Seen,
    /// Derived from first principles, quoted from nobody.
    Derived,
    /// Stated by the station file.
    Stated,
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
            Self::Derived => "derived",
            Self::Stated => "as stated",
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
    /// Rectangular broad-crested weirs.
    ISO_3846 = "ISO 3846:2008", "Hydrometry - Open channel flow measurement using rectangular broad-crested weirs";
    /// Round-nose horizontal broad-crested weirs.
    ISO_4374 = "ISO 4374:1990", "Liquid flow measurement in open channels - Round-nose horizontal broad-crested weirs";
    /// V-shaped broad-crested weirs.
    ISO_8333 = "ISO 8333:1985", "Liquid flow measurement in open channels - V-shaped broad-crested weirs";
    /// Trapezoidal broad-crested weirs.
    ISO_4362 = "ISO 4362:1999", "Hydrometric determinations - Trapezoidal broad-crested weirs";
    /// Flat-V weirs.
    ISO_4377 = "ISO 4377:2012", "Hydrometric determinations - Flat-V weirs";
    /// Streamlined triangular profile weirs.
    ISO_9827 = "ISO 9827:1994", "Measurement of liquid flow in open channels - Streamlined triangular profile weirs";
    /// Parshall flumes.
    ISO_9826 = "ISO 9826:1992", "Measurement of liquid flow in open channels - Parshall and SANIIRI flumes";
    /// Compound structures.
    ISO_14139 = "ISO 14139:2000", "Hydrometric determinations - Compound gauging structures";
    /// End depth.
    ISO_18481 = "ISO 18481:2017", "Hydrometry - Flow measurement at a free overfall, end depth method";
    /// The full-width thin-plate equation.
    REHBOCK = "Rehbock 1929", "Discussion of precise weir measurements";
    /// A general drowned-flow factor of thin plates.
    VILLEMONTE = "Villemonte 1947", "Submerged-weir discharge studies";
    /// A handbook of discharge measurement structures.
    BOS = "Bos 1989", "Discharge measurement structures, 3rd ed.";
    /// The coefficient of long-throated structures.
    LONG_THROATED = "Bos, Replogle and Clemmens 1984", "Flow measuring flumes for open channel systems";
    /// The coefficient of embankments with slopes 1:2.
    FRITZ_HAGER = "Fritz and Hager 1998", "Hydraulics of embankment weirs";
    /// The drowned-flow correction of Parshall flumes.
    PARSHALL = "Parshall 1936", "The Parshall measuring flume";
    /// Submerged Parshall flumes.
    SKOGERBOE = "Skogerboe and others 1967", "Design and calibration of submerged open channel flow measurement structures";
    /// Specific energy and critical flow.
    SPECIFIC_ENERGY = "critical-flow theory", "Specific energy of open channels, any textbook of hydraulics; derived in docs/methods.md";
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
    /// What a station states of itself.
    STATION_FILE = "the station file", "What the station states of itself";
    /// The rule of this program where no document gives one.
    PRACTICE = "common practice", "A rule of the trade, no single document";
}
