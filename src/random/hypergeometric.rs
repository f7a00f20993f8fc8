//! Hypergeometric numbers.

use super::Stream;
use crate::num::{ln, saddle::ln_binomial};

/// The most individuals that are picked one by one; measured, the two ways cost the same near here.
const MOST_PICKED: u64 = 128;

/// How many marked individuals are among `drawn` taken at random, without replacement, from `marked` and `others`. All
/// are drawn if `drawn` is more than there are. Up to 2^53 individuals.
pub fn hypergeometric(stream: &mut Stream, marked: u64, others: u64, drawn: u64) -> u64 {
    let all = marked + others;
    if drawn >= all {
        marked
    } else if drawn > all / 2 {
        marked - hypergeometric(stream, marked, others, all - drawn)
    } else if marked > others {
        drawn - hypergeometric(stream, others, marked, drawn)
    } else if marked < drawn {
        // Who is marked and who is drawn play the same part.
        hypergeometric(stream, drawn, all - drawn, marked)
    } else if drawn <= MOST_PICKED {
        pick(stream, marked, all, drawn)
    } else {
        ratio_of_uniforms(stream, marked as f64, others as f64, drawn as f64)
    }
}

fn pick(stream: &mut Stream, marked: u64, all: u64, drawn: u64) -> u64 {
    let mut marked_left = marked;
    for taken in 0..drawn {
        marked_left -= u64::from(stream.below(all - taken) < marked_left);
    }
    marked - marked_left
}

/// Stadlober (1990), The ratio of uniforms approach for generating discrete random variates, J. Comput. Appl. Math. 31:
/// a table-mountain hat over a distribution whose masses rise to one mode.
fn ratio_of_uniforms(stream: &mut Stream, marked: f64, others: f64, drawn: f64) -> u64 {
    let all = marked + others;
    let (centre, width) = hat(marked, others, drawn);
    let mode = ((drawn + 1.0) * ((marked + 1.0) / (all + 2.0))).floor();
    let ln_at_mode = ln_mass(mode, marked, others, drawn);
    loop {
        let u = stream.open_uniform();
        let k = (centre + width * (stream.uniform() - 0.5) / u).floor();
        if !(0.0..=marked.min(drawn)).contains(&k) {
            continue;
        }
        let relative = ln_mass(k, marked, others, drawn) - ln_at_mode;
        // Bounds of 2 ln u on both sides spare the logarithm most of the time.
        if u * (4.0 - u) - 3.0 <= relative {
            return k as u64;
        }
        if u * (u - relative) < 1.0 && 2.0 * ln(u) <= relative {
            return k as u64;
        }
    }
}

/// The centre of the hat, and its width: the numbers at height u of it lie within half of width / u of the centre.
fn hat(marked: f64, others: f64, drawn: f64) -> (f64, f64) {
    let all = marked + others;
    let mean = drawn * (marked / all);
    let variance = mean * (others / all) * ((all - drawn) / (all - 1.0));
    (mean + 0.5, HAT_SLOPE * (variance + 0.5).sqrt() + HAT_LEAST)
}

/// ln of the mass of k but for a term that all k share: two binomials, of a p that keeps their deviances small.
fn ln_mass(k: f64, marked: f64, others: f64, drawn: f64) -> f64 {
    let p = drawn / (marked + others);
    ln_binomial(k, marked, p) + ln_binomial(drawn - k, others, p)
}

/// 2 sqrt(2 / e).
const HAT_SLOPE: f64 = 1.715_527_769_921_413_5;
/// 3 - 2 sqrt(3 / e).
const HAT_LEAST: f64 = 0.898_916_162_058_898_8;

#[cfg(test)]
mod tests {
    use super::*;
    use crate::num::exp;

    /// What makes rejection exact: the root of the mass over the mode's lies under the hat at both ends of every number.
    #[test]
    fn the_hat_covers_the_distribution() {
        for i in 0..25 {
            let others = (129.0 * exp(0.4 * f64::from(i))).floor();
            for (share_marked, share_drawn) in
                [(1.0, 1.0), (0.5, 1.0), (0.1, 0.9), (1.0, 0.1), (0.02, 0.5), (0.3, 0.02)]
            {
                let marked = (others * share_marked).floor().max(129.0);
                let drawn = (marked * share_drawn).floor().max(129.0);
                let (centre, width) = hat(marked, others, drawn);
                let mode = ((drawn + 1.0) * (marked + 1.0) / (marked + others + 2.0)).floor();
                let first = (centre - 6.0 * width).floor().max(0.0);
                let last = (centre + 6.0 * width).floor().min(drawn);
                let at_mode = ln_mass(mode, marked, others, drawn);
                for k in first as u32..=last as u32 {
                    let k = f64::from(k);
                    let root = exp(0.5 * (ln_mass(k, marked, others, drawn) - at_mode));
                    let farthest = (k - centre).abs().max((k + 1.0 - centre).abs());
                    assert!(root <= 1.0 + 1e-12 && root * farthest <= 0.5 * width, "{marked} {others} {drawn} at {k}");
                }
            }
        }
    }
}
