//! Nappe works out how wrong a flow-measuring station may be, why, and what would make it better.
//!
//! The command line is a thin layer over this library. A station file is read into a
//! [`Station`](station::Station), a study is asked of it, and a report lays the answer out:
//!
//! ```
//! use nappe::propagation::Coverage;
//! use nappe::study::{At, Question, budget};
//!
//! let file = include_bytes!("../examples/quillmere-outfall.toml");
//! let (station, findings) = nappe::station::read(file);
//! assert!(findings.is_empty());
//! let question = Question {
//!     at: At::Head(0.09),
//!     coverage: Coverage::Probability(0.95),
//!     trials: None,
//!     seed: 1,
//!     tailwater: None,
//!     month: None,
//! };
//! let answer = budget(&station.unwrap(), &question, &|_| {}).unwrap();
//! // The air temperature over the sensor comes first, and the flow is known to about 16 %.
//! assert_eq!(answer.rows[0].name, "air temperature under the hood");
//! assert!((answer.result.relative_expanded_percent.unwrap() - 15.7).abs() < 0.2);
//! ```
//!
//! The layers, from the bottom: [`units`] and [`diagnostic`], [`model`], [`propagation`], [`station`],
//! [`study`], [`report`], [`cli`]. Each knows only those before it; DEVELOPERS.md says what belongs where.
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
