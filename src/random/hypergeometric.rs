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
    let centre = drawn * (marked / all) + 0.5;
    let variance = drawn * (marked / all) * (others / all) * ((all - drawn) / (all - 1.0));
    let width = HAT_SLOPE * (variance + 0.5).sqrt() + HAT_LEAST;
    let mode = ((drawn + 1.0) * ((marked + 1.0) / (all + 2.0))).floor();
    // ln of the mass of k but for a term that all share, as two binomials of a p that keeps their deviances small.
    let p = drawn / all;
    let ln_mass = |k: f64| ln_binomial(k, marked, p) + ln_binomial(drawn - k, others, p);
    let at_mode = ln_mass(mode);
    loop {
        let u = stream.open_uniform();
        let k = (centre + width * (stream.uniform() - 0.5) / u).floor();
        if !(0.0..=marked.min(drawn)).contains(&k) {
            continue;
        }
        let relative = ln_mass(k) - at_mode;
        // Bounds of 2 ln u on both sides spare the logarithm most of the time.
        if u * (4.0 - u) - 3.0 <= relative {
            return k as u64;
        }
        if u * (u - relative) < 1.0 && 2.0 * ln(u) <= relative {
            return k as u64;
        }
    }
}

/// 2 sqrt(2 / e).
const HAT_SLOPE: f64 = 1.715_527_769_921_413_5;
/// 3 - 2 sqrt(3 / e).
const HAT_LEAST: f64 = 0.898_916_162_058_898_8;
