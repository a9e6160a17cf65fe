//! Nappe works out how wrong a flow-measuring station may be, why, and what would make it better.
#![forbid(unsafe_code)]
#![warn(missing_docs)]

pub mod cli;
pub mod diagnostic;
pub mod model;
pub mod propagation;
pub mod report;
pub mod station;
pub mod study;
pub mod units;
