//! What a structure is: data that a file of the catalogue states.

use super::input::{InputSpec, Values};
use super::published::{
    Adjustment, Choice, Coefficient, Constant, CriticalFlow, DrownedFlow, HeadPosition,
    ModularLimit, PublishedTable,
};
use crate::model::{Citation, Limit};

/// A weir or flume as a standard describes it.
#[derive(Debug)]
pub struct Structure {
    /// Its name in a station file.
    pub kind: &'static str,
    /// What it is, in words.
    pub title: &'static str,
    /// The standard that describes it.
    pub standard: Citation,
    /// Its inputs besides those that every structure has (head, factor on the coefficient, gravity).
    pub inputs: &'static [InputSpec],
    /// A set of constants that a word of the station file picks.
    pub choice: Option<Choice>,
    /// Published constants of its equation.
    pub constants: &'static [Constant],
    /// Published tables of its equation.
    pub tables: &'static [PublishedTable],
    /// The forms of its equation; the first is that of the usual installation.
    pub regimes: &'static [Regime],
    /// Which form holds, from the indicated values.
    pub regime_for: fn(&Values) -> usize,
    /// Published uncertainties besides that of the coefficient.
    pub adjustments: &'static [Adjustment],
    /// Published equations for drowned flow; the first is used unless the file chooses. Where there is
    /// one, the discharge of every regime has the factor `f`.
    pub drowned: &'static [DrownedFlow],
    /// Up to what tailwater the flow is modular.
    pub modular: ModularLimit,
    /// What critical flow at the control needs; `None` where the control is no sill or throat.
    pub critical: Option<CriticalFlow>,
    /// How the velocity of approach enters.
    pub velocity_of_approach: &'static str,
    /// Where the head is to be measured.
    pub head_measured: HeadPosition,
    /// The head is read in the approach channel, which other structures beside it could share.
    pub head_in_approach: bool,
    /// The key of the control's width, no wider than the approach; `None` where it has none.
    pub control_width: Option<&'static str>,
}

/// One form of a structure's equation.
#[derive(Clone, Copy, Debug)]
pub struct Regime {
    /// Its name.
    pub name: &'static str,
    /// When it holds, in words.
    pub when: &'static str,
    /// Definitions: name and expression.
    pub definitions: &'static [(&'static str, &'static str)],
    /// The discharge `Q`, in the symbols and definitions.
    pub discharge: &'static str,
    /// What stands on both sides of the equation, if anything does.
    pub implicit: Implicit,
    /// A quantity that only an equation gives, which may depend on the discharge: critical depth, say.
    pub solved: Option<Solved>,
    /// Positive where water flows over the crest.
    pub flowing: &'static str,
    /// Positive where a published curve is left; its end is then held.
    pub beyond: Option<&'static str>,
    /// Expressions that are zero where another regime begins, if one can at these indicated values. The
    /// regime is chosen once; trials on the other side are counted.
    pub borders: fn(&Values) -> &'static [&'static str],
    /// Limits of use.
    pub limits: &'static [Limit],
    /// The published uncertainty of the coefficient.
    pub coefficient: Coefficient,
}

/// What stands on both sides of an equation.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Implicit {
    /// Nothing.
    Nothing,
    /// The discharge, through the total head `H` of the approach.
    Discharge,
}

/// A quantity that only an equation gives.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Solved {
    /// Its symbol.
    pub name: &'static str,
    /// The equation.
    pub equation: &'static str,
    /// Its smallest value; the root nearest above is meant.
    pub from: &'static str,
    /// Its largest value.
    pub to: &'static str,
}
