//! Heads of a station's range in words.

use crate::units::significant;

/// The heads, from and to, at which something is so.
pub(super) fn heads_in_words(heads: &[[f64; 2]]) -> String {
    if heads.is_empty() {
        return "none".to_owned();
    }
    let each = heads
        .iter()
        .map(|[from, to]| format!("{} m to {} m", significant(*from, 4), significant(*to, 4)));
    each.collect::<Vec<_>>().join(", ")
}
