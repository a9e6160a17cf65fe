//! Drowned flow of weirs: the factor on modular flow, from what is published.

/// The drowned-flow factor from the published one, which is above 1 where the flow is modular. The factor
/// `F_f` on it moves it by no more than the reduction itself, so that `f` does not jump where drowning
/// begins.
pub(super) const DROWNED_FACTOR: (&str, &str) = (
    "f",
    "1 when f_published >= 1 otherwise f_published*(1 + max(min(F_f - 1, 1 - f_published), f_published - 1))",
);
