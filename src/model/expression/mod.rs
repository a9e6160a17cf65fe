//! Symbolic expressions: one graph of shared nodes, with what can be done to it.
//!
//! [`Graph`] holds the nodes and keeps them simplified; `text` reads the notation of equations,
//! `dimensions` checks what was read, `lower` puts it into the graph, `derive` differentiates, `print`
//! writes.

mod derive;
mod dimensions;
mod graph;
mod lower;
mod number;
mod print;
mod table;
mod text;

pub(super) use dimensions::check as check_dimensions;
pub use dimensions::{Dimensions, MismatchError};
pub use graph::{Extremum, Function, Graph, Id, NameId, Node, Relation, SymbolId, TableId};
pub(super) use lower::lower as lower_tree;
pub use lower::{LowerError, Scope};
pub use number::Number;
pub use print::Names;
pub use table::{Axis, Table};
pub use text::{Syntax, SyntaxError, Tree, TreeKind, parse, parse_equation};
