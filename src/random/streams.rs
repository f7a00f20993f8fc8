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

/// The key of a patch, from its name alone: the 64-bit FNV-1a hash of its UTF-8 bytes (Fowler, Noll & Vo), mixed once
/// more because FNV leaves the high bits of short names nearly alike.
pub fn patch_key(name: &str) -> u64 {
    let hash = name
        .bytes()
        .fold(0xcbf2_9ce4_8422_2325, |hash: u64, byte| (hash ^ u64::from(byte)).wrapping_mul(0x0000_0100_0000_01b3));
    mix(hash)
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
