//! Which units a page is in.

use crate::units::{Dimension, Unit};

/// Units of a page.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Default)]
pub enum UnitSystem {
    /// SI: m, mm, m3/s, l/s.
    #[default]
    Si,
    /// US customary: ft, cfs, gpm.
    Us,
}

impl UnitSystem {
    /// The unit for a result of about this size: the one stated, unless another system is asked for.
    pub(super) fn result(self, dimension: Dimension, size: f64, stated: Option<&Unit>) -> Unit {
        if dimension == Dimension::DISCHARGE {
            match (self, stated) {
                (Self::Si, Some(stated)) => return stated.clone(),
                (Self::Si, None) if size.abs() < 0.1 => return named("l/s"),
                (Self::Si, None) => return named("m3/s"),
                // About 45 gpm.
                (Self::Us, _) if size.abs() < 0.003 => return named("gpm"),
                (Self::Us, _) => return named("cfs"),
            }
        }
        stated.cloned().unwrap_or_else(|| Unit::si(dimension))
    }

    /// The unit of a head.
    pub(super) fn head(self) -> Unit {
        named(if self == Self::Si { "m" } else { "ft" })
    }

    /// The unit of an error of the head.
    pub(super) fn head_error(self) -> Unit {
        named(if self == Self::Si { "mm" } else { "ft" })
    }
}

/// A unit of the table.
fn named(text: &str) -> Unit {
    Unit::parse(text).unwrap_or_else(|_| Unit::one())
}
