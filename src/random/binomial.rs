//! Binomial numbers.

use super::Stream;
use crate::num::{exp, ln, ln_1p, saddle::ln_binomial};

/// The most individuals that are asked one by one. Measured, the other ways are as fast from about 200 on, but small
/// differences in `n` and `p` lead them farther apart.
const MOST_ASKED: u32 = 256;

/// How many of `n` individuals does a thing that each does with chance `p` (clamped to 0 to 1; NaN counts as 0).
///
/// Up to some hundreds, each individual has eight random bits of its own, so that two draws from one stream with nearly
/// the same `n` and `p` have nearly the same result.
#[inline]
pub fn binomial(stream: &mut Stream, n: u32, p: f64) -> u32 {
    if p >= 1.0 {
        n
    } else if n < 8 {
        few(stream, n, p)
    } else if n <= MOST_ASKED {
        ask_each(stream, n, threshold(p))
    } else if p <= 0.5 {
        many(stream, n, p)
    } else if p > 0.5 {
        n - many(stream, n, 1.0 - p)
    } else {
        0
    }
}

/// The same for `n` below 8 and `p` below 1, in one word but for one draw in some hundreds, and without a branch that
/// depends on `n`.
#[inline]
pub(super) fn few(stream: &mut Stream, n: u32, p: f64) -> u32 {
    let threshold = threshold(p);
    let mut tally = Tally::of(threshold >> 56);
    tally.count_first(stream.word(), n);
    let (below, tied) = tally.sums();
    if tied == 0 { below } else { below + ask_each(stream, tied, threshold << 8) }
}

/// `p` in units of 2^-64; NaN and what is below 0 are 0.
#[inline]
fn threshold(p: f64) -> u64 {
    (p * 18_446_744_073_709_551_616.0) as u64
}

/// Asks each individual for the first eight bits of a uniform number, and those whose bits are the same as the first
/// eight of the threshold for the next eight.
fn ask_each(stream: &mut Stream, n: u32, threshold: u64) -> u32 {
    let (mut successes, mut undecided, mut threshold) = (0, n, threshold);
    while undecided > 0 && threshold > 0 {
        let mut tally = Tally::of(threshold >> 56);
        for _ in 0..undecided / 8 {
            tally.count(stream.word(), UNITS, UNITS);
        }
        if undecided % 8 > 0 {
            tally.count_first(stream.word(), undecided % 8);
        }
        let (below, tied) = tally.sums();
        successes += below;
        undecided = tied;
        threshold <<= 8;
    }
    successes
}

/// The unit of each of the four 16-bit lanes of a word.
const UNITS: u64 = 0x0001_0001_0001_0001;

/// How many of at most [`MOST_ASKED`] random bytes are below a given byte, and how many are at most that: eight bytes at a
/// time, in the lanes of a word.
struct Tally {
    /// 0x100 + byte in each lane: less a byte x it keeps its ninth bit just where x is at most that byte
    at_most: u64,
    n_below: u64,
    n_at_most: u64,
}

impl Tally {
    #[inline]
    fn of(byte: u64) -> Self {
        Self { at_most: (0x100 + byte) * UNITS, n_below: 0, n_at_most: 0 }
    }

    /// Counts the first `n` of the bytes of a word; `n` below 8.
    #[inline]
    fn count_first(&mut self, word: u64, n: u32) {
        let asked = (1_u64 << (8 * n)) - 1;
        self.count(word, asked & UNITS, (asked >> 8) & UNITS);
    }

    /// Counts the even and the odd bytes of a word whose lanes have a unit.
    #[inline]
    fn count(&mut self, word: u64, even_units: u64, odd_units: u64) {
        let even = word & (0xff * UNITS);
        let odd = (word >> 8) & (0xff * UNITS);
        let ninth_bits = |even, odd| ((even >> 8) & even_units) + ((odd >> 8) & odd_units);
        self.n_at_most += ninth_bits(self.at_most - even, self.at_most - odd);
        let below = self.at_most - UNITS;
        self.n_below += ninth_bits(below - even, below - odd);
    }

    /// How many bytes are below, and how many are equal.
    #[inline]
    fn sums(&self) -> (u32, u32) {
        let sum = |lanes: u64| (lanes.wrapping_mul(UNITS) >> 48) as u32;
        (sum(self.n_below), sum(self.n_at_most - self.n_below))
    }
}

