//! Published numbers of a structure, each with its source and how well it is known here.

use crate::model::expression::Table;
use crate::model::{Citation, Confidence, Limit};
use crate::units::{Dimension, Unit};

/// A published constant.
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

/// A published table, in the units it is printed in.
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

/// Published constants of which a word of the station file picks a set: the size of a flume, say.
#[derive(Clone, Copy, Debug)]
pub struct Choice {
    /// The key in a station file.
    pub key: &'static str,
    /// What it picks.
    pub meaning: &'static str,
    /// The constants of a set: symbol, dimension and meaning.
    pub symbols: &'static [(&'static str, Dimension, &'static str)],
    /// The words, each with its constants in SI units; NaN where none is published.
    pub sets: &'static [(&'static str, &'static [f64])],
    /// The word for a new file.
    pub example: &'static str,
    /// Who published them.
    pub source: Citation,
    /// How well they are known here.
    pub confidence: Confidence,
}

/// What is known of the uncertainty of a coefficient.
#[derive(Clone, Copy, Debug)]
pub enum Coefficient {
    /// A published rule.
    Published(CoefficientRule),
    /// None that could be stated here: the user states it.
    FromUser {
        /// The inputs of which a source must act on one.
        inputs: &'static [&'static str],
        /// Why that is so.
        why: &'static str,
    },
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

/// An equation for drowned flow.
#[derive(Clone, Copy, Debug)]
pub struct DrownedFlow {
    /// The word that chooses it in a station file.
    pub name: &'static str,
    /// When it holds and where its head is read, in words.
    pub when: &'static str,
    /// Definitions that end in the drowned-flow factor `f`, which is 1 where the flow is modular; in the
    /// second head `h_2` and the factor `F_f` on what is published.
    pub definitions: &'static [(&'static str, &'static str)],
    /// Constants of the choice without which it is not published.
    pub needs: &'static [&'static str],
    /// Positive where the published curve is left; its end is then held.
    pub beyond: Option<&'static str>,
    /// Limits of use of the equation.
    pub limits: &'static [Limit],
    /// Where its second head is read.
    pub reads: SecondHeadAt,
    /// The modular limit for this second head.
    pub ratio: ModularRatio,
    /// The published uncertainty of the factor; `None` if the user states it.
    pub uncertainty: Option<CoefficientRule>,
    /// Who published it.
    pub source: Citation,
    /// How well it is known here.
    pub confidence: Confidence,
}

/// Where a second head is read.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum SecondHeadAt {
    /// In the tailwater, or the throat's end.
    Tailwater,
    /// At a tapping in the crest.
    CrestTapping,
}

/// The ratio of heads up to which flow is modular, `M_L`, for an equation of drowned flow.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum ModularRatio {
    /// That of the structure.
    OfStructure,
    /// One of its own.
    Own(f64),
    /// A constant of the choice.
    OfChoice(&'static str),
}

/// Up to what tailwater the flow is modular.
#[derive(Clone, Copy, Debug)]
pub struct ModularLimit {
    /// In words.
    pub words: &'static str,
    /// The published ratio of tailwater head to head, `M_L` in the symbols of the structure; `None` where
    /// a choice brings it, or where the limit is no ratio.
    pub ratio: Option<f64>,
    /// The highest tailwater above the crest, in the symbols of the structure.
    pub highest: &'static str,
    /// Who says so.
    pub source: Citation,
    /// How well it is known here.
    pub confidence: Confidence,
}

/// What critical flow at the control needs (specific energy).
#[derive(Clone, Copy, Debug)]
pub struct CriticalFlow {
    /// Least energy above the sill with which the control passes `Q`, in the symbols of the structure.
    pub energy: &'static str,
    /// Symbol of the height of the sill above the approach bed.
    pub sill: &'static str,
    /// Symbol of the width of a rectangular control; `None` for other shapes.
    pub width: Option<&'static str>,
    /// Symbol of the width of the approach at its bed, and of its side slope if it has one.
    pub approach: (&'static str, Option<&'static str>),
}

/// The symbol of the modular limit as a ratio of heads.
pub(super) const MODULAR_LIMIT: &str = "M_L";

impl ModularLimit {
    /// The limit is a ratio of heads.
    pub fn is_ratio(&self) -> bool {
        self.highest.contains(MODULAR_LIMIT)
    }
}

/// Where the head is to be measured.
#[derive(Clone, Copy, Debug)]
pub struct HeadPosition {
    /// In words.
    pub words: &'static str,
    /// Nearest distance upstream of the crest or throat, in the symbols of the structure at the largest
    /// head; `None` where none is known.
    pub nearest: Option<&'static str>,
    /// Farthest distance.
    pub farthest: Option<&'static str>,
    /// Who says so.
    pub source: Citation,
    /// How well it is known here.
    pub confidence: Confidence,
}

impl PublishedTable {
    /// The table in SI units, with the dimension of its values. `None` if it is malformed, which a test
    /// rules out for the catalogue.
    pub(super) fn in_si(&self) -> Option<(Table, Dimension)> {
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

impl Choice {
    /// The set that a file means: its word, or another way to write the same size (`0.3 m` for
    /// `0.30 m`).
    pub fn find(&self, word: &str) -> Option<usize> {
        let same = |known: &str| match (number_and_rest(known), number_and_rest(word)) {
            (Some(a), Some(b)) => a == b,
            _ => known == word.trim(),
        };
        self.sets.iter().position(|(known, _)| same(known))
    }
}

/// `0.30 m` as 0.3 and `m`.
fn number_and_rest(text: &str) -> Option<(f64, &str)> {
    let (number, rest) = text.trim().split_once(' ')?;
    Some((number.parse().ok()?, rest.trim()))
}
