//! The Monte Carlo method (JCGM 101 clause 7): draws, trials in blocks, intervals, the adaptive
//! procedure.
//!
//! Same seed, same bits, whatever the number of threads: every source has a stream of its own for every
//! super-block of trials, super-blocks are filled independently, and whatever is summed is summed in
//! their order.

mod adaptive;
mod draw;
mod interval;
mod stream;
mod trials;

pub use adaptive::{Amount, MonteCarlo, OutputStatistics, monte_carlo};
pub(super) use draw::draw;
pub use interval::{Intervals, intervals};
pub use stream::{Stream, StreamKey};
pub(super) use trials::Sampler;
pub use trials::{SUPER_BLOCK, Tally};
