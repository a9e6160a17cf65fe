//! All integration tests in one binary. Each module says what belongs in it.
#![allow(
    clippy::unwrap_used,
    clippy::panic,
    reason = "a test that cannot go on fails; helpers of tests are tests to the lints in name only"
)]

mod bad_files;
mod budgets;
mod case;
mod cli;
mod derivatives;
mod documents;
mod examples;
mod hydraulics;
mod layering;
mod limiting_cases;
mod metrology;
mod properties;
mod published;
mod stability;
