//! Every draw is keyed by (seed, replicate, patch, year, purpose).
//!
//! Keys are hashed one word at a time, so that what is common to many draws is hashed once: the replicate outside the
//! years, the year outside the patches. The last step gives a fresh 64-bit state, whatever the draw will use of it.
//!
//! ```
//! use eyot::random::{Purpose, ReplicateKey, binomial, patch_key};
//!
//! let year = ReplicateKey::new(20_261, 1).year(5);
//! let mut stream = year.patch(patch_key("Withy Bed")).draw(Purpose::Leaving(0));
//! assert!(binomial(&mut stream, 12, 0.25) <= 12);
//! ```

use rand::Rng;
use rand_xoshiro::SplitMix64;
use rand_xoshiro::rand_core::SeedableRng;

use super::Purpose;

/// The identity of a replicate under a seed.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct ReplicateKey(u64);

impl ReplicateKey {
    /// The key of a replicate.
    pub fn new(seed: u64, replicate: u32) -> Self {
        Self(absorb(absorb(START, seed), u64::from(replicate)))
    }

    /// The key of a year of this replicate.
    pub fn year(self, year: u32) -> YearKey {
        YearKey(absorb(self.0, u64::from(year)))
    }
}

/// The identity of a year in a replicate.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct YearKey(u64);

impl YearKey {
    /// The key of a patch in this year; `patch_key` as [`patch_key`] gives it.
    #[inline]
    pub fn patch(self, patch_key: u64) -> PlaceKey {
        PlaceKey(absorb(self.0, patch_key))
    }

    /// The key of draws in this year that belong to no patch.
    pub fn network(self) -> PlaceKey {
        self.patch(NO_PATCH)
    }
}

/// The identity of a patch, or of the network as a whole, in a year of a replicate.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct PlaceKey(u64);

impl PlaceKey {
    /// The stream of random words for one purpose at this place.
    #[inline]
    pub fn draw(self, purpose: Purpose) -> Stream {
        Stream(SplitMix64::seed_from_u64(absorb(self.0, purpose.code())))
    }
}

/// The random words of one draw, as many as it needs: the generator SplitMix64 (Steele, Lea & Flood 2014).
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Stream(SplitMix64);

impl Stream {
    /// The next 64 random bits.
    #[inline]
    pub fn word(&mut self) -> u64 {
        self.0.next_u64()
    }

    /// A uniform number in [0, 1), a multiple of 2^-53.
    #[inline]
    pub fn uniform(&mut self) -> f64 {
        (self.word() >> 11) as f64 * EPSILON_53
    }

    /// A uniform number in (0, 1): an odd multiple of 2^-54, so that its logarithm exists.
    #[inline]
    pub fn open_uniform(&mut self) -> f64 {
        ((self.word() >> 12) as f64 + 0.5) * (2.0 * EPSILON_53)
    }

    /// A uniform whole number below `n`; 0 if `n` is 0.
    ///
    /// # Source
    /// Lemire (2019), Fast random integer generation in an interval, ACM TOMACS 29.
    #[inline]
    pub fn below(&mut self, n: u64) -> u64 {
        let mut wide = u128::from(self.word()) * u128::from(n);
        if (wide as u64) < n {
            let uneven = n.wrapping_neg() % n.max(1);
            while (wide as u64) < uneven {
                wide = u128::from(self.word()) * u128::from(n);
            }
        }
        (wide >> 64) as u64
    }
}

/// The key of a patch, from its name alone: the FNV-1a hash of its UTF-8 bytes, mixed once more because FNV leaves the
/// high bits of short names nearly alike.
pub fn patch_key(name: &str) -> u64 {
    mix(fnv_1a(name.as_bytes()))
}

/// The index by which something with a name of its own enters [`Purpose`]s: the upper half of the hash of the name, so that
/// it does not hang on what else there is.
pub fn name_index(name: &str) -> u32 {
    (patch_key(name) >> 32) as u32
}

/// The 64-bit hash of Fowler, Noll & Vo, in the variant 1a.
fn fnv_1a(bytes: &[u8]) -> u64 {
    bytes.iter().fold(0xcbf2_9ce4_8422_2325, |hash, byte| (hash ^ u64::from(*byte)).wrapping_mul(0x0000_0100_0000_01b3))
}

/// 2^-53.
const EPSILON_53: f64 = 1.0 / (1_u64 << 53) as f64;

/// Fractional parts of the square roots of 2, 3 and 5: numbers with nothing up their sleeves.
const START: u64 = 0x6a09_e667_f3bc_c908;
const SPREAD: u64 = 0xbb67_ae85_84ca_a73b;
const NO_PATCH: u64 = 0x3c6e_f372_fe94_f82b;

/// One word more into a hash. Of the words that meet one state no two give the same result, as every part can be undone.
#[inline]
fn absorb(state: u64, word: u64) -> u64 {
    mix(state ^ word.wrapping_mul(SPREAD))
}

