//! Poisson numbers.

use super::Stream;
use super::binomial::{binomial, few};
use super::poisson_table::{LARGEST_MEAN, TABLE};
use crate::num::{ln, saddle::ln_poisson};

/// A Poisson number of this mean (below 0 and NaN count as 0), or `u32::MAX` where it would be greater.
#[inline]
pub fn poisson(stream: &mut Stream, mean: f64) -> u32 {
    if mean < (LARGEST_MEAN + 1) as f64 {
        small(stream, mean)
    } else if mean > 1e10 {
        u32::MAX
    } else if mean > 0.0 {
        transformed_rejection(stream, mean)
    } else {
        0
    }
}

/// The sum of a number whose mean is the whole part and of one whose mean is the rest, which is what is left of a number
/// of mean 1 if each is kept with that chance.
#[inline]
fn small(stream: &mut Stream, mean: f64) -> u32 {
    // The cast takes what is below 0 to 0.
    let whole = mean as usize;
    let number = TABLE.number(whole, stream.word());
    let ones = TABLE.number(1, stream.word());
    let rest = mean - whole as f64;
    number + if ones < 8 { few(stream, ones, rest) } else { binomial(stream, ones, rest) }
}

/// Algorithm PTRS of Hörmann (1993), The transformed rejection method for generating Poisson random variables, Insur.
/// Math. Econ. 12; for means of 10 and more. The masses in its last step are Loader's, right at every size.
fn transformed_rejection(stream: &mut Stream, mean: f64) -> u32 {
    let b = 0.931 + 2.53 * mean.sqrt();
    let a = -0.059 + 0.02483 * b;
    let inside = 0.9277 - 3.6224 / (b - 2.0);
    loop {
        let u = stream.uniform() - 0.5;
        let v = stream.open_uniform();
        let from_edge = 0.5 - u.abs();
        let k = ((2.0 * a / from_edge + b) * u + mean + 0.43).floor();
        if from_edge >= 0.07 && v <= inside {
            return k as u32;
        }
        if k < 0.0 || (from_edge < 0.013 && v > from_edge) {
            continue;
        }
        let height = (1.1239 + 1.1328 / (b - 3.4)) / (a / (from_edge * from_edge) + b);
        if ln(v * height) <= ln_poisson(k, mean) {
            return k as u32;
        }
    }
}
