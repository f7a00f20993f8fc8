//! A beta distributed rate by the normal deviate of its year.

use crate::num::beta::Beta;
use crate::num::{exp, normal};

/// The quantile of the distribution at the standard normal probability of `z`, and its derivative by `z`.
pub(super) fn value_and_slope(distribution: &Beta, z: f64) -> (f64, f64) {
    let (x, rest) = distribution.quantile(normal::cdf(z), normal::cdf(-z));
    if x <= 0.0 || rest <= 0.0 {
        return (x, 0.0);
    }
    // Both distributions reach the same probability there, so the slopes of their cdfs meet: d logit(x) / dz is their ratio.
    let logit_slope = normal::density(z) / exp(distribution.ln_slope(x, rest));
    (x, x * rest * logit_slope)
}