/// For `n` above [`MOST_ASKED`] and `p` at most 1/2.
fn many(stream: &mut Stream, n: u32, p: f64) -> u32 {
    if p <= 0.0 {
        0
    } else if f64::from(n) * p < 10.0 {
        search(stream, n, p)
    } else {
        transformed_rejection(stream, n, p)
    }
}

/// Sums the probabilities from 0 up: algorithm BINV of Kachitvichyanukul & Schmeiser (1988), Comm. ACM 31.
fn search(stream: &mut Stream, n: u32, p: f64) -> u32 {
    let odds = p / (1.0 - p);
    let none = exp(f64::from(n) * ln_1p(-p));
    loop {
        let mut left = stream.uniform();
        let mut mass = none;
        // With a mean below 10 more than 150 has no chance; getting there means that the sum was rounded short of 1.
        for k in 0..150 {
            if left < mass {
                return k;
            }
            left -= mass;
            mass *= odds * f64::from(n - k) / f64::from(k + 1);
        }
    }
}

/// Algorithm BTRS of Hörmann (1993), The generation of binomial random variates, J. Stat. Comput. Simul. 46; for
/// n p >= 10. The masses in its last step are Loader's, right at every size.
fn transformed_rejection(stream: &mut Stream, n: u32, p: f64) -> u32 {
    let n = f64::from(n);
    let hat = Hat::over(n, p);
    loop {
        let u = stream.uniform() - 0.5;
        let v = stream.open_uniform();
        let from_edge = 0.5 - u.abs();
        let k = hat.number(u, from_edge);
        if from_edge >= 0.07 && v <= hat.inside {
            return k as u32;
        }
        if (0.0..=n).contains(&k) && ln(v * hat.height / hat.slope(from_edge)) <= ln_to_mode(k, n, p) {
            return k as u32;
        }
    }
}

/// ln of the mass of k over that of the mode.
fn ln_to_mode(k: f64, n: f64, p: f64) -> f64 {
    let mode = ((n + 1.0) * p).floor();
    ln_binomial(k, n, p) - ln_binomial(mode, n, p)
}

/// A uniform number from -1/2 to 1/2 transformed nearly to the distribution wanted.
struct Hat {
    mean: f64,
    a: f64,
    b: f64,
    /// away from the edges, a height that lies below the distribution
    inside: f64,
    /// what the mass over the mode's times the slope is at most
    height: f64,
}

impl Hat {
    fn over(n: f64, p: f64) -> Self {
        let mean = n * p;
        let sd = (mean * (1.0 - p)).sqrt();
        let b = 1.15 + 2.53 * sd;
        let a = -0.0873 + 0.0248 * b + 0.01 * p;
        Self { mean, a, b, inside: 0.92 - 4.2 / b, height: (2.83 + 5.1 / b) * sd }
    }

    fn number(&self, u: f64, from_edge: f64) -> f64 {
        ((2.0 * self.a / from_edge + self.b) * u + self.mean + 0.5).floor()
    }

    /// The derivative of the number by u.
    fn slope(&self, from_edge: f64) -> f64 {
        self.a / (from_edge * from_edge) + self.b
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// What makes rejection exact: the distribution lies under the hat everywhere, and above what is taken unseen.
    #[test]
    fn the_hat_covers_the_distribution() {
        for i in 0..20 {
            let n = (257.0 * exp(0.87 * f64::from(i))).floor().min(f64::from(u32::MAX));
            for j in 0..20 {
                let p = 10.0 / n * exp(f64::from(j) / 19.0 * ln(0.5 * n / 10.0));
                let hat = Hat::over(n, p);
                for step in 1..4000 {
                    let u = f64::from(step) / 4000.0 - 0.5;
                    let from_edge = 0.5 - u.abs();
                    let k = hat.number(u, from_edge);
                    if (0.0..=n).contains(&k) {
                        let share = exp(ln_to_mode(k, n, p)) * hat.slope(from_edge) / hat.height;
                        assert!(share <= 1.0, "{n} {p}, u {u}: {share}");
                        assert!(share >= hat.inside || from_edge < 0.07, "{n} {p}, u {u}: {share}");
                    } else {
                        assert!(from_edge < 0.07, "{n} {p}, u {u}: {k}");
                    }
                }
            }
        }
    }
}