/// Every bit of the result depends on every bit of `z`: the 64-bit finaliser "Mix13" of Stafford (2011).
#[inline]
fn mix(z: u64) -> u64 {
    let z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
    let z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
    z ^ (z >> 31)
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::collections::BTreeSet;

    /// A key by its five parts.
    type Parts = [u64; 5];

    fn stream([seed, replicate, year, patch, stage]: Parts) -> Stream {
        let year = ReplicateKey::new(seed, replicate as u32).year(year as u32);
        year.patch(patch).draw(Purpose::Fates(stage as u32))
    }

    const BITS: [u32; 5] = [64, 32, 32, 64, 32];

    /// Keys as a run has them: small numbers but for the patch.
    fn keys(n: u64) -> impl Iterator<Item = Parts> {
        (0..n).map(|i| [20_261, i % 50, i / 50 % 100, patch_key(&format!("patch {}", i / 5000)), i % 3])
    }

    /// The strict avalanche criterion (Webster & Tavares 1986): a bit of the key turned, each bit of the first word turns
    /// with chance 1/2. 4,096 keys, so a standard error of 1/128; 14,336 pairs of bits, of which one beyond 6 errors has
    /// chance 3e-5.
    #[test]
    fn every_bit_of_a_key_moves_every_bit_of_a_word() {
        for (part, bits) in BITS.into_iter().enumerate() {
            for bit in 0..bits {
                let mut turned = [0_u32; 64];
                for key in keys(4096) {
                    let mut other = key;
                    other[part] ^= 1 << bit;
                    let difference = stream(key).word() ^ stream(other).word();
                    for (at, count) in turned.iter_mut().enumerate() {
                        *count += (difference >> at & 1) as u32;
                    }
                }
                let worst = turned.iter().map(|count| (f64::from(*count) - 2048.0).abs()).fold(0.0, f64::max);
                assert!(worst < 6.0 * 32.0, "part {part}, bit {bit}: {turned:?}");
            }
        }
    }

    /// Null: uniform numbers of neighbouring keys, and those that follow each other in a stream, are uncorrelated. A million
    /// pairs: a standard error of 0.001; passes within 4.
    #[test]
    fn neighbouring_keys_are_uncorrelated() {
        let correlation = |pair: &dyn Fn(Parts) -> (f64, f64)| {
            let products = keys(1_000_000).map(|key| {
                let (x, y) = pair(key);
                12.0 * (x - 0.5) * (y - 0.5)
            });
            products.sum::<f64>() / 1e6
        };
        for part in 0..5 {
            let found = correlation(&|key| {
                let mut next = key;
                next[part] = next[part].wrapping_add(1);
                (stream(key).uniform(), stream(next).uniform())
            });
            assert!(found.abs() < 0.004, "part {part}: {found}");
        }
        let found = correlation(&|key| {
            let mut stream = stream(key);
            (stream.uniform(), stream.uniform())
        });
        assert!(found.abs() < 0.004, "in a stream: {found}");
    }

    #[test]
    fn keys_apart_give_words_apart() {
        let mut words = BTreeSet::new();
        for key in keys(300_000) {
            let mut stream = stream(key);
            assert!(words.insert(stream.word()) && words.insert(stream.word()));
        }
        let year = ReplicateKey::new(1, 1).year(1);
        let codes = [
            Purpose::Weather(0),
            Purpose::OwnWeather(0),
            Purpose::Fates(0),
            Purpose::Young(0),
            Purpose::Leaving(0),
            Purpose::Destinations(0),
            Purpose::Surplus,
            Purpose::Removal(0),
            Purpose::RecordedYears,
        ];
        let first: BTreeSet<u64> = codes.into_iter().map(|purpose| year.network().draw(purpose).word()).collect();
        assert_eq!(first.len(), codes.len());
    }

    /// Test vectors published with FNV by its authors.
    #[test]
    fn names_are_hashed_by_fnv_1a() {
        assert_eq!(fnv_1a(b""), 0xcbf2_9ce4_8422_2325);
        assert_eq!(fnv_1a(b"a"), 0xaf63_dc4c_8601_ec8c);
        assert_eq!(fnv_1a(b"foobar"), 0x8594_4171_f739_67e8);
    }

    /// Null: uniform over what is below n. Chi-square of 6 degrees of freedom, 0.9999 quantile 27.86 (table); 70,000 draws.
    #[test]
    fn below_is_uniform_and_below() {
        let mut counts = [0.0_f64; 7];
        for key in keys(70_000) {
            counts[stream(key).below(7) as usize] += 1.0;
        }
        let chi_square: f64 = counts.iter().map(|count| (count - 1e4) * (count - 1e4) / 1e4).sum();
        assert!(chi_square < 27.86, "{counts:?}");
        // Just above half of all words, nearly every second one must be refused.
        let huge = (1 << 63) + 1;
        let lower = keys(10_000).filter(|key| stream(*key).below(huge) < huge / 2).count() as f64;
        assert!((lower - 5000.0).abs() < 4.0 * 50.0, "{lower}");
        assert_eq!(stream([1; 5]).below(1), 0);
        assert_eq!(stream([1; 5]).below(0), 0);
    }
}
