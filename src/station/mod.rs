//! Station files: reading, checking, and turning a station into a problem to propagate.
//!
//! Readers never stop at the first fault: they give what they could read and a list of
//! [`Diagnostic`](crate::diagnostic::Diagnostic)s. A file that has an error gives no station.

mod compound;
mod correlation;
mod equation;
mod file;
mod head;
mod quantity;
mod section;
mod setting;
mod size;
mod source;
mod spread;
mod spread_reader;
mod structure;
mod tailwater;
mod template;

pub use file::{MAX_BYTES, Station, read};
pub(crate) use file::{too_large, unstated_warning};
pub use head::Head;
pub use quantity::Stated;
pub use setting::{Moment, Refusal, Setting, Sketch, SourceRow};
pub use size::{Amount, Size};
pub use source::{ErrorSource, FixedUntil};
pub use spread::{Shape, Spread, Width};
pub use structure::{Evidence, Kind, StationInput};
pub use tailwater::Tailwater;
pub use template::{equation_template, template};
