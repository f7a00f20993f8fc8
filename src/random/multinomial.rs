//! Multinomial numbers.

use super::{Stream, binomial};

/// What the probabilities may lack of 1 and still leave nobody over: more than rounding takes, less than any draw can see.
const SLACK: f64 = 1e-12;

/// Shares `n` individuals out, each to one of the places with the probability stated for it (0 or above, summing to at most
/// 1), and returns how many went to none. `out` is as long as `probabilities`.
///
/// A binomial number for each place in turn, of those who are left: for few places. For many places and few individuals
/// see [`super::AliasRows`].
pub fn multinomial(stream: &mut Stream, n: u32, probabilities: &[f64], out: &mut [u32]) -> u32 {
    let mut left = n;
    let mut probability_left = 1.0;
    for (p, number) in probabilities.iter().zip(out) {
        let after = probability_left - p;
        *number = if after > SLACK { binomial(stream, left, p / probability_left) } else { left };
        left -= *number;
        probability_left = after;
    }
    left
}
