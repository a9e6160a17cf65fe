//! Heads of a station's range in words.

use crate::units::{Unit, significant};

/// The heads, from and to in m, at which something is so, in a unit of length.
pub(super) fn heads_in_words(heads: &[[f64; 2]], unit: &Unit) -> String {
    if heads.is_empty() {
        return "none".to_owned();
    }
    let number = |metres: f64| format!("{} {unit}", significant(unit.from_si(metres), 4));
    let each = heads.iter().map(|[from, to]| format!("{} to {}", number(*from), number(*to)));
    each.collect::<Vec<_>>().join(", ")
}
