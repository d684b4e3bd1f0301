//! Streams of random numbers, one for each cause of noise, and the shaping of white noise into 1/f noise.

mod flicker;
mod gaussian;

use rand::SeedableRng;
use rand::rngs::Xoshiro256PlusPlus;

pub use flicker::FlickerShaper;
pub use gaussian::Gaussian;

/// The generator of one cause of noise. The same four arguments give the same stream on every machine; a change in any one
/// of them gives another, so that silencing one cause leaves the draws of all others as they were.
///
/// Its seed is the FNV-1a 64-bit hash (Fowler, Noll, Vo; RFC 9923) of the seed and the channel (eight bytes each, little-endian),
/// the path, a byte 0xFF that no UTF-8 text holds, and the cause, finished by the mix of SplitMix64 (Steele, Lea, Flood 2014)
/// because FNV's last bytes reach its high bits poorly. The generator is xoshiro256++ (Blackman, Vigna 2019).
pub fn stream(seed: u64, channel: usize, path: &str, cause: &str) -> Xoshiro256PlusPlus {
    let hash = fnv1a(
        seed.to_le_bytes()
            .into_iter()
            .chain((channel as u64).to_le_bytes())
            .chain(path.bytes())
            .chain([0xff])
            .chain(cause.bytes()),
    );
    Xoshiro256PlusPlus::seed_from_u64(splitmix64(hash))
}

fn fnv1a(bytes: impl Iterator<Item = u8>) -> u64 {
    bytes.fold(0xcbf2_9ce4_8422_2325, |hash, byte| {
        (hash ^ u64::from(byte)).wrapping_mul(0x0000_0100_0000_01b3)
    })
}

fn splitmix64(state: u64) -> u64 {
    let mut z = state.wrapping_add(0x9e37_79b9_7f4a_7c15);
    z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
    z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
    z ^ (z >> 31)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_hashes_give_their_published_values() {
        // RFC 9923, appendix C: FNV-1a 64 of "", "a" and "foobar".
        assert_eq!(fnv1a("".bytes()), 0xcbf2_9ce4_8422_2325);
        assert_eq!(fnv1a("a".bytes()), 0xaf63_dc4c_8601_ec8c);
        assert_eq!(fnv1a("foobar".bytes()), 0x8594_4171_f739_67e8);
        // First outputs of SplitMix64 seeded with 1234567 (Vigna's reference code; from memory).
        assert_eq!(splitmix64(1_234_567), 6_457_827_717_110_365_317);
    }

    #[test]
    fn text_that_moves_between_path_and_cause_changes_the_stream() {
        let mut a = Gaussian::new(1, 0, "receiver.detector", "shot");
        let mut b = Gaussian::new(1, 0, "receiver.detectors", "hot");
        assert_ne!(a.draw(), b.draw());
    }
}
