//! Equations as data, and the catalogue of structures that are made of them.
//!
//! Knows no probability and no file. An equation enters as text, in the same notation for the
//! catalogue and for a user's own ([`Blueprint`]); it becomes one expression graph ([`Model`]) that
//! is evaluated, differentiated, printed and compiled ([`Program`]).

mod allocate;
mod blueprint;
mod build;
mod compile;
pub mod expression;
mod limits;
mod program;
mod solve;
pub mod source;
pub mod structures;
mod system;
mod tape;

pub use blueprint::{Blueprint, Fault, FaultProblem, Input, Part, UnknownText};
pub use limits::{Limit, Side, Unsourced};
pub use program::{Outcome, Program, Workspace};
pub use source::{Citation, Confidence};
pub use system::{Branch, Definition, Model, Unknown};
pub use tape::BLOCK;
