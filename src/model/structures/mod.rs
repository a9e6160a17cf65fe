//! The catalogue of structures. To add one: a file here, and its line in [`CATALOGUE`].
//!
//! A structure is data: its inputs, its equation in the notation of [`super::expression`], its limits of
//! use, its coefficient's published uncertainty, and a source with a confidence for every number.

mod rectangular_throated_flume;
mod thin_plate_rectangular;
mod thin_plate_triangular;
mod triangular_profile;

use super::{Blueprint, Citation, Confidence, Input, Limit, UnknownText};
use crate::model::expression::Table;
use crate::units::{Dimension, Unit};

/// Every structure, in the order of the help.
pub const CATALOGUE: &[&Structure] = &[
    &thin_plate_rectangular::STRUCTURE,
    &thin_plate_triangular::STRUCTURE,
    &rectangular_throated_flume::STRUCTURE,
    &triangular_profile::STRUCTURE,
];

/// The structure of a kind.
pub fn find(kind: &str) -> Option<&'static Structure> {
    CATALOGUE.iter().find(|structure| structure.kind == kind).copied()
}

/// A weir or flume as a standard describes it.
#[derive(Debug)]
pub struct Structure {
    /// Its name in a station file.
    pub kind: &'static str,
    /// What it is, in words.
    pub title: &'static str,
    /// The standard that describes it.
    pub standard: Citation,
    /// Its inputs besides those that every structure has ([`Structure::all_inputs`]).
    pub inputs: &'static [InputSpec],
    /// Published constants of its equation.
    pub constants: &'static [Constant],
    /// Published tables of its equation.
    pub tables: &'static [PublishedTable],
    /// The forms of its equation; the first is that of the usual installation.
    pub regimes: &'static [Regime],
    /// Which form holds, from the indicated values.
    pub regime_for: fn(&Values<'_>) -> usize,
    /// Published uncertainties besides that of the coefficient.
    pub adjustments: &'static [Adjustment],
    /// How the velocity of approach enters.
    pub velocity_of_approach: &'static str,
    /// Up to what tailwater the flow is modular.
    pub modular: Statement,
    /// Where the head is to be measured.
    pub head_measured: Statement,
}

/// An input of a structure.
#[derive(Clone, Copy, Debug)]
pub struct InputSpec {
    /// Its key in a station file.
    pub key: &'static str,
    /// Its symbol in the equation.
    pub symbol: &'static str,
    /// Its dimension.
    pub dimension: Dimension,
    /// What it is, in words.
    pub meaning: &'static str,
    /// The value it has where the file says nothing, in SI units; `None` if the file must.
    pub default: Option<f64>,
    /// The smallest and largest value it can have, in SI units.
    pub domain: [f64; 2],
    /// Why a value outside is refused.
    pub domain_reason: &'static str,
    /// A value to start from, for a new file.
    pub example: &'static str,
}

/// A published constant with its source.
#[derive(Clone, Copy, Debug)]
pub struct Constant {
    /// Its name in the equation.
    pub symbol: &'static str,
    /// Its value in SI units.
    pub value: f64,
    /// Its dimension.
    pub dimension: Dimension,
    /// What it is.
    pub meaning: &'static str,
    /// Who published it.
    pub source: Citation,
    /// How well it is known here.
    pub confidence: Confidence,
}

/// A published table with its source, in the units it is printed in.
#[derive(Clone, Copy, Debug)]
pub struct PublishedTable {
    /// Its name in the equation.
    pub name: &'static str,
    /// What it gives.
    pub meaning: &'static str,
    /// First argument: what it is, its unit, its nodes.
    pub first: (&'static str, &'static str, &'static [f64]),
    /// Second argument, for a table of two.
    pub second: Option<(&'static str, &'static str, &'static [f64])>,
    /// Unit of the values.
    pub unit: &'static str,
    /// The values, row by row of the first argument.
    pub values: &'static [f64],
    /// Who published it.
    pub source: Citation,
    /// How well it is known here.
    pub confidence: Confidence,
}

/// One form of a structure's equation.
#[derive(Clone, Copy, Debug)]
pub struct Regime {
    /// Its name.
    pub name: &'static str,
    /// When it holds, in words.
    pub when: &'static str,
    /// Definitions: name and expression. The result is `Q`.
    pub definitions: &'static [(&'static str, &'static str)],
    /// Name, equation, lower and upper bound of the unknown.
    pub unknown: Option<[&'static str; 4]>,
    /// Positive where water flows over the crest.
    pub flowing: &'static str,
    /// Positive where a published curve is left; its end is then held.
    pub beyond: Option<&'static str>,
    /// Limits of use.
    pub limits: &'static [Limit],
    /// The published uncertainty of the coefficient.
    pub coefficient: CoefficientRule,
}

/// The published uncertainty of a coefficient.
#[derive(Clone, Copy, Debug)]
pub struct CoefficientRule {
    /// The rule in words.
    pub words: &'static str,
    /// Per cent of the coefficient at 95 %, in the symbols of the structure. Half of it is the standard
    /// uncertainty.
    pub percent: &'static str,
    /// Who published it.
    pub source: Citation,
    /// How well it is known here.
    pub confidence: Confidence,
}

/// A published uncertainty of a head or width adjustment.
#[derive(Clone, Copy, Debug)]
pub struct Adjustment {
    /// The name of its error source.
    pub name: &'static str,
    /// The input that it acts on.
    pub acts_on: &'static str,
    /// Its standard uncertainty in SI units, in the symbols of the structure.
    pub standard_uncertainty: &'static str,
    /// The rule in words.
    pub words: &'static str,
    /// Who published it.
    pub source: Citation,
    /// How well it is known here.
    pub confidence: Confidence,
}

/// A sentence with its source.
#[derive(Clone, Copy, Debug)]
pub struct Statement {
    /// The sentence.
    pub text: &'static str,
    /// Who says so.
    pub source: Citation,
    /// How well it is known here.
    pub confidence: Confidence,
}

/// The indicated values of a structure's inputs, by key.
#[derive(Debug)]
pub struct Values<'a>(pub &'a [(&'static str, Option<f64>)]);

impl Values<'_> {
    /// The value of an input, in SI units; `None` where the file gives none.
    pub fn given(&self, key: &str) -> Option<f64> {
        self.0.iter().find(|(known, _)| *known == key).and_then(|(_, value)| *value)
    }

    /// The value of an input that the file must give; NaN, which keeps no bound, where it does not.
    pub fn value(&self, key: &str) -> f64 {
        self.given(key).unwrap_or(f64::NAN)
    }
}

/// Lengths that a station can have.
const LENGTHS: [f64; 2] = [1e-3, 1e4];
const LENGTH_REASON: &str = "a length between 1 mm and 10 km is due";

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
}

/// The head, which every structure of the catalogue reads.
pub const HEAD: InputSpec = InputSpec {
    domain: [-10.0, 100.0],
    domain_reason: "a head between -10 m and 100 m is due",
    ..InputSpec::length("head", "h", "gauged head above the crest", "0.20 m")
};

/// Multiplies the published coefficient; its errors are those of the coefficient.
pub const COEFFICIENT_FACTOR: InputSpec = InputSpec {
    key: "coefficient_factor",
    symbol: "F_C",
    dimension: Dimension::NONE,
    meaning: "factor on the published coefficient",
    default: Some(1.0),
    domain: [0.7, 1.3],
    domain_reason: "it is a factor near 1 on the published coefficient, no coefficient itself",
    example: "1",
};

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
pub const KINETIC_ENERGY_COEFFICIENT: InputSpec = InputSpec {
    key: "kinetic_energy_coefficient",
    symbol: "alpha",
    dimension: Dimension::NONE,
    meaning: "kinetic-energy (Coriolis) coefficient of the approach flow",
    default: Some(1.0),
    domain: [1.0, 2.0],
    domain_reason: "it is 1 for even flow and up to 2 for very uneven flow",
    example: "1",
};

/// Shifts the published head adjustment.
const HEAD_ADJUSTMENT: InputSpec = InputSpec {
    key: "head_adjustment",
    symbol: "dk_h",
    dimension: Dimension::LENGTH,
    meaning: "shift of the published head adjustment k_h",
    default: Some(0.0),
    domain: [-0.01, 0.01],
    domain_reason: "it shifts an adjustment of about a millimetre",
    example: "0 mm",
};

/// Shifts the published width adjustment.
const WIDTH_ADJUSTMENT: InputSpec = InputSpec {
    key: "width_adjustment",
    symbol: "dk_b",
    meaning: "shift of the published width adjustment k_b",
    ..HEAD_ADJUSTMENT
};

/// The published uncertainty of `k_h` of thin plates.
const PUBLISHED_HEAD_ADJUSTMENT: Adjustment = Adjustment {
    name: "published head adjustment",
    acts_on: "head_adjustment",
    standard_uncertainty: "0.00015",
    words: "0.3 mm at 95 % for k_h",
    source: super::source::ISO_1438,
    confidence: Confidence::Memory,
};

/// The name of the error source of the coefficient.
pub const PUBLISHED_COEFFICIENT: &str = "published coefficient";

/// An error source that a structure brings with it.
#[derive(Clone, Copy, Debug)]
pub struct AutomaticSource {
    /// Its name.
    pub name: &'static str,
    /// The input that it acts on.
    pub acts_on: &'static str,
    /// Its size, in the symbols of the structure: a standard uncertainty in SI units, or, where it
    /// scales, per cent at 95 %.
    pub rule: &'static str,
    /// It scales its input.
    pub scales: bool,
    /// The rule in words.
    pub words: &'static str,
    /// Who published it, and how well that is known here.
    pub published: (Citation, Confidence),
}

impl Structure {
    /// The error sources that it brings with it in a regime: the published uncertainty of its coefficient
    /// and those of its adjustments.
    pub fn automatic_sources(&self, regime: &Regime) -> Vec<AutomaticSource> {
        let rule = regime.coefficient;
        let coefficient = AutomaticSource {
            name: PUBLISHED_COEFFICIENT,
            acts_on: COEFFICIENT_FACTOR.key,
            rule: rule.percent,
            scales: true,
            words: rule.words,
            published: (rule.source, rule.confidence),
        };
        let adjustments = self.adjustments.iter().map(|each| AutomaticSource {
            name: each.name,
            acts_on: each.acts_on,
            rule: each.standard_uncertainty,
            scales: false,
            words: each.words,
            published: (each.source, each.confidence),
        });
        std::iter::once(coefficient).chain(adjustments).collect()
    }

    /// All inputs: the head, the structure's own, the factor on the coefficient, gravity.
    pub fn all_inputs(&self) -> Vec<InputSpec> {
        let mut inputs = vec![HEAD];
        inputs.extend(self.inputs.iter().copied());
        inputs.extend([COEFFICIENT_FACTOR, GRAVITY]);
        inputs
    }

    /// The equations of a regime, ready to be built into a model.
    pub fn blueprint(&self, regime: usize) -> Blueprint {
        let form = &self.regimes[regime];
        let owned = |text: &&str| (*text).to_owned();
        Blueprint {
            inputs: self
                .all_inputs()
                .iter()
                .map(|input| Input {
                    key: input.key.to_owned(),
                    symbol: input.symbol.to_owned(),
                    dimension: input.dimension,
                })
                .collect(),
            constants: self
                .constants
                .iter()
                .map(|each| (each.symbol.to_owned(), each.value, each.dimension))
                .collect(),
            tables: self.tables.iter().filter_map(PublishedTable::in_si).collect(),
            definitions: form
                .definitions
                .iter()
                .map(|(name, text)| (owned(name), owned(text)))
                .collect(),
            unknown: form.unknown.map(|[name, equation, from, to]| UnknownText {
                name: name.to_owned(),
                equation: equation.to_owned(),
                from: from.to_owned(),
                to: to.to_owned(),
            }),
            result: "Q".to_owned(),
            flowing: Some(form.flowing.to_owned()),
            beyond: form.beyond.map(str::to_owned),
        }
    }
}

impl PublishedTable {
    /// The table in SI units, with the dimension of its values. `None` if it is malformed, which a test
    /// rules out for the catalogue.
    fn in_si(&self) -> Option<(Table, Dimension)> {
        let convert = |unit: &str, values: &[f64]| -> Option<Vec<f64>> {
            let unit = Unit::parse(unit).ok()?;
            Some(values.iter().map(|value| unit.to_si(*value)).collect())
        };
        let first = convert(self.first.1, self.first.2)?;
        let values = convert(self.unit, self.values)?;
        let table = match self.second {
            None => Table::line(self.name, &first, &values),
            Some((_, unit, nodes)) => {
                Table::grid(self.name, &first, &convert(unit, nodes)?, &values)
            }
        };
        Some((table?, Unit::parse(self.unit).ok()?.dimension()))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::model::Model;

    #[test]
    fn every_structure_builds_in_every_regime_and_gives_a_discharge() {
        for structure in CATALOGUE {
            for regime in 0..structure.regimes.len() {
                let mut model = Model::build(&structure.blueprint(regime)).unwrap();
                assert_eq!(model.result_dimension(), Dimension::DISCHARGE, "{}", structure.kind);
                let form = &structure.regimes[regime];
                for limit in form.limits {
                    model.expression(limit.quantity).unwrap();
                }
                let (_, percent) = model.expression(form.coefficient.percent).unwrap();
                assert!(percent.is_none());
                for adjustment in structure.adjustments {
                    model.expression(adjustment.standard_uncertainty).unwrap();
                    assert!(model.input(adjustment.acts_on).is_some());
                }
            }
        }
    }

    #[test]
    fn every_table_of_the_catalogue_is_complete() {
        for table in CATALOGUE.iter().flat_map(|structure| structure.tables) {
            assert!(table.in_si().is_some(), "{}", table.name);
        }
    }
}
