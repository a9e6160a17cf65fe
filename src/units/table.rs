//! The table of units. Data only: symbol, size in SI units as a fraction, dimension.
//!
//! Sizes are exact by definition: the SI Brochure (9th edition, tables 8 and the prefixes), the
//! international foot of 0.3048 m and inch of 0.0254 m, the US gallon of 231 cubic inches, the acre of
//! 43 560 square feet (international feet; NIST Handbook 44, appendix C). A year is 365.25 days.

use super::Dimension;

/// One unit: its spellings, and its size as `numerator / denominator` SI units, kept as a fraction so
/// that a reading in millimetres is rounded only once.
pub(super) struct Entry {
    pub(super) spellings: &'static [&'static str],
    pub(super) numerator: f64,
    pub(super) denominator: f64,
    pub(super) dimension: Dimension,
}

const fn entry(
    spellings: &'static [&'static str],
    numerator: f64,
    denominator: f64,
    dimension: Dimension,
) -> Entry {
    Entry { spellings, numerator, denominator, dimension }
}

const FORCE: Dimension = Dimension::of(1, 1, -2, 0, 0);

/// Cubic metres in a cubic foot, times 1e9, and in a US gallon, times 1e12: both whole numbers.
const CUBIC_FOOT_E9: f64 = 28_316_846.592;
const GALLON_E12: f64 = 3_785_411_784.0;

#[rustfmt::skip] // one unit a line, in columns
pub(super) const UNITS: &[Entry] = &[
    entry(&["1"], 1.0, 1.0, Dimension::NONE),
    entry(&["%", "per cent"], 1.0, 100.0, Dimension::NONE),
    entry(&["‰"], 1.0, 1000.0, Dimension::NONE),
    entry(&["m"], 1.0, 1.0, Dimension::LENGTH),
    entry(&["km"], 1000.0, 1.0, Dimension::LENGTH),
    entry(&["cm"], 1.0, 100.0, Dimension::LENGTH),
    entry(&["mm"], 1.0, 1000.0, Dimension::LENGTH),
    entry(&["um", "µm", "μm"], 1.0, 1e6, Dimension::LENGTH),
    entry(&["nm"], 1.0, 1e9, Dimension::LENGTH),
    entry(&["ft"], 3048.0, 10_000.0, Dimension::LENGTH),
    entry(&["in"], 254.0, 10_000.0, Dimension::LENGTH),
    entry(&["ha"], 10_000.0, 1.0, Dimension::AREA),
    entry(&["l", "L", "litre", "litres"], 1.0, 1000.0, Dimension::VOLUME),
    entry(&["ml", "mL"], 1.0, 1e6, Dimension::VOLUME),
    entry(&["Ml", "ML"], 1000.0, 1.0, Dimension::VOLUME),
    entry(&["gal"], GALLON_E12, 1e12, Dimension::VOLUME),
    entry(&["acre-ft"], 43_560.0 * CUBIC_FOOT_E9, 1e9, Dimension::VOLUME),
    entry(&["cfs"], CUBIC_FOOT_E9, 1e9, Dimension::DISCHARGE),
    entry(&["gpm"], GALLON_E12, 60.0 * 1e12, Dimension::DISCHARGE),
    entry(&["mgd"], GALLON_E12, 86_400.0 * 1e6, Dimension::DISCHARGE),
    entry(&["s"], 1.0, 1.0, Dimension::TIME),
    entry(&["min"], 60.0, 1.0, Dimension::TIME),
    entry(&["h", "hour", "hours"], 3600.0, 1.0, Dimension::TIME),
    entry(&["d", "day", "days"], 86_400.0, 1.0, Dimension::TIME),
    entry(&["week", "weeks"], 7.0 * 86_400.0, 1.0, Dimension::TIME),
    entry(&["year", "years"], 365.25 * 86_400.0, 1.0, Dimension::TIME),
    entry(&["rad"], 1.0, 1.0, Dimension::ANGLE),
    entry(&["deg", "°"], std::f64::consts::PI, 180.0, Dimension::ANGLE),
    entry(&["kg"], 1.0, 1.0, Dimension::MASS),
    entry(&["g"], 1.0, 1000.0, Dimension::MASS),
    entry(&["mg"], 1.0, 1e6, Dimension::MASS),
    entry(&["t"], 1000.0, 1.0, Dimension::MASS),
    entry(&["N"], 1.0, 1.0, FORCE),
    entry(&["Pa"], 1.0, 1.0, Dimension::PRESSURE),
    entry(&["hPa", "mbar"], 100.0, 1.0, Dimension::PRESSURE),
    entry(&["kPa"], 1000.0, 1.0, Dimension::PRESSURE),
    entry(&["MPa"], 1e6, 1.0, Dimension::PRESSURE),
    entry(&["bar"], 100_000.0, 1.0, Dimension::PRESSURE),
    entry(&["K", "degC", "°C"], 1.0, 1.0, Dimension::TEMPERATURE),
    entry(&["degF", "°F"], 5.0, 9.0, Dimension::TEMPERATURE),
];
