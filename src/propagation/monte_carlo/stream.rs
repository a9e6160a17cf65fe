//! Streams of random numbers: one for each seed, source and super-block.

use rand::SeedableRng;
use rand::rngs::Xoshiro256PlusPlus;

/// A published generator (xoshiro256++; Blackman and Vigna 2021), behind the traits of `rand`.
pub type Stream = Xoshiro256PlusPlus;

/// What a stream is for. Different uses of one source never share numbers.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum StreamKey {
    /// Trials of the Monte Carlo method.
    Trials,
    /// First sample of the variance-based shares.
    SharesA,
    /// Second sample of the variance-based shares.
    SharesB,
}

impl StreamKey {
    /// The stream of a source for a super-block.
    ///
    /// It depends on nothing but its arguments, so that a source draws the same numbers whatever other
    /// sources a file holds.
    pub fn stream(self, seed: u64, source: &str, super_block: u64) -> Stream {
        let purpose = match self {
            Self::Trials => 1,
            Self::SharesA => 2,
            Self::SharesB => 3,
        };
        let mut state = mix(seed ^ 0x6e61_7070_6500_0000);
        state = mix(state ^ purpose);
        state = mix(state ^ hash(source));
        state = mix(state ^ super_block);
        let mut bytes = [0; 32];
        for word in bytes.chunks_exact_mut(8) {
            state = state.wrapping_add(GOLDEN);
            word.copy_from_slice(&mix(state).to_le_bytes());
        }
        Stream::from_seed(bytes)
    }
}

const GOLDEN: u64 = 0x9e37_79b9_7f4a_7c15;

/// The finaliser of splitmix64 (Steele, Lea and Flood 2014): every bit of the input reaches every bit
/// of the output.
fn mix(mut z: u64) -> u64 {
    z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
    z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
    z ^ (z >> 31)
}

/// FNV-1a: a hash of the name that no version of the compiler changes.
fn hash(name: &str) -> u64 {
    name.bytes().fold(0xcbf2_9ce4_8422_2325, |hash, byte| {
        (hash ^ u64::from(byte)).wrapping_mul(0x0000_0100_0000_01b3)
    })
}

#[cfg(test)]
mod tests {
    use rand::Rng;

    use super::*;

    /// A change of these numbers changes every user's results: it needs a line in CHANGELOG, "Results".
    #[test]
    fn streams_are_stable() {
        let first = |key: StreamKey, name, block| key.stream(1, name, block).next_u64();
        let numbers = [
            first(StreamKey::Trials, "gauge zero", 0),
            first(StreamKey::Trials, "gauge zero", 1),
            first(StreamKey::SharesA, "gauge zero", 0),
        ];
        assert_eq!(numbers, STABLE);
    }

    const STABLE: [u64; 3] = [3452196581285397854, 15097072318635084770, 7808907334968243451];
}
