//! Propagation of errors through a model: the linear method (JCGM 100) and the Monte Carlo method
//! (JCGM 101).
//!
//! Knows distributions and models, nothing of hydraulics, files or printing. A [`Problem`] goes in,
//! plain numbers come out.

mod agreement;
mod correlation;
mod coverage;
mod distribution;
mod dominant;
mod linear;
pub mod monte_carlo;
mod problem;
mod shares;

pub use agreement::{Agreement, numerical_tolerance};
pub use correlation::{Correlation, ImpossibleCorrelation, impossible};
pub use coverage::Coverage;
pub use distribution::Distribution;
pub use dominant::{Dominant, dominant};
pub use linear::{Contribution, DegreesOfFreedom, Linear, linear};
pub use problem::{Action, Effect, Problem, Source, corrected};
pub use shares::{Share, Shares, shares};
