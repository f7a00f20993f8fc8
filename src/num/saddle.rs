//! Probabilities of counts in saddle-point form, free of the cancellation that factorials of large numbers bring.
//!
//! Loader (2000), Fast and accurate computation of binomial probabilities. Every mass is a Stirling term times the
//! exponent of deviances, each of which is small and right where the mass is not negligible. The forms hold for
//! real arguments too, which is how the incomplete gamma and beta functions use them.

use super::{ln, ln_gamma};

/// ln(2 pi).
pub(super) const LN_TAU: f64 = 1.837_877_066_409_345_5;

/// ln Γ(x+1) minus its Stirling approximation (x + 1/2) ln x - x + ln(2 pi)/2, for `x` above 0.
pub fn stirling_error(x: f64) -> f64 {
    if x < 10.0 {
        return ln_gamma(x + 1.0) - (x + 0.5) * ln(x) + x - 0.5 * LN_TAU;
    }
    // Coefficients B_2k / (2k (2k - 1)) of Stirling's series; the first one left out is below 1e-15 at 10.
    let square = 1.0 / (x * x);
    let series = [1.0 / 1188.0, -691.0 / 360_360.0];
    let series = series[0] + square * series[1];
    let series = -1.0 / 1680.0 + square * series;
    let series = 1.0 / 1260.0 + square * series;
    let series = -1.0 / 360.0 + square * series;
    (1.0 / 12.0 + square * series) / x
}

/// x ln(x / mean) + mean - x, for `x` and `mean` above 0: half the deviance of a count `x` from its mean.
pub fn deviance(x: f64, mean: f64) -> f64 {
    let apart = x - mean;
    if apart.abs() >= 0.1 * (x + mean) {
        return x * ln(x / mean) - apart;
    }
    // ln(x / mean) = 2 artanh(v), whose first term joins `apart` without loss.
    let v = apart / (x + mean);
    let square = v * v;
    let mut power = 2.0 * x * v;
    let mut sum = apart * v;
    let mut odd = 1.0;
    loop {
        power *= square;
        odd += 2.0;
        let next = sum + power / odd;
        if next.to_bits() == sum.to_bits() {
            return sum;
        }
        sum = next;
    }
}

/// ln of the chance that a Poisson number of this mean is `k`; both 0 or above.
pub fn ln_poisson(k: f64, mean: f64) -> f64 {
    if mean <= 0.0 {
        return if k > 0.0 { f64::NEG_INFINITY } else { 0.0 };
    }
    if k <= 0.0 {
        return -mean;
    }
    -0.5 * (LN_TAU + ln(k)) - stirling_error(k) - deviance(k, mean)
}

/// ln of the chance of `k` successes in `n` trials, each of chance `p`; 0 <= k <= n, and p strictly between 0 and 1.
pub fn ln_binomial(k: f64, n: f64, p: f64) -> f64 {
    if k <= 0.0 {
        return n * super::ln_1p(-p);
    }
    let failures = n - k;
    if failures <= 0.0 {
        return n * ln(p);
    }
    stirling_error(n)
        - stirling_error(k)
        - stirling_error(failures)
        - deviance(k, n * p)
        - deviance(failures, n * (1.0 - p))
        - 0.5 * (LN_TAU + ln(k) + ln(failures / n))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::num::exp;

    /// Against the products that define them, in which nothing cancels.
    #[test]
    fn masses_of_small_counts_are_the_products_that_define_them() {
        let choose = |n: u32, k: u32| (0..k).fold(1.0, |c, i| c * f64::from(n - i) / f64::from(i + 1));
        for k in 0..=12 {
            let power = |x: f64, times: u32| (0..times).fold(1.0, |product, _| product * x);
            let binomial = choose(12, k) * power(0.3, k) * power(0.7, 12 - k);
            assert!((exp(ln_binomial(f64::from(k), 12.0, 0.3)) / binomial - 1.0).abs() < 1e-13);
        }
    }

    /// ln n! as a sum of logarithms, across the joint of the two branches.
    #[test]
    fn stirling_error_fits_the_factorials() {
        let mut ln_factorial = 0.0;
        for n in 1..=40 {
            let x = f64::from(n);
            ln_factorial += ln(x);
            let stirling = (x + 0.5) * ln(x) - x + 0.5 * LN_TAU;
            assert!((stirling + stirling_error(x) - ln_factorial).abs() < 4e-14, "{n}");
        }
        assert!((stirling_error(10.0 - 1e-12) - stirling_error(10.0)).abs() < 2e-14);
    }

    #[test]
    fn deviance_is_the_same_on_both_sides_of_its_joint() {
        // v = 0.1 at x = 11, mean = 9.
        let near = deviance(11.0 - 1e-9, 9.0);
        let far = deviance(11.0 + 1e-9, 9.0);
        assert!((far - near - 2e-9 * ln(11.0 / 9.0)).abs() < 1e-14);
        assert!((deviance(1e9 + 1.0, 1e9) - 0.5e-9).abs() < 1e-17);
    }
}
