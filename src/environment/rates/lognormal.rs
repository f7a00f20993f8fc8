//! Lognormal rates.

use crate::num::{exp, ln, ln_1p};

/// A lognormal distribution.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Lognormal {
    mu: f64,
    sigma: f64,
}

impl Lognormal {
    /// The distribution with this mean and sd; `None` unless both are above 0 and finite.
    pub fn with_mean_and_sd(mean: f64, sd: f64) -> Option<Self> {
        let lawful = |x: f64| x > 0.0 && x.is_finite();
        let cv = sd / mean;
        if !lawful(mean) || !lawful(sd) || !lawful(cv * cv) {
            return None;
        }
        let variance = ln_1p(cv * cv);
        Some(Self { mu: ln(mean) - 0.5 * variance, sigma: variance.sqrt() })
    }

    /// Mean and sd of the logarithm.
    pub fn mu_sigma(&self) -> (f64, f64) {
        (self.mu, self.sigma)
    }

    /// The mean.
    pub fn mean(&self) -> f64 {
        exp(self.mu + 0.5 * self.sigma * self.sigma)
    }

    pub(super) fn value_and_slope(&self, z: f64) -> (f64, f64) {
        let value = exp(self.mu + self.sigma * z);
        (value, self.sigma * value)
    }
}
