//! The inputs of structures: what a station file gives, and the ones that all structures share.

use crate::model::Input;
use crate::units::Dimension;

/// An input of a structure.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct InputSpec {
    /// Its key in a station file.
    pub key: &'static str,
    /// Its symbol in the equation.
    pub symbol: &'static str,
    /// Its dimension.
    pub dimension: Dimension,
    /// What it is, in words.
    pub meaning: &'static str,
    /// The value it has where the file says nothing, in SI units (NaN: it may be left out and has none);
    /// `None` if the file must.
    pub default: Option<f64>,
    /// The smallest and largest value it can have, in SI units.
    pub domain: [f64; 2],
    /// Why a value outside is refused.
    pub domain_reason: &'static str,
    /// A value to start from, for a new file.
    pub example: &'static str,
}

/// An input as it stands in the equation of one installation: that of a section of a compound weir has
/// the section in its key and symbol.
#[derive(Clone, Debug, PartialEq)]
pub struct InstalledInput {
    /// Its key for error sources, options and reports.
    pub key: String,
    /// Its symbol in the equation.
    pub symbol: String,
    /// What it is.
    pub spec: InputSpec,
}

impl From<InputSpec> for InstalledInput {
    fn from(spec: InputSpec) -> Self {
        Self { key: spec.key.to_owned(), symbol: spec.symbol.to_owned(), spec }
    }
}

impl From<&InstalledInput> for Input {
    fn from(input: &InstalledInput) -> Self {
        let InstalledInput { key, symbol, spec } = input;
        Self { key: key.clone(), symbol: symbol.clone(), dimension: spec.dimension }
    }
}

/// The indicated values of a structure's inputs, by key.
#[derive(Clone, Debug, Default)]
pub struct Values(Vec<(String, Option<f64>)>);

impl Values {
    /// Values by key, in SI units; `None` for an input that the file leaves out.
    pub fn new(values: impl IntoIterator<Item = (String, Option<f64>)>) -> Self {
        Self(values.into_iter().collect())
    }

    /// The value of an input, in SI units; `None` where the file gives none.
    pub fn given(&self, key: &str) -> Option<f64> {
        self.0.iter().find(|(known, _)| *known == key).and_then(|(_, value)| *value)
    }

    /// The value of an input that the file must give; NaN, which keeps no bound, where it does not.
    pub fn value(&self, key: &str) -> f64 {
        self.given(key).unwrap_or(f64::NAN)
    }

    /// All of them.
    pub fn iter(&self) -> impl Iterator<Item = (&str, Option<f64>)> {
        self.0.iter().map(|(key, value)| (key.as_str(), *value))
    }
}

/// Lengths that a station can have.
const LENGTHS: [f64; 2] = [1e-3, 1e4];
const LENGTH_REASON: &str = "a length between 1 mm and 10 km is due";
/// Heights that may be nothing.
const HEIGHTS: [f64; 2] = [0.0, 100.0];
const HEIGHT_REASON: &str = "a height between 0 m and 100 m is due";

impl InputSpec {
    /// A length that the file must give.
    pub const fn length(
        key: &'static str,
        symbol: &'static str,
        meaning: &'static str,
        example: &'static str,
    ) -> Self {
        Self {
            key,
            symbol,
            dimension: Dimension::LENGTH,
            meaning,
            default: None,
            domain: LENGTHS,
            domain_reason: LENGTH_REASON,
            example,
        }
    }

    /// A height that the file must give, and that may be 0.
    pub const fn height(
        key: &'static str,
        symbol: &'static str,
        meaning: &'static str,
        example: &'static str,
    ) -> Self {
        Self {
            domain: HEIGHTS,
            domain_reason: HEIGHT_REASON,
            ..Self::length(key, symbol, meaning, example)
        }
    }

    /// A pure number that the file must give.
    pub const fn number(
        key: &'static str,
        symbol: &'static str,
        meaning: &'static str,
        domain: [f64; 2],
        domain_reason: &'static str,
        example: &'static str,
    ) -> Self {
        Self {
            key,
            symbol,
            dimension: Dimension::NONE,
            meaning,
            default: None,
            domain,
            domain_reason,
            example,
        }
    }

    /// The same input with a value where the file gives none.
    #[must_use]
    pub const fn or(self, default: f64) -> Self {
        Self { default: Some(default), ..self }
    }

    /// The same input, which a file may leave out.
    #[must_use]
    pub const fn optional(self) -> Self {
        self.or(f64::NAN)
    }

    /// The value that stands where the file gives none.
    pub fn default_value(&self) -> Option<f64> {
        self.default.filter(|value| !value.is_nan())
    }
}

/// The head, which every structure of the catalogue reads.
pub const HEAD: InputSpec = InputSpec {
    domain: [-10.0, 100.0],
    domain_reason: "a head between -10 m and 100 m is due",
    ..InputSpec::length("head", "h", "gauged head above the crest", "0.20 m")
};

/// Multiplies the published coefficient; its errors are those of the coefficient.
pub const COEFFICIENT_FACTOR: InputSpec = InputSpec::number(
    "coefficient_factor",
    "F_C",
    "factor on the published coefficient",
    [0.7, 1.3],
    "it is a factor near 1 on the published coefficient, no coefficient itself",
    "1",
)
.or(1.0);

/// The acceleration of free fall.
pub const GRAVITY: InputSpec = InputSpec {
    key: "gravity",
    symbol: "g",
    dimension: Dimension::ACCELERATION,
    meaning: "acceleration of free fall",
    default: Some(9.80665),
    domain: [9.7, 9.9],
    domain_reason: "on the ground it is between 9.7 m/s2 and 9.9 m/s2",
    example: "9.80665 m/s2",
};

/// The kinetic-energy (Coriolis) coefficient of the approach.
pub const KINETIC_ENERGY_COEFFICIENT: InputSpec = InputSpec::number(
    "kinetic_energy_coefficient",
    "alpha",
    "kinetic-energy (Coriolis) coefficient of the approach flow",
    [1.0, 2.0],
    "it is 1 for even flow and up to 2 for very uneven flow",
    "1",
)
.or(1.0);

/// The second head: of the tailwater, or at a crest tapping.
pub const TAILWATER_HEAD: InputSpec = InputSpec {
    key: "tailwater_head",
    symbol: "h_2",
    meaning: "head of the tailwater, or at the crest tapping, above the crest",
    ..HEAD
};

/// Multiplies the published drowned-flow factor where the flow is drowned.
pub const DROWNED_FLOW_FACTOR: InputSpec = InputSpec {
    key: "drowned_flow_factor",
    symbol: "F_f",
    meaning: "factor on the published drowned-flow factor",
    ..COEFFICIENT_FACTOR
};
