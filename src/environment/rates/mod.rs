//! How a rate varies from year to year, as a function of the weather's standard normal deviate.

mod beta;
mod curves;
mod lognormal;

pub use curves::{Located, RateCurves};
pub use lognormal::Lognormal;

use crate::num::beta::Beta;

/// The distribution of a yearly rate.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum YearlyRate {
    /// the same every year
    Fixed(f64),
    /// a share or probability, such as survival
    Beta(Beta),
    /// a number of young, or a growth rate
    Lognormal(Lognormal),
}

impl YearlyRate {
    /// A rate between 0 and 1, beta distributed; fixed if `sd` is 0. `None` unless the mean is a probability and `sd` is 0 or
    /// above and below [`crate::num::beta::largest_sd`].
    pub fn beta(mean: f64, sd: f64) -> Option<Self> {
        if sd == 0.0 {
            return (0.0..=1.0).contains(&mean).then_some(Self::Fixed(mean));
        }
        if sd > 0.0 { Beta::with_mean_and_sd(mean, sd).map(Self::Beta) } else { None }
    }

    /// A rate above 0, lognormally distributed; fixed if `sd` is 0. `None` unless both are 0 or above, and the mean above 0
    /// where `sd` is.
    pub fn lognormal(mean: f64, sd: f64) -> Option<Self> {
        if sd == 0.0 {
            return (mean >= 0.0 && mean.is_finite()).then_some(Self::Fixed(mean));
        }
        Lognormal::with_mean_and_sd(mean, sd).map(Self::Lognormal)
    }

    /// The rate in a year whose deviate is `z`: its quantile at the standard normal probability of `z`, right to 1e-9.
    pub fn at(&self, z: f64) -> f64 {
        self.value_and_slope(z).0
    }

    /// The mean over the years.
    pub fn mean(&self) -> f64 {
        match self {
            Self::Fixed(rate) => *rate,
            Self::Beta(distribution) => distribution.mean(),
            Self::Lognormal(distribution) => distribution.mean(),
        }
    }

    /// The rate at `z`, and its derivative by `z`.
    fn value_and_slope(&self, z: f64) -> (f64, f64) {
        match self {
            Self::Fixed(rate) => (*rate, 0.0),
            Self::Beta(distribution) => beta::value_and_slope(distribution, z),
            Self::Lognormal(distribution) => distribution.value_and_slope(z),
        }
    }
}
